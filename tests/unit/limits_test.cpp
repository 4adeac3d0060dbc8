#include "polar/limits.h"

#include <gtest/gtest.h>

#include <cmath>
#include <limits>
#include <stdexcept>
#include <string>

#include "polar/error.h"

namespace frostline {
namespace {

TEST(BinaryEntropy, IsSymmetricAndZeroAtTheEnds) {
  EXPECT_EQ(binary_entropy(0), 0);
  EXPECT_EQ(binary_entropy(1), 0);
  EXPECT_DOUBLE_EQ(binary_entropy(0.5), 1);
  EXPECT_DOUBLE_EQ(binary_entropy(0.25), binary_entropy(0.75));
  EXPECT_THROW(binary_entropy(-0.1), std::invalid_argument);
  EXPECT_THROW(binary_entropy(std::nan("")), std::invalid_argument);
}

TEST(Requirements, RefuseValuesOutsideInOneLineWithTheName) {
  EXPECT_NO_THROW(require_error_rate(0.02, "QBER"));
  EXPECT_NO_THROW(require_probability(0.5, "FER"));
  for (const double p : {0.0, 0.5, -1.0, 2.0, std::nan("")}) {
    EXPECT_THROW(require_error_rate(p, "QBER"), InputError) << p;
  }
  for (const double value : {0.0, 1.0, -1.0, std::nan("")}) {
    EXPECT_THROW(require_probability(value, "FER"), InputError) << value;
  }
  try {
    require_error_rate(0.7, "QBER");
    FAIL();
  } catch (const InputError& error) {
    EXPECT_EQ(std::string(error.what()).find("QBER 0.7"), 0U);
    EXPECT_EQ(std::string(error.what()).find('\n'), std::string::npos);
  }
}

TEST(FiniteLengthLimit, RefusesWhatLiesOutsideItsRange) {
  EXPECT_THROW(finite_length_limit(0, 0.02, 0.1), InputError);
  EXPECT_THROW(finite_length_limit((std::uint64_t{1} << 32) + 1, 0.02, 0.1), InputError);
  EXPECT_THROW(finite_length_limit(1024, 0.5, 0.1), InputError);
  EXPECT_THROW(finite_length_limit(1024, 0.02, 1), InputError);
}

TEST(FiniteLengthLimit, FallsWithTheFailureProbabilityAndRisesWithTheErrorRate) {
  std::uint64_t last = 1024;
  for (const double fer : {1e-300, 1e-100, 1e-12, 1e-6, 1e-3, 0.1, 0.4, 0.6, 0.9, 0.999999}) {
    const std::uint64_t bits = finite_length_limit(1024, 0.05, fer).bits;
    EXPECT_LE(bits, last) << fer;
    last = bits;
  }
  last = 0;
  for (const double p : {1e-9, 1e-4, 0.01, 0.1, 0.3, 0.49, 0.4999999}) {
    const std::uint64_t bits = finite_length_limit(1024, p, 0.01).bits;
    EXPECT_GE(bits, last) << p;
    last = bits;
  }
}

TEST(FiniteLengthLimit, NeverExceedsTheLengthAndReachesIt) {
  // At p near one half every pattern counts the same: 1 - fer of all 2^N of them.
  EXPECT_EQ(finite_length_limit(4096, 0.4999999999, 1e-6).bits, 4096U);
  EXPECT_EQ(finite_length_limit(std::uint64_t{1} << 32, 0.4999999999999, 0.25).bits,
            std::uint64_t{1} << 32);
  EXPECT_LE(finite_length_limit(1024, 0.3, std::numeric_limits<double>::min()).bits, 1024U);
}

TEST(FiniteLengthLimit, IsZeroWhereOnePatternIsEnough) {
  EXPECT_EQ(finite_length_limit(8, 0.001, 0.1).bits, 0U);
  EXPECT_EQ(finite_length_limit(1, 0.2, 0.25).bits, 0U);
  EXPECT_EQ(finite_length_limit(1, 0.25, 0.2).bits, 1U);
}

TEST(FiniteLengthLimit, IsTheBorderlineBetweenTwoMethodsOfSumming) {
  // Tails are summed from above below FER 1/2 and from below at and above it.
  const std::uint64_t below = finite_length_limit(65536, 0.02, std::nextafter(0.5, 0)).bits;
  const std::uint64_t above = finite_length_limit(65536, 0.02, 0.5).bits;
  EXPECT_EQ(below, above);
}

}  // namespace
}  // namespace frostline
