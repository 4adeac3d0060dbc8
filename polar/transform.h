// The polar transform u = x G over GF(2), G = F^(Kronecker n), F = [1 0; 1 1], natural index order.
//
// E. Arikan, "Channel polarization", IEEE Trans. IT 55(7), 2009, eq. (70) without the bit-reversal
// permutation. G is its own inverse.
//
// Rows of lanes: B blocks that lie side by side are a string of N B bits in which bit i B + l is
// position i of lane l (see ../designs/FORMATS.md, "cut"). Then the transform of all lanes is the
// butterfly network over that string without its lowest log2 B stages.
#pragma once

#include <cstdint>

#include "polar/bits.h"
#include "polar/block_length.h"

namespace frostline {

// Largest number of lanes B of a batch.
constexpr unsigned kMaxLanes = 512;

// Transforms B = lanes blocks in place. rows: words_for(N lanes) words.
// REQUIRES: lanes a power of two from 1 to 512 (std::invalid_argument otherwise).
// One thread; uses the vector instructions of the machine, same result on all of them.
void polar_transform(Span<std::uint64_t> rows, BlockLength block_length, unsigned lanes = 1);

// The same for one block, as a value. REQUIRES: bits.size() a valid block length.
BitString polar_transform(BitString bits);

}  // namespace frostline
