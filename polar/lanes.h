// From rows of lanes to blocks and back: the transposition of an N by B matrix of bits.
//
// rows:   bit i B + l is position i of lane l      (how a batch lies in a key, and in messages)
// blocks: bit l N + i is position i of lane l      (how settled blocks follow each other)
#pragma once

#include <cstdint>

#include "polar/bits.h"
#include "polar/block_length.h"

namespace frostline {

// REQUIRES: lanes a power of two from 1 to 512; both views hold words_for(N lanes) words and do not
// overlap. Bits of the last word beyond N lanes are zero in the output.
void lanes_to_blocks(Span<const std::uint64_t> rows, BlockLength block_length, unsigned lanes,
                     Span<std::uint64_t> blocks);
void blocks_to_lanes(Span<const std::uint64_t> blocks, BlockLength block_length, unsigned lanes,
                     Span<std::uint64_t> rows);

}  // namespace frostline
