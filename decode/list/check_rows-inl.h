// Check bits of all paths at once: the CRC of every byte of a row, byte of positions after byte.
//
// The register is kept reflected, as x_0 comes first and is bit 0 of its byte: what is shifted out
// is the lowest bit. A step of a byte is two look-ups of 16 entries for each byte of the register.
//
// Included once a target, inside Highway's namespace; no include guard of the usual kind.
#if defined(FROSTLINE_CHECK_ROWS_INL_H) == defined(HWY_TARGET_TOGGLE)
#ifdef FROSTLINE_CHECK_ROWS_INL_H
#undef FROSTLINE_CHECK_ROWS_INL_H
#else
#define FROSTLINE_CHECK_ROWS_INL_H
#endif

#include <hwy/highway.h>

#include "decode/list/path_rows-inl.h"
#include "polar/check_bits.h"

HWY_BEFORE_NAMESPACE();
namespace frostline {
namespace HWY_NAMESPACE {

struct CheckTables {
  explicit CheckTables(unsigned width) {
    std::uint32_t reflected = 0;
    const std::uint32_t generator = check_generator(width);
    for (unsigned t = 0; t < width; ++t) {
      reflected |= ((generator >> t) & 1U) << (width - 1 - t);
    }
    for (unsigned nibble = 0; nibble < 16; ++nibble) {
      for (unsigned high = 0; high < 2; ++high) {
        std::uint32_t value = nibble << (4 * high);
        for (unsigned t = 0; t < 8; ++t) value = (value >> 1) ^ ((value & 1U) != 0 ? reflected : 0);
        for (unsigned k = 0; k < 3; ++k) {
          entries[high][k][nibble] = static_cast<std::uint8_t>(value >> (8 * k));
        }
      }
    }
  }

  alignas(16) std::uint8_t entries[2][3][16];
};

// Bit t of the register, from bit 0 of byte 0 on, is the t-th check bit. It starts at 0.
struct CheckRegister {
  Row byte[3];

  HWY_INLINE void Take(const Row& x, const CheckTables& tables) {
    const Row index = Xor(x, byte[0]);
    const Row low = LowNibbles(index);
    const Row high = HighNibbles(index);
    const auto change = [&](unsigned k) {
      return Xor(LookUp(tables.entries[0][k], low), LookUp(tables.entries[1][k], high));
    };
    byte[0] = Xor(byte[1], change(0));
    byte[1] = Xor(byte[2], change(1));
    byte[2] = change(2);
  }
};

}  // namespace HWY_NAMESPACE
}  // namespace frostline
HWY_AFTER_NAMESPACE();

#endif  // FROSTLINE_CHECK_ROWS_INL_H
