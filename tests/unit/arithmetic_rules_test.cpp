#include "decode/reference/arithmetic_rules.h"

#include <gtest/gtest.h>

#include <cmath>
#include <random>
#include <vector>

namespace frostline {
namespace {

std::vector<SignMagnitude> all_messages(unsigned planes) {
  std::vector<SignMagnitude> messages;
  for (unsigned m = 0; m < (1U << planes); ++m) {
    messages.push_back({false, static_cast<std::uint8_t>(m)});
    messages.push_back({true, static_cast<std::uint8_t>(m)});
  }
  return messages;
}

int value_of(SignMagnitude message) {
  return message.negative ? -message.magnitude : message.magnitude;
}

// The rules again, in ordinary signed arithmetic; where the value is 0 the sign is said apart.
SignMagnitude signed_zero_aware(int value, int largest, bool sign_of_zero) {
  const int clipped = std::max(-largest, std::min(largest, value));
  return {clipped < 0 || (clipped == 0 && sign_of_zero),
          static_cast<std::uint8_t>(std::abs(clipped))};
}

TEST(PlanesRules, EqualSignedArithmeticWithASignedZeroOnEveryPair) {
  for (unsigned planes = 2; planes <= 7; ++planes) {
    const PlanesRules rules(planes);
    const int largest = (1 << planes) - 1;
    for (const SignMagnitude a : all_messages(planes)) {
      for (const SignMagnitude b : all_messages(planes)) {
        const int least = std::min<int>(a.magnitude, b.magnitude);
        const bool sign = a.negative != b.negative;
        ASSERT_EQ(rules.f(a, b), signed_zero_aware(sign ? -least : least, largest, sign));
        ASSERT_EQ(rules.g(a, b, false),
                  signed_zero_aware(value_of(b) + value_of(a), largest, b.negative));
        ASSERT_EQ(rules.g(a, b, true),
                  signed_zero_aware(value_of(b) - value_of(a), largest, b.negative));
      }
    }
  }
}

TEST(PlanesRules, GiveTheHandWorkedValuesOfThreePlanes) {
  const PlanesRules rules(3);
  const auto plus = [](unsigned m) { return SignMagnitude{false, static_cast<std::uint8_t>(m)}; };
  const auto minus = [](unsigned m) { return SignMagnitude{true, static_cast<std::uint8_t>(m)}; };
  EXPECT_EQ(rules.f(plus(3), minus(5)), minus(3));
  EXPECT_EQ(rules.f(minus(0), plus(5)), minus(0));  // a zero passes its sign on
  EXPECT_EQ(rules.f(minus(0), minus(5)), plus(0));
  EXPECT_EQ(rules.g(plus(3), plus(5), false), plus(7));  // 8 saturates
  EXPECT_EQ(rules.g(minus(7), minus(7), false), minus(7));
  EXPECT_EQ(rules.g(plus(3), plus(5), true), plus(2));
  EXPECT_EQ(rules.g(plus(5), plus(3), true), minus(2));
  EXPECT_EQ(rules.g(minus(5), plus(3), false), minus(2));
  EXPECT_EQ(rules.g(plus(4), minus(4), false), minus(0));  // the sign of b
  EXPECT_EQ(rules.g(minus(4), plus(4), false), plus(0));
  EXPECT_EQ(rules.g(plus(4), plus(4), true), plus(0));
  EXPECT_EQ(rules.g(minus(0), plus(6), false), plus(6));
  EXPECT_EQ(rules.g(plus(6), minus(0), false), plus(6));  // t = 1, a larger: the other sign
  EXPECT_EQ(rules.g(minus(0), plus(0), false), plus(0));
  EXPECT_TRUE(rules.decide(minus(0)));
  EXPECT_FALSE(rules.decide(plus(0)));
}

TEST(PlanesRules, ConstantChainIsHalfAUnit) {
  for (unsigned planes = 2; planes <= 7; ++planes) {
    const PlanesRules rules(planes);
    EXPECT_EQ(rules.chain_g(rules.channel(), false), (SignMagnitude{false, 1}));
    EXPECT_EQ(rules.chain_g(rules.chain_f(rules.channel()), true), (SignMagnitude{false, 0}));
    EXPECT_FALSE(rules.chain_decide(rules.channel()));
  }
}

// With h the decision of a message and |m| the message without its sign: f and g of the bare
// magnitudes, given the bit relative to the decisions, are f and g of the messages relative to
// them.
TEST(PlanesRules, ReBasingByHardDecisionsCommutesWithFAndG) {
  const auto bare = [](SignMagnitude m) { return SignMagnitude{false, m.magnitude}; };
  const auto flipped = [](SignMagnitude m, bool flip) {
    return SignMagnitude{m.negative != flip, m.magnitude};
  };
  for (unsigned planes = 2; planes <= 7; ++planes) {
    const PlanesRules rules(planes);
    for (const SignMagnitude a : all_messages(planes)) {
      for (const SignMagnitude b : all_messages(planes)) {
        const bool ha = rules.decide(a);
        const bool hb = rules.decide(b);
        ASSERT_EQ(rules.f(bare(a), bare(b)), flipped(rules.f(a, b), ha != hb));
        for (const bool bit : {false, true}) {
          ASSERT_EQ(rules.g(bare(a), bare(b), bit != (ha != hb)), flipped(rules.g(a, b, bit), hb));
        }
      }
    }
  }
}

TEST(ExactRules, FEqualsTheFormulaInLongDouble) {
  const ExactRules rules(0.1);
  std::mt19937_64 generator(1);
  std::uniform_real_distribution<double> exponent(-12, 1.3);
  std::bernoulli_distribution coin(0.5);
  const auto draw = [&] {
    const double size = std::pow(10.0, exponent(generator));
    return coin(generator) ? size : -size;
  };
  for (int trial = 0; trial < 100000; ++trial) {
    const double a = draw();
    const double b = coin(generator) ? draw() : a;
    // tanh(x/2) = 1 - 2/(e^x + 1); atanh through log1p keeps small products.
    const long double ta = std::tanh(static_cast<long double>(a) / 2);
    const long double tb = std::tanh(static_cast<long double>(b) / 2);
    const auto wanted = static_cast<double>(2 * std::atanh(ta * tb));
    // Near |t| = 1 the yardstick itself loses e^20 of the 2^64 of a long double.
    const bool small = std::min(std::abs(a), std::abs(b)) < 1;
    ASSERT_NEAR(rules.f(a, b), wanted, (small ? 4e-15 : 1e-10) * std::abs(wanted)) << a << " " << b;
    ASSERT_EQ(rules.f(a, b), rules.f(b, a));
  }
  EXPECT_EQ(rules.f(0.0, 5.0), 0.0);
  EXPECT_EQ(rules.f(-2.0, 0.0), 0.0);
  EXPECT_EQ(rules.f(700.0, -800.0), -700.0);
  EXPECT_FALSE(rules.decide(0.0));
  EXPECT_FALSE(rules.decide(-0.0));
}

TEST(ExactRules, FIsContinuousWhereItsTwoFormsMeet) {
  const ExactRules rules(0.1);
  for (const double b : {1.0, 1.5, 3.0, 20.0, -1.0, -40.0}) {
    const double below = rules.f(std::nextafter(1.0, 0.0), b);
    EXPECT_NEAR(below, rules.f(1.0, b), 4e-15);
  }
}

TEST(IntegerRules, SaturateSymmetricallyAndDecideZeroAsZero) {
  const IntegerRules rules(4, 3);
  EXPECT_EQ(rules.g(6, 5, false), 7);
  EXPECT_EQ(rules.g(6, -5, true), -7);
  EXPECT_EQ(rules.g(-7, -7, false), -7);
  EXPECT_EQ(rules.f(-3, 5), -3);
  EXPECT_EQ(rules.f(-3, -5), 3);
  EXPECT_EQ(rules.f(0, -5), 0);
  EXPECT_FALSE(rules.decide(0));
  EXPECT_EQ(rules.chain_g(rules.channel(), false), 6);
  EXPECT_EQ(rules.chain_g(rules.channel(), true), 0);
}

TEST(Rules, RejectParametersOutsideTheirRange) {
  for (const double qber : {0.0, 0.5, -0.1, 1.0, std::nan("")}) {
    EXPECT_THROW(ExactRules{qber}, std::invalid_argument);
  }
  for (const unsigned planes : {0U, 1U, 8U, 40U}) {
    EXPECT_THROW(PlanesRules{planes}, std::invalid_argument);
  }
  EXPECT_THROW(IntegerRules(2, 1), std::invalid_argument);
  EXPECT_THROW(IntegerRules(16, 1), std::invalid_argument);
  EXPECT_THROW(IntegerRules(6, 0), std::invalid_argument);
  EXPECT_THROW(IntegerRules(6, 32), std::invalid_argument);
}

}  // namespace
}  // namespace frostline
