// Error probability of every index by going through all error patterns: the judge of constructions
// at short lengths.
#pragma once

#include <cmath>
#include <cstdint>
#include <vector>

namespace frostline::testing {

// Probability that a word of length bits is the error pattern of a BSC(p).
inline double pattern_probability(std::uint32_t pattern, unsigned length, double p) {
  const int ones = __builtin_popcount(pattern);
  return std::pow(p, ones) * std::pow(1 - p, static_cast<int>(length) - ones);
}

// u = x G by its definition: u_j is the sum of x_i over all i whose bits contain those of j.
inline std::uint32_t transformed(std::uint32_t x, unsigned length) {
  std::uint32_t u = 0;
  for (unsigned j = 0; j < length; ++j) {
    for (unsigned i = j; i < length; ++i) {
      if ((i & j) == j) u ^= ((x >> i) & 1U) << j;
    }
  }
  return u;
}

// Maximum likelihood of each u_i given u_0 .. u_i-1, ties counted half.
inline std::vector<double> leaf_errors_by_enumeration(unsigned length, double p) {
  // Probability of each prefix of u: prefix[i][v], v the bits u_0 .. u_i.
  std::vector<std::vector<double>> prefix(length);
  for (unsigned i = 0; i < length; ++i) prefix[i].assign(std::size_t{2} << i, 0);
  for (std::uint32_t x = 0; x < (std::uint32_t{1} << length); ++x) {
    const std::uint32_t u = transformed(x, length);
    const double probability = pattern_probability(x, length, p);
    for (unsigned i = 0; i < length; ++i) prefix[i][u & ((2U << i) - 1)] += probability;
  }
  std::vector<double> errors(length, 0);
  for (unsigned i = 0; i < length; ++i) {
    const std::size_t top = std::size_t{1} << i;
    for (std::size_t v = 0; v < top; ++v) errors[i] += std::min(prefix[i][v], prefix[i][v + top]);
  }
  return errors;
}

}  // namespace frostline::testing
