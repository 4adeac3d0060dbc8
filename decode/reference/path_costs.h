// What a decision costs the path that takes it, in each arithmetic: the path metric is the sum over
// all indices, frozen ones included, and the smallest is the best.
//
//   exact        ln(1 + exp(-(1-2u) LLR)) nats: minus the logarithm of the probability of u_i given
//                the channel and the path so far (A. Balatsoukas-Stimming, M. Bastani Parizi,
//                A. Burg, IEEE Trans. SP 63(19), 2015, Theorem 1).
//   planes:W     the same with weight times magnitude in the place of |LLR|, in half nats, the
//                correction ln(1 + e^-x) rounded to 1/16 of a half nat. So sums are exact, and the
//                metric is the same number on every machine.
//   integer:Q:A  |LLR| where the bit disagrees, nothing where it agrees (the same
//                paper's approximation for hardware), in units of the LLR.
//
// Each has of(i, message, bit) for leaf i, chain(c, bit) for leaf 0, which is of the chain, and
// never_forks(i): whether every path follows the decision at the open index i.
#pragma once

#include <array>
#include <cmath>
#include <cstddef>
#include <cstdlib>

#include "decode/reference/arithmetic_rules.h"
#include "polar/metric_weights.h"

namespace frostline {

class ExactCosts {
 public:
  double of(std::size_t, double llr, bool bit) const {
    const double disagreement = bit == (llr < 0) ? 0 : std::abs(llr);
    return disagreement + std::log1p(std::exp(-std::abs(llr)));
  }
  double chain(double llr, bool bit) const { return of(0, llr, bit); }
  bool never_forks(std::size_t) const { return false; }
};

class PlanesCosts {
 public:
  // weights: referred to.
  explicit PlanesCosts(const MetricWeights& weights) : weights_(weights) {
    for (std::size_t x = 0; x < corrections_.size(); ++x) {
      const double nats = std::log1p(std::exp(-kMetricUnitNats * static_cast<double>(x)));
      corrections_[x] = std::round(nats / kMetricUnitNats * kSteps) / kSteps;
    }
  }

  double of(std::size_t i, SignMagnitude message, bool bit) const {
    const unsigned x = weights_.of_leaf(i) * message.magnitude;
    const double disagreement = bit == message.negative ? 0 : x;
    return disagreement + (x < corrections_.size() ? corrections_[x] : 0);
  }
  // One positive channel LLR, which the weight stands for.
  double chain(PlanesRules::Chain, bool bit) const { return of(0, {false, 1}, bit); }
  bool never_forks(std::size_t i) const { return weights_.never_forks[i]; }

 private:
  static constexpr double kSteps = 16;

  const MetricWeights& weights_;
  std::array<double, 16> corrections_{};  // of x half nats; from x = 9 on they round to 0
};

class IntegerCosts {
 public:
  double of(std::size_t, int llr, bool bit) const { return bit == (llr < 0) ? 0 : std::abs(llr); }
  double chain(int llr, bool bit) const { return of(0, llr, bit); }
  bool never_forks(std::size_t) const { return false; }
};

}  // namespace frostline
