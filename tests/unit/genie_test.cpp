#include "decode/trial/genie.h"

#include <gtest/gtest.h>
#include <tbb/global_control.h>
#include <tbb/parallel_for.h>

#include <cmath>
#include <stdexcept>

#include "construct/density_evolution.h"
#include "construct/gaussian.h"
#include "construct/selection.h"
#include "decode/reference/successive_cancellation.h"
#include "polar/error.h"
#include "polar/transform.h"
#include "tests/support/binomial.h"
#include "tests/support/difference.h"
#include "tests/support/genie_decoder.h"
#include "tests/support/random_bits.h"

namespace frostline {
namespace {

using testing::Generator;

const Arithmetic kFinite[] = {Arithmetic::planes_of(2), Arithmetic::planes_of(3),
                              Arithmetic::planes_of(7), Arithmetic::integer_of(4, 3),
                              Arithmetic::integer_of(6, 8)};

GenieTrial trial_of(std::size_t length, double p, const Arithmetic& arithmetic,
                    std::uint64_t blocks, std::uint64_t seed) {
  return {BlockLength(length), p, arithmetic, blocks, seed};
}

// tests/support/genie_decoder.h is written from the rules alone.
TEST(Genie, GoesWrongWhereADecoderWrittenFromTheRulesDoes) {
  Generator generator(3);
  for (const Arithmetic& arithmetic : kFinite) {
    const testing::GenieDecoder decoder(arithmetic);
    for (const std::size_t length : {8U, 64U, 512U}) {
      for (const double p : {0.01, 0.06, 0.3}) {
        for (int block = 0; block < 6; ++block) {
          const BitString errors = testing::random_bits(generator, length, p);
          const BitString u = polar_transform(errors);
          std::vector<bool> x(length);
          for (std::size_t i = 0; i < length; ++i) x[i] = errors[i];
          const std::vector<bool> found = decoder.decisions(x);
          const BitString wrong = wrong_decisions_with_genie(errors, arithmetic, p);
          for (std::size_t i = 0; i < length; ++i) {
            ASSERT_EQ(wrong[i], found[i] != u[i]) << to_string(arithmetic) << " " << p << " " << i;
          }
        }
      }
    }
  }
}

// With one open index decode_sc is told all others.
TEST(Genie, GoesWrongWhereExactSuccessiveCancellationOfOneOpenIndexDoes) {
  Generator generator(4);
  for (int block = 0; block < 20; ++block) {
    const BitString errors = testing::random_bits(generator, 64, 0.08);
    const BitString u = polar_transform(errors);
    const BitString wrong = wrong_decisions_with_genie(errors, Arithmetic::exact(), 0.08);
    for (std::size_t i = 0; i < 64; ++i) {
      BitString mask(64);
      for (std::size_t j = 0; j < 64; ++j) mask.set(j, j != i);
      const Code code{FrozenSet(BlockLength(64), mask), Precoding::none, 0};
      ASSERT_EQ(wrong[i], decode_sc(code, Arithmetic::exact(), 0.08, u).u[i] != u[i]) << i;
    }
  }
}

TEST(Genie, TellsWhichBlocksSuccessiveCancellationLoses) {
  Generator generator(5);
  const BlockLength block_length(256);
  const FrozenSet frozen = testing::weight_frozen_set(block_length, 130);
  for (const Precoding precoding : {Precoding::none, Precoding::state8}) {
    const Code code{frozen, precoding, 0};
    for (const Arithmetic& arithmetic :
         {Arithmetic::exact(), Arithmetic::planes_of(3), Arithmetic::integer_of(6, 8)}) {
      int lost = 0;
      for (int block = 0; block < 200; ++block) {
        const BitString errors = testing::random_bits(generator, 256, 0.05);
        const BitString wrong = wrong_decisions_with_genie(errors, arithmetic, 0.05);
        bool wrong_at_open = false;
        for (std::size_t i = 0; i < 256; ++i) wrong_at_open |= wrong[i] && !frozen.is_frozen(i);
        const ScDecision decision =
            decode_sc(code, arithmetic, 0.05, testing::difference_of(code, errors));
        ASSERT_EQ(decision.errors != errors, wrong_at_open) << to_string(arithmetic);
        lost += wrong_at_open ? 1 : 0;
      }
      EXPECT_GT(lost, 5);
      EXPECT_LT(lost, 195);
    }
  }
}

// Every count of wrong decisions is one that its binomial distribution yields with a probability
// above what is left after sharing 0.1 % among all indices and both tails.
TEST(GenieTrial, CountsAgreeWithDensityEvolutionWithin999PermilleIntervals) {
  for (const Arithmetic& arithmetic : {Arithmetic::planes_of(3), Arithmetic::integer_of(6, 8)}) {
    for (const std::size_t length : {64U, 256U, 1024U}) {
      const GenieCounts counts = run_genie_trial(trial_of(length, 0.05, arithmetic, 5000, 11));
      const Reliability exact = density_evolution(BlockLength(length), 0.05, arithmetic);
      const double smallest_tail = 0.001 / 2 / static_cast<double>(length);
      for (std::size_t i = 0; i < length; ++i) {
        EXPECT_GT(
            testing::smaller_tail(counts.wrong[i], 5000, std::exp(exact.log_error_probability[i])),
            smallest_tail)
            << to_string(arithmetic) << " " << i << " wrong " << counts.wrong[i];
      }
    }
  }
}

TEST(GenieTrial, CountsTheSameOnAnyNumberOfThreads) {
  for (const Arithmetic& arithmetic : {Arithmetic::planes_of(3), Arithmetic::exact()}) {
    std::vector<std::uint32_t> first;
    for (const std::size_t threads : {1U, 2U, 8U}) {
      const tbb::global_control limit(tbb::global_control::max_allowed_parallelism, threads);
      const auto wrong = run_genie_trial(trial_of(512, 0.04, arithmetic, 300, 5)).wrong;
      if (first.empty()) first = wrong;
      EXPECT_EQ(wrong, first) << threads;
    }
    EXPECT_NE(run_genie_trial(trial_of(512, 0.04, arithmetic, 300, 6)).wrong, first);
  }
}

TEST(GenieTrial, TellsItsProgressAndStopsWhenTold) {
  std::atomic<bool> stop{false};
  std::uint64_t last = 0;
  RunControl control;
  control.stop = &stop;
  control.progress = [&](std::uint64_t done, std::uint64_t total) {
    EXPECT_EQ(done, last + 1);
    EXPECT_EQ(total, 200U);
    last = done;
  };
  const GenieTrial trial = trial_of(64, 0.05, Arithmetic::planes_of(3), 200, 1);
  run_genie_trial(trial, control);
  EXPECT_EQ(last, 200U);
  control.progress = [&](std::uint64_t done, std::uint64_t) { stop = done >= 20; };
  EXPECT_THROW(run_genie_trial(trial, control), Interrupted);
}

TEST(GenieTrial, LeavesNoBlockOutInACancelledRun) {
  const GenieTrial trial = trial_of(64, 0.05, Arithmetic::planes_of(3), 500, 1);
  const GenieCounts whole = run_genie_trial(trial);
  GenieCounts cancelled;
  tbb::task_group_context context;
  tbb::parallel_for(
      0, 1,
      [&](int) {
        context.cancel_group_execution();
        cancelled = run_genie_trial(trial);
      },
      context);
  EXPECT_EQ(cancelled.wrong, whole.wrong);
}

TEST(GenieTrial, RefusesValuesOutsideItsRange) {
  const Arithmetic planes = Arithmetic::planes_of(3);
  EXPECT_THROW(run_genie_trial(trial_of(64, 0, planes, 10, 1)), InputError);
  EXPECT_THROW(run_genie_trial(trial_of(64, 0.5, planes, 10, 1)), InputError);
  EXPECT_THROW(run_genie_trial(trial_of(64, 0.02, planes, 0, 1)), InputError);
  EXPECT_THROW(run_genie_trial(trial_of(64, 0.02, planes, std::uint64_t{1} << 32, 1)), InputError);
  EXPECT_THROW(run_genie_trial(trial_of(64, 0.02, Arithmetic::planes_of(8), 10, 1)),
               std::invalid_argument);
  EXPECT_THROW(wrong_decisions_with_genie(BitString(63), planes, 0.02), InputError);
}

// ---------------------------------------------------------------- reliability

Reliability prior_of(const std::vector<double>& probabilities) {
  Reliability prior;
  for (const double p : probabilities) prior.log_error_probability.push_back(std::log(p));
  return prior;
}

TEST(GenieReliability, IsTheSmoothedFrequency) {
  // h = B q / (1 + 2 B q): 1000 q = 1 gives 1/3; 500 gives 500/1001; 1e-6 nearly itself.
  const GenieCounts counts{1000, {400, 3, 0, 0}};
  const Reliability reliability = genie_reliability(counts, prior_of({0.5, 0.001, 0.001, 1e-9}));
  EXPECT_EQ(reliability.kind, ReliabilityKind::estimate);
  const double expected[] = {(400 + 500.0 / 1001) / 1001, (3 + 1.0 / 3) / 1001, (1.0 / 3) / 1001,
                             1e-6 / 1.000002 / 1001};
  for (std::size_t i = 0; i < 4; ++i) {
    EXPECT_NEAR(std::exp(reliability.log_error_probability[i]) / expected[i], 1, 1e-12) << i;
  }
}

TEST(GenieReliability, OrdersByCountAndThenByThePrior) {
  const GenieCounts counts{100, {1, 0, 0, 0, 1, 7}};
  Reliability prior = prior_of({1e-30, 0.4, 1e-12, 1, 1e-3, 1e-9});
  prior.log_error_probability[2] = -2000;  // below what a double holds
  const std::vector<std::uint32_t> order = freezing_order(genie_reliability(counts, prior));
  EXPECT_EQ(order, (std::vector<std::uint32_t>{5, 4, 0, 3, 1, 2}));
}

TEST(GenieReliability, NeedsBlocksAndAFittingPrior) {
  const Reliability prior = prior_of({0.1, 0.1});
  EXPECT_THROW(genie_reliability({0, {0, 0}}, prior), std::invalid_argument);
  EXPECT_THROW(genie_reliability({5, {0, 0, 0}}, prior), std::invalid_argument);
  Reliability order = prior;
  order.kind = ReliabilityKind::order_only;
  EXPECT_THROW(genie_reliability({5, {0, 0}}, order), std::invalid_argument);
}

// Judged by the exact probabilities, the set from a trial is nearly as good as the best one, and
// its estimate of the FER is near.
TEST(GenieReliability, ChoosesNearlyTheFrozenSetOfDensityEvolution) {
  const BlockLength block_length(1024);
  const Arithmetic arithmetic = Arithmetic::planes_of(3);
  const Reliability exact = density_evolution(block_length, 0.05, arithmetic);
  const auto exact_order = freezing_order(exact);
  const auto exact_sums = union_sums(exact, exact_order);
  const Reliability estimate =
      genie_reliability(run_genie_trial(trial_of(1024, 0.05, arithmetic, 20000, 2)),
                        gaussian_approximation(block_length, 0.05));
  const auto order = freezing_order(estimate);
  const auto sums = union_sums(estimate, order);
  const auto best = static_cast<double>(smallest_frozen_count(exact_sums, 0.1));
  const std::size_t chosen = smallest_frozen_count(sums, 0.1);
  EXPECT_NEAR(static_cast<double>(chosen), best, 0.01 * best);
  const double judged = union_sums(exact, order)[chosen];
  EXPECT_NEAR(judged, 0.1, 0.02);
  EXPECT_LT(judged, 1.05 * exact_sums[chosen]);
}

}  // namespace
}  // namespace frostline
