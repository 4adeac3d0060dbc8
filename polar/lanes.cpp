#include "polar/lanes.h"

#include <algorithm>
#include <stdexcept>

#include "polar/transform.h"

namespace frostline {
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

// In place: bit c of word r becomes bit r of word c (H. S. Warren, Hacker's Delight, 7-3).
void transpose_64x64(std::uint64_t words[64]) {
  std::uint64_t mask = 0x00000000FFFFFFFFU;
  for (unsigned width = 32; width != 0; width >>= 1, mask ^= mask << width) {
    for (unsigned r = 0; r < 64; r = (r + width + 1) & ~width) {
      const std::uint64_t swapped = ((words[r] >> width) ^ words[r + width]) & mask;
      words[r + width] ^= swapped;
      words[r] ^= swapped << width;
    }
  }
}

// 2^log2_rows by 2^log2_columns bits, both at least 64.
void transpose_in_squares(Span<const std::uint64_t> from, unsigned log2_rows, unsigned log2_columns,
                          Span<std::uint64_t> to) {
  const std::size_t row_words = (std::size_t{1} << log2_columns) / 64;
  const std::size_t column_words = (std::size_t{1} << log2_rows) / 64;
  std::uint64_t square[64];
  for (std::size_t c = 0; c < row_words; ++c) {
    for (std::size_t r = 0; r < column_words; ++r) {
      for (std::size_t k = 0; k < 64; ++k) square[k] = from[(64 * r + k) * row_words + c];
      transpose_64x64(square);
      for (std::size_t k = 0; k < 64; ++k) to[(64 * c + k) * column_words + r] = square[k];
    }
  }
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
  if (log2_rows + log2_columns < 7) {
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
