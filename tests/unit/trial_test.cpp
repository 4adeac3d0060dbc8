#include "decode/trial/trial.h"

#include <gtest/gtest.h>
#include <tbb/global_control.h>

#include <algorithm>
#include <cmath>

#include "construct/designer.h"
#include "decode/lanes/lane_decoder.h"
#include "decode/reference/reference_batch_decoder.h"
#include "polar/error.h"
#include "polar/limits.h"

namespace frostline {
namespace {

const Arithmetic kPlanes3 = Arithmetic::planes_of(3);

struct Sample {
  Code code;
  double largest_leaf;  // exact error probability of the worst open index
  double union_sum;
};

Sample sample(unsigned log2, double p, double fer, unsigned check_bits) {
  const BlockLength block_length = BlockLength::from_log2(log2);
  const Ranking ranking =
      rank_indices(block_length, p, default_construction(kPlanes3), 0, kPlanes3);
  const Design design =
      make_design(ranking, {Goal::Kind::fer, fer, 0}, {check_bits, Precoding::none, false}, {})
          .design;
  double largest = 0;
  for (std::size_t i = 0; i < block_length.bits(); ++i) {
    if (design.code.frozen.is_frozen(i)) continue;
    largest = std::max(largest, std::exp(ranking.judged.reliability.log_error_probability[i]));
  }
  return {design.code, largest, *design.predicted.fer};
}

TEST(Trial, MeasuresBetweenTheWorstIndexAndTheUnion) {
  for (const auto& [log2, p, fer] : {std::tuple{6U, 0.05, 0.1},
                                     {8U, 0.02, 0.03},
                                     {10U, 0.05, 0.1},
                                     {10U, 0.11, 0.3},
                                     {12U, 0.02, 0.1}}) {
    const Sample design = sample(log2, p, fer, 11);
    const LaneDecoder decoder(design.code, kPlanes3);
    const TrialSummary summary = run_trial(design.code, decoder, p, {20000, {}, 5});
    EXPECT_EQ(summary.blocks, 20000U);
    const RateInterval interval = fixed_blocks_interval(summary.failures, summary.blocks, 0.999);
    EXPECT_GE(interval.high, design.largest_leaf);
    EXPECT_LE(interval.low, design.union_sum);
    EXPECT_GT(summary.failures, 0U);
    // No one-way message of fixed length does better (polar/limits.h: V. Strassen, 1962), check
    // bits counted, even at the worst FER that the counts leave room for.
    EXPECT_GE(design.code.leakage_bits(),
              finite_length_limit(std::uint64_t{1} << log2, p, interval.high).bits);
    // Five standard deviations of the number of errors.
    const double bits = 20000.0 * static_cast<double>(std::size_t{1} << log2);
    EXPECT_NEAR(static_cast<double>(summary.errors), bits * p, 5 * std::sqrt(bits * p * (1 - p)));
  }
}

TEST(Trial, CountsTheSameForAnyNumberOfThreads) {
  const Sample design = sample(9, 0.05, 0.1, 6);
  const LaneDecoder decoder(design.code, kPlanes3);
  std::vector<TrialSummary> seen;
  for (const std::size_t threads : {1U, 2U, 8U}) {
    const tbb::global_control limit(tbb::global_control::max_allowed_parallelism, threads);
    seen.push_back(run_trial(design.code, decoder, 0.05, {1000000, 150, 9}));
    seen.push_back(run_trial(design.code, decoder, 0.05, {3333, {}, 9}));
  }
  for (std::size_t k = 2; k < seen.size(); ++k) {
    EXPECT_EQ(seen[k].blocks, seen[k - 2].blocks);
    EXPECT_EQ(seen[k].failures, seen[k - 2].failures);
    EXPECT_EQ(seen[k].undetected, seen[k - 2].undetected);
    EXPECT_EQ(seen[k].errors, seen[k - 2].errors);
  }
  EXPECT_EQ(seen[0].failures, 150U);
  EXPECT_TRUE(seen[0].stopped_at_failure);
  EXPECT_EQ(seen[1].blocks, 3333U);
  EXPECT_FALSE(seen[1].stopped_at_failure);
}

TEST(Trial, FastAndReferenceDecoderFailOnTheSameBlocks) {
  const Sample design = sample(8, 0.05, 0.2, 11);
  const LaneDecoder fast(design.code, kPlanes3);
  const ReferenceBatchDecoder reference(design.code, kPlanes3, 0.05);
  const TrialSummary a = run_trial(design.code, fast, 0.05, {2000, {}, 3});
  const TrialSummary b = run_trial(design.code, reference, 0.05, {2000, {}, 3});
  EXPECT_EQ(a.failures, b.failures);
  EXPECT_EQ(a.undetected, b.undetected);
  EXPECT_GT(a.failures, 0U);
}

// A wrong block passes c random check bits with probability 2^-c.
TEST(Trial, CountsWhatPassesTheCheckBits) {
  const Sample none = sample(8, 0.05, 0.2, 0);
  const TrialSummary all =
      run_trial(none.code, LaneDecoder(none.code, kPlanes3), 0.05, {5000, {}, 3});
  EXPECT_EQ(all.undetected, all.failures);
  const Sample six = sample(8, 0.05, 0.2, 6);
  const TrialSummary some =
      run_trial(six.code, LaneDecoder(six.code, kPlanes3), 0.05, {60000, {}, 3});
  const RateInterval rate = fixed_blocks_interval(some.undetected, some.failures, 0.999);
  EXPECT_LE(rate.low, 1.0 / 64);
  EXPECT_GT(some.undetected, 0U);
}

TEST(Trial, WithoutErrorsNothingFails) {
  const Sample design = sample(8, 0.05, 0.1, 11);
  const LaneDecoder decoder(design.code, kPlanes3);
  const TrialSummary summary = run_trial(design.code, decoder, 0, {1000, {}, 1});
  EXPECT_EQ(summary.failures, 0U);
  EXPECT_EQ(summary.errors, 0U);
  EXPECT_EQ(summary.fer_interval.low, 0);
}

TEST(Trial, StopsWhenAsked) {
  const Sample design = sample(8, 0.05, 0.1, 11);
  const LaneDecoder decoder(design.code, kPlanes3);
  std::atomic<bool> stop{false};
  RunControl control;
  control.stop = &stop;
  control.progress = [&](std::uint64_t done, std::uint64_t) { stop = done >= 5000; };
  const TrialSummary summary = run_trial(design.code, decoder, 0.05, {100000000, {}, 1}, control);
  EXPECT_TRUE(summary.interrupted);
  EXPECT_GE(summary.blocks, 5000U);
  EXPECT_LT(summary.blocks, 100000U);
}

TEST(Trial, RefusesWhatIsOutOfRange) {
  const Sample design = sample(6, 0.05, 0.1, 6);
  const LaneDecoder decoder(design.code, kPlanes3);
  EXPECT_THROW(run_trial(design.code, decoder, 0.6, {10, {}, 1}), InputError);
  EXPECT_THROW(run_trial(design.code, decoder, 0.1, {0, {}, 1}), InputError);
  EXPECT_THROW(run_trial(design.code, decoder, 0.1, {10, 0, 1}), InputError);
}

}  // namespace
}  // namespace frostline
