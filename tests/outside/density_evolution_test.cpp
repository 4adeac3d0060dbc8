// Density evolution of planes against published leakage of exact successive cancellation.
#include "construct/density_evolution.h"

#include <gtest/gtest.h>

#include "construct/selection.h"
#include "polar/limits.h"

namespace frostline {
namespace {

double syndrome_efficiency(unsigned log2_length, double p, unsigned planes) {
  const BlockLength block_length = BlockLength::from_log2(log2_length);
  const Reliability reliability = density_evolution(block_length, p, Arithmetic::planes_of(planes));
  const auto sums = union_sums(reliability, freezing_order(reliability));
  return static_cast<double>(smallest_frozen_count(sums, 0.1)) /
         (static_cast<double>(block_length.bits()) * binary_entropy(p));
}

// P. Jouguet and S. Kunz-Jacques, QIC 14(3&4), 2014, SC at QBER 2 %, FER bound 0.1: beta 0.935 at
// 2^16 and 0.963 at 2^20 (from memory), f = 1.394 and 1.224. The other two points: near-exact leaf
// probabilities, computed independently. No arithmetic can do better than exact; three planes cost
// at most 1.6 % of N h2.
TEST(DensityEvolution, CostsThreePlanesLittleMoreThanExactDecoding) {
  const struct {
    unsigned log2;
    double p;
    double exact;
  } points[] = {{16, 0.02, 1.394}, {16, 0.05, 1.258}, {16, 0.11, 1.155}, {20, 0.02, 1.224}};
  for (const auto& point : points) {
    const double efficiency = syndrome_efficiency(point.log2, point.p, 3);
    EXPECT_GT(efficiency, point.exact * 0.9995) << point.log2 << " " << point.p;
    EXPECT_LT(efficiency, point.exact * 1.016) << point.log2 << " " << point.p;
  }
}

// Common practice: with min-sum a few bits of magnitude are enough, and each further one buys less.
TEST(DensityEvolution, GainsLessFromEachFurtherPlane) {
  const double two = syndrome_efficiency(16, 0.02, 2);
  const double three = syndrome_efficiency(16, 0.02, 3);
  const double four = syndrome_efficiency(16, 0.02, 4);
  EXPECT_GT(two - three, 0.002);
  EXPECT_GT(two - three, three - four);
  EXPECT_GE(three, four);
}

}  // namespace
}  // namespace frostline
