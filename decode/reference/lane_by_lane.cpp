#include "decode/reference/lane_by_lane.h"

#include <tbb/parallel_for.h>

#include <vector>

#include "polar/lanes.h"

namespace frostline {
namespace {

// Row 0 holds the top bit.
std::uint32_t check_of_lane(const BatchDifference& difference, unsigned check_width,
                            unsigned lane) {
  std::uint32_t check = 0;
  for (unsigned t = 0; t < check_width; ++t) {
    const std::size_t bit = std::size_t{t} * difference.lanes + lane;
    check = (check << 1) | ((difference.checks[bit / 64] >> (bit % 64)) & 1U);
  }
  return check;
}

}  // namespace

void decode_lane_by_lane(const BatchDifference& difference, BlockLength block_length,
                         unsigned check_width, const BlockDecoder& decode_block,
                         Span<std::uint64_t> error_rows) {
  const unsigned lanes = difference.lanes;
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
        errors[lane] = decode_block(of_lane, check_of_lane(difference, check_width, lane));
      },
      context);
  // Blocks shorter than a word share words, so they are put together by one thread.
  for (unsigned lane = 0; lane < lanes; ++lane) {
    copy_bits(errors[lane].words(), 0, blocks, bits * lane, bits);
  }
  blocks_to_lanes(blocks, block_length, lanes, error_rows);
}

}  // namespace frostline
