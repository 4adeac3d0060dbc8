#include "decode/trial/frozen_curve.h"

#include <gtest/gtest.h>
#include <tbb/global_control.h>

#include "construct/designer.h"
#include "construct/selection.h"
#include "decode/reference/reference_batch_decoder.h"

namespace frostline {
namespace {

const BlockLength kLength = BlockLength::from_log2(9);
constexpr double kQber = 0.05;

std::vector<std::uint32_t> order_for(const Arithmetic& arithmetic) {
  return rank_indices(kLength, kQber, default_construction(arithmetic), 0, arithmetic).order;
}

TrialOptions blocks_of(std::uint64_t blocks) {
  TrialOptions options;
  options.blocks = blocks;
  options.seed = 6;
  return options;
}

// The same blocks, so that not only intervals agree but counts.
TEST(FrozenCurve, GoesThroughSeparateTrialsAtFiveFrozenCounts) {
  for (const Arithmetic& arithmetic :
       {Arithmetic::planes_of(3), parse_arithmetic("integer:6:4"), parse_arithmetic("exact")}) {
    const auto order = order_for(arithmetic);
    const auto channel = parse_channel("burst:0.03:0.2:0.001:0.01");
    const TrialOptions options = blocks_of(1500);
    const FrozenCurve curve = run_frozen_curve(order, arithmetic, kQber, *channel, options);
    EXPECT_EQ(curve.blocks, 1500U);
    for (const std::size_t frozen : {180U, 205U, 230U, 255U, 290U}) {
      const Code code{freeze_first(order, frozen), Precoding::none, 0};
      const ReferenceBatchDecoder decoder(code, arithmetic, kQber);
      const TrialSummary trial = run_trial(code, decoder, *channel, options);
      EXPECT_EQ(curve.failures[frozen], trial.failures) << to_string(arithmetic) << ' ' << frozen;
      EXPECT_EQ(curve.errors, trial.errors);
    }
    EXPECT_GT(curve.failures[180], curve.failures[290]);
    EXPECT_EQ(curve.failures[kLength.bits()], 0U);
  }
}

TEST(FrozenCurve, IsTheSameForAnyNumberOfThreads) {
  const Arithmetic arithmetic = Arithmetic::planes_of(3);
  const auto order = order_for(arithmetic);
  std::vector<FrozenCurve> curves;
  for (const std::size_t threads : {1U, 2U, 8U}) {
    const tbb::global_control limit(tbb::global_control::max_allowed_parallelism, threads);
    curves.push_back(
        run_frozen_curve(order, arithmetic, kQber, SymmetricChannel(kQber), blocks_of(2000)));
  }
  EXPECT_EQ(curves[0].failures, curves[1].failures);
  EXPECT_EQ(curves[0].failures, curves[2].failures);
}

// By hand: of four blocks, one needs none, two need 3, one needs 6 of 8.
TEST(FrozenCurve, CountsWhatRevealsCost) {
  FrozenCurve curve;
  curve.blocks = 4;
  curve.failures = {3, 3, 3, 1, 1, 1, 0, 0, 0};
  EXPECT_EQ(mean_revealed_bits(curve, 1)[0], (3 + 3 + 6) / 4.0);
  EXPECT_EQ(mean_revealed_bits(curve, 4)[0], (4 + 4 + 8) / 4.0);
  EXPECT_EQ(mean_revealed_bits(curve, 4)[2], (4 + 4 + 4) / 4.0);
  EXPECT_EQ(mean_revealed_bits(curve, 4)[5], 3 / 4.0);  // no more than there are
  EXPECT_EQ(mean_revealed_bits(curve, 2)[6], 0);
  EXPECT_THROW(mean_revealed_bits(curve, 0), std::invalid_argument);
}

TEST(FrozenCurve, RefusesAnOrderThatIsNone) {
  std::vector<std::uint32_t> order(8, 0);
  EXPECT_THROW(run_frozen_curve(order, Arithmetic::planes_of(3), kQber, SymmetricChannel(kQber),
                                blocks_of(8)),
               std::invalid_argument);
}

}  // namespace
}  // namespace frostline
