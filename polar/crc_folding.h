// Shortens what a CRC goes over by carry-less multiplication, 16 bytes at a time.
//
// A CRC is the remainder of a polynomial; a piece of it times a power of X may be replaced by
// anything with the same remainder. Each block of 128 bits is multiplied by the remainder of the
// power of X that separates it from a later block, and added to that one. What is left is 16 bytes
// with the same CRC, for a table to finish.
// V. Gopal et al., "Fast CRC computation for generic polynomials using PCLMULQDQ", Intel, 2009.
#pragma once

#include <cstddef>
#include <cstdint>

namespace frostline {

// Remainders of powers of X. Bits run as in reflected CRCs: the lowest bit of the first byte is the
// coefficient of the highest power.
struct CrcFolding {
  std::uint64_t over_128[2];  // X^191 and X^127
  std::uint64_t over_512[2];  // X^575 and X^511
};

// generator: without its leading term X^width; bit k is the coefficient of X^k. REQUIRES: width at
// most 32.
constexpr CrcFolding make_crc_folding(std::uint32_t generator, unsigned width) {
  CrcFolding folding{};
  std::uint64_t remainder = 1;
  for (unsigned power = 1; power <= 575; ++power) {
    remainder <<= 1;
    if ((remainder >> width) & 1U) remainder ^= (std::uint64_t{1} << width) | generator;
    std::uint64_t mirrored = 0;
    for (unsigned k = 0; k < width; ++k) mirrored |= ((remainder >> k) & 1U) << (63 - k);
    if (power == 127) folding.over_128[1] = mirrored;
    if (power == 191) folding.over_128[0] = mirrored;
    if (power == 511) folding.over_512[1] = mirrored;
    if (power == 575) folding.over_512[0] = mirrored;
  }
  return folding;
}

// The bytes below which there is nothing to gain.
constexpr std::size_t kShortestFold = 128;

// Folds the first multiple of 16 of `count` bytes into 16 with the same remainder, with start added
// to the first 8 bytes. Returns how many bytes that were; 0, and nothing done, on machines without
// carry-less multiplication and where count < kShortestFold.
std::size_t fold_crc(const CrcFolding& folding, const std::uint8_t* bytes, std::size_t count,
                     std::uint64_t start, std::uint8_t folded[16]);

}  // namespace frostline
