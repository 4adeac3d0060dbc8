// The finite-length limit against figures and counts made elsewhere.
#include "polar/limits.h"

#include <gtest/gtest.h>

#include <boost/multiprecision/cpp_bin_float.hpp>
#include <boost/multiprecision/cpp_int.hpp>
#include <cmath>

namespace frostline {
namespace {

using boost::multiprecision::cpp_int;
using boost::multiprecision::cpp_rational;

constexpr double kErrorRates[] = {0.01, 0.02, 0.03, 0.05, 0.08, 0.11};
constexpr double kFers[] = {0.1, 0.01, 0.001};

struct LimitRow {
  unsigned log2_length;
  double ratio[6][3];  // for each error rate, for each FER
};

// Fixed-length compression of N Bernoulli(p) bits, counted exactly by an independent program with
// big integers; bits over N h2(p), rounded to five and then to four decimals.
constexpr LimitRow kRatios[] = {
    {10,
     {{1.2571, 1.5472, 1.7526},
      {1.1806, 1.3740, 1.5121},
      {1.1555, 1.2961, 1.4016},
      {1.1116, 1.2139, 1.2923},
      {1.0805, 1.1582, 1.2117},
      {1.0646, 1.1232, 1.1662}}},
    {12,
     {{1.1453, 1.2782, 1.3870},
      {1.0978, 1.1910, 1.2618},
      {1.0814, 1.1529, 1.2057},
      {1.0596, 1.1116, 1.1500},
      {1.0435, 1.0817, 1.1091},
      {1.0344, 1.0646, 1.0861}}},
    {16,
     {{1.0395, 1.0729, 1.0973},
      {1.0270, 1.0498, 1.0664},
      {1.0214, 1.0393, 1.0525},
      {1.0157, 1.0289, 1.0385},
      {1.0116, 1.0212, 1.0283},
      {1.0092, 1.0169, 1.0225}}},
    {20,
     {{1.0101, 1.0184, 1.0246},
      {1.0069, 1.0126, 1.0167},
      {1.0055, 1.0099, 1.0132},
      {1.0040, 1.0073, 1.0097},
      {1.0030, 1.0054, 1.0071},
      {1.0023, 1.0043, 1.0057}}},
    {24,
     {{1.0026, 1.0046, 1.0062},
      {1.0017, 1.0031, 1.0042},
      {1.0014, 1.0025, 1.0033},
      {1.0010, 1.0018, 1.0024},
      {1.0007, 1.0013, 1.0018},
      {1.0006, 1.0011, 1.0014}}},
};

TEST(FiniteLengthLimit, EqualsIndependentCountingOverTheGrid) {
  for (const LimitRow& row : kRatios) {
    const std::uint64_t length = std::uint64_t{1} << row.log2_length;
    for (int i = 0; i < 6; ++i) {
      for (int j = 0; j < 3; ++j) {
        const FiniteLengthLimit limit = finite_length_limit(length, kErrorRates[i], kFers[j]);
        EXPECT_NEAR(limit.efficiency, row.ratio[i][j], 0.551e-4)
            << "N = 2^" << row.log2_length << ", p = " << kErrorRates[i] << ", FER " << kFers[j];
      }
    }
  }
}

TEST(FiniteLengthLimit, EqualsIndependentCountingInBits) {
  // Computed independently, as above.
  EXPECT_EQ(finite_length_limit(4096, 0.02, 0.001).bits, 731U);
  EXPECT_EQ(finite_length_limit(65536, 0.02, 0.1).bits, 9520U);
  EXPECT_EQ(finite_length_limit(65536, 0.02, 0.01).bits, 9731U);
  EXPECT_EQ(finite_length_limit(65536, 0.02, 0.001).bits, 9885U);
}

// V. Strassen, 1962; M. Tomamichel, J. Martinez-Mateo, C. Pacher, D. Elkouss, Quantum Inf. Process.
// 16, 280, 2017: the second-order formula comes within a few bits of the exact count.
TEST(FiniteLengthLimit, LiesWithinFiveBitsOfTheSecondOrderFormula) {
  for (const LimitRow& row : kRatios) {
    const std::uint64_t length = std::uint64_t{1} << row.log2_length;
    for (const double p : kErrorRates) {
      for (const double fer : kFers) {
        const FiniteLengthLimit limit = finite_length_limit(length, p, fer);
        EXPECT_NEAR(static_cast<double>(limit.bits), limit.second_order_bits, 5.0)
            << "N = 2^" << row.log2_length << ", p = " << p << ", FER " << fer;
      }
    }
  }
}

// The normal quantile is a table value of any statistics book: Qinv(0.1) = 1.2815515655,
// Qinv(0.001) = 3.0902323062.
TEST(FiniteLengthLimit, SecondOrderFormulaUsesTheNormalQuantile) {
  const double p = 0.02;
  const double n = 65536;
  const double variance = p * (1 - p) * std::pow(std::log2((1 - p) / p), 2);
  const double quantiles[][2] = {{0.1, 1.2815515655446004}, {0.001, 3.0902323061678132}};
  for (const auto& [fer, quantile] : quantiles) {
    EXPECT_NEAR(finite_length_limit(65536, p, fer).second_order_bits,
                n * binary_entropy(p) + std::sqrt(n * variance) * quantile - 8, 1e-6);
  }
}

// Common practice: a reconciliation stage is budgeted at 1.1 N h2(p). At p from 2 to 11 % and
// FER 0.1 that is possible from 2^12 bits on, and at FER 0.001 from 2^16 on; 2^10 bits are too few.
TEST(FiniteLengthLimit, AllowsTheUsualBudgetForLongBlocksOnly) {
  for (const double p : {0.02, 0.03, 0.05, 0.08, 0.11}) {
    EXPECT_LT(finite_length_limit(4096, p, 0.1).efficiency, 1.1);
    EXPECT_LT(finite_length_limit(65536, p, 0.001).efficiency, 1.1);
    EXPECT_GT(finite_length_limit(1024, p, 0.01).efficiency, 1.1);
  }
}

// Fewest patterns whose probability is at least 1 - fer, taken one by one from the most probable
// on, in exact rational arithmetic (Boost.Multiprecision).
std::uint64_t bits_by_enumeration(unsigned length, double p, double fer) {
  const cpp_rational exact_p(p);
  const cpp_rational exact_q = 1 - exact_p;
  cpp_rational missing = 1 - cpp_rational(fer);
  cpp_int kept = 0;
  cpp_int choose = 1;
  cpp_rational pattern = 1;
  for (unsigned w = 0; w < length; ++w) pattern *= exact_q;
  for (unsigned w = 0; missing > 0; ++w) {
    const cpp_rational shell = pattern * choose;
    if (shell < missing) {
      kept += choose;
      missing -= shell;
    } else {
      const cpp_rational share = missing / pattern;
      kept += (numerator(share) + denominator(share) - 1) / denominator(share);
      missing = 0;
    }
    choose = choose * (length - w) / (w + 1);
    pattern = pattern / exact_q * exact_p;
  }
  std::uint64_t bits = 0;
  while ((cpp_int(1) << bits) < kept) ++bits;
  return bits;
}

TEST(FiniteLengthLimit, EqualsExactEnumerationOfShortBlocks) {
  for (unsigned length = 1; length <= 64; length += length < 12 ? 1 : 13) {
    for (const double p : {0.001, 0.02, 0.11, 0.25, 0.49}) {
      for (const double fer : {1e-12, 1e-3, 0.1, 0.25, 0.5, 0.9, 0.999}) {
        EXPECT_EQ(finite_length_limit(length, p, fer).bits, bits_by_enumeration(length, p, fer))
            << "N = " << length << ", p = " << p << ", FER " << fer;
      }
    }
  }
}

// The converse for channels, the twin of the one for sources: a BSC(0.11) code of rate 0.9 C and
// error 1e-3 has at least 2985 symbols (Y. Polyanskiy, H. V. Poor, S. Verdu, IEEE Trans. IT 56(5),
// 2010; value from memory, computed independently as 2986). A linear code of n - M dimensions is
// also a one-way scheme of M bits, so at a length well below that the limit asks for more than
// n - 0.9 C n bits, and well above for less.
TEST(FiniteLengthLimit, AgreesWithTheChannelCodingConverse) {
  const double p = 0.11;
  const double capacity = 1 - binary_entropy(p);
  const auto slack = [&](std::uint64_t n) {
    const double allowed = static_cast<double>(n) * (1 - 0.9 * capacity);
    return allowed - static_cast<double>(finite_length_limit(n, p, 1e-3).bits);
  };
  EXPECT_LT(slack(2800), 0);
  EXPECT_GT(slack(3200), 0);
}

// Boost.Multiprecision at 50 digits.
TEST(BinaryEntropy, EqualsHighPrecision) {
  using Wide = boost::multiprecision::cpp_bin_float_50;
  for (const double p : {1e-12, 1e-3, 0.02, 0.11, 0.25, 0.5, 0.9, 1 - 1e-9}) {
    const Wide x(p);
    const Wide y = 1 - x;
    const Wide exact = -(x * log(x) + y * log(y)) / log(Wide(2));
    EXPECT_NEAR(binary_entropy(p) / static_cast<double>(exact), 1, 1e-14) << p;
  }
}

}  // namespace
}  // namespace frostline
