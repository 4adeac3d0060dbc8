#include "decode/list/list_program.h"

#include <algorithm>
#include <cmath>

namespace frostline {
namespace {

// ln(1 + e^-x) of x half nats, in half nats.
double correction(double x) { return std::log1p(std::exp(-kMetricUnitNats * x)) / kMetricUnitNats; }

template <typename Integer>
Integer rounded(double value, double most) {
  return static_cast<Integer>(std::lround(std::min(value, most)));
}

WeightCosts costs_of_weight(unsigned weight, unsigned planes) {
  WeightCosts costs{};
  const double w = weight;
  const double units = kUnitsPerHalfNat;
  const unsigned largest = (1U << planes) - 1;
  for (unsigned v = 0; v < 16; ++v) {
    costs.flip[v] = rounded<std::uint8_t>(units * w * v, 255);
    const double x = w * std::min(v % 8, largest);
    const double common = correction(w * largest);
    costs.single[v] =
        rounded<std::uint8_t>(units * ((v >= 8 ? x : 0) + correction(x) - common), 127);
  }
  for (unsigned k = 0; k < planes; ++k) {
    costs.disagreement[k] = rounded<std::uint16_t>(units * w * (1U << k), 255);
  }
  const auto mean = [&](unsigned first, unsigned last) {
    double sum = 0;
    for (unsigned m = first; m <= last; ++m) sum += correction(w * m);
    return sum / (last - first + 1);
  };
  const double steps = units * kCorrectionSteps;
  const double two_or_three = mean(2, 3);
  costs.correction[0] = rounded<std::uint16_t>(steps * (mean(0, 0) - mean(1, 1)), 255);
  costs.correction[1] = rounded<std::uint16_t>(steps * (mean(1, 1) - two_or_three), 255);
  if (planes == 3) {
    costs.correction[2] = rounded<std::uint16_t>(steps * (two_or_three - mean(4, 7)), 255);
  }
  return costs;
}

ListNode kind_of_byte(std::uint8_t frozen, std::uint8_t never_forks) {
  if (frozen == 0xFF) return ListNode::frozen;
  if (frozen != 0) return ListNode::mixed;
  return never_forks == 0xFF ? ListNode::open : ListNode::open_forks;
}

ListNode kind_of_halves(ListNode left, ListNode right) {
  if (left == right) return left;
  const bool open = left != ListNode::frozen && left != ListNode::mixed &&
                    right != ListNode::frozen && right != ListNode::mixed;
  return open ? ListNode::open_forks : ListNode::mixed;
}

}  // namespace

ListProgram::ListProgram(const Code& code, const MetricWeights* metric_weights,
                         unsigned magnitude_planes, unsigned list_size)
    : log2_length(code.block_length().log2()),
      bytes(code.block_length().bytes()),
      planes(magnitude_planes),
      list(list_size),
      check_bits(code.check_bits),
      schedule(code.frozen, code.precoding),
      precoded(code.precoding != Precoding::none),
      nodes(2 * bytes),
      never_forks(bytes, 0xFF),
      weights(16 * bytes) {
  if (list > 1) {
    weights = metric_weights->nodes;
    const Span<const std::uint64_t> flags = metric_weights->never_forks.words();
    for (std::size_t j = 0; j < bytes; ++j) {
      never_forks[j] = static_cast<std::uint8_t>(flags[j / 8] >> (8 * (j % 8)));
    }
  }
  for (std::size_t j = 0; j < bytes; ++j) {
    nodes[bytes + j] = kind_of_byte(schedule.frozen_places(j), never_forks[j]);
  }
  for (std::size_t v = bytes - 1; v > 0; --v) {
    nodes[v] = kind_of_halves(nodes[2 * v], nodes[2 * v + 1]);
  }
  for (unsigned w = 0; w <= kLargestMetricWeight; ++w) costs.push_back(costs_of_weight(w, planes));
}

}  // namespace frostline
