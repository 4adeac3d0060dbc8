#include "construct/orders.h"

#include <tbb/parallel_sort.h>

#include <cmath>
#include <string>
#include <vector>

#include "polar/error.h"

namespace frostline {
namespace {

// order: the first to freeze first.
Reliability ranked(const std::vector<std::uint32_t>& order) {
  Reliability reliability;
  reliability.kind = ReliabilityKind::order_only;
  reliability.log_error_probability.resize(order.size());
  const double n = static_cast<double>(order.size());
  for (std::size_t rank = 0; rank < order.size(); ++rank) {
    reliability.log_error_probability[order[rank]] = -static_cast<double>(rank + 1) / n;
  }
  return reliability;
}

// 2^(j/4) for j = 4k + r is 2^k 2^(r/4): four integer coefficients an index, and three roundings.
// No two indices weigh the same, since the fourth roots of 1, 2, 4 and 8 are linearly independent
// over the rationals.
double weight_of(std::uint32_t index) {
  double weight = 0;
  for (unsigned r = 0; r < 4; ++r) {
    std::uint32_t coefficient = 0;
    for (unsigned k = 0; 4 * k + r < BlockLength::kMaxLog2; ++k) {
      coefficient |= ((index >> (4 * k + r)) & 1U) << k;
    }
    weight += static_cast<double>(coefficient) * std::exp2(r / 4.0);
  }
  return weight;
}

}  // namespace

Reliability nr_sequence_order(BlockLength block_length) {
  if (block_length.log2() > kNrSequenceMaxLog2) {
    throw InputError("the NR sequence serves block lengths up to 1024, not " +
                     std::to_string(block_length.bits()));
  }
  std::vector<std::uint32_t> order;
  for (const std::uint16_t index : kNrSequence) {
    if (index < block_length.bits()) order.push_back(index);
  }
  return ranked(order);
}

Reliability polarization_weight_order(BlockLength block_length) {
  std::vector<double> weights(block_length.bits());
  std::vector<std::uint32_t> order(block_length.bits());
  for (std::uint32_t i = 0; i < order.size(); ++i) {
    order[i] = i;
    weights[i] = weight_of(i);
  }
  tbb::parallel_sort(order.begin(), order.end(), [&](std::uint32_t a, std::uint32_t b) {
    return weights[a] != weights[b] ? weights[a] < weights[b] : a < b;
  });
  return ranked(order);
}

}  // namespace frostline
