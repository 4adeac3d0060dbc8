#include "polar/bits.h"

#include <gtest/gtest.h>

#include <cstdint>
#include <stdexcept>
#include <string>
#include <vector>

#include "polar/error.h"
#include "polar/simd.h"
#include "tests/support/random_bits.h"

namespace frostline {
namespace {

using testing::Generator;

// Calls with every size near the borders of bytes and words, and some larger ones.
template <typename Check>
void for_sizes(Check check) {
  for (std::size_t bits = 0; bits <= 200; ++bits) check(bits);
  for (const std::size_t bits : {255, 256, 257, 511, 512, 1000, 4096, 4099}) check(bits);
}

void expect_zero_beyond_size(const BitString& bits) {
  ASSERT_EQ(bits.words().size(), (bits.size() + 63) / 64);
  if (bits.size() % 64 != 0) {
    ASSERT_EQ(bits.words()[bits.size() / 64] >> (bits.size() % 64), 0U);
  }
}

TEST(BitString, BitIIsBitIModulo64OfItsWord) {
  Generator generator(1);
  for_sizes([&](std::size_t size) {
    BitString bits(size);
    std::vector<bool> model(size);
    for (std::size_t step = 0; step < 2 * size; ++step) {
      const std::size_t i = generator() % size;
      if (step % 3 == 0) {
        bits.flip(i);
        model[i] = !model[i];
      } else {
        bits.set(i, step % 3 == 1);
        model[i] = step % 3 == 1;
      }
    }
    std::size_t ones = 0;
    for (std::size_t i = 0; i < size; ++i) {
      ASSERT_EQ(bits[i], model[i]);
      ASSERT_EQ((bits.words()[i / 64] >> (i % 64)) & 1U, model[i] ? 1U : 0U);
      ones += model[i];
    }
    ASSERT_EQ(bits.count(), ones);
    ASSERT_EQ(bits.empty(), size == 0);
    expect_zero_beyond_size(bits);
  });
}

TEST(BitString, SumIsBitByBitAndNeedsEqualSizes) {
  Generator generator(2);
  for_sizes([&](std::size_t size) {
    const BitString a = testing::random_bits(generator, size);
    const BitString b = testing::random_bits(generator, size);
    BitString sum = a;
    sum ^= b;
    for (std::size_t i = 0; i < size; ++i) ASSERT_EQ(sum[i], a[i] != b[i]);
    expect_zero_beyond_size(sum);
    sum ^= b;
    ASSERT_EQ(sum, a);
    BitString longer(size + 1);
    ASSERT_THROW(longer ^= a, std::invalid_argument);
  });
}

TEST(BitString, StringsOfUnequalSizeDiffer) {
  EXPECT_NE(BitString(63), BitString(64));
  EXPECT_EQ(BitString(63), BitString(63));
}

TEST(BitString, AppendAndSliceCutAnywhere) {
  Generator generator(3);
  for (int trial = 0; trial < 400; ++trial) {
    const BitString a = testing::random_bits(generator, generator() % 200);
    const BitString b = testing::random_bits(generator, generator() % 200);
    BitString joined = a;
    joined.append(b);
    joined.append(true);
    joined.append(false);
    ASSERT_EQ(joined.size(), a.size() + b.size() + 2);
    expect_zero_beyond_size(joined);
    for (std::size_t i = 0; i < a.size(); ++i) ASSERT_EQ(joined[i], a[i]);
    for (std::size_t i = 0; i < b.size(); ++i) ASSERT_EQ(joined[a.size() + i], b[i]);
    ASSERT_TRUE(joined[joined.size() - 2]);
    ASSERT_FALSE(joined[joined.size() - 1]);
    ASSERT_EQ(joined.slice(0, a.size()), a);
    ASSERT_EQ(joined.slice(a.size(), b.size()), b);
    expect_zero_beyond_size(joined.slice(a.size() / 2, b.size()));
  }
}

TEST(CountOnes, CountsBitByBitOnEveryVectorSet) {
  Generator generator(41);
  for (const std::string& name : simd_names()) {
    force_simd(name);
    for (std::size_t bits = 0; bits < 1500; bits += 63) {
      const BitString string = testing::random_bits(generator, bits);
      std::size_t ones = 0;
      for (std::size_t i = 0; i < bits; ++i) ones += string[i];
      EXPECT_EQ(count_ones(string.words()), ones) << name << ", " << bits << " bits";
    }
  }
  reset_simd();
}

TEST(CopyBits, WritesTheRangeAndNothingElse) {
  Generator generator(4);
  for (int trial = 0; trial < 4000; ++trial) {
    const std::size_t count = generator() % (trial % 2 == 0 ? 80 : 600);
    // Aligned ranges too, which take another way.
    const std::size_t step = trial % 3 == 0 ? 64 : 1;
    const std::size_t from_first = generator() % 130 / step * step;
    const std::size_t to_first = generator() % 130 / step * step;
    const BitString from = testing::random_bits(generator, from_first + count + generator() % 70);
    const BitString before = testing::random_bits(generator, to_first + count + generator() % 70);
    BitString to = before;
    copy_bits(from.words(), from_first, to.words(), to_first, count);
    for (std::size_t i = 0; i < to.size(); ++i) {
      const bool inside = i >= to_first && i < to_first + count;
      ASSERT_EQ(to[i], inside ? from[i - to_first + from_first] : before[i]);
    }
    expect_zero_beyond_size(to);
  }
}

TEST(PackedBits, AreMostSignificantFirstWithZeroPadding) {
  Generator generator(5);
  for_sizes([&](std::size_t size) {
    const BitString bits = testing::random_bits(generator, size);
    const KeyBytes packed = bits_to_packed(bits);
    ASSERT_EQ(packed.size(), (size + 7) / 8);
    for (std::size_t i = 0; i < 8 * packed.size(); ++i) {
      const bool bit = (packed[i / 8] >> (7 - i % 8)) & 1;
      ASSERT_EQ(bit, i < size && bits[i]);
    }
    ASSERT_EQ(bits_from_packed(packed, size), bits);
  });
}

TEST(PackedBits, IgnorePadBitsAndLeaveOtherWordsAlone) {
  Generator generator(6);
  for_sizes([&](std::size_t size) {
    std::vector<std::uint8_t> packed((size + 7) / 8 + 2);
    for (std::uint8_t& byte : packed) byte = static_cast<std::uint8_t>(generator());
    const BitString bits = bits_from_packed(packed, size);
    for (std::size_t i = 0; i < size; ++i) {
      ASSERT_EQ(bits[i], ((packed[i / 8] >> (7 - i % 8)) & 1) != 0);
    }
    expect_zero_beyond_size(bits);
    if (size > 0) {
      ASSERT_THROW(
          bits_from_packed(Span<const std::uint8_t>(packed).subspan(0, (size - 1) / 8), size),
          std::invalid_argument);
    }
  });
}

TEST(TextBits, ReadBackAndSkipWhiteSpace) {
  Generator generator(7);
  for_sizes([&](std::size_t size) {
    const BitString bits = testing::random_bits(generator, size);
    std::string text = bits_to_text(bits);
    ASSERT_EQ(text.size(), size);
    for (std::size_t i = 0; i < size; ++i) ASSERT_EQ(text[i], bits[i] ? '1' : '0');
    ASSERT_EQ(bits_from_text(text, "key"), bits);
    for (std::size_t i = text.size(); i > 0; i -= std::min<std::size_t>(i, 7)) {
      text.insert(i, i % 2 == 0 ? " \r\n" : "\t");
    }
    ASSERT_EQ(bits_from_text(text, "key"), bits);
  });
}

std::string message_of(const std::string& text) {
  try {
    bits_from_text(text, "alice.txt");
  } catch (const InputError& error) {
    return error.what();
  }
  return "";
}

TEST(TextBits, OtherCharactersAreLocated) {
  EXPECT_NE(message_of("0101\n01x1\n").find("alice.txt: line 2, column 3: 'x'"), std::string::npos);
  EXPECT_NE(message_of("2").find("line 1, column 1"), std::string::npos);
  EXPECT_NE(message_of(std::string("01\0", 3)).find("line 1, column 3: byte 0x00"),
            std::string::npos);
  EXPECT_NE(message_of("0\n\n\xff").find("line 3, column 1: byte 0xff"), std::string::npos);
}

TEST(HexBits, DigitKCoversBits4kTo4kPlus3MostSignificantFirst) {
  Generator generator(8);
  for_sizes([&](std::size_t size) {
    const BitString bits = testing::random_bits(generator, size);
    const std::string hex = bits_to_hex(bits);
    ASSERT_EQ(hex.size(), (size + 3) / 4);
    for (std::size_t k = 0; k < hex.size(); ++k) {
      unsigned digit = 0;
      for (std::size_t i = 4 * k; i < 4 * k + 4; ++i) {
        digit = 2 * digit + (i < size && bits[i] ? 1U : 0U);
      }
      ASSERT_EQ(hex[k], "0123456789abcdef"[digit]);
    }
    ASSERT_EQ(bits_from_hex(hex, size, "mask"), bits);
  });
  EXPECT_EQ(bits_from_hex("aF", 8, "mask"), bits_from_text("10101111", "mask"));
}

TEST(HexBits, WrongDigitsOrTooManyOrTooFewAreRejected) {
  EXPECT_THROW(bits_from_hex("0g", 8, "mask"), InputError);
  EXPECT_THROW(bits_from_hex("0 ", 8, "mask"), InputError);
  EXPECT_THROW(bits_from_hex("0", 8, "mask"), InputError);
  EXPECT_THROW(bits_from_hex("000", 8, "mask"), InputError);
  EXPECT_THROW(bits_from_hex("1", 3, "mask"), InputError);  // a bit beyond the end
  EXPECT_NO_THROW(bits_from_hex("e", 3, "mask"));
}

}  // namespace
}  // namespace frostline
