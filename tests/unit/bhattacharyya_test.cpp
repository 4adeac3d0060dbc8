#include "construct/bhattacharyya.h"

#include <gtest/gtest.h>

#include <cmath>

#include "polar/error.h"

namespace frostline {
namespace {

TEST(Bhattacharyya, EqualsThePlainRecursionOfAShortBlock) {
  const double z = 0.3;
  const std::vector<double> log_z = log_bhattacharyya(BlockLength(16), z);
  for (unsigned i = 0; i < 16; ++i) {
    double value = z;
    for (int level = 3; level >= 0; --level) {
      value = (i >> level) & 1U ? value * value : 2 * value - value * value;
    }
    EXPECT_NEAR(log_z[i], std::log(value), 1e-12 * std::abs(std::log(value)) + 1e-15) << i;
  }
}

TEST(Bhattacharyya, RefusesValuesOutsideItsRange) {
  EXPECT_THROW(log_bhattacharyya(BlockLength(16), 0), InputError);
  EXPECT_THROW(log_bhattacharyya(BlockLength(16), 1), InputError);
  EXPECT_THROW(bhattacharyya_bound(BlockLength(16), 0.5), InputError);
}

TEST(Bhattacharyya, KeepsItsDigitsAtBothEndsOfALongBlock) {
  const BlockLength block_length = BlockLength::from_log2(24);
  const Reliability reliability = bhattacharyya_bound(block_length, 0.02);
  EXPECT_EQ(reliability.kind, ReliabilityKind::upper_bound);
  const std::vector<double>& log_p = reliability.log_error_probability;
  ASSERT_EQ(log_p.size(), block_length.bits());
  // The last index is Z^N, the first 1 - (1-Z)^N.
  const double log_z = std::log(2 * std::sqrt(0.02 * 0.98));
  EXPECT_NEAR(log_p.back() / (log_z * 16777216), 1, 1e-14);
  EXPECT_EQ(log_p.front(), 0);
  for (const double value : log_p) ASSERT_TRUE(std::isfinite(value) && value <= 0);
}

}  // namespace
}  // namespace frostline
