// Runs over the batches of a key: read in order, worked on in parallel, handed on in order.
//
// What the exchange's four steps share. Bounded memory whatever the key's length: only a few
// batches a thread are in flight.
#pragma once

#include <tbb/global_control.h>
#include <tbb/parallel_pipeline.h>

#include <cstdint>
#include <memory>

#include "decode/exchange/cut.h"
#include "decode/exchange/key_files.h"
#include "decode/exchange/run_control.h"
#include "polar/bits.h"
#include "polar/error.h"
#include "polar/lanes.h"

namespace frostline {

// For each batch of the cut in order: read(batch) makes a Work (one thread at a time), work(Work&)
// runs in parallel, hand_on(Work&) sees them in order (one thread at a time). Work has a member
// `batch`. Throws Interrupted when control says so, and whatever the three throw.
template <typename Work, typename Read, typename Do, typename HandOn>
void run_batches(const Cut& cut, const RunControl& control, Read&& read, Do&& work,
                 HandOn&& hand_on) {
  using Token = std::shared_ptr<Work>;
  const std::uint64_t total = cut.batch_count();
  std::uint64_t next = 0;
  const std::size_t threads =
      tbb::global_control::active_value(tbb::global_control::max_allowed_parallelism);
  tbb::parallel_pipeline(
      2 * threads,
      tbb::make_filter<void, Token>(tbb::filter_mode::serial_in_order,
                                    [&](tbb::flow_control& flow) -> Token {
                                      if (next == total || control.stopped()) {
                                        flow.stop();
                                        return nullptr;
                                      }
                                      return std::make_shared<Work>(read(cut.batch(next++)));
                                    }) &
          tbb::make_filter<Token, Token>(tbb::filter_mode::parallel,
                                         [&](Token token) {
                                           if (!control.stopped()) work(*token);
                                           return token;
                                         }) &
          tbb::make_filter<Token, void>(tbb::filter_mode::serial_in_order, [&](const Token& token) {
            if (control.stopped()) return;
            hand_on(*token);
            if (control.progress) {
              control.progress(token->batch.first_block + token->batch.lanes, cut.block_count());
            }
          }));
  if (control.stopped()) throw Interrupted();
}

// The bits of a batch as they lie in the key: rows of lanes.
inline KeyWords read_rows(const KeySource& key, const Cut& cut, const Batch& batch) {
  const std::size_t bits = cut.block_length().bits() * batch.lanes;
  KeyWords rows(words_for(bits));
  key.read(batch.first_bit, bits, rows);
  return rows;
}

// The same bits block after block.
inline KeyWords rows_as_blocks(const KeyWords& rows, const Cut& cut, const Batch& batch) {
  KeyWords blocks(rows.size());
  lanes_to_blocks(rows, cut.block_length(), batch.lanes, blocks);
  return blocks;
}

// Block `lane` of blocks, from bit 0 of its first word on.
inline KeyWords block_words(const KeyWords& blocks, const Cut& cut, unsigned lane) {
  const std::size_t bits = cut.block_length().bits();
  KeyWords block(words_for(bits));
  copy_bits(blocks, bits * lane, block, 0, bits);
  return block;
}

}  // namespace frostline
