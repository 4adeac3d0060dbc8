#include "decode/trial/calibration.h"

#include <gtest/gtest.h>
#include <tbb/global_control.h>

#include <boost/math/distributions/binomial.hpp>

#include "construct/designer.h"
#include "construct/metric_weights.h"
#include "construct/selection.h"
#include "decode/trial/frozen_curve.h"
#include "polar/error.h"

namespace frostline {
namespace {

const Arithmetic kPlanes3 = Arithmetic::planes_of(3);
const BlockLength kLength = BlockLength::from_log2(9);
constexpr double kQber = 0.05;

class CalibrationTest : public ::testing::Test {
 protected:
  CalibrationTest()
      : ranking_(rank_indices(kLength, kQber, default_construction(kPlanes3), 0, kPlanes3)) {}

  CalibrationTask task(unsigned list, double fer, std::uint64_t seed) const {
    CalibrationTask task;
    task.candidate = [this, list](std::size_t frozen_count) {
      Design design =
          make_design(ranking_, {Goal::Kind::frozen, 0, frozen_count},
                      {11, list > 1 ? Precoding::state8 : Precoding::none, false, list}, {})
              .design;
      DecoderPlan plan{{list}, nullptr};
      if (list > 1) {
        plan.weights = std::make_shared<const MetricWeights>(
            metric_weights(design.code.frozen, kQber, kPlanes3));
      }
      return Candidate{design.code, make_batch_decoder(design, plan)};
    };
    task.block_length = kLength.bits();
    task.guess = 200;
    task.target_fer = fer;
    task.effort = Effort::quick;
    task.seed = seed;
    return task;
  }

  Ranking ranking_;
  SymmetricChannel channel_{kQber};
};

// By the binomial distribution of Boost.Math: seeing that few has a probability of at most 5 %
// where the FER is the target, and one more would not.
TEST(AllowedFailures, AreTheMostThatShowTheTarget) {
  for (const auto& [blocks, target] : {std::pair{250U, 0.1}, {4000U, 0.1}, {25000U, 0.001}}) {
    const auto allowed = allowed_failures(blocks, target, 0.95);
    ASSERT_TRUE(allowed);
    const boost::math::binomial_distribution<double> law(blocks, target);
    EXPECT_LE(boost::math::cdf(law, static_cast<double>(*allowed)), 0.05 + 1e-9);
    EXPECT_GT(boost::math::cdf(law, static_cast<double>(*allowed + 1)), 0.05);
  }
  // 0.9^28 is above 5 %, 0.9^29 below.
  EXPECT_FALSE(allowed_failures(28, 0.1, 0.95));
  EXPECT_EQ(allowed_failures(29, 0.1, 0.95), 0U);
}

// The curve of the same blocks tells the smallest frozen count that passes, without bisection.
TEST_F(CalibrationTest, FindsTheSmallestFrozenCountThatTheCurveShows) {
  for (const std::uint64_t seed : {1U, 2U, 3U}) {
    const CalibrationTask asked = task(1, 0.1, seed);
    const Calibration found = calibrate(asked, channel_);
    TrialOptions options;
    options.blocks = 250;
    options.seed = seed;
    const FrozenCurve curve = run_frozen_curve(ranking_.order, kPlanes3, kQber, channel_, options);
    const std::uint64_t allowed = *allowed_failures(250, 0.1, 0.95);
    std::size_t smallest = 0;
    while (curve.failures[smallest] > allowed) ++smallest;
    // A confirmation that fails lets it grow.
    EXPECT_GE(found.frozen_count, smallest);
    EXPECT_LE(found.frozen_count, smallest + 15);
    EXPECT_EQ(found.confirmed.blocks, 1000U);
    EXPECT_LE(found.fer_interval.high, 0.1);
    EXPECT_GE(found.blocks, 1000U);
    // What the file records can be repeated.
    const Candidate candidate = asked.candidate(found.frozen_count);
    options.blocks = 1000;
    options.seed = found.confirmed_seed;
    const TrialSummary again = run_trial(candidate.code, *candidate.decoder, channel_, options);
    EXPECT_EQ(again.failures, found.confirmed.failures);
    // And the target is met on blocks that nobody has seen.
    options.blocks = 20000;
    options.seed = 100 + seed;
    const TrialSummary fresh = run_trial(candidate.code, *candidate.decoder, channel_, options);
    EXPECT_LE(fixed_blocks_interval(fresh.failures, fresh.blocks, 0.999).low, 0.1);
  }
}

TEST_F(CalibrationTest, SparesAListLeakage) {
  const Calibration single = calibrate(task(1, 0.1, 1), channel_);
  const Calibration list = calibrate(task(8, 0.1, 1), channel_);
  EXPECT_LT(list.frozen_count + 10, single.frozen_count);
}

TEST_F(CalibrationTest, StartsAnywhereAndCountsTheSameForAnyNumberOfThreads) {
  CalibrationTask asked = task(1, 0.1, 4);
  const Calibration first = calibrate(asked, channel_);
  for (const std::size_t guess : {0U, 512U}) {
    asked.guess = guess;
    const tbb::global_control limit(tbb::global_control::max_allowed_parallelism, 1 + guess / 100);
    const Calibration again = calibrate(asked, channel_);
    EXPECT_EQ(again.frozen_count, first.frozen_count);
    EXPECT_EQ(again.confirmed.failures, first.confirmed.failures);
  }
}

TEST_F(CalibrationTest, RefusesWhatCannotBeShownAndStopsWhenAsked) {
  EXPECT_THROW(calibrate(task(1, 0, 1), channel_), InputError);
  EXPECT_THROW(calibrate(task(1, 1, 1), channel_), InputError);
  EXPECT_THROW(calibrate(task(1, 1e-12, 1), channel_), InputError);
  EXPECT_THROW(parse_effort("some"), InputError);
  std::atomic<bool> stop{true};
  RunControl control;
  control.stop = &stop;
  EXPECT_THROW(calibrate(task(1, 0.1, 1), channel_, control), Interrupted);
}

}  // namespace
}  // namespace frostline
