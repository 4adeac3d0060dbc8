// Bhattacharyya parameters against E. Arikan, "Channel polarization", IEEE Trans. IT 55(7), 2009.
#include "construct/bhattacharyya.h"

#include <gtest/gtest.h>

#include <algorithm>
#include <cmath>

#include "construct/selection.h"

namespace frostline {
namespace {

// Arikan 2009: a BEC(1/2) at N = 8, times 256, natural index order.
TEST(Bhattacharyya, EqualsArikansValuesOnABec) {
  const double expected[] = {255, 225, 207, 81, 175, 49, 31, 1};
  const std::vector<double> log_z = log_bhattacharyya(BlockLength(8), 0.5);
  for (std::size_t i = 0; i < 8; ++i) EXPECT_NEAR(256 * std::exp(log_z[i]), expected[i], 1e-11);
}

// On a BEC the mean of Z is kept by each step (Arikan 2009, prop. 6), so the sum is N / 2.
TEST(Bhattacharyya, KeepsItsSumOnABec) {
  for (unsigned log2 = BlockLength::kMinLog2; log2 <= 20; ++log2) {
    const BlockLength block_length = BlockLength::from_log2(log2);
    double sum = 0;
    for (const double value : log_bhattacharyya(block_length, 0.5)) sum += std::exp(value);
    const double half = static_cast<double>(block_length.bits()) / 2;
    EXPECT_NEAR(sum / half, 1, 1e-12) << log2;
  }
}

// Sum of the 512 smallest at N = 1024: computed independently.
TEST(Bhattacharyya, EqualsTheIndependentSumOfTheBestHalf) {
  Reliability reliability;
  reliability.log_error_probability = log_bhattacharyya(BlockLength(1024), 0.5);
  const std::vector<double> sums = union_sums(reliability, freezing_order(reliability));
  EXPECT_NEAR(sums[512], 22.047908719, 1e-9);
}

}  // namespace
}  // namespace frostline
