// The Gaussian approximation against high-precision quadrature and published operating points.
#include "construct/gaussian.h"

#include <gtest/gtest.h>

#include <boost/math/quadrature/tanh_sinh.hpp>
#include <boost/multiprecision/cpp_bin_float.hpp>
#include <cmath>

#include "construct/selection.h"
#include "polar/limits.h"

namespace frostline {
namespace {

using Wide = boost::multiprecision::cpp_bin_float_50;

// ln E[2 / (1 + exp(u))], u ~ N(mean, 2 mean), by tanh-sinh quadrature with 50 digits
// (Boost.Math): the definition itself, where log_phi uses an even form and the trapezoidal rule.
double log_phi_by_quadrature(double mean) {
  const Wide x(mean);
  const Wide reach = mean < 20 ? Wide(x + 12 * sqrt(2 * x)) : Wide(70);
  boost::math::quadrature::tanh_sinh<Wide> rule(10);
  const auto density = [&](const Wide& u) -> Wide {
    return exp(-(u - x) * (u - x) / (4 * x)) * 2 / (1 + exp(u));
  };
  const Wide low = mean < 20 ? Wide(x - 12 * sqrt(2 * x)) : Wide(-70);
  const Wide pi = boost::math::constants::pi<Wide>();
  const Wide integral = rule.integrate(density, low, reach, Wide(1e-17)) / sqrt(4 * pi * x);
  return static_cast<double>(log(integral));
}

// Values of phi by quadrature, computed independently (figures to seven digits).
TEST(LogPhi, EqualsTabulatedValues) {
  const double table[][2] = {{0.01, 9.950248e-01}, {0.1, 9.523148e-01}, {0.6, 7.631797e-01},
                             {1, 6.498866e-01},    {2, 4.495995e-01},   {5, 1.687930e-01},
                             {8, 6.859741e-02},    {12, 2.180957e-02},  {20, 2.411315e-03},
                             {40, 1.203662e-05}};
  for (const auto& [mean, phi] : table) {
    EXPECT_NEAR(std::exp(log_phi(mean)) / phi, 1, 5e-7) << mean;
  }
  EXPECT_EQ(log_phi(0), 0);
}

TEST(LogPhi, EqualsHighPrecisionQuadrature) {
  for (const double mean : {1e-8, 1e-3, 0.5, 0.999, 1.001, 7.0, 100.0, 1e6}) {
    EXPECT_NEAR(log_phi(mean) / log_phi_by_quadrature(mean), 1, 1e-10) << mean;
  }
}

// S.-Y. Chung, T. Richardson, R. Urbanke, IEEE Trans. IT 47(2), 2001: phi lies between
// sqrt(pi/x) exp(-x/4) (1 - 3/x) and sqrt(pi/x) exp(-x/4) (1 + 1/(7x)) for large x (formula from
// memory).
TEST(LogPhi, LiesBetweenThePublishedBounds) {
  for (const double mean : {12.0, 40.0, 300.0, 1e4, 1e6}) {
    const double common = 0.5 * std::log(std::acos(-1.0) / mean) - mean / 4;
    EXPECT_GT(log_phi(mean), common + std::log1p(-3 / mean)) << mean;
    EXPECT_LT(log_phi(mean), common + std::log1p(1 / (7 * mean))) << mean;
  }
}

double syndrome_efficiency(unsigned log2_length, double p, double fer) {
  const BlockLength block_length = BlockLength::from_log2(log2_length);
  const Reliability reliability = gaussian_approximation(block_length, p);
  const auto sums = union_sums(reliability, freezing_order(reliability));
  return static_cast<double>(smallest_frozen_count(sums, fer)) /
         (static_cast<double>(block_length.bits()) * binary_entropy(p));
}

// P. Jouguet and S. Kunz-Jacques, QIC 14(3&4), 2014, SC at QBER 2 %, FER bound 0.1: efficiency
// beta 0.935 at 2^16 and 0.963 at 2^20 (from memory), that is f = 1.394 and 1.224.
TEST(GaussianApproximation, ComesWithinOnePercentOfPublishedLeakage) {
  EXPECT_NEAR(syndrome_efficiency(16, 0.02, 0.1) / 1.394, 1, 0.01);
  EXPECT_NEAR(syndrome_efficiency(20, 0.02, 0.1) / 1.224, 1, 0.01);
}

// From near-exact leaf probabilities, computed independently.
TEST(GaussianApproximation, ComesWithinOnePercentOfNearExactLeakage) {
  EXPECT_NEAR(syndrome_efficiency(16, 0.05, 0.1) / 1.258, 1, 0.01);
  EXPECT_NEAR(syndrome_efficiency(16, 0.11, 0.1) / 1.155, 1, 0.01);
  EXPECT_NEAR(syndrome_efficiency(12, 0.05, 0.01) / 1.542, 1, 0.01);
  EXPECT_NEAR(syndrome_efficiency(10, 0.11, 0.001) / 1.457, 1, 0.01);
}

}  // namespace
}  // namespace frostline
