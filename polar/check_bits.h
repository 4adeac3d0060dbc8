// Check bits: a CRC over x_0 .. x_N-1 of a block, x_0 first, register 0 at start, no final XOR.
//
// Generators: width 6, 11, 24: 3GPP TS 38.212 clause 5.1 (CRC6, CRC11, CRC24C); 8: generator 1D,
// SAE J1850; 16: generator C867, 3GPP2 C.S0002. None has the factor X+1, which would only repeat
// the sum of all x, that is the frozen u_0.
#pragma once

#include <cstdint>

#include "polar/bits.h"
#include "polar/block_length.h"

namespace frostline {

// Whether width is 0, 6, 8, 11, 16 or 24.
bool is_check_width(unsigned width);
// Throws InputError when it is not.
void require_check_width(unsigned width);
// Default width for a block length: 11 up to 2^11, 16 up to 2^13, 24 above.
unsigned default_check_bits(BlockLength block_length);
// The generator without its leading term; bit k is the coefficient of X^k. REQUIRES: a width that
// is_check_width and not 0.
std::uint32_t check_generator(unsigned width);

// The CRC of bits first .. first + count - 1 of words; its bit width-1 is the first one sent.
// REQUIRES: first and count multiples of 8. Width 0 gives 0.
std::uint32_t check_bits(Span<const std::uint64_t> words, std::size_t first, std::size_t count,
                         unsigned width);
inline std::uint32_t check_bits(const BitString& bits, unsigned width) {
  return check_bits(bits.words(), 0, bits.size(), width);
}

}  // namespace frostline
