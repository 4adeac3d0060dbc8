#include "construct/metric_weights.h"

#include <algorithm>
#include <cmath>
#include <stdexcept>
#include <vector>

#include "construct/density_tree.h"
#include "construct/selection.h"
#include "polar/error.h"
#include "polar/limits.h"

namespace frostline {
namespace {

// What the metric of the true path changes by when the weight goes from w to w + 1, for a message
// of each magnitude that is right or wrong.
class WeightSteps {
 public:
  explicit WeightSteps(unsigned planes) : levels_(std::size_t{1} << planes) {
    for (unsigned w = 0; w < kLargestMetricWeight; ++w) {
      for (std::size_t m = 0; m < levels_; ++m) {
        const double step = kMetricUnitNats * static_cast<double>(m);
        const double llr = static_cast<double>(w) * step;
        const double right = softplus(-(llr + step)) - softplus(-llr);
        right_.push_back(right);
        wrong_.push_back(right + step);
      }
    }
  }

  // The metric is convex in w, so its steps only grow: the first that is not negative starts at the
  // best weight. right, wrong: 2^W probabilities.
  template <typename Table>
  unsigned best_weight(const Table& right, const Table& wrong) const {
    unsigned low = 0;
    unsigned high = kLargestMetricWeight;
    while (low < high) {
      const unsigned w = (low + high) / 2;
      double step = 0;
      for (std::size_t m = 1; m < levels_; ++m) {
        step += right[m] * right_[w * levels_ + m] + wrong[m] * wrong_[w * levels_ + m];
      }
      if (step < 0) {
        low = w + 1;
      } else {
        high = w;
      }
    }
    return low;
  }

  // One message of one unit that is wrong with probability error.
  unsigned best_weight(double error) const {
    std::vector<double> right(levels_, 0.0);
    std::vector<double> wrong(levels_, 0.0);
    right[1] = 1 - error;
    wrong[1] = error;
    return best_weight(right, wrong);
  }

 private:
  static double softplus(double x) { return std::log1p(std::exp(x)); }

  std::size_t levels_;
  std::vector<double> right_;  // at w * levels_ + m
  std::vector<double> wrong_;
};

// Writes the weights of all nodes, and the leaves' error probabilities in the same pass.
class NodeWeights {
 public:
  NodeWeights(const WeightSteps& steps, Span<std::uint8_t> nodes, Span<double> log_p)
      : steps_(steps), nodes_(nodes), length_(log_p.size()), errors_(log_p) {}

  void chain(double error, std::size_t length) {
    errors_.chain(error, length);
    at(0, length) = static_cast<std::uint8_t>(steps_.best_weight(error));
  }
  template <typename Density>
  void inner(const Density& density, std::size_t first, std::size_t length) {
    weigh(density, first, length);
  }
  template <typename Density>
  void pair(const Density& density, std::size_t first) {
    errors_.pair(density, first);
    weigh(density.f(), first, 1);
    weigh(density.g(), first + 1, 1);
  }
  template <typename Density>
  void leaf(const Density& density, std::size_t i) {
    errors_.leaf(density, i);
    weigh(density, i, 1);
  }
  void perfect(double doubt, std::size_t first, std::size_t length) {
    errors_.perfect(doubt, first, length);
    fill(first, length, kLargestMetricWeight);
  }
  void useless(std::size_t first, std::size_t length) {
    errors_.useless(first, length);
    fill(first, length, 0);
  }

 private:
  std::uint8_t& at(std::size_t first, std::size_t length) {
    return nodes_[(length_ + first) / length];
  }
  template <typename Density>
  void weigh(const Density& density, std::size_t first, std::size_t length) {
    at(first, length) =
        static_cast<std::uint8_t>(steps_.best_weight(density.right(), density.wrong()));
  }
  // The node and all below it.
  void fill(std::size_t first, std::size_t length, unsigned weight) {
    for (std::size_t part = length; part > 0; part /= 2) {
      const Span<std::uint8_t> row = nodes_.subspan((length_ + first) / part, length / part);
      std::fill(row.begin(), row.end(), static_cast<std::uint8_t>(weight));
    }
  }

  const WeightSteps& steps_;
  Span<std::uint8_t> nodes_;
  std::size_t length_;
  LeafErrors errors_;
};

BitString most_reliable(const FrozenSet& frozen, const Reliability& reliability, double bound) {
  const std::vector<std::uint32_t> order = freezing_order(reliability);
  BitString never_forks(order.size());
  double sum = 0;
  for (auto index = order.rbegin(); index != order.rend(); ++index) {
    if (frozen.is_frozen(*index)) continue;
    sum += std::exp(reliability.log_error_probability[*index]);
    if (sum > bound) break;
    never_forks.set(*index, true);
  }
  return never_forks;
}

}  // namespace

MetricWeights metric_weights(const FrozenSet& frozen, double p, const Arithmetic& arithmetic,
                             double never_fork_bound) {
  require_error_rate(p, "QBER");
  if (!(never_fork_bound >= 0 && never_fork_bound <= 1)) {
    throw InputError("bound of the never-fork set is not from 0 to 1");
  }
  if (arithmetic.kind != Arithmetic::Kind::planes || arithmetic.planes < 2 ||
      arithmetic.planes > 7) {
    throw std::invalid_argument("metric_weights: not an arithmetic of 2 to 7 planes");
  }
  const BlockLength block_length = frozen.block_length();
  MetricWeights weights{block_length, std::vector<std::uint8_t>(2 * block_length.bits(), 0), {}};
  Reliability reliability;
  reliability.kind = ReliabilityKind::exact;
  reliability.log_error_probability.resize(block_length.bits());
  const WeightSteps steps(arithmetic.planes);
  NodeWeights visitor(steps, weights.nodes, reliability.log_error_probability);
  visit_planes_tree(p, block_length.bits(), arithmetic.planes, visitor);
  weights.never_forks = most_reliable(frozen, reliability, never_fork_bound);
  return weights;
}

}  // namespace frostline
