// Takes the lanes of a batch apart for decoders of one block.
#pragma once

#include <cstdint>
#include <functional>

#include "decode/batch_decoder.h"
#include "polar/bits.h"
#include "polar/block_length.h"

namespace frostline {

// From the difference of one block, N bits, and its check bits (as check_bits() gives them) to its
// error pattern, N bits.
using BlockDecoder =
    std::function<BitString(const BitString& difference, std::uint32_t check_difference)>;

// Decodes the blocks of a batch in parallel (oneTBB) and lays the error patterns side by side
// again. check_width: c, or 0 for a decoder that looks at no check bits. decode_block must be safe
// to call from many threads at once.
void decode_lane_by_lane(const BatchDifference& difference, BlockLength block_length,
                         unsigned check_width, const BlockDecoder& decode_block,
                         Span<std::uint64_t> error_rows);

}  // namespace frostline
