#include "construct/selection.h"

#include <gtest/gtest.h>

#include <algorithm>
#include <cmath>
#include <limits>
#include <numeric>
#include <stdexcept>

#include "construct/bhattacharyya.h"
#include "polar/error.h"
#include "polar/limits.h"

namespace frostline {
namespace {

Reliability reliability_of(std::vector<double> log_p) {
  Reliability reliability;
  reliability.log_error_probability = std::move(log_p);
  return reliability;
}

TEST(PredictionKind, NamesEveryKind) {
  EXPECT_EQ(prediction_kind(ReliabilityKind::upper_bound), "upper-bound");
  EXPECT_EQ(prediction_kind(ReliabilityKind::lower_bound), "lower-bound");
  EXPECT_EQ(prediction_kind(ReliabilityKind::exact), "exact-union");
  EXPECT_EQ(prediction_kind(ReliabilityKind::estimate), "estimate");
  EXPECT_EQ(prediction_kind(ReliabilityKind::order_only), "order-only");
}

TEST(FreezingOrder, GoesFromMostToLeastLikelyToFail) {
  const double none = -std::numeric_limits<double>::infinity();
  const auto order = freezing_order(reliability_of({-3, -1, none, -2, 0, none, -1e7, -1e8}));
  EXPECT_EQ(order, (std::vector<std::uint32_t>{4, 1, 3, 0, 6, 7, 2, 5}));
}

TEST(FreezingOrder, FreezesTheLowerIndexFirstOnNearTies) {
  // The second is larger than the first by less than the rounding, the third by more.
  const auto order = freezing_order(reliability_of({-1, -1 + 2e-10, -1 + 2e-9, -1 - 2e-10}));
  EXPECT_EQ(order, (std::vector<std::uint32_t>{2, 0, 1, 3}));
}

TEST(FreezingOrder, RefusesWhatIsNoLogarithmOfAProbability) {
  EXPECT_THROW(freezing_order(reliability_of({-1, 0.1})), std::invalid_argument);
  EXPECT_THROW(freezing_order(reliability_of({-1, std::nan("")})), std::invalid_argument);
}

TEST(UnionSums, FallMonotonicallyToZero) {
  const Reliability reliability = bhattacharyya_bound(BlockLength(4096), 0.05);
  const auto order = freezing_order(reliability);
  const auto sums = union_sums(reliability, order);
  ASSERT_EQ(sums.size(), 4097U);
  EXPECT_EQ(sums.back(), 0);
  for (std::size_t m = 0; m < 4096; ++m) {
    ASSERT_GE(sums[m], sums[m + 1]);
    ASSERT_NEAR(sums[m] - sums[m + 1], std::exp(reliability.log_error_probability[order[m]]),
                1e-12);
  }
  EXPECT_THROW(union_sums(reliability, {0, 1}), std::invalid_argument);
}

TEST(FreezeFirst, FreezesThatManyFromTheFrontOfTheOrder) {
  const std::vector<std::uint32_t> order{4, 1, 3, 0, 6, 7, 2, 5};
  EXPECT_EQ(freeze_first(order, 3).mask(), bits_from_text("01011000", "mask"));
  EXPECT_EQ(freeze_first(order, 0).frozen_count(), 0U);
  EXPECT_EQ(freeze_first(order, 8).frozen_count(), 8U);
  EXPECT_THROW(freeze_first(order, 9), std::invalid_argument);
}

TEST(SmallestFrozenCount, IsTheFirstWhoseUnionMeetsTheTarget) {
  const std::vector<double> sums{1.5, 0.6, 0.25, 0.25, 0.125, 0};
  EXPECT_EQ(smallest_frozen_count(sums, 0.7), 1U);
  EXPECT_EQ(smallest_frozen_count(sums, 0.25), 2U);
  EXPECT_EQ(smallest_frozen_count(sums, 0.2), 4U);
  EXPECT_EQ(smallest_frozen_count(sums, 1e-300), 5U);
  EXPECT_THROW(smallest_frozen_count(sums, 0), InputError);
  EXPECT_THROW(smallest_frozen_count(sums, 1), InputError);
}

TEST(BestKey, EqualsBruteForce) {
  const Reliability reliability = bhattacharyya_bound(BlockLength(1024), 0.02);
  const auto sums = union_sums(reliability, freezing_order(reliability));
  for (const double phase_error : {0.0, 0.02, 0.11}) {
    for (const unsigned check_bits : {0U, 11U}) {
      const BestKey best = best_key(sums, phase_error, check_bits);
      const auto rate = [&](std::size_t m) {
        const double success = 1 - std::min(1.0, sums[m]);
        return success * (1 - binary_entropy(phase_error) - double(m + check_bits) / 1024);
      };
      EXPECT_DOUBLE_EQ(best.net_key_rate, rate(best.frozen_count));
      for (std::size_t m = 0; m <= 1024; ++m) {
        EXPECT_LE(rate(m), best.net_key_rate);
        if (m < best.frozen_count) {
          EXPECT_LT(rate(m), best.net_key_rate);
        }
      }
    }
  }
}

TEST(BestKey, IsNotPositiveWhereNoKeyIsLeft) {
  const Reliability reliability = bhattacharyya_bound(BlockLength(1024), 0.2);
  const auto sums = union_sums(reliability, freezing_order(reliability));
  EXPECT_LE(best_key(sums, 0.5, 11).net_key_rate, 0);
  EXPECT_THROW(best_key(sums, 0.6, 11), InputError);
  EXPECT_THROW(best_key(sums, -0.1, 11), InputError);
}

}  // namespace
}  // namespace frostline
