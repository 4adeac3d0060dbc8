#include "decode/reference/reference_batch_decoder.h"

#include <tbb/parallel_for.h>

#include "decode/reference/successive_cancellation.h"
#include "polar/lanes.h"

namespace frostline {

ReferenceBatchDecoder::ReferenceBatchDecoder(Code code, Arithmetic arithmetic, double qber)
    : code_(std::move(code)), arithmetic_(arithmetic), qber_(qber) {}

void ReferenceBatchDecoder::decode(const BatchDifference& difference,
                                   Span<std::uint64_t> error_rows) const {
  const unsigned lanes = difference.lanes;
  const BlockLength block_length = code_.block_length();
  const std::size_t bits = block_length.bits();
  KeyWords blocks(words_for(bits * lanes));
  lanes_to_blocks(difference.rows, block_length, lanes, blocks);
  std::vector<BitString> errors(lanes);
  // A context of its own: a run around this one that is cancelled, by an exception in another
  // batch, would cancel the loop too and leave lanes that nobody decoded.
  tbb::task_group_context context(tbb::task_group_context::isolated);
  tbb::parallel_for(
      0U, lanes,
      [&](unsigned lane) {
        BitString of_lane(bits);
        copy_bits(blocks, bits * lane, of_lane.words(), 0, bits);
        errors[lane] = decode_sc(code_, arithmetic_, qber_, of_lane).errors;
      },
      context);
  // Blocks shorter than a word share words, so they are put together by one thread.
  for (unsigned lane = 0; lane < lanes; ++lane) {
    copy_bits(errors[lane].words(), 0, blocks, bits * lane, bits);
  }
  blocks_to_lanes(blocks, block_length, lanes, error_rows);
}

}  // namespace frostline
