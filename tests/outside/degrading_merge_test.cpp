// Degrading and upgrading merge against I. Tal and A. Vardy, "How to construct polar codes", IEEE
// Trans. IT 59(10), 2013, and against what is known of successive cancellation on a BSC.
#include "construct/degrading_merge.h"

#include <gtest/gtest.h>

#include <cmath>

#include "construct/selection.h"
#include "polar/limits.h"

namespace frostline {
namespace {

// Table I there: BSC(0.11), N = 2^20, k = 445340 unfrozen, sum over the best k. Values from memory;
// an independent computation gives 5.094991e-03 and 6.924710e-05. The row of 64 letters takes
// minutes: see tests/bench/tal_vardy_table.txt.
TEST(DegradingMerge, EqualsTableIOfTalAndVardy) {
  const struct {
    unsigned letters;
    double sum;
  } rows[] = {{8, 5.096030e-03}, {16, 6.926762e-05}};
  for (const auto& row : rows) {
    const Reliability reliability =
        degrading_merge(BlockLength::from_log2(20), 0.11, row.letters, Merging::greedy);
    const auto sums = union_sums(reliability, freezing_order(reliability));
    EXPECT_NEAR(sums[sums.size() - 1 - 445340] / row.sum, 1, 0.005) << row.letters;
  }
}

// P. Jouguet and S. Kunz-Jacques, QIC 14(3&4), 2014: SC at QBER 2 %, N = 2^16, FER bound 0.1, has
// beta = 0.935, f = 1.394 (from memory). At 5 and 11 %: computed independently.
TEST(DegradingMerge, EqualsPublishedLeakageOfExactDecoding) {
  const double points[][2] = {{0.02, 1.394}, {0.05, 1.258}, {0.11, 1.155}};
  for (const auto& [p, efficiency] : points) {
    const Reliability reliability = degrading_merge(BlockLength::from_log2(16), p, 24);
    const auto sums = union_sums(reliability, freezing_order(reliability));
    const double bits = static_cast<double>(smallest_frozen_count(sums, 0.1));
    EXPECT_NEAR(bits / (65536 * binary_entropy(p)) / efficiency, 1, 0.003) << p;
  }
}

// The largest numbers of unfrozen indices whose sum of near-exact leaf probabilities meets a
// target: computed independently with another implementation of the merge.
TEST(DegradingMerge, EqualsAnIndependentComputationAtShortLengths) {
  const struct {
    unsigned log2;
    double p;
    double fer;
    std::size_t open;
  } points[] = {{10, 0.02, 1e-1, 757},  {10, 0.05, 1e-3, 479},  {10, 0.11, 1e-6, 203},
                {12, 0.01, 1e-2, 3358}, {12, 0.05, 1e-1, 2429}, {12, 0.11, 1e-3, 1316}};
  for (const auto& point : points) {
    const BlockLength block_length = BlockLength::from_log2(point.log2);
    const Reliability reliability = degrading_merge(block_length, point.p, 40);
    const auto sums = union_sums(reliability, freezing_order(reliability));
    const std::size_t open = block_length.bits() - smallest_frozen_count(sums, point.fer);
    EXPECT_NEAR(static_cast<double>(open), static_cast<double>(point.open), 2)
        << point.log2 << " " << point.p << " " << point.fer;
  }
}

}  // namespace
}  // namespace frostline
