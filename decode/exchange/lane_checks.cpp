#include "decode/exchange/lane_checks.h"

#include "polar/check_bits.h"

namespace frostline {

BitString lane_checks(const KeyWords& blocks, const Code& code, unsigned lanes) {
  const unsigned width = code.check_bits;
  const std::size_t bits = code.block_length().bits();
  BitString rows(std::size_t{width} * lanes);
  if (width == 0) return rows;
  for (unsigned lane = 0; lane < lanes; ++lane) {
    const std::uint32_t crc = check_bits(blocks, bits * lane, bits, width);
    for (unsigned t = 0; t < width; ++t) {
      if ((crc >> (width - 1 - t)) & 1U) rows.flip(std::size_t{t} * lanes + lane);
    }
  }
  return rows;
}

}  // namespace frostline
