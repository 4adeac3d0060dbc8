// One source for all targets of Google Highway: the file includes itself once for each.
#undef HWY_TARGET_INCLUDE
#define HWY_TARGET_INCLUDE "polar/lanes.cpp"  // NOLINT
#include <hwy/foreach_target.h>               // IWYU pragma: keep
// After foreach_target.
#include <hwy/highway.h>
#include <sodium.h>

#include "polar/lanes.h"

HWY_BEFORE_NAMESPACE();
namespace frostline {
namespace HWY_NAMESPACE {
namespace hn = hwy::HWY_NAMESPACE;

// Squares of 64 by 64 bits that are transposed together: word r of square q is squares[8 r + q].
constexpr std::size_t kSquares = 8;

// Bit k of the word: whether bit `bit` of k is 0.
constexpr std::uint64_t kBitIsZero[6] = {0x5555555555555555U, 0x3333333333333333U,
                                         0x0F0F0F0F0F0F0F0FU, 0x00FF00FF00FF00FFU,
                                         0x0000FFFF0000FFFFU, 0x00000000FFFFFFFFU};

// Swaps the upper right and lower left quarters of all blocks of 2 kWidth by 2 kWidth bits
// (H. S. Warren, Hacker's Delight, 7-3): bit log2(kWidth) of a row's number and of a column's
// change places.
template <int kWidth, std::size_t kRows = 64>
HWY_INLINE void SwapQuarters(std::uint64_t* HWY_RESTRICT squares, std::uint64_t mask) {
  const hn::CappedTag<std::uint64_t, kSquares> d;
  const auto lower = hn::Set(d, mask);
  for (std::size_t r = 0; r < kRows; r = (r + kWidth + 1) & ~std::size_t{kWidth}) {
    std::uint64_t* const top = squares + kSquares * r;
    std::uint64_t* const bottom = squares + kSquares * (r + kWidth);
    for (std::size_t q = 0; q < kSquares; q += hn::Lanes(d)) {
      const auto a = hn::Load(d, top + q);
      const auto b = hn::Load(d, bottom + q);
      const auto swapped = hn::And(hn::Xor(hn::ShiftRight<kWidth>(a), b), lower);
      hn::Store(hn::Xor(b, swapped), d, bottom + q);
      hn::Store(hn::Xor(a, hn::ShiftLeft<kWidth>(swapped)), d, top + q);
    }
  }
}

// A matrix of 64 tall by 64 wide bits, row after row, is written column after column.
void TransposeInSquares(const std::uint64_t* from, std::size_t tall, std::size_t wide,
                        std::uint64_t* to) {
  HWY_ALIGN std::uint64_t squares[64 * kSquares];
  for (std::size_t c = 0; c < wide; ++c) {
    for (std::size_t r = 0; r < tall; r += kSquares) {
      const std::size_t count = HWY_MIN(kSquares, tall - r);
      for (std::size_t q = 0; q < count; ++q) {
        for (std::size_t k = 0; k < 64; ++k) {
          squares[kSquares * k + q] = from[(64 * (r + q) + k) * wide + c];
        }
      }
      SwapQuarters<32>(squares, 0x00000000FFFFFFFFU);
      SwapQuarters<16>(squares, 0x0000FFFF0000FFFFU);
      SwapQuarters<8>(squares, 0x00FF00FF00FF00FFU);
      SwapQuarters<4>(squares, 0x0F0F0F0F0F0F0F0FU);
      SwapQuarters<2>(squares, 0x3333333333333333U);
      SwapQuarters<1>(squares, 0x5555555555555555U);
      for (std::size_t k = 0; k < 64; ++k) {
        for (std::size_t q = 0; q < count; ++q) {
          to[(64 * c + k) * tall + r + q] = squares[kSquares * k + q];
        }
      }
    }
  }
  sodium_memzero(squares, sizeof squares);
}

// Bits kHigh and kLow of every bit's place in its word change places.
template <unsigned kHigh, unsigned kLow, class V>
HWY_INLINE V SwapPlaceBits(V word) {
  const hn::DFromV<V> d;
  constexpr int kShift = (1 << kHigh) - (1 << kLow);
  const auto mask = hn::Set(d, kBitIsZero[kHigh] & ~kBitIsZero[kLow]);
  const auto differ = hn::And(hn::Xor(word, hn::ShiftRight<kShift>(word)), mask);
  return hn::Xor(word, hn::Xor(differ, hn::ShiftLeft<kShift>(differ)));
}

// Rotates the six bits of every bit's place in its word to the right by kBy: what stood in the low
// kBy bits stands in the high ones then.
template <unsigned kBy, class V>
HWY_INLINE V RotatePlaces(V w) {
  if constexpr (kBy == 1) {
    w = SwapPlaceBits<1, 0>(w);
    w = SwapPlaceBits<2, 1>(w);
    w = SwapPlaceBits<3, 2>(w);
    w = SwapPlaceBits<4, 3>(w);
    return SwapPlaceBits<5, 4>(w);
  } else if constexpr (kBy == 2) {
    w = SwapPlaceBits<2, 0>(SwapPlaceBits<3, 1>(w));
    return SwapPlaceBits<4, 2>(SwapPlaceBits<5, 3>(w));
  } else if constexpr (kBy == 3) {
    return SwapPlaceBits<3, 0>(SwapPlaceBits<4, 1>(SwapPlaceBits<5, 2>(w)));
  } else if constexpr (kBy == 4) {
    w = SwapPlaceBits<4, 2>(SwapPlaceBits<5, 3>(w));
    return SwapPlaceBits<2, 0>(SwapPlaceBits<3, 1>(w));
  } else {
    w = SwapPlaceBits<5, 4>(w);
    w = SwapPlaceBits<4, 3>(w);
    w = SwapPlaceBits<3, 2>(w);
    w = SwapPlaceBits<2, 1>(w);
    return SwapPlaceBits<1, 0>(w);
  }
}

template <unsigned kBy>
HWY_INLINE void RotateAllPlaces(std::uint64_t* HWY_RESTRICT words, std::size_t count) {
  const hn::CappedTag<std::uint64_t, kSquares> d;
  for (std::size_t i = 0; i < count; i += hn::Lanes(d)) {
    hn::Store(RotatePlaces<kBy>(hn::Load(d, words + i)), d, words + i);
  }
}

// Swaps the bits of a word's number in its group with the low bits of places.
template <std::size_t kColumns>
HWY_INLINE void SwapGroups(std::uint64_t* HWY_RESTRICT squares) {
  if constexpr (kColumns >= 32) SwapQuarters<16, kColumns>(squares, kBitIsZero[4]);
  if constexpr (kColumns >= 16) SwapQuarters<8, kColumns>(squares, kBitIsZero[3]);
  if constexpr (kColumns >= 8) SwapQuarters<4, kColumns>(squares, kBitIsZero[2]);
  if constexpr (kColumns >= 4) SwapQuarters<2, kColumns>(squares, kBitIsZero[1]);
  SwapQuarters<1, kColumns>(squares, kBitIsZero[0]);
}

// A matrix of 64 groups rows and 2^kLog2 columns of bits, fewer than 64, row after row, is written
// column after column; the other way round where kBack. REQUIRES: groups a multiple of kSquares.
//
// A group is 64 rows in 2^kLog2 words. The top kLog2 bits of a row's number are the number of its
// word; they change places with the column's number, which is the low end of a bit's place, and
// must then go to the top of the place.
template <unsigned kLog2, bool kBack>
void TransposeGroups(const std::uint64_t* from, std::size_t groups, std::uint64_t* to) {
  constexpr std::size_t kColumns = std::size_t{1} << kLog2;
  HWY_ALIGN std::uint64_t squares[kColumns * kSquares];
  for (std::size_t g = 0; g < groups; g += kSquares) {
    for (std::size_t q = 0; q < kSquares; ++q) {
      for (std::size_t w = 0; w < kColumns; ++w) {
        squares[kSquares * w + q] = kBack ? from[w * groups + g + q] : from[(g + q) * kColumns + w];
      }
    }
    if constexpr (kBack) RotateAllPlaces<6 - kLog2>(squares, kColumns * kSquares);
    SwapGroups<kColumns>(squares);
    if constexpr (!kBack) RotateAllPlaces<kLog2>(squares, kColumns * kSquares);
    for (std::size_t q = 0; q < kSquares; ++q) {
      for (std::size_t w = 0; w < kColumns; ++w) {
        (kBack ? to[(g + q) * kColumns + w] : to[w * groups + g + q]) = squares[kSquares * w + q];
      }
    }
  }
  sodium_memzero(squares, sizeof squares);
}

template <bool kBack>
void TransposeInGroups(const std::uint64_t* from, std::size_t groups, unsigned log2_columns,
                       std::uint64_t* to) {
  switch (log2_columns) {
    case 1:
      return TransposeGroups<1, kBack>(from, groups, to);
    case 2:
      return TransposeGroups<2, kBack>(from, groups, to);
    case 3:
      return TransposeGroups<3, kBack>(from, groups, to);
    case 4:
      return TransposeGroups<4, kBack>(from, groups, to);
    default:
      return TransposeGroups<5, kBack>(from, groups, to);
  }
}

void GroupsToColumns(const std::uint64_t* from, std::size_t groups, unsigned log2_columns,
                     std::uint64_t* to) {
  TransposeInGroups<false>(from, groups, log2_columns, to);
}
void ColumnsToGroups(const std::uint64_t* from, std::size_t groups, unsigned log2_columns,
                     std::uint64_t* to) {
  TransposeInGroups<true>(from, groups, log2_columns, to);
}

}  // namespace HWY_NAMESPACE
}  // namespace frostline
HWY_AFTER_NAMESPACE();

#if HWY_ONCE
#include <algorithm>
#include <stdexcept>

#include "polar/transform.h"

namespace frostline {

HWY_EXPORT(TransposeInSquares);
HWY_EXPORT(GroupsToColumns);
HWY_EXPORT(ColumnsToGroups);

namespace {

unsigned log2_of(unsigned lanes) {
  unsigned log2 = 0;
  while ((1U << log2) < lanes) ++log2;
  if (lanes == 0 || lanes > kMaxLanes || (1U << log2) != lanes) {
    throw std::invalid_argument("lanes must be a power of two from 1 to 512");
  }
  return log2;
}

// The even bits of a word, in order, as its low half (a perfect unshuffle in five steps).
std::uint64_t even_bits(std::uint64_t w) {
  w &= 0x5555555555555555U;
  w = (w | (w >> 1)) & 0x3333333333333333U;
  w = (w | (w >> 2)) & 0x0F0F0F0F0F0F0F0FU;
  w = (w | (w >> 4)) & 0x00FF00FF00FF00FFU;
  w = (w | (w >> 8)) & 0x0000FFFF0000FFFFU;
  return (w | (w >> 16)) & 0x00000000FFFFFFFFU;
}

// The low half of a word spread over its even bits: the inverse.
std::uint64_t spread_bits(std::uint64_t w) {
  w &= 0x00000000FFFFFFFFU;
  w = (w | (w << 16)) & 0x0000FFFF0000FFFFU;
  w = (w | (w << 8)) & 0x00FF00FF00FF00FFU;
  w = (w | (w << 4)) & 0x0F0F0F0F0F0F0F0FU;
  w = (w | (w << 2)) & 0x3333333333333333U;
  return (w | (w << 1)) & 0x5555555555555555U;
}

// Moves the lowest bit of every bit's index to the top: even bits first, then odd bits.
void rotate_index_right(Span<const std::uint64_t> from, Span<std::uint64_t> to) {
  const std::size_t half = from.size() / 2;
  for (std::size_t i = 0; i < half; ++i) {
    const std::uint64_t low = from[2 * i];
    const std::uint64_t high = from[2 * i + 1];
    to[i] = even_bits(low) | (even_bits(high) << 32);
    to[half + i] = even_bits(low >> 1) | (even_bits(high >> 1) << 32);
  }
}

// The inverse: moves the highest bit of every bit's index to the bottom.
void rotate_index_left(Span<const std::uint64_t> from, Span<std::uint64_t> to) {
  const std::size_t half = from.size() / 2;
  for (std::size_t i = 0; i < half; ++i) {
    const std::uint64_t even = from[i];
    const std::uint64_t odd = from[half + i];
    to[2 * i] = spread_bits(even) | (spread_bits(odd) << 1);
    to[2 * i + 1] = spread_bits(even >> 32) | (spread_bits(odd >> 32) << 1);
  }
}

using Pass = void (*)(Span<const std::uint64_t>, Span<std::uint64_t>);

void repeat_pass(Pass pass, unsigned count, Span<const std::uint64_t> from,
                 Span<std::uint64_t> to) {
  if (count == 0) {
    std::copy(from.begin(), from.end(), to.begin());
    return;
  }
  KeyWords scratch(count > 1 ? from.size() : 0);
  // The last pass has to end in `to`, so an even number of passes starts in the scratch.
  Span<std::uint64_t> targets[2] = {to, Span<std::uint64_t>(scratch)};
  Span<const std::uint64_t> source = from;
  for (unsigned done = 0; done < count; ++done) {
    const Span<std::uint64_t> target = targets[(count - 1 - done) % 2];
    pass(source, target);
    source = target;
  }
}

// 2^log2_rows by 2^log2_columns bits, both at least 64.
void transpose_in_squares(Span<const std::uint64_t> from, unsigned log2_rows, unsigned log2_columns,
                          Span<std::uint64_t> to) {
  HWY_DYNAMIC_DISPATCH(TransposeInSquares)
  (from.data(), (std::size_t{1} << log2_rows) / 64, (std::size_t{1} << log2_columns) / 64,
   to.data());
}

void transpose_bit_by_bit(Span<const std::uint64_t> from, std::size_t rows, std::size_t columns,
                          Span<std::uint64_t> to) {
  std::fill(to.begin(), to.end(), 0);
  for (std::size_t r = 0; r < rows; ++r) {
    for (std::size_t c = 0; c < columns; ++c) {
      const std::size_t source = r * columns + c;
      const std::size_t target = c * rows + r;
      to[target / 64] |= ((from[source / 64] >> (source % 64)) & 1U) << (target % 64);
    }
  }
}

// A matrix of bits, row after row, is written column after column.
void transpose_bits(Span<const std::uint64_t> from, unsigned log2_rows, unsigned log2_columns,
                    Span<std::uint64_t> to) {
  const std::size_t words = words_for(std::size_t{1} << (log2_rows + log2_columns));
  if (from.size() != words || to.size() != words) {
    throw std::invalid_argument("a batch of another size");
  }
  // Rows in groups of 64, and those by eight.
  constexpr unsigned kLog2Groups = 9;
  if (log2_columns > 0 && log2_columns < 6 && log2_rows >= kLog2Groups) {
    HWY_DYNAMIC_DISPATCH(GroupsToColumns)
    (from.data(), (std::size_t{1} << log2_rows) / 64, log2_columns, to.data());
  } else if (log2_rows > 0 && log2_rows < 6 && log2_columns >= kLog2Groups) {
    HWY_DYNAMIC_DISPATCH(ColumnsToGroups)
    (from.data(), (std::size_t{1} << log2_columns) / 64, log2_rows, to.data());
  } else if (log2_rows + log2_columns < 7) {
    transpose_bit_by_bit(from, std::size_t{1} << log2_rows, std::size_t{1} << log2_columns, to);
  } else if (log2_columns < 6) {
    repeat_pass(rotate_index_right, log2_columns, from, to);
  } else if (log2_rows < 6) {
    repeat_pass(rotate_index_left, log2_rows, from, to);
  } else {
    transpose_in_squares(from, log2_rows, log2_columns, to);
  }
}

}  // namespace

void lanes_to_blocks(Span<const std::uint64_t> rows, BlockLength block_length, unsigned lanes,
                     Span<std::uint64_t> blocks) {
  transpose_bits(rows, block_length.log2(), log2_of(lanes), blocks);
}

void blocks_to_lanes(Span<const std::uint64_t> blocks, BlockLength block_length, unsigned lanes,
                     Span<std::uint64_t> rows) {
  transpose_bits(blocks, log2_of(lanes), block_length.log2(), rows);
}

}  // namespace frostline
#endif  // HWY_ONCE
