#include "construct/degrading_merge.h"

#include <gtest/gtest.h>
#include <tbb/global_control.h>

#include <cmath>

#include "construct/selection.h"
#include "polar/error.h"
#include "tests/support/leaf_enumeration.h"

namespace frostline {
namespace {

double sum_of_best(const Reliability& reliability, std::size_t count) {
  const auto sums = union_sums(reliability, freezing_order(reliability));
  return sums[sums.size() - 1 - count];
}

TEST(DegradingMerge, RefusesValuesOutsideItsRange) {
  const BlockLength block_length(64);
  EXPECT_THROW(degrading_merge(block_length, 0.5, 16), InputError);
  EXPECT_THROW(degrading_merge(block_length, 0.11, 2), InputError);
  EXPECT_THROW(degrading_merge(block_length, 0.11, 17), InputError);
  EXPECT_THROW(upgrading_merge(block_length, 0.11, 1026), InputError);
}

TEST(DegradingMerge, EqualsExhaustiveEnumerationWhereNothingIsMerged) {
  for (const unsigned length : {8U, 16U}) {
    for (const double p : {0.001, 0.02, 0.11, 0.4}) {
      const auto exact = testing::leaf_errors_by_enumeration(length, p);
      const Reliability upper = degrading_merge(BlockLength(length), p, 1024);
      const Reliability lower = upgrading_merge(BlockLength(length), p, 1024);
      EXPECT_EQ(upper.kind, ReliabilityKind::upper_bound);
      EXPECT_EQ(lower.kind, ReliabilityKind::lower_bound);
      for (unsigned i = 0; i < length; ++i) {
        EXPECT_NEAR(std::exp(upper.log_error_probability[i]) / exact[i], 1, 1e-9)
            << length << " " << p << " " << i;
        EXPECT_NEAR(std::exp(lower.log_error_probability[i]) / exact[i], 1, 1e-9)
            << length << " " << p << " " << i;
      }
    }
  }
}

TEST(DegradingMerge, BracketsExhaustiveEnumerationWhereItMerges) {
  for (const double p : {0.001, 0.11, 0.4}) {
    const auto exact = testing::leaf_errors_by_enumeration(16, p);
    const Reliability upper = degrading_merge(BlockLength(16), p, 4);
    const Reliability lower = upgrading_merge(BlockLength(16), p, 4);
    for (unsigned i = 0; i < 16; ++i) {
      EXPECT_GE(std::exp(upper.log_error_probability[i]), exact[i] * (1 - 1e-12)) << p << " " << i;
      EXPECT_LE(std::exp(lower.log_error_probability[i]), exact[i] * (1 + 1e-12)) << p << " " << i;
    }
  }
}

TEST(DegradingMerge, NeverLiesBelowUpgradingMerge) {
  for (const double p : {1e-4, 0.02, 0.11, 0.45}) {
    for (const unsigned log2 : {3U, 7U, 12U}) {
      const BlockLength block_length = BlockLength::from_log2(log2);
      const Reliability upper = degrading_merge(block_length, p, 8);
      const Reliability lower = upgrading_merge(block_length, p, 8);
      for (std::size_t i = 0; i < block_length.bits(); ++i) {
        ASSERT_TRUE(std::isfinite(upper.log_error_probability[i]));
        ASSERT_TRUE(std::isfinite(lower.log_error_probability[i]));
        ASSERT_LE(upper.log_error_probability[i], 0);
        ASSERT_GE(upper.log_error_probability[i] - lower.log_error_probability[i], -1e-12)
            << p << " " << log2 << " " << i;
      }
    }
  }
}

TEST(DegradingMerge, TightensWithMoreLetters) {
  const BlockLength block_length(4096);
  double upper = 1;
  double lower = 0;
  for (const unsigned letters : {4U, 8U, 16U, 32U}) {
    const double next_upper = sum_of_best(degrading_merge(block_length, 0.05, letters), 2300);
    const double next_lower = sum_of_best(upgrading_merge(block_length, 0.05, letters), 2300);
    EXPECT_LT(next_upper, upper);
    EXPECT_GT(next_lower, lower);
    EXPECT_LT(next_lower, next_upper);
    upper = next_upper;
    lower = next_lower;
  }
  EXPECT_LT(upper / lower, 1.3);
}

// The pass that thins long lists is rigorous too, and costs next to nothing.
TEST(DegradingMerge, IsNearlyAsTightWhenQuick) {
  const BlockLength block_length(4096);
  for (const unsigned letters : {16U, 48U}) {
    const Reliability greedy = degrading_merge(block_length, 0.05, letters, Merging::greedy);
    const Reliability quick = degrading_merge(block_length, 0.05, letters, Merging::quick);
    const Reliability lower = upgrading_merge(block_length, 0.05, letters);
    EXPECT_NE(greedy.log_error_probability, quick.log_error_probability);
    EXPECT_NEAR(sum_of_best(quick, 2300) / sum_of_best(greedy, 2300), 1, 0.01);
    for (std::size_t i = 0; i < block_length.bits(); ++i) {
      ASSERT_GE(quick.log_error_probability[i] - lower.log_error_probability[i], -1e-12) << i;
    }
  }
}

TEST(DegradingMerge, IsTheSameOnAnyNumberOfThreads) {
  const BlockLength block_length(8192);
  std::vector<double> first;
  for (const std::size_t threads : {1U, 2U, 5U}) {
    const tbb::global_control limit(tbb::global_control::max_allowed_parallelism, threads);
    const auto log_p = degrading_merge(block_length, 0.02, 8).log_error_probability;
    if (first.empty()) first = log_p;
    EXPECT_EQ(log_p, first) << threads;
  }
}

}  // namespace
}  // namespace frostline
