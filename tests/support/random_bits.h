// Random strings and frozen sets for tests, from the standard library's generator, so that the
// tests do not rest on the project's own streams.
#pragma once

#include <algorithm>
#include <cstdint>
#include <numeric>
#include <random>
#include <vector>

#include "polar/frozen_set.h"

namespace frostline::testing {

using Generator = std::mt19937_64;

inline BitString random_bits(Generator& generator, std::size_t bits, double p = 0.5) {
  BitString string(bits);
  std::bernoulli_distribution one(p);
  for (std::size_t i = 0; i < bits; ++i) string.set(i, one(generator));
  return string;
}

// Each index frozen with probability share, independently.
inline FrozenSet random_frozen_set(Generator& generator, BlockLength length, double share) {
  return FrozenSet(length, random_bits(generator, length.bits(), share));
}

// How many key bits are summed in u_i: row i of G has ones at the subsets of i, column i at the
// supersets, of which there are 2^(n - popcount(i)).
inline std::size_t column_weight(BlockLength length, std::size_t i) {
  std::size_t weight = length.bits();
  for (; i != 0; i &= i - 1) weight /= 2;
  return weight;
}

// A frozen set shaped as a design's: the indices that sum the most key bits, lower index first.
// Stretches of frozen, mixed and open bytes all occur.
inline FrozenSet weight_frozen_set(BlockLength length, std::size_t frozen_count) {
  std::vector<std::size_t> order(length.bits());
  std::iota(order.begin(), order.end(), std::size_t{0});
  std::stable_sort(order.begin(), order.end(), [&](std::size_t a, std::size_t b) {
    return column_weight(length, a) > column_weight(length, b);
  });
  BitString mask(length.bits());
  for (std::size_t k = 0; k < frozen_count; ++k) mask.set(order[k], true);
  return FrozenSet(length, std::move(mask));
}

// A frozen set in which whole bytes are frozen, open or mixed, each with the same chance.
inline FrozenSet bytewise_frozen_set(Generator& generator, BlockLength length) {
  BitString mask(length.bits());
  std::uniform_int_distribution<unsigned> kind(0, 2);
  std::bernoulli_distribution coin(0.5);
  for (std::size_t j = 0; j < length.bytes(); ++j) {
    const unsigned chosen = kind(generator);
    for (std::size_t k = 0; k < 8; ++k) {
      mask.set(8 * j + k, chosen == 0 || (chosen == 2 && coin(generator)));
    }
  }
  return FrozenSet(length, std::move(mask));
}

}  // namespace frostline::testing
