#include "decode/reference/successive_cancellation.h"

#include <gtest/gtest.h>

#include <cmath>
#include <stdexcept>
#include <vector>

#include "polar/transform.h"
#include "tests/support/difference.h"
#include "tests/support/polarized_frozen_set.h"
#include "tests/support/random_bits.h"

namespace frostline {
namespace {

using testing::difference_of;
using testing::Generator;

constexpr Precoding kPrecodings[] = {Precoding::none, Precoding::state8};

std::vector<Arithmetic> some_arithmetics() {
  return {Arithmetic::exact(),      Arithmetic::planes_of(2),     Arithmetic::planes_of(3),
          Arithmetic::planes_of(7), Arithmetic::integer_of(5, 2), Arithmetic::integer_of(15, 1)};
}

// A code whose union bound is small where M leaves room.
FrozenSet bhattacharyya_frozen_set(BlockLength length, double p, std::size_t frozen_count) {
  return testing::polarized_frozen_set(length, testing::bsc_bhattacharyya(p), frozen_count);
}

TEST(SuccessiveCancellation, AlwaysShowsTheGivenPublicValues) {
  Generator generator(1);
  for (unsigned log2 = 3; log2 <= 10; ++log2) {
    const BlockLength length = BlockLength::from_log2(log2);
    for (int trial = 0; trial < 12; ++trial) {
      const FrozenSet frozen =
          trial % 3 == 0   ? testing::random_frozen_set(generator, length, 0.4)
          : trial % 3 == 1 ? testing::bytewise_frozen_set(generator, length)
                           : testing::weight_frozen_set(length, generator() % (length.bits() + 1));
      for (const Precoding precoding : kPrecodings) {
        const Code code{frozen, precoding, 0};
        // Any d at all, not only that of a likely pattern.
        BitString difference = testing::random_bits(generator, length.bits());
        for (const Arithmetic& arithmetic : some_arithmetics()) {
          const ScDecision decision = decode_sc(code, arithmetic, 0.03, difference);
          ASSERT_EQ(polar_transform(decision.errors), decision.u);
          const BitString shown = difference_of(code, decision.errors);
          for (std::size_t i = 0; i < length.bits(); ++i) {
            if (frozen.is_frozen(i)) {
              ASSERT_EQ(shown[i], difference[i])
                  << to_string(arithmetic) << " N = " << length.bits() << " index " << i;
            }
          }
        }
      }
    }
  }
}

TEST(SuccessiveCancellation, FindsNoErrorWhereThereIsNone) {
  Generator generator(2);
  for (unsigned log2 = 3; log2 <= 11; ++log2) {
    const BlockLength length = BlockLength::from_log2(log2);
    for (const double share : {0.0, 0.3, 1.0}) {
      for (const Precoding precoding : kPrecodings) {
        const Code code{testing::random_frozen_set(generator, length, share), precoding, 0};
        for (const Arithmetic& arithmetic : some_arithmetics()) {
          const ScDecision decision = decode_sc(code, arithmetic, 0.03, BitString(length.bits()));
          ASSERT_EQ(decision.errors.count(), 0U);
          ASSERT_EQ(decision.u.count(), 0U);
        }
      }
    }
  }
}

TEST(SuccessiveCancellation, IgnoresTheDifferenceAtOpenIndices) {
  Generator generator(3);
  const BlockLength length(256);
  const Code code{testing::weight_frozen_set(length, 100), Precoding::state8, 0};
  const BitString difference = testing::random_bits(generator, 256);
  BitString other = difference;
  for (std::size_t i = 0; i < 256; ++i) {
    if (!code.frozen.is_frozen(i)) other.flip(i);
  }
  for (const Arithmetic& arithmetic : some_arithmetics()) {
    EXPECT_EQ(decode_sc(code, arithmetic, 0.03, difference).errors,
              decode_sc(code, arithmetic, 0.03, other).errors);
  }
}

TEST(SuccessiveCancellation, CorrectsEverySingleError) {
  for (const std::size_t bits : {64, 256, 1024}) {
    const BlockLength length(bits);
    const FrozenSet frozen = bhattacharyya_frozen_set(length, 0.02, bits / 2);
    for (const Precoding precoding : kPrecodings) {
      const Code code{frozen, precoding, 0};
      for (const Arithmetic& arithmetic :
           {Arithmetic::exact(), Arithmetic::planes_of(3), Arithmetic::integer_of(6, 4)}) {
        for (std::size_t i = 0; i < bits; ++i) {
          BitString errors(bits);
          errors.set(i, true);
          ASSERT_EQ(decode_sc(code, arithmetic, 0.02, difference_of(code, errors)).errors, errors)
              << to_string(arithmetic) << " N = " << bits << ", position " << i;
        }
      }
    }
  }
}

TEST(SuccessiveCancellation, PlanesDoNotDependOnTheErrorRate) {
  Generator generator(10);
  const BlockLength length(512);
  const Code code{testing::weight_frozen_set(length, 200), Precoding::state8, 0};
  for (int trial = 0; trial < 20; ++trial) {
    const BitString difference =
        difference_of(code, testing::random_bits(generator, length.bits(), 0.04));
    for (unsigned planes = 2; planes <= 7; ++planes) {
      const Arithmetic arithmetic = Arithmetic::planes_of(planes);
      const ScDecision reference = decode_sc(code, arithmetic, 0.01, difference);
      for (const double p : {1e-6, 0.11, 0.49}) {
        ASSERT_EQ(decode_sc(code, arithmetic, p, difference).errors, reference.errors);
      }
    }
  }
}

TEST(SuccessiveCancellation, KeepsTheBhattacharyyaBound) {
  // At p = 0.05 and N = 512; a rigorous bound of the FER in exact arithmetic. The number of
  // failures among 400 blocks lies above its bound by four standard deviations with chance 3e-5.
  const BlockLength length(512);
  const double p = 0.05;
  const FrozenSet frozen = bhattacharyya_frozen_set(length, p, 310);
  const std::vector<double> z = testing::polarized(length, testing::bsc_bhattacharyya(p));
  double bound = 0;
  for (std::size_t i = 0; i < length.bits(); ++i) bound += frozen.is_frozen(i) ? 0 : z[i] / 2;
  ASSERT_GT(bound, 0.02);
  ASSERT_LT(bound, 0.5);
  const int blocks = 400;
  for (const Precoding precoding : kPrecodings) {
    const Code code{frozen, precoding, 0};
    Generator generator(11);
    int exact_failures = 0;
    int planes_failures = 0;
    for (int block = 0; block < blocks; ++block) {
      const BitString errors = testing::random_bits(generator, length.bits(), p);
      const BitString difference = difference_of(code, errors);
      exact_failures += decode_sc(code, Arithmetic::exact(), p, difference).errors != errors;
      planes_failures += decode_sc(code, Arithmetic::planes_of(3), p, difference).errors != errors;
    }
    EXPECT_LE(exact_failures, blocks * bound + 4 * std::sqrt(blocks * bound));
    EXPECT_LE(planes_failures, blocks / 4);
  }
}

TEST(SuccessiveCancellation, FailsNearlyAlwaysWhereTheSyndromeIsShorterThanTheEntropy) {
  const BlockLength length(512);
  const Code code{bhattacharyya_frozen_set(length, 0.05, 100), Precoding::none, 0};  // N h2 = 147
  Generator generator(12);
  int failures = 0;
  for (int block = 0; block < 100; ++block) {
    const BitString errors = testing::random_bits(generator, length.bits(), 0.05);
    failures +=
        decode_sc(code, Arithmetic::exact(), 0.05, difference_of(code, errors)).errors != errors;
  }
  EXPECT_GE(failures, 90);
}

TEST(SuccessiveCancellation, RejectsADifferenceOfAnotherLength) {
  const Code code{testing::weight_frozen_set(BlockLength(64), 20), Precoding::none, 0};
  for (const Arithmetic& arithmetic : some_arithmetics()) {
    EXPECT_THROW(decode_sc(code, arithmetic, 0.1, BitString(63)), std::invalid_argument);
    EXPECT_THROW(decode_sc(code, arithmetic, 0.1, BitString(128)), std::invalid_argument);
  }
  EXPECT_THROW(decode_sc(code, Arithmetic::exact(), 0.5, BitString(64)), std::invalid_argument);
  EXPECT_THROW(decode_sc(code, Arithmetic::planes_of(1), 0.1, BitString(64)),
               std::invalid_argument);
}

}  // namespace
}  // namespace frostline
