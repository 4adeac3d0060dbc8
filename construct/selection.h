// From a Reliability to a frozen set.
//
// Indices are frozen from the most likely to fail to the least; near ties are settled by rounding
// ln P to 1e-9 and freezing the lower index first, so that the same options give the same mask on
// every machine.
#pragma once

#include <cstdint>
#include <optional>
#include <vector>

#include "polar/frozen_set.h"
#include "polar/reliability.h"

namespace frostline {

// All N indices, the first to freeze first.
std::vector<std::uint32_t> freezing_order(const Reliability& reliability);

// Sums over the open indices as a function of the frozen count: entry M is the sum of exp(ln P)
// over order[M..N-1], M = 0..N. Summed from the smallest probability up.
std::vector<double> union_sums(const Reliability& reliability,
                               const std::vector<std::uint32_t>& order);

// The set that freezes the first frozen_count of the order.
FrozenSet freeze_first(const std::vector<std::uint32_t>& order, std::size_t frozen_count);

// Smallest M whose union over the open indices is at most fer (0 < fer < 1). M = N always is one.
std::size_t smallest_frozen_count(const std::vector<double>& sums, double fer);

// The M with the largest net key rate a sifted bit when failed blocks are discarded,
// (1-FER)(1 - h2(phase_error) - (M + check_bits)/N), FER = min(1, union). The smaller M on a tie.
struct BestKey {
  std::size_t frozen_count;
  double net_key_rate;  // a sifted bit; not positive means no key at this error rate
};
BestKey best_key(const std::vector<double>& sums, double phase_error, unsigned check_bits);

}  // namespace frostline
