// Frozen sets with the shape of a design's, for tests and benchmarks that must not depend on how
// designs are made.
#pragma once

#include <algorithm>
#include <cmath>
#include <numeric>
#include <vector>

#include "polar/frozen_set.h"

namespace frostline::testing {

// Bhattacharyya parameters of all indices from that of the channel: exact on an erasure channel, an
// upper bound on any other, by Z- <= 2Z - Z^2, Z+ = Z^2 (E. Arikan, IEEE Trans. IT 55(7), 2009,
// Proposition 5). Half of it bounds the chance of a wrong decision of successive cancellation.
inline std::vector<double> polarized(BlockLength length, double channel) {
  std::vector<double> z{channel};
  while (z.size() < length.bits()) {
    std::vector<double> next;
    for (const double parent : z) {
      next.push_back(2 * parent - parent * parent);
      next.push_back(parent * parent);
    }
    z = std::move(next);
  }
  return z;
}

// The parameter of a BSC(p).
inline double bsc_bhattacharyya(double p) { return 2 * std::sqrt(p * (1 - p)); }

// The frozen_count indices with the largest parameters, lower index first.
inline FrozenSet polarized_frozen_set(BlockLength length, double channel,
                                      std::size_t frozen_count) {
  const std::vector<double> z = polarized(length, channel);
  std::vector<std::size_t> order(length.bits());
  std::iota(order.begin(), order.end(), std::size_t{0});
  std::stable_sort(order.begin(), order.end(),
                   [&](std::size_t a, std::size_t b) { return z[a] > z[b]; });
  BitString mask(length.bits());
  for (std::size_t k = 0; k < frozen_count; ++k) mask.set(order[k], true);
  return FrozenSet(length, std::move(mask));
}

}  // namespace frostline::testing
