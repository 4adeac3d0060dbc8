#include "decode/list/passes.h"

#include <stdexcept>
#include <utility>

#include "polar/check_bits.h"
#include "polar/lanes.h"

namespace frostline {
namespace {

std::uint32_t check_of_lane(const BatchDifference& difference, unsigned width, unsigned lane) {
  std::uint32_t check = 0;
  for (unsigned t = 0; t < width; ++t) {
    const std::size_t bit = std::size_t{t} * difference.lanes + lane;
    check = (check << 1) | ((difference.checks[bit / 64] >> (bit % 64)) & 1U);
  }
  return check;
}

unsigned power_of_two_from(std::size_t count) {
  unsigned lanes = 1;
  while (lanes < count) lanes *= 2;
  return lanes;
}

// Some lanes of a batch as a batch of their own, the lanes that are left over all zero.
struct SmallBatch {
  SmallBatch(const BatchDifference& of, Span<const std::uint64_t> blocks, BlockLength block_length,
             unsigned check_width, const std::vector<unsigned>& which)
      : lanes(power_of_two_from(which.size())),
        rows(words_for(block_length.bits() * lanes)),
        checks(words_for(std::size_t{check_width} * lanes)) {
    const std::size_t bits = block_length.bits();
    KeyWords chosen(rows.size());
    for (std::size_t k = 0; k < which.size(); ++k) {
      copy_bits(blocks, bits * which[k], chosen, bits * k, bits);
      for (std::size_t t = 0; t < check_width; ++t) {
        copy_bits(of.checks, t * of.lanes + which[k], checks, t * lanes + k, 1);
      }
    }
    blocks_to_lanes(chosen, block_length, lanes, rows);
  }

  unsigned lanes;
  KeyWords rows;
  KeyWords checks;
};

}  // namespace

PassesDecoder::PassesDecoder(BlockLength block_length, unsigned check_bits,
                             std::vector<std::unique_ptr<BatchDecoder>> passes)
    : block_length_(block_length), check_bits_(check_bits), passes_(std::move(passes)) {
  if (passes_.empty() || check_bits_ == 0) {
    throw std::invalid_argument("passes need decoders, and check bits between them");
  }
}

void PassesDecoder::decode(const BatchDifference& difference,
                           Span<std::uint64_t> error_rows) const {
  passes_.front()->decode(difference, error_rows);
  const std::size_t bits = block_length_.bits();
  KeyWords errors(words_for(bits * difference.lanes));
  lanes_to_blocks(error_rows, block_length_, difference.lanes, errors);
  KeyWords differences;
  std::vector<unsigned> rejected(difference.lanes);
  for (unsigned lane = 0; lane < difference.lanes; ++lane) rejected[lane] = lane;
  for (std::size_t pass = 1; pass < passes_.size(); ++pass) {
    std::vector<unsigned> still;
    for (const unsigned lane : rejected) {
      if (check_bits(errors, bits * lane, bits, check_bits_) !=
          check_of_lane(difference, check_bits_, lane)) {
        still.push_back(lane);
      }
    }
    rejected = still;
    if (rejected.empty()) break;
    if (differences.empty()) {
      differences.resize(errors.size());
      lanes_to_blocks(difference.rows, block_length_, difference.lanes, differences);
    }
    const SmallBatch batch(difference, differences, block_length_, check_bits_, rejected);
    KeyWords found(batch.rows.size());
    passes_[pass]->decode({batch.lanes, batch.rows, batch.checks}, found);
    KeyWords found_blocks(found.size());
    lanes_to_blocks(found, block_length_, batch.lanes, found_blocks);
    for (std::size_t k = 0; k < rejected.size(); ++k) {
      copy_bits(found_blocks, bits * k, errors, bits * rejected[k], bits);
    }
  }
  // Only what a later pass found changes anything.
  if (!differences.empty()) blocks_to_lanes(errors, block_length_, difference.lanes, error_rows);
}

}  // namespace frostline
