// Confidence intervals against their definition, with the binomial and negative binomial
// distributions of Boost.Math (another route than the Beta quantiles that the code takes).
#include "decode/trial/interval.h"

#include <gtest/gtest.h>

#include <boost/math/distributions/binomial.hpp>
#include <boost/math/distributions/negative_binomial.hpp>
#include <cmath>
#include <stdexcept>

namespace frostline {
namespace {

using boost::math::cdf;
using boost::math::complement;

TEST(FixedBlocksInterval, LeavesTwoAndAHalfPercentOnEitherSide) {
  for (const std::uint64_t blocks : {10U, 317U, 100000U}) {
    for (const std::uint64_t failures : {1U, 3U, 9U}) {
      const RateInterval interval = fixed_blocks_interval(failures, blocks);
      const auto n = static_cast<double>(blocks);
      const auto k = static_cast<double>(failures);
      // At the lower end so many failures or more, at the upper end so many or fewer, are that
      // rare.
      EXPECT_NEAR(cdf(complement(boost::math::binomial(n, interval.low), k - 1)), 0.025, 1e-9);
      EXPECT_NEAR(cdf(boost::math::binomial(n, interval.high), k), 0.025, 1e-9);
    }
  }
}

TEST(FixedBlocksInterval, HasClosedFormsAtTheEnds) {
  const RateInterval none = fixed_blocks_interval(0, 50);
  EXPECT_EQ(none.low, 0);
  EXPECT_NEAR(none.high, 1 - std::pow(0.025, 1.0 / 50), 1e-12);
  const RateInterval all = fixed_blocks_interval(50, 50);
  EXPECT_NEAR(all.low, std::pow(0.025, 1.0 / 50), 1e-12);
  EXPECT_EQ(all.high, 1);
}

TEST(StoppedAtFailureInterval, LeavesTwoAndAHalfPercentOnEitherSide) {
  for (const std::uint64_t failures : {1U, 20U, 100U}) {
    for (const std::uint64_t blocks : {101U, 5000U}) {
      const RateInterval interval = stopped_at_failure_interval(failures, blocks);
      const auto k = static_cast<double>(failures);
      const auto successes = static_cast<double>(blocks - failures);
      // Successes before the k-th failure: at the lower end so few, at the upper end so many, are
      // that rare.
      EXPECT_NEAR(cdf(boost::math::negative_binomial(k, interval.low), successes), 0.025, 1e-9);
      if (successes > 0) {
        EXPECT_NEAR(
            cdf(complement(boost::math::negative_binomial(k, interval.high), successes - 1)), 0.025,
            1e-9);
      }
    }
  }
}

TEST(Intervals, RefuseImpossibleCounts) {
  EXPECT_THROW(fixed_blocks_interval(1, 0), std::invalid_argument);
  EXPECT_THROW(fixed_blocks_interval(2, 1), std::invalid_argument);
  EXPECT_THROW(fixed_blocks_interval(1, 2, 1.0), std::invalid_argument);
  EXPECT_THROW(stopped_at_failure_interval(0, 5), std::invalid_argument);
}

}  // namespace
}  // namespace frostline
