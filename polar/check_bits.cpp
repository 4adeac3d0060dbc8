#include "polar/check_bits.h"

#include <sodium.h>

#include <array>
#include <stdexcept>
#include <string>

#include "polar/crc_folding.h"
#include "polar/error.h"

namespace frostline {
namespace {

// The register is kept mirrored: bit 0 is the coefficient of X^(width-1). x_0 is the lowest bit of
// its word, so a byte of a word then meets the register as it lies, whatever the width, and eight
// table look-ups take in a word (M. E. Kounavis, F. L. Berry, IEEE Trans. Computers 57(11), 2008).

constexpr std::uint32_t mirror(std::uint32_t value, unsigned width) {
  std::uint32_t mirrored = 0;
  for (unsigned k = 0; k < width; ++k) mirrored |= ((value >> k) & 1U) << (width - 1 - k);
  return mirrored;
}

// remainder[k][b]: what byte b leaves in the register after it and k zero bytes have gone in.
struct CrcTable {
  std::array<std::array<std::uint32_t, 256>, 8> remainder{};
};

constexpr CrcTable make_table(std::uint32_t generator, unsigned width) {
  const std::uint32_t mirrored = mirror(generator, width);
  CrcTable table;
  for (std::uint32_t byte = 0; byte < 256; ++byte) {
    std::uint32_t state = byte;
    for (unsigned k = 0; k < 8; ++k) state = (state >> 1) ^ ((state & 1U) ? mirrored : 0);
    table.remainder[0][byte] = state;
  }
  for (std::size_t k = 1; k < 8; ++k) {
    for (std::size_t byte = 0; byte < 256; ++byte) {
      const std::uint32_t state = table.remainder[k - 1][byte];
      table.remainder[k][byte] = (state >> 8) ^ table.remainder[0][state & 0xFFU];
    }
  }
  return table;
}

struct Crc {
  unsigned width;
  std::uint32_t generator;
  CrcTable table;
  CrcFolding folding;
};

template <unsigned kWidth, std::uint32_t kGenerator>
const Crc& crc() {
  static constexpr Crc kCrc{kWidth, kGenerator, make_table(kGenerator, kWidth),
                            make_crc_folding(kGenerator, kWidth)};
  return kCrc;
}

const Crc* find_crc(unsigned width) {
  switch (width) {
    case 6:
      return &crc<6, 0x21>();
    case 8:
      return &crc<8, 0x1D>();
    case 11:
      return &crc<11, 0x621>();
    case 16:
      return &crc<16, 0xC867>();
    case 24:
      return &crc<24, 0xB2B117>();
    default:
      return nullptr;
  }
}

const Crc& crc_of(unsigned width) {
  const Crc* const found = find_crc(width);
  if (found == nullptr) {
    throw std::invalid_argument("no check bits of width " + std::to_string(width));
  }
  return *found;
}

std::uint32_t advance_byte(const CrcTable& table, std::uint32_t state, std::uint8_t byte) {
  return (state >> 8) ^ table.remainder[0][(state ^ byte) & 0xFFU];
}

std::uint32_t advance_word(const CrcTable& table, std::uint32_t state, std::uint64_t word) {
  word ^= state;
  std::uint32_t next = 0;
  for (unsigned k = 0; k < 8; ++k) next ^= table.remainder[7 - k][(word >> (8 * k)) & 0xFFU];
  return next;
}

}  // namespace

bool is_check_width(unsigned width) { return width == 0 || find_crc(width) != nullptr; }

void require_check_width(unsigned width) {
  if (!is_check_width(width)) {
    throw InputError("check bits " + std::to_string(width) + ": expected 0, 6, 8, 11, 16 or 24");
  }
}

unsigned default_check_bits(BlockLength block_length) {
  if (block_length.log2() <= 11) return 11;
  return block_length.log2() <= 13 ? 16 : 24;
}

std::uint32_t check_generator(unsigned width) { return crc_of(width).generator; }

std::uint32_t check_bits(Span<const std::uint64_t> words, std::size_t first, std::size_t count,
                         unsigned width) {
  if (width == 0) return 0;
  if (first % 8 != 0 || count % 8 != 0) {
    throw std::invalid_argument("check bits over a range that is not whole bytes");
  }
  const Crc& crc = crc_of(width);
  const CrcTable& table = crc.table;
  const std::size_t end = first + count;
  std::uint32_t state = 0;
  std::size_t i = first;
  if (first % 64 == 0) {
    std::uint8_t folded[16];
    const auto* const bytes = reinterpret_cast<const std::uint8_t*>(words.data() + first / 64);
    const std::size_t done = fold_crc(crc.folding, bytes, count / 64 * 8, 0, folded);
    if (done > 0) {
      for (const std::uint8_t byte : folded) state = advance_byte(table, state, byte);
      sodium_memzero(folded, sizeof folded);
      i += 8 * done;
    }
  }
  while (i < end) {
    const std::uint64_t word = words[i / 64];
    if (i % 64 == 0 && end - i >= 64) {
      state = advance_word(table, state, word);
      i += 64;
    } else {
      state = advance_byte(table, state, static_cast<std::uint8_t>(word >> (i % 64)));
      i += 8;
    }
  }
  return mirror(state, width);
}

}  // namespace frostline
