// Check bits against published check values, the CRC of the Boost library, and ranks by m4ri.
#include "polar/check_bits.h"

#include <gtest/gtest.h>

#include <boost/crc.hpp>
#include <stdexcept>
#include <string_view>

#include "polar/error.h"
#include "polar/simd.h"
#include "polar/syndrome.h"
#include "tests/support/gf2_matrix.h"
#include "tests/support/random_bits.h"

namespace frostline {
namespace {

using testing::Generator;

constexpr unsigned kWidths[] = {6, 8, 11, 16, 24};

// The bits of a text, first byte first, most significant bit first.
BitString message_bits(std::string_view text) {
  BitString bits(8 * text.size());
  for (std::size_t i = 0; i < bits.size(); ++i) {
    bits.set(i, (static_cast<unsigned char>(text[i / 8]) >> (7 - i % 8)) & 1);
  }
  return bits;
}

template <std::size_t kWidth>
std::uint32_t boost_crc(const BitString& bits, std::uint32_t generator) {
  boost::crc_basic<kWidth> crc(
      static_cast<typename boost::crc_basic<kWidth>::value_type>(generator));
  for (std::size_t i = 0; i < bits.size(); ++i) crc.process_bit(bits[i]);
  return static_cast<std::uint32_t>(crc.checksum());
}

// boost::crc_basic takes its generator from here, not from the code under test.
std::uint32_t boost_crc(const BitString& bits, unsigned width) {
  switch (width) {
    case 6:
      return boost_crc<6>(bits, 0x21);  // 3GPP TS 38.212 clause 5.1, CRC6
    case 8:
      return boost_crc<8>(bits, 0x1D);  // SAE J1850
    case 11:
      return boost_crc<11>(bits, 0x621);  // 3GPP TS 38.212 clause 5.1, CRC11
    case 16:
      return boost_crc<16>(bits, 0xC867);  // 3GPP2 C.S0002
    case 24:
      return boost_crc<24>(bits, 0xB2B117);  // 3GPP TS 38.212 clause 5.1, CRC24C
    default:
      throw std::invalid_argument("width");
  }
}

TEST(CheckBits, ShowThePublishedCheckValues) {
  // Register 0 at start, most significant bit first, no final XOR. Generators from the text of
  // 3GPP TS 38.212 clause 5.1; check values as public catalogues of CRCs give them.
  const BitString digits = message_bits("123456789");
  EXPECT_EQ(check_bits(digits, 6), 0x15U);
  EXPECT_EQ(check_bits(digits, 11), 0x5CAU);
  EXPECT_EQ(check_bits(digits, 24), 0xF48279U);
}

TEST(CheckBits, EqualBoostCrcOnRandomStringsOfManyLengths) {
  Generator generator(1);
  for (std::size_t bytes = 1; bytes <= 200; ++bytes) {
    const BitString bits = testing::random_bits(generator, 8 * bytes);
    for (const unsigned width : kWidths) {
      ASSERT_EQ(check_bits(bits, width), boost_crc(bits, width))
          << bytes << " bytes, width " << width;
    }
  }
}

TEST(CheckBits, OfARangeEqualThoseOfItsCopy) {
  Generator generator(2);
  const BitString bits = testing::random_bits(generator, 1024);
  for (std::size_t first = 0; first <= 136; first += 8) {
    for (std::size_t count = 0; count <= 280; count += 8) {
      for (const unsigned width : kWidths) {
        ASSERT_EQ(check_bits(bits.words(), first, count, width),
                  boost_crc(bits.slice(first, count), width));
      }
    }
  }
}

TEST(CheckBits, GeneratorsLackTheFactorXPlusOne) {
  // X + 1 divides a polynomial over GF(2) exactly when its number of terms is even.
  for (const unsigned width : kWidths) {
    unsigned terms = 1;  // X^width
    for (std::uint32_t rest = check_generator(width); rest != 0; rest &= rest - 1) ++terms;
    EXPECT_EQ(terms % 2, 1U) << "width " << width;
    EXPECT_EQ(check_generator(width) & 1U, 1U);
    EXPECT_LT(check_generator(width), std::uint32_t{1} << width);
  }
}

// [H; CRC] column by column: the syndrome and the check bits of each unit vector.
std::size_t rank_with_check_bits(const FrozenSet& frozen, Precoding precoding, unsigned width) {
  const std::size_t length = frozen.block_length().bits();
  const SyndromeFormer former(frozen, precoding);
  testing::Gf2Matrix matrix(frozen.frozen_count() + width, length);
  for (std::size_t i = 0; i < length; ++i) {
    BitString unit(length);
    unit.set(i, true);
    const BitString syndrome = former.syndrome(unit);
    for (std::size_t row = 0; row < syndrome.size(); ++row) matrix.set(row, i, syndrome[row]);
    const std::uint32_t check = boost_crc(unit, width);
    for (unsigned k = 0; k < width; ++k) matrix.set(syndrome.size() + k, i, (check >> k) & 1U);
  }
  return matrix.rank();
}

TEST(CheckBits, AddTheirFullRankToDesignLikeFrozenSets) {
  for (unsigned log2 = 6; log2 <= 10; ++log2) {
    const BlockLength length = BlockLength::from_log2(log2);
    for (const unsigned width : kWidths) {
      for (const double share : {0.1, 0.25, 0.5}) {
        const auto count = static_cast<std::size_t>(share * static_cast<double>(length.bits()));
        const FrozenSet frozen = testing::weight_frozen_set(length, count);
        ASSERT_TRUE(frozen.is_frozen(0));
        for (const Precoding precoding : {Precoding::none, Precoding::state8}) {
          EXPECT_EQ(rank_with_check_bits(frozen, precoding, width), count + width)
              << "N = " << length.bits() << ", M = " << count << ", width " << width;
        }
      }
    }
  }
}

TEST(CheckBits, AddTheirFullRankToRandomFrozenSetsWithUZero) {
  Generator generator(3);
  for (unsigned log2 = 7; log2 <= 10; ++log2) {
    const BlockLength length = BlockLength::from_log2(log2);
    for (const unsigned width : kWidths) {
      for (int trial = 0; trial < 3; ++trial) {
        BitString mask = testing::random_bits(generator, length.bits(), 0.15 + 0.15 * trial);
        mask.set(0, true);
        const FrozenSet frozen(length, mask);
        EXPECT_EQ(rank_with_check_bits(frozen, Precoding::state8, width),
                  frozen.frozen_count() + width)
            << "N = " << length.bits() << ", width " << width;
      }
    }
  }
}

TEST(CheckBits, DefaultsGrowWithTheBlock) {
  EXPECT_EQ(default_check_bits(BlockLength::from_log2(3)), 11U);
  EXPECT_EQ(default_check_bits(BlockLength::from_log2(11)), 11U);
  EXPECT_EQ(default_check_bits(BlockLength::from_log2(12)), 16U);
  EXPECT_EQ(default_check_bits(BlockLength::from_log2(13)), 16U);
  EXPECT_EQ(default_check_bits(BlockLength::from_log2(14)), 24U);
  EXPECT_EQ(default_check_bits(BlockLength::from_log2(24)), 24U);
}

TEST(CheckBits, OtherWidthsAndPartialBytesAreRejected) {
  for (unsigned width = 0; width <= 33; ++width) {
    const bool valid =
        width == 0 || width == 6 || width == 8 || width == 11 || width == 16 || width == 24;
    EXPECT_EQ(is_check_width(width), valid);
    if (valid) {
      EXPECT_NO_THROW(require_check_width(width));
    } else {
      EXPECT_THROW(require_check_width(width), InputError);
      EXPECT_THROW(check_generator(width), std::invalid_argument);
    }
  }
  const BitString bits(64);
  EXPECT_EQ(check_bits(bits, 0), 0U);
  EXPECT_THROW(check_bits(bits.words(), 0, 12, 16), std::invalid_argument);
  EXPECT_THROW(check_bits(bits.words(), 4, 16, 16), std::invalid_argument);
}

// Folding by carry-less multiplication and the tables, at lengths around those where each begins.
TEST(CheckBits, AreThoseOfBoostOnEveryVectorSetAtEveryLength) {
  Generator generator(43);
  for (const std::string& name : simd_names()) {
    force_simd(name);
    for (const unsigned width : kWidths) {
      for (const std::size_t first : {0, 8, 64, 192}) {
        for (std::size_t count = 968; count < 1800; count += 56) {
          const BitString bits = testing::random_bits(generator, first + count);
          BitString range(count);
          copy_bits(bits.words(), first, range.words(), 0, count);
          ASSERT_EQ(check_bits(bits.words(), first, count, width), boost_crc(range, width))
              << name << ", width " << width << ", bits " << first << " + " << count;
        }
      }
    }
  }
  reset_simd();
}

}  // namespace
}  // namespace frostline
