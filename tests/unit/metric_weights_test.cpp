#include "construct/metric_weights.h"

#include <gtest/gtest.h>
#include <tbb/global_control.h>
#include <tbb/parallel_for.h>

#include <array>
#include <cmath>
#include <random>
#include <stdexcept>

#include "construct/density_evolution.h"
#include "construct/selection.h"
#include "polar/error.h"
#include "tests/support/leaf_enumeration.h"
#include "tests/support/node_messages.h"
#include "tests/support/polarized_frozen_set.h"

namespace frostline {
namespace {

using testing::NodeMessages;

FrozenSet all_open(BlockLength block_length) {
  return FrozenSet(block_length, BitString(block_length.bits()));
}

// Probability, or number, of messages of a node by magnitude, right and wrong.
struct NodeTable {
  std::array<double, 128> right{};
  std::array<double, 128> wrong{};
};

// Where a node stands in MetricWeights::nodes.
std::size_t place(std::size_t length, unsigned k, std::size_t first) {
  return (length + first) >> k;
}

// The path metric that the true path pays at one position of a node, in nats.
double expected_metric(const NodeTable& table, unsigned weight) {
  double sum = 0;
  for (std::size_t m = 0; m < table.right.size(); ++m) {
    const double llr = 0.5 * weight * static_cast<double>(m);
    sum += (table.right[m] + table.wrong[m]) * std::log1p(std::exp(-llr)) + table.wrong[m] * llr;
  }
  return sum;
}

// Numbers of error patterns by their weight: the tables of all nodes for any p.
class Enumeration {
 public:
  Enumeration(unsigned length, unsigned planes) : length_(length), tables_(length + 1) {
    for (auto& of_weight : tables_) of_weight.resize(2 * length);
    std::size_t weight = 0;
    const NodeMessages messages(
        planes, [&](unsigned k, std::size_t first, bool wrong, std::size_t magnitude) {
          NodeTable& table = tables_[weight][place(length_, k, first)];
          // All positions of a node are alike; together they count once.
          (wrong ? table.wrong : table.right)[magnitude] += 1 / static_cast<double>(1U << k);
        });
    std::vector<bool> x(length);
    for (std::uint32_t pattern = 0; pattern < (std::uint32_t{1} << length); ++pattern) {
      for (unsigned j = 0; j < length; ++j) x[j] = (pattern >> j) & 1U;
      weight = static_cast<std::size_t>(__builtin_popcount(pattern));
      messages.walk(x);
    }
  }

  NodeTable table(std::size_t node, double p) const {
    NodeTable result;
    for (std::size_t weight = 0; weight <= length_; ++weight) {
      const double probability = testing::pattern_probability((1U << weight) - 1, length_, p);
      for (std::size_t m = 0; m < result.right.size(); ++m) {
        result.right[m] += probability * tables_[weight][node].right[m];
        result.wrong[m] += probability * tables_[weight][node].wrong[m];
      }
    }
    return result;
  }

 private:
  unsigned length_;
  std::vector<std::vector<NodeTable>> tables_;  // by weight of the pattern, then by node
};

TEST(MetricWeights, MakeTheTruePathCheapestByExhaustiveEnumeration) {
  for (const unsigned length : {8U, 16U}) {
    for (const unsigned planes : {2U, 3U, 5U}) {
      const Enumeration enumeration(length, planes);
      for (const double p : {1e-4, 0.01, 0.05, 0.11, 0.3}) {
        const MetricWeights weights =
            metric_weights(all_open(BlockLength(length)), p, Arithmetic::planes_of(planes));
        ASSERT_EQ(weights.nodes.size(), 2 * length);
        for (std::size_t node = 1; node < 2 * length; ++node) {
          const NodeTable table = enumeration.table(node, p);
          const unsigned weight = weights.nodes[node];
          ASSERT_LE(weight, kLargestMetricWeight);
          const double metric = expected_metric(table, weight);
          for (unsigned other = 0; other <= kLargestMetricWeight; ++other) {
            EXPECT_LE(metric, expected_metric(table, other) * (1 + 1e-12))
                << length << " " << planes << " " << p << " node " << node << " weight " << weight
                << " other " << other;
          }
        }
      }
    }
  }
}

// Why a penalty that is proportional to the magnitude is right at 0.
TEST(MetricWeights, ChargeNothingAtMagnitudeZeroWhereTheSignSaysNothing) {
  const Enumeration enumeration(16, 3);
  for (std::size_t node = 1; node < 32; ++node) {
    const NodeTable table = enumeration.table(node, 0.07);
    EXPECT_NEAR(table.right[0], table.wrong[0], 1e-14) << node;
  }
}

// The maximum-likelihood slope of the LLR, in nats a unit, and its standard deviation.
struct Slope {
  double value = 0;
  double deviation = 0;
};
Slope fitted_slope(const NodeTable& table) {
  double low = 0;
  double high = 40;
  const auto excess = [&](double slope) {  // of magnitudes at disagreements over their expectation
    double sum = 0;
    for (std::size_t m = 1; m < table.right.size(); ++m) {
      const auto unit = static_cast<double>(m);
      sum += unit *
             (table.wrong[m] - (table.right[m] + table.wrong[m]) / (1 + std::exp(slope * unit)));
    }
    return sum;
  };
  for (int step = 0; step < 60; ++step) {
    const double middle = (low + high) / 2;
    (excess(middle) < 0 ? low : high) = middle;
  }
  double information = 0;
  for (std::size_t m = 1; m < table.right.size(); ++m) {
    const double tanh_half = std::tanh(low * static_cast<double>(m) / 2);
    information += static_cast<double>(m * m) * (table.right[m] + table.wrong[m]) *
                   (1 - tanh_half * tanh_half) / 4;
  }
  return {low, 1 / std::sqrt(information)};
}

// The rules of the decoder are those that tests of density evolution hold against the reference.
// A weight is the whole number of half nats that fits best, which is within 0.6 of the best real
// one, give or take five standard deviations.
TEST(MetricWeights, AreTheEmpiricalLlrOfAUnitByMonteCarlo) {
  const std::size_t length = 256;
  std::vector<NodeTable> tables(2 * length);
  const NodeMessages messages(
      3, [&](unsigned k, std::size_t first, bool wrong, std::size_t magnitude) {
        NodeTable& table = tables[place(length, k, first)];
        ++(wrong ? table.wrong : table.right)[magnitude];
      });
  std::mt19937_64 generator(7);
  std::bernoulli_distribution error(0.05);
  for (int block = 0; block < 4000; ++block) {
    std::vector<bool> x(length);
    for (std::size_t i = 0; i < length; ++i) x[i] = error(generator);
    messages.walk(x);
  }
  const MetricWeights weights =
      metric_weights(all_open(BlockLength(length)), 0.05, Arithmetic::planes_of(3));
  int sharp = 0;  // nodes whose slope the trial knows to a quarter of a nat
  for (std::size_t node = 1; node < 2 * length; ++node) {
    double disagreements = 0;
    for (std::size_t m = 1; m < 128; ++m) disagreements += tables[node].wrong[m];
    if (disagreements < 20) continue;
    const Slope slope = fitted_slope(tables[node]);
    EXPECT_NEAR(weights.nodes[node], std::min(31.0, slope.value / 0.5),
                0.6 + 5 * slope.deviation / 0.5)
        << node;
    if (slope.deviation < 0.25) ++sharp;
  }
  EXPECT_GT(sharp, 200);
}

TEST(MetricWeights, GrowFromLeftToRightAndWithTheQualityOfTheChannel) {
  const BlockLength block_length(4096);
  for (const unsigned planes : {2U, 3U, 4U}) {
    std::vector<std::uint8_t> worse;
    for (const double p : {0.11, 0.05, 0.02}) {
      const MetricWeights weights =
          metric_weights(all_open(block_length), p, Arithmetic::planes_of(planes));
      for (std::size_t node = 2; node < block_length.bits(); ++node) {
        ASSERT_LE(weights.nodes[2 * node], weights.nodes[node])
            << planes << " " << p << " " << node;
        // Saturation may take back a little of what a right child gains.
        ASSERT_GE(weights.nodes[2 * node + 1] + 1, weights.nodes[node])
            << planes << " " << p << " " << node;
      }
      for (std::size_t node = 1; node < worse.size(); ++node) {
        ASSERT_GE(weights.nodes[node], worse[node]) << planes << " " << p << " " << node;
      }
      worse = weights.nodes;
    }
  }
}

// At the root's right child a unit is two channel LLRs, ln 19 each at 5 %: 11.8 half nats. The
// root's one message is a single channel LLR: 5.9.
TEST(MetricWeights, AreTheChannelsOwnLlrNearTheRoot) {
  const MetricWeights weights =
      metric_weights(all_open(BlockLength(64)), 0.05, Arithmetic::planes_of(3));
  EXPECT_EQ(weights.of_node(6, 0), 6U);
  EXPECT_EQ(weights.of_node(5, 32), 12U);
  EXPECT_EQ(weights.of_node(4, 48), 12U);
  EXPECT_EQ(weights.of_leaf(0), 0U);
  EXPECT_EQ(weights.of_leaf(63), weights.of_node(0, 63));
}

TEST(MetricWeights, SaturateWherePerfectAndVanishWhereUseless) {
  const BlockLength block_length = BlockLength::from_log2(14);
  const MetricWeights weights =
      metric_weights(all_open(block_length), 0.02, Arithmetic::planes_of(3));
  EXPECT_EQ(weights.of_leaf(block_length.bits() - 1), kLargestMetricWeight);
  EXPECT_EQ(weights.of_node(3, block_length.bits() - 8), kLargestMetricWeight);
  EXPECT_EQ(weights.of_leaf(1), 0U);
  EXPECT_EQ(weights.of_node(3, 8), 0U);
}

TEST(MetricWeights, AreTheSameOnAnyNumberOfThreadsAndInACancelledRun) {
  const BlockLength block_length = BlockLength::from_log2(15);
  const FrozenSet frozen = testing::polarized_frozen_set(block_length, 0.3, 10000);
  const auto weigh = [&] { return metric_weights(frozen, 0.05, Arithmetic::planes_of(3)); };
  const MetricWeights first = weigh();
  for (const std::size_t threads : {1U, 2U, 5U}) {
    const tbb::global_control limit(tbb::global_control::max_allowed_parallelism, threads);
    const MetricWeights again = weigh();
    EXPECT_EQ(again.nodes, first.nodes) << threads;
    EXPECT_EQ(again.never_forks, first.never_forks) << threads;
  }
  tbb::task_group_context context;
  tbb::parallel_for(
      0, 1,
      [&](int) {
        context.cancel_group_execution();
        const MetricWeights again = weigh();
        EXPECT_EQ(again.nodes, first.nodes);
        EXPECT_EQ(again.never_forks, first.never_forks);
      },
      context);
}

TEST(NeverForkSet, IsTheLargestOneOfTheMostReliableOpenIndicesWithinItsBound) {
  const BlockLength block_length(2048);
  const Arithmetic arithmetic = Arithmetic::planes_of(3);
  const Reliability reliability = density_evolution(block_length, 0.05, arithmetic);
  const std::vector<std::uint32_t> order = freezing_order(reliability);
  // A frozen set of another construction, so that the two orders differ.
  const FrozenSet frozen = testing::polarized_frozen_set(block_length, 0.35, 800);
  for (const double bound : {1e-6, 1e-3, 0.1}) {
    const BitString never = metric_weights(frozen, 0.05, arithmetic, bound).never_forks;
    ASSERT_EQ(never.size(), block_length.bits());
    double sum = 0;
    double next = 0;       // the smallest error probability of an open index that forks
    bool forking = false;  // from the most reliable index down: first none forks, then all do
    for (auto index = order.rbegin(); index != order.rend(); ++index) {
      const double error = std::exp(reliability.log_error_probability[*index]);
      if (frozen.is_frozen(*index)) {
        EXPECT_FALSE(never[*index]);
      } else if (never[*index]) {
        EXPECT_FALSE(forking) << *index;
        sum += error;
      } else if (!forking) {
        forking = true;
        next = error;
      }
    }
    EXPECT_LE(sum, bound);
    EXPECT_GT(sum + next, bound);
    EXPECT_GT(never.count(), 500U);
  }
}

TEST(NeverForkSet, IsEmptyWithoutABoundAndAllOpenIndicesWhereTheyFit) {
  const BlockLength block_length(256);
  const Arithmetic arithmetic = Arithmetic::planes_of(3);
  const FrozenSet frozen = testing::polarized_frozen_set(block_length, 0.3, 200);
  EXPECT_EQ(metric_weights(frozen, 0.02, arithmetic, 0).never_forks.count(), 0U);
  EXPECT_EQ(metric_weights(frozen, 0.02, arithmetic, 1).never_forks.count(), 56U);
}

// 4100 of 44000 open indices seen at N = 65536, p = 0.05 (computed independently).
TEST(NeverForkSet, LeavesAboutATenthOfTheOpenIndicesToFork) {
  const BlockLength block_length(65536);
  const Arithmetic arithmetic = Arithmetic::planes_of(3);
  const Reliability reliability = density_evolution(block_length, 0.05, arithmetic);
  const FrozenSet frozen = freeze_first(freezing_order(reliability), block_length.bits() - 44000);
  const std::size_t forks = 44000 - metric_weights(frozen, 0.05, arithmetic).never_forks.count();
  EXPECT_GT(forks, 3900U);
  EXPECT_LT(forks, 4300U);
}

TEST(MetricWeights, RefuseValuesOutsideTheirRange) {
  const FrozenSet frozen = all_open(BlockLength(64));
  const Arithmetic planes = Arithmetic::planes_of(3);
  EXPECT_THROW(metric_weights(frozen, 0.5, planes), InputError);
  EXPECT_THROW(metric_weights(frozen, 0, planes), InputError);
  EXPECT_THROW(metric_weights(frozen, 0.02, planes, -1e-9), InputError);
  EXPECT_THROW(metric_weights(frozen, 0.02, planes, std::nan("")), InputError);
  EXPECT_THROW(metric_weights(frozen, 0.02, planes, 1.5), InputError);
  EXPECT_THROW(metric_weights(frozen, 0.02, Arithmetic::exact()), std::invalid_argument);
  EXPECT_THROW(metric_weights(frozen, 0.02, Arithmetic::integer_of(6, 8)), std::invalid_argument);
  EXPECT_THROW(metric_weights(frozen, 0.02, Arithmetic::planes_of(8)), std::invalid_argument);
}

}  // namespace
}  // namespace frostline
