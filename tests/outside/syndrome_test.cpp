// The syndrome against a parity-check matrix H that is built from the definitions alone: G as a
// Kronecker power, precoding as a recursion over rows of G, products and ranks by the m4ri library.
#include "polar/syndrome.h"

#include <gtest/gtest.h>

#include <array>
#include <stdexcept>
#include <vector>

#include "polar/check_bits.h"
#include "polar/transform.h"
#include "tests/support/gf2_matrix.h"
#include "tests/support/random_bits.h"

namespace frostline {
namespace {

using testing::Generator;
using testing::Gf2Matrix;

constexpr Precoding kPrecodings[] = {Precoding::none, Precoding::state8};

// A linear function of x: which of the x_j are summed.
using Functional = std::vector<bool>;

void add_to(Functional& sum, const Functional& other) {
  for (std::size_t j = 0; j < sum.size(); ++j) sum[j] = sum[j] != other[j];
}

// Entry (row, column) of the n-fold Kronecker power of F = [1 0; 1 1]: the product of F's entries
// over the binary digits.
bool kronecker_power_entry(std::size_t row, std::size_t column, unsigned log2) {
  constexpr bool kF[2][2] = {{true, false}, {true, true}};
  bool entry = true;
  for (unsigned k = 0; k < log2; ++k) entry = entry && kF[(row >> k) & 1U][(column >> k) & 1U];
  return entry;
}

// u_i as a function of x, by u = x G: column i of G.
std::vector<Functional> functionals_of_u(BlockLength length) {
  std::vector<Functional> u(length.bits(), Functional(length.bits()));
  for (std::size_t i = 0; i < length.bits(); ++i) {
    for (std::size_t j = 0; j < length.bits(); ++j) {
      u[i][j] = kronecker_power_entry(j, i, length.log2());
    }
  }
  return u;
}

// The recursion of "state8", with functions of x in place of bits.
void precode(const FrozenSet& frozen, std::vector<Functional>& u) {
  const std::size_t bytes = u.size() / 8;
  std::vector<int> frozen_in(bytes);
  for (std::size_t i = 0; i < u.size(); ++i) frozen_in[i / 8] += frozen.is_frozen(i);
  std::array<Functional, 8> state;
  state.fill(Functional(u.size()));
  for (std::size_t j = 0; j < bytes; ++j) {
    const int here = frozen_in[j];
    const int next = j + 1 < bytes ? frozen_in[j + 1] : here;
    const bool mixed = here > 0 && here < 8;
    if (mixed || (here == 8 && next < 8)) {
      for (std::size_t k = 0; k < 8; ++k) {
        if (!frozen.is_frozen(8 * j + k)) continue;
        for (std::size_t b = 0; b < 8; ++b) {
          if ((kState8Rows[k] >> b) & 1) add_to(u[8 * j + k], state[b]);
        }
      }
    }
    if (mixed || (here == 0 && next > 0)) {
      // x^8 = x^4 + x^3 + x^2 + 1.
      const std::array<Functional, 8> old = state;
      for (std::size_t k = 0; k < 8; ++k) state[k] = old[(k + 7) % 8];
      for (const std::size_t k : {2, 3, 4}) add_to(state[k], old[7]);
      for (std::size_t k = 0; k < 8; ++k) {
        if (!frozen.is_frozen(8 * j + k)) add_to(state[k], u[8 * j + k]);
      }
    }
  }
}

// H: one row a frozen index, ascending; with room for more rows below.
void fill_parity_checks(const FrozenSet& frozen, Precoding precoding, Gf2Matrix& h) {
  std::vector<Functional> u = functionals_of_u(frozen.block_length());
  if (precoding == Precoding::state8) precode(frozen, u);
  std::size_t row = 0;
  for (std::size_t i = 0; i < u.size(); ++i) {
    if (!frozen.is_frozen(i)) continue;
    for (std::size_t j = 0; j < u.size(); ++j) h.set(row, j, u[i][j]);
    ++row;
  }
}

std::vector<FrozenSet> some_frozen_sets(Generator& generator, BlockLength length) {
  return {testing::random_frozen_set(generator, length, 0.3),
          testing::random_frozen_set(generator, length, 0.7),
          testing::bytewise_frozen_set(generator, length),
          testing::weight_frozen_set(length, length.bits() * 3 / 8)};
}

TEST(Syndrome, EqualsHTimesX) {
  Generator generator(1);
  for (unsigned log2 = 3; log2 <= 10; ++log2) {
    const BlockLength length = BlockLength::from_log2(log2);
    for (const FrozenSet& frozen : some_frozen_sets(generator, length)) {
      if (frozen.frozen_count() == 0) continue;
      for (const Precoding precoding : kPrecodings) {
        Gf2Matrix h(frozen.frozen_count(), length.bits());
        fill_parity_checks(frozen, precoding, h);
        const SyndromeFormer former(frozen, precoding);
        const std::size_t blocks = 16;
        Gf2Matrix x(length.bits(), blocks);
        std::vector<BitString> strings;
        for (std::size_t b = 0; b < blocks; ++b) {
          strings.push_back(testing::random_bits(generator, length.bits()));
          for (std::size_t i = 0; i < length.bits(); ++i) x.set(i, b, strings[b][i]);
        }
        Gf2Matrix product(frozen.frozen_count(), blocks);
        mzd_mul(product.get(), h.get(), x.get(), 0);
        for (std::size_t b = 0; b < blocks; ++b) {
          const BitString syndrome = former.syndrome(strings[b]);
          ASSERT_EQ(syndrome.size(), frozen.frozen_count());
          for (std::size_t row = 0; row < syndrome.size(); ++row) {
            ASSERT_EQ(syndrome[row], product.get(row, b))
                << "N = " << length.bits() << ", row " << row << ", " << precoding_name(precoding);
          }
        }
      }
    }
  }
}

TEST(Syndrome, HasRankM) {
  Generator generator(2);
  for (unsigned log2 = 3; log2 <= 10; ++log2) {
    const BlockLength length = BlockLength::from_log2(log2);
    for (const FrozenSet& frozen : some_frozen_sets(generator, length)) {
      if (frozen.frozen_count() == 0) continue;
      for (const Precoding precoding : kPrecodings) {
        Gf2Matrix h(frozen.frozen_count(), length.bits());
        fill_parity_checks(frozen, precoding, h);
        EXPECT_EQ(h.rank(), frozen.frozen_count());
      }
    }
  }
}

// x^k modulo the generator, written out: the check bits of a unit vector with k positions after it.
std::uint32_t power_modulo(std::size_t k, std::uint32_t generator, unsigned width) {
  std::uint32_t remainder = generator;  // x^width
  for (std::size_t step = 0; step < k; ++step) {
    const bool top = (remainder >> (width - 1)) & 1U;
    remainder = (remainder << 1) & ((1U << width) - 1);
    if (top) remainder ^= generator;
  }
  return remainder;
}

TEST(Syndrome, AndCheckBitsTogetherHaveRankMPlusC) {
  Generator generator(3);
  constexpr std::pair<unsigned, std::uint32_t> kGenerators[] = {
      {6, 0x21}, {8, 0x1D}, {11, 0x621}, {16, 0xC867}, {24, 0xB2B117}};
  for (unsigned log2 = 7; log2 <= 10; ++log2) {
    const BlockLength length = BlockLength::from_log2(log2);
    for (FrozenSet frozen : some_frozen_sets(generator, length)) {
      if (!frozen.is_frozen(0)) {
        BitString mask = frozen.mask();
        mask.set(0, true);
        frozen = FrozenSet(length, mask);
      }
      for (const auto& [width, polynomial] : kGenerators) {
        if (frozen.frozen_count() + width + 20 > length.bits()) continue;
        for (const Precoding precoding : kPrecodings) {
          Gf2Matrix all(frozen.frozen_count() + width, length.bits());
          fill_parity_checks(frozen, precoding, all);
          for (std::size_t i = 0; i < length.bits(); ++i) {
            const std::uint32_t check = power_modulo(length.bits() - 1 - i, polynomial, width);
            BitString unit(length.bits());
            unit.set(i, true);
            ASSERT_EQ(check_bits(unit, width), check);
            for (unsigned k = 0; k < width; ++k) {
              all.set(frozen.frozen_count() + k, i, (check >> k) & 1U);
            }
          }
          EXPECT_EQ(all.rank(), frozen.frozen_count() + width)
              << "N = " << length.bits() << ", width " << width;
        }
      }
    }
  }
}

TEST(Syndrome, IsLinear) {
  Generator generator(4);
  for (unsigned log2 = 3; log2 <= 12; ++log2) {
    const BlockLength length = BlockLength::from_log2(log2);
    for (const FrozenSet& frozen : some_frozen_sets(generator, length)) {
      for (const Precoding precoding : kPrecodings) {
        const SyndromeFormer former(frozen, precoding);
        const BitString a = testing::random_bits(generator, length.bits());
        const BitString b = testing::random_bits(generator, length.bits());
        BitString sum = a;
        sum ^= b;
        BitString sum_of_syndromes = former.syndrome(a);
        sum_of_syndromes ^= former.syndrome(b);
        ASSERT_EQ(former.syndrome(sum), sum_of_syndromes);
      }
    }
  }
}

TEST(Syndrome, OfLanesIsThatOfEachBlock) {
  Generator generator(5);
  for (unsigned lanes = 1; lanes <= 512; lanes *= 2) {
    for (unsigned log2 = 3; log2 <= 9; log2 += 2) {
      const BlockLength length = BlockLength::from_log2(log2);
      const SyndromeFormer former(testing::random_frozen_set(generator, length, 0.4),
                                  Precoding::state8);
      const BitString rows = testing::random_bits(generator, length.bits() * lanes);
      BitString shown = rows;
      former.to_public_rows(shown.words(), lanes);
      const BitString syndromes = former.gather(shown.words(), lanes);
      ASSERT_EQ(syndromes.size(), former.frozen().frozen_count() * lanes);
      for (unsigned lane = 0; lane < lanes; lane += 1 + lanes / 16) {
        BitString block(length.bits());
        for (std::size_t i = 0; i < length.bits(); ++i) block.set(i, rows[i * lanes + lane]);
        const BitString syndrome = former.syndrome(block);
        for (std::size_t row = 0; row < syndrome.size(); ++row) {
          ASSERT_EQ(syndromes[row * lanes + lane], syndrome[row]);
        }
      }
      // Scattered, the frozen rows come back, and zeros elsewhere.
      BitString scattered = testing::random_bits(generator, length.bits() * lanes);
      former.scatter(syndromes, lanes, scattered.words());
      for (std::size_t i = 0; i < length.bits() * lanes; ++i) {
        ASSERT_EQ(scattered[i], former.frozen().is_frozen(i / lanes) && shown[i]);
      }
    }
  }
}

TEST(Syndrome, RejectsWrongLengths) {
  const SyndromeFormer former(testing::weight_frozen_set(BlockLength(64), 20), Precoding::none);
  EXPECT_THROW(former.syndrome(BitString(32)), std::invalid_argument);
  BitString rows(64 * 2);
  EXPECT_THROW(former.scatter(BitString(20), 2, rows.words()), std::invalid_argument);
}

}  // namespace
}  // namespace frostline
