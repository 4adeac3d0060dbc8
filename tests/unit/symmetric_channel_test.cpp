#include "construct/symmetric_channel.h"

#include <gtest/gtest.h>

#include <cmath>

#include "polar/limits.h"

namespace frostline {
namespace {

double total(const SymmetricChannel& w) {
  double sum = 0;
  for (const Letter& letter : w) sum += letter.given0 + letter.given1;
  return sum;
}

SymmetricChannel some_channel() {
  SymmetricChannel w = bsc_channel(0.11);
  SymmetricChannel next;
  plus_step(w, next);
  minus_step(next, w);
  plus_step(w, next);
  return next;
}

TEST(SymmetricChannel, StepsKeepProbabilityAndMutualInformation) {
  // Arikan 2009, prop. 4: I(W-) + I(W+) = 2 I(W).
  const SymmetricChannel w = some_channel();
  SymmetricChannel minus;
  SymmetricChannel plus;
  minus_step(w, minus);
  plus_step(w, plus);
  EXPECT_NEAR(total(minus), 1, 1e-14);
  EXPECT_NEAR(total(plus), 1, 1e-14);
  EXPECT_NEAR(mutual_information_nats(minus) + mutual_information_nats(plus),
              2 * mutual_information_nats(w), 1e-14);
  // Prop. 5: Z(W+) = Z(W)^2.
  EXPECT_NEAR(bhattacharyya_parameter(plus), std::pow(bhattacharyya_parameter(w), 2), 1e-14);
  EXPECT_NEAR(minus_error_probability(w), error_probability(minus), 1e-15);
  EXPECT_NEAR(plus_error_probability(w), error_probability(plus), 1e-15);
}

TEST(SymmetricChannel, MeasuresOfABscAreTheTextbookOnes) {
  for (const double p : {1e-9, 0.02, 0.11, 0.4999}) {
    const SymmetricChannel w = bsc_channel(p);
    const double entropy = binary_entropy(p) * std::log(2.0);
    EXPECT_NEAR(conditional_entropy_nats(w) / entropy, 1, 1e-13);
    EXPECT_NEAR(mutual_information_nats(w), std::log(2.0) - entropy, 1e-14);
    EXPECT_NEAR(bhattacharyya_parameter(w), 2 * std::sqrt(p * (1 - p)), 1e-15);
    EXPECT_NEAR(bhattacharyya_complement(w), 1 - 2 * std::sqrt(p * (1 - p)), 1e-15);
  }
}

TEST(SymmetricChannel, MeasuresKeepTheirDigitsWhereTheyAreTiny) {
  const double delta = 1e-7;  // p = (1 - delta) / 2: I = delta^2 / 2, 1 - Z = delta^2 / 2
  const SymmetricChannel w = bsc_channel((1 - delta) / 2);
  EXPECT_NEAR(mutual_information_nats(w) / (delta * delta / 2), 1, 1e-8);
  EXPECT_NEAR(bhattacharyya_complement(w) / (delta * delta / 2), 1, 1e-8);
}

TEST(SymmetricChannel, MergingBracketsEveryMeasure) {
  const SymmetricChannel w = some_channel();
  for (std::size_t letters = 2; letters < w.size(); ++letters) {
    SymmetricChannel worse = w;
    SymmetricChannel better = w;
    degrade(worse, letters);
    upgrade(better, letters);
    ASSERT_EQ(worse.size(), letters);
    ASSERT_EQ(better.size(), letters);
    EXPECT_NEAR(total(worse), 1, 1e-14);
    EXPECT_NEAR(total(better), 1, 1e-14);
    EXPECT_GE(error_probability(worse), error_probability(w) - 1e-15);
    EXPECT_LE(error_probability(better), error_probability(w) + 1e-15);
    EXPECT_GT(bhattacharyya_parameter(worse), bhattacharyya_parameter(w));
    EXPECT_LT(bhattacharyya_parameter(better), bhattacharyya_parameter(w));
    EXPECT_LT(mutual_information_nats(worse), mutual_information_nats(w));
    EXPECT_GT(mutual_information_nats(better), mutual_information_nats(w));
    for (std::size_t i = 1; i < letters; ++i) EXPECT_LE(worse[i].ratio, worse[i - 1].ratio);
  }
}

}  // namespace
}  // namespace frostline
