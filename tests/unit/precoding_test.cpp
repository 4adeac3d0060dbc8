#include "polar/precoding.h"

#include <gtest/gtest.h>

#include <array>
#include <set>
#include <stdexcept>

#include "polar/error.h"
#include "tests/support/gf2_matrix.h"
#include "tests/support/random_bits.h"

namespace frostline {
namespace {

using testing::Generator;

// Multiplication by x modulo x^8+x^4+x^3+x^2+1, coefficient by coefficient.
std::array<bool, 8> times_x(const std::array<bool, 8>& s) {
  std::array<bool, 8> product{};
  for (std::size_t k = 0; k < 7; ++k) product[k + 1] = s[k];
  if (s[7]) {
    for (const std::size_t k : {0, 2, 3, 4}) product[k] = !product[k];
  }
  return product;
}

// "state8" of one block, bit by bit from its definition.
BitString precode_by_definition(const FrozenSet& frozen, const BitString& u) {
  const std::size_t bytes = frozen.block_length().bytes();
  const auto frozen_in = [&](std::size_t j) {
    std::size_t count = 0;
    for (std::size_t k = 0; k < 8; ++k) count += frozen.is_frozen(8 * j + k);
    return count;
  };
  const auto is_frozen = [&](std::size_t j) { return frozen_in(j) == 8; };
  const auto is_open = [&](std::size_t j) { return frozen_in(j) == 0; };
  const auto is_mixed = [&](std::size_t j) { return !is_frozen(j) && !is_open(j); };

  BitString shown = u;
  std::array<bool, 8> state{};
  for (std::size_t j = 0; j < bytes; ++j) {
    const bool last = j + 1 == bytes;
    if (is_mixed(j) || (is_frozen(j) && !last && !is_frozen(j + 1))) {
      for (std::size_t k = 0; k < 8; ++k) {
        if (!frozen.is_frozen(8 * j + k)) continue;
        bool offset = false;
        for (std::size_t b = 0; b < 8; ++b) offset ^= ((kState8Rows[k] >> b) & 1) && state[b];
        shown.set(8 * j + k, u[8 * j + k] ^ offset);
      }
    }
    if (is_mixed(j) || (is_open(j) && !last && !is_open(j + 1))) {
      state = times_x(state);
      for (std::size_t k = 0; k < 8; ++k) {
        if (!frozen.is_frozen(8 * j + k)) state[k] = state[k] ^ u[8 * j + k];
      }
    }
  }
  return shown;
}

FrozenSet some_frozen_set(Generator& generator, BlockLength length, int trial) {
  switch (trial % 4) {
    case 0:
      return testing::random_frozen_set(generator, length, 0.5);
    case 1:
      return testing::random_frozen_set(generator, length, 0.1);
    case 2:
      return testing::bytewise_frozen_set(generator, length);
    default:
      return testing::weight_frozen_set(length, generator() % (length.bits() + 1));
  }
}

TEST(Precoding, EqualsItsDefinitionForEveryNumberOfLanes) {
  Generator generator(1);
  for (unsigned log2 = 3; log2 <= 10; ++log2) {
    const BlockLength length = BlockLength::from_log2(log2);
    for (unsigned lanes = 1; lanes <= 512; lanes *= 2) {
      for (int trial = 0; trial < 4; ++trial) {
        const FrozenSet frozen = some_frozen_set(generator, length, trial);
        const PrecodingSchedule schedule(frozen, Precoding::state8);
        const BitString rows = testing::random_bits(generator, length.bits() * lanes);
        BitString shown = rows;
        apply_precoding(schedule, lanes, shown.words());
        // All lanes of short blocks, some of long ones.
        const unsigned stride = length.bits() * lanes > 65536 ? 37 : 1;
        for (unsigned lane = 0; lane < lanes; lane += stride) {
          BitString u(length.bits());
          BitString found(length.bits());
          for (std::size_t i = 0; i < length.bits(); ++i) {
            u.set(i, rows[i * lanes + lane]);
            found.set(i, shown[i * lanes + lane]);
          }
          ASSERT_EQ(found, precode_by_definition(frozen, u))
              << "N = " << length.bits() << ", lanes " << lanes << ", lane " << lane;
        }
      }
    }
  }
}

TEST(Precoding, IsItsOwnInverse) {
  Generator generator(2);
  for (unsigned lanes = 1; lanes <= 512; lanes *= 2) {
    for (int trial = 0; trial < 8; ++trial) {
      const BlockLength length = BlockLength::from_log2(3 + static_cast<unsigned>(trial));
      const PrecodingSchedule schedule(some_frozen_set(generator, length, trial),
                                       Precoding::state8);
      const BitString rows = testing::random_bits(generator, length.bits() * lanes);
      BitString twice = rows;
      apply_precoding(schedule, lanes, twice.words());
      apply_precoding(schedule, lanes, twice.words());
      EXPECT_EQ(twice, rows);
    }
  }
}

TEST(Precoding, NoneShowsPlainU) {
  Generator generator(3);
  const BlockLength length(256);
  const FrozenSet frozen = testing::random_frozen_set(generator, length, 0.5);
  const PrecodingSchedule schedule(frozen, Precoding::none);
  EXPECT_TRUE(schedule.active_bytes().empty());
  const BitString rows = testing::random_bits(generator, 256 * 4);
  BitString shown = rows;
  apply_precoding(schedule, 4, shown.words());
  EXPECT_EQ(shown, rows);
  for (std::size_t j = 0; j < length.bytes(); ++j) {
    EXPECT_FALSE(schedule.adds_state(j));
    EXPECT_FALSE(schedule.moves_state(j));
  }
}

TEST(Precoding, LongFrozenOrOpenStretchesAreInactiveButAtTheirEnds) {
  BitString mask(128);  // bytes: 4 frozen, 4 open, 1 mixed, 3 open, 4 frozen
  for (std::size_t i = 0; i < 32; ++i) mask.set(i, true);
  mask.set(64, true);
  for (std::size_t i = 96; i < 128; ++i) mask.set(i, true);
  const PrecodingSchedule schedule(FrozenSet(BlockLength(128), mask), Precoding::state8);
  EXPECT_EQ(schedule.active_bytes(), (std::vector<std::uint32_t>{3, 7, 8, 11}));
  EXPECT_TRUE(schedule.adds_state(3) && !schedule.moves_state(3));
  EXPECT_TRUE(!schedule.adds_state(7) && schedule.moves_state(7));
  EXPECT_TRUE(schedule.adds_state(8) && schedule.moves_state(8));
  EXPECT_TRUE(!schedule.adds_state(11) && schedule.moves_state(11));
  EXPECT_EQ(schedule.frozen_places(8), 0x01);
  EXPECT_EQ(schedule.frozen_places(15), 0xFF);
}

TEST(Precoding, StateOfOneBlockFollowsTheSameRules) {
  for (unsigned state = 0; state < 256; ++state) {
    std::array<bool, 8> bits{};
    for (unsigned k = 0; k < 8; ++k) bits[k] = (state >> k) & 1U;
    const std::array<bool, 8> next = times_x(bits);
    const std::uint8_t advanced = state8_advance(static_cast<std::uint8_t>(state), 0xA5);
    const std::uint8_t offsets = state8_offsets(static_cast<std::uint8_t>(state));
    for (unsigned k = 0; k < 8; ++k) {
      EXPECT_EQ(((advanced ^ 0xA5) >> k) & 1, next[k]);
      bool offset = false;
      for (unsigned b = 0; b < 8; ++b) offset ^= ((kState8Rows[k] >> b) & 1) && bits[b];
      EXPECT_EQ((offsets >> k) & 1, offset);
    }
  }
}

TEST(Precoding, RowsOfYAreWhatTheirCommentSays) {
  testing::Gf2Matrix y(8, 8);
  std::set<unsigned> seen;
  std::array<int, 8> column_weights{};
  for (unsigned k = 0; k < 8; ++k) {
    int weight = 0;
    for (unsigned b = 0; b < 8; ++b) {
      // The coefficient of x^0 of x^(122 + 96 k) x^b.
      std::array<bool, 8> product{true};
      for (unsigned step = 0; step < 122 + 96 * k + b; ++step) product = times_x(product);
      const bool bit = (kState8Rows[k] >> b) & 1;
      EXPECT_EQ(bit, product[0]) << "row " << k << ", bit " << b;
      y.set(k, b, bit);
      weight += bit;
      column_weights[b] += bit;
    }
    EXPECT_TRUE(weight >= 3 && weight <= 5);
    seen.insert(kState8Rows[k]);
    for (unsigned other = 0; other < k; ++other) {
      const unsigned apart = 96 * (k - other) % 255;
      EXPECT_GE(std::min(apart, 255 - apart), 30U);
    }
  }
  for (const int weight : column_weights) EXPECT_TRUE(weight >= 3 && weight <= 5);
  EXPECT_EQ(seen.size(), 8U);
  EXPECT_EQ(y.rank(), 8U);
}

TEST(Precoding, AnyOneRowSeenEightTimesTellsTheWholeState) {
  for (unsigned row = 0; row < 8; ++row) {
    testing::Gf2Matrix shown(8, 8);
    for (unsigned b = 0; b < 8; ++b) {
      std::uint8_t state = static_cast<std::uint8_t>(1U << b);
      for (unsigned step = 0; step < 8; ++step) {
        shown.set(step, b, (state8_offsets(state) >> row) & 1);
        state = state8_advance(state, 0);
      }
    }
    EXPECT_EQ(shown.rank(), 8U);
  }
}

TEST(Precoding, NamesReadBackAndOthersAreRejected) {
  for (const Precoding precoding : {Precoding::none, Precoding::state8}) {
    EXPECT_EQ(parse_precoding(precoding_name(precoding)), precoding);
  }
  EXPECT_THROW(parse_precoding("state9"), InputError);
  EXPECT_THROW(parse_precoding(""), InputError);
}

TEST(Precoding, RejectsLanesThatAreNoPowerOfTwoUpTo512) {
  const PrecodingSchedule schedule(testing::weight_frozen_set(BlockLength(8), 4),
                                   Precoding::state8);
  BitString rows(8 * 1024);
  for (const unsigned lanes : {0U, 3U, 48U, 1024U}) {
    EXPECT_THROW(apply_precoding(schedule, lanes, rows.words()), std::invalid_argument);
  }
}

}  // namespace
}  // namespace frostline
