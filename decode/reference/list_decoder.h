// Plain scalar list decoding, in every arithmetic: index by index, nothing left out, the judge of
// fast list decoders.
//
// I. Tal, A. Vardy, "List Decoding of Polar Codes", IEEE Trans. IT 61(5), 2015; path metric of
// LLRs: A. Balatsoukas-Stimming, M. Bastani Parizi, A. Burg, IEEE Trans. SP 63(19), 2015. What a
// decision costs in each arithmetic: decode/reference/path_costs.h.
//
// Paths stand in slots. At an open index every path goes on with the bit that its message decides
// and, unless the index never forks, with the other bit too. Of these alternatives the L best stay:
// the smaller metric, then the kept before the forked, then the lower slot of the parent. As a fork
// never costs less than the path that it leaves, a fork that stays has a parent that stays. Kept
// paths stay in their slots; forks take the free slots, lowest first, in the order of their
// parents.
#pragma once

#include <cstdint>
#include <vector>

#include "polar/arithmetic.h"
#include "polar/bits.h"
#include "polar/code.h"
#include "polar/metric_weights.h"

namespace frostline {

constexpr unsigned kLargestReferenceList = 128;

struct ListPath {
  BitString errors;   // s, N bits: its public values at frozen indices are the given ones
  double metric;      // exact: nats; planes: half nats; integer: units of the LLR
  bool check_agrees;  // its check bits are the given ones
};

struct ListDecision {
  // All survivors, best first: ascending metrics, of equals the lower slot. At most L.
  std::vector<ListPath> paths;
  // The first path whose check agrees; the first of all where none does.
  std::size_t chosen;

  const BitString& errors() const { return paths[chosen].errors; }
};

// difference: N bits, d at frozen indices; values at open indices are ignored. check_difference:
// the check bits of the error pattern, as check_bits() gives them; with 0 check bits all paths
// agree. list: L, a power of two from 1 to 128. qber: 0 < p < 0.5, used by exact arithmetic only.
// weights: used by planes only, which must have them; for this N. Throws std::invalid_argument
// otherwise. Time O(L N log N); about 4 L N messages of memory.
ListDecision decode_list(const Code& code, const Arithmetic& arithmetic, double qber, unsigned list,
                         const MetricWeights* weights, const BitString& difference,
                         std::uint32_t check_difference);

// Throws std::invalid_argument where decode_list would.
void require_list_arguments(const Code& code, const Arithmetic& arithmetic, unsigned list,
                            const MetricWeights* weights);

}  // namespace frostline
