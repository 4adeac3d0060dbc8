#include "construct/gaussian.h"

#include <gtest/gtest.h>

#include <cmath>
#include <stdexcept>

#include "construct/symmetric_channel.h"
#include "polar/error.h"

namespace frostline {
namespace {

TEST(LogPhi, IsUndoneByItsInverse) {
  for (double log_mean = -40; log_mean < 20; log_mean += 0.37) {
    const double mean = std::exp(log_mean);
    EXPECT_NEAR(mean_from_log_phi(log_phi(mean)) / mean, 1, 1e-12) << mean;
  }
  EXPECT_EQ(mean_from_log_phi(0), 0);
  EXPECT_THROW(log_phi(-1), std::invalid_argument);
  EXPECT_THROW(mean_from_log_phi(0.1), std::invalid_argument);
}

TEST(LogPhi, FallsWithoutAJumpWhereItsFormsMeet) {
  for (const double mean : {0.25, 1.0}) {  // the step of the rule, and the complement
    const double below = log_phi(mean * (1 - 1e-9));
    const double above = log_phi(mean * (1 + 1e-9));
    EXPECT_LT(above, below);
    EXPECT_NEAR(above / below, 1, 3e-9);
  }
}

TEST(GaussianApproximation, RefusesValuesOutsideItsRange) {
  EXPECT_THROW(gaussian_approximation(BlockLength(1024), 0), InputError);
  EXPECT_THROW(gaussian_approximation(BlockLength(1024), 0.5), InputError);
  EXPECT_THROW(gaussian_approximation(BlockLength(1024), 0.02, 13), InputError);
}

TEST(GaussianApproximation, FollowsItsRecursionFromTheStart) {
  // Without exact levels the last index only doubles the mean, the first only takes minus steps.
  const unsigned log2 = 4;
  const Reliability reliability = gaussian_approximation(BlockLength::from_log2(log2), 0.11, 0);
  EXPECT_EQ(reliability.kind, ReliabilityKind::estimate);
  const std::vector<double>& log_p = reliability.log_error_probability;
  const auto log_error = [](double mean) { return std::log(std::erfc(std::sqrt(mean) / 2) / 2); };
  double mean = 4.7;  // near the mean that fits a BSC(0.11); refined on the last index
  for (int step = 0; step < 60; ++step) {
    mean += (log_error(16 * mean) - log_p.back()) / 4.2;
  }
  ASSERT_NEAR(log_error(16 * mean), log_p.back(), 1e-9);
  for (unsigned level = 0; level < log2; ++level) {
    const double phi = std::exp(log_phi(mean));
    mean = mean_from_log_phi(std::log1p(-(1 - phi) * (1 - phi)));
  }
  EXPECT_NEAR(log_error(mean), log_p.front(), 1e-7);
}

TEST(GaussianApproximation, IsExactWhereEveryLevelIs) {
  // Three exact levels of N = 8: the leaves' error probabilities, by the channels' own recursion.
  const Reliability reliability = gaussian_approximation(BlockLength(8), 0.11, 12);
  for (unsigned i = 0; i < 8; ++i) {
    SymmetricChannel channel = bsc_channel(0.11);
    for (int level = 2; level >= 0; --level) {
      SymmetricChannel next;
      if ((i >> level) & 1U) {
        plus_step(channel, next);
      } else {
        minus_step(channel, next);
      }
      channel = next;
    }
    EXPECT_NEAR(std::exp(reliability.log_error_probability[i]), error_probability(channel), 1e-12);
  }
}

TEST(GaussianApproximation, NeverUnderflows) {
  for (const double p : {1e-6, 0.02, 0.499}) {
    for (const unsigned exact_levels : {0U, 6U, 9U}) {
      const unsigned log2 = exact_levels == 6 && p == 0.02 ? 24 : 14;
      const Reliability reliability =
          gaussian_approximation(BlockLength::from_log2(log2), p, exact_levels);
      for (const double value : reliability.log_error_probability) {
        ASSERT_TRUE(std::isfinite(value) && value < 0) << p << " " << exact_levels;
      }
    }
  }
}

}  // namespace
}  // namespace frostline
