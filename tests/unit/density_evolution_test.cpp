#include "construct/density_evolution.h"

#include <gtest/gtest.h>
#include <tbb/global_control.h>

#include <cmath>

#include "construct/degrading_merge.h"
#include "decode/reference/successive_cancellation.h"
#include "polar/error.h"
#include "polar/random.h"
#include "polar/transform.h"
#include "tests/support/binomial.h"
#include "tests/support/genie_decoder.h"
#include "tests/support/leaf_enumeration.h"

namespace frostline {
namespace {

using testing::GenieDecoder;

const Arithmetic kArithmetics[] = {Arithmetic::planes_of(2),      Arithmetic::planes_of(3),
                                   Arithmetic::planes_of(5),      Arithmetic::integer_of(3, 1),
                                   Arithmetic::integer_of(4, 3),  Arithmetic::integer_of(6, 8),
                                   Arithmetic::integer_of(5, 15), Arithmetic::integer_of(8, 1)};

std::vector<double> errors_by_enumeration(unsigned length, double p, const Arithmetic& arithmetic) {
  const GenieDecoder decoder(arithmetic);
  std::vector<double> errors(length, 0);
  std::vector<bool> bits(length);
  for (std::uint32_t x = 0; x < (std::uint32_t{1} << length); ++x) {
    for (unsigned j = 0; j < length; ++j) bits[j] = (x >> j) & 1U;
    const std::uint32_t u = testing::transformed(x, length);
    const double probability = testing::pattern_probability(x, length, p);
    const std::vector<bool> found = decoder.decisions(bits);
    for (unsigned i = 0; i < length; ++i) {
      if (found[i] != static_cast<bool>((u >> i) & 1U)) errors[i] += probability;
    }
  }
  return errors;
}

TEST(DensityEvolution, RefusesValuesOutsideItsRange) {
  const BlockLength block_length(64);
  EXPECT_THROW(density_evolution(block_length, 0.5, Arithmetic::planes_of(3)), InputError);
  EXPECT_THROW(density_evolution(block_length, 0.02, Arithmetic::exact()), std::invalid_argument);
  EXPECT_THROW(density_evolution(block_length, 0.02, Arithmetic::planes_of(8)),
               std::invalid_argument);
  EXPECT_THROW(density_evolution(block_length, 0.02, Arithmetic::integer_of(2, 1)),
               std::invalid_argument);
  EXPECT_THROW(density_evolution(block_length, 0.02, Arithmetic::integer_of(4, 8)),
               std::invalid_argument);
}

TEST(DensityEvolution, EqualsExhaustiveEnumeration) {
  for (const Arithmetic& arithmetic : kArithmetics) {
    for (const double p : {0.01, 0.11, 0.4}) {
      for (const unsigned length : {8U, 16U}) {
        if (length == 16 && p == 0.4) continue;
        const auto exact = errors_by_enumeration(length, p, arithmetic);
        const Reliability reliability = density_evolution(BlockLength(length), p, arithmetic);
        EXPECT_EQ(reliability.kind, ReliabilityKind::exact);
        for (unsigned i = 0; i < length; ++i) {
          EXPECT_NEAR(std::exp(reliability.log_error_probability[i]) / exact[i], 1, 1e-9)
              << to_string(arithmetic) << " " << p << " " << length << " " << i;
        }
      }
    }
  }
}

// One open index, all others known: what decode_sc decides there is the genie's decision.
bool decides(std::size_t i, const BitString& u, const Arithmetic& arithmetic) {
  BitString mask(u.size());
  for (std::size_t j = 0; j < u.size(); ++j) mask.set(j, j != i);
  const Code code{FrozenSet(BlockLength(u.size()), mask), Precoding::none, 0};
  return decode_sc(code, arithmetic, 0.02, u).u[i];
}

TEST(DensityEvolution, EqualsExhaustiveEnumerationByTheReferenceDecoder) {
  for (const Arithmetic& arithmetic : kArithmetics) {
    const Reliability reliability = density_evolution(BlockLength(8), 0.11, arithmetic);
    std::vector<double> errors(8, 0);
    for (std::uint32_t x = 0; x < 256; ++x) {
      BitString u(8);
      for (unsigned j = 0; j < 8; ++j) u.set(j, (testing::transformed(x, 8) >> j) & 1U);
      const double probability = testing::pattern_probability(x, 8, 0.11);
      for (unsigned i = 0; i < 8; ++i) {
        if (decides(i, u, arithmetic) != u[i]) errors[i] += probability;
      }
    }
    for (unsigned i = 0; i < 8; ++i) {
      EXPECT_NEAR(std::exp(reliability.log_error_probability[i]) / errors[i], 1, 1e-9)
          << to_string(arithmetic) << " " << i;
    }
  }
}

BitString random_pattern(std::size_t length, double p, std::uint64_t stream) {
  BitString pattern(length);
  RandomStream random(20260101, "density evolution test", stream);
  random.bernoulli(p, length, pattern.words());
  return pattern;
}

std::vector<bool> as_vector(const BitString& bits) {
  std::vector<bool> result(bits.size());
  for (std::size_t i = 0; i < bits.size(); ++i) result[i] = bits[i];
  return result;
}

TEST(DensityEvolution, JudgesTheDecoderThatTheReferenceIs) {
  for (const Arithmetic& arithmetic : kArithmetics) {
    for (std::uint64_t block = 0; block < 8; ++block) {
      const BitString x = random_pattern(64, 0.08, block);
      const BitString u = polar_transform(x);
      const std::vector<bool> found = GenieDecoder(arithmetic).decisions(as_vector(x));
      for (std::size_t i = 0; i < 64; ++i) {
        ASSERT_EQ(found[i], decides(i, u, arithmetic)) << to_string(arithmetic) << " " << i;
      }
    }
  }
}

// Every count of wrong decisions is one that its binomial distribution yields with a probability
// above what is left after sharing 0.1 % among all indices and both tails.
TEST(DensityEvolution, EqualsMonteCarloWithin999PermilleIntervals) {
  const std::uint64_t blocks = 1500;
  for (const Arithmetic& arithmetic : {Arithmetic::planes_of(3), Arithmetic::integer_of(6, 8)}) {
    const GenieDecoder decoder(arithmetic);
    for (const std::size_t length : {64U, 256U, 1024U}) {
      std::vector<double> wrong(length, 0);
      for (std::uint64_t block = 0; block < blocks; ++block) {
        const BitString x = random_pattern(length, 0.05, block);
        const BitString u = polar_transform(x);
        const std::vector<bool> found = decoder.decisions(as_vector(x));
        for (std::size_t i = 0; i < length; ++i) wrong[i] += found[i] != u[i] ? 1 : 0;
      }
      const Reliability reliability = density_evolution(BlockLength(length), 0.05, arithmetic);
      const double smallest_tail = 0.001 / 2 / static_cast<double>(length);
      for (std::size_t i = 0; i < length; ++i) {
        const double probability = std::exp(reliability.log_error_probability[i]);
        EXPECT_GT(testing::smaller_tail(wrong[i], static_cast<double>(blocks), probability),
                  smallest_tail)
            << to_string(arithmetic) << " " << i;
      }
    }
  }
}

// No decoder decides an index better than maximum likelihood given the earlier ones.
TEST(DensityEvolution, NeverFallsBelowTheBoundOfMaximumLikelihood) {
  const BlockLength block_length(1024);
  const Reliability bound = upgrading_merge(block_length, 0.05, 32);
  for (const Arithmetic& arithmetic : {Arithmetic::planes_of(3), Arithmetic::integer_of(6, 3)}) {
    const Reliability reliability = density_evolution(block_length, 0.05, arithmetic);
    for (std::size_t i = 0; i < block_length.bits(); ++i) {
      EXPECT_GE(reliability.log_error_probability[i], bound.log_error_probability[i] - 1e-9)
          << to_string(arithmetic) << " " << i;
    }
  }
}

TEST(DensityEvolution, IsTheSameOnAnyNumberOfThreads) {
  const BlockLength block_length = BlockLength::from_log2(15);
  std::vector<double> first;
  for (const std::size_t threads : {1U, 2U, 5U}) {
    const tbb::global_control limit(tbb::global_control::max_allowed_parallelism, threads);
    const auto log_p =
        density_evolution(block_length, 0.02, Arithmetic::planes_of(3)).log_error_probability;
    if (first.empty()) first = log_p;
    EXPECT_EQ(log_p, first) << threads;
  }
}

TEST(DensityEvolution, StaysFiniteAtTheEnds) {
  for (const Arithmetic& arithmetic : {Arithmetic::planes_of(2), Arithmetic::integer_of(4, 2)}) {
    for (const double p : {1e-12, 1e-3, 0.499}) {
      const Reliability reliability = density_evolution(BlockLength::from_log2(13), p, arithmetic);
      for (const double value : reliability.log_error_probability) {
        ASSERT_TRUE(std::isfinite(value) && value < 0) << to_string(arithmetic) << " " << p;
      }
    }
  }
}

}  // namespace
}  // namespace frostline
