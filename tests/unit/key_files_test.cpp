// Keys in files: packed bytes and text.
#include "decode/exchange/key_files.h"

#include <gtest/gtest.h>

#include <functional>
#include <utility>

#include "polar/error.h"
#include "tests/support/folder.h"
#include "tests/support/random_bits.h"

namespace frostline {
namespace {

using testing::Folder;
using testing::Generator;
using testing::random_bits;

std::string error_of(const std::function<void()>& act) {
  try {
    act();
  } catch (const InputError& error) {
    return error.what();
  }
  return "no error";
}

BitString read_bits(const KeySource& key, std::uint64_t first, std::size_t count) {
  BitString bits(count);
  // What was there before must not show.
  for (std::uint64_t& word : bits.words()) word = ~std::uint64_t{0};
  key.read(first, count, bits.words());
  return bits;
}

// Bit i is bit 7 - i % 8 of byte i / 8 (designs/FORMATS.md).
std::string packed(const BitString& bits) {
  std::string bytes((bits.size() + 7) / 8, '\0');
  for (std::size_t i = 0; i < bits.size(); ++i) {
    if (bits[i]) bytes[i / 8] = static_cast<char>(bytes[i / 8] | (1 << (7 - i % 8)));
  }
  return bytes;
}

TEST(KeyFile, PackedHoldsTheMostSignificantBitFirst) {
  const Folder folder;
  folder.write("key", "\x80\x01");
  const auto key = open_key(folder.path("key"), KeyFormat::packed, std::nullopt);
  ASSERT_EQ(key->bits(), 16U);
  const BitString bits = read_bits(*key, 0, 16);
  EXPECT_EQ(bits_to_text(bits), "1000000000000001");
}

TEST(KeyFile, BothFormatsReadAnywhere) {
  const Folder folder;
  Generator generator(1);
  const BitString bits = random_bits(generator, 5003);
  folder.write("packed", packed(bits));
  folder.write("text", bits_to_text(bits));
  const auto packed_key = open_key(folder.path("packed"), KeyFormat::packed, 5003);
  const auto text_key = open_key(folder.path("text"), KeyFormat::text, std::nullopt);
  for (const KeySource* key : {packed_key.get(), text_key.get()}) {
    ASSERT_EQ(key->bits(), 5003U);
    for (const std::uint64_t first : {0, 8, 64, 1000, 4992}) {
      for (const std::size_t count : {0, 1, 7, 11, 64}) {
        if (first + count > 5003) continue;
        EXPECT_EQ(read_bits(*key, first, count), bits.slice(first, count)) << first;
      }
    }
    EXPECT_EQ(read_bits(*key, 0, 5003), bits);
  }
}

TEST(KeyFile, PackedPiecesStartAtWholeBytes) {
  const Folder folder;
  folder.write("key", "12345678");
  const auto key = open_key(folder.path("key"), KeyFormat::packed, std::nullopt);
  BitString bits(8);
  EXPECT_THROW(key->read(4, 8, bits.words()), std::invalid_argument);
}

TEST(KeyFile, BitsSayHowManyOfTheLastByteCount) {
  const Folder folder;
  folder.write("key", std::string(10, '\xff'));
  for (const std::uint64_t bits : {73, 79, 80}) {
    EXPECT_EQ(open_key(folder.path("key"), KeyFormat::packed, bits)->bits(), bits);
  }
  for (const std::uint64_t bits : {0, 72, 81, 1000}) {
    EXPECT_NE(error_of([&] {
                open_key(folder.path("key"), KeyFormat::packed, bits);
              }).find("holds 10 bytes, but " + std::to_string(bits) + " bits take"),
              std::string::npos);
  }
}

TEST(KeyFile, TextSkipsWhiteSpaceAndTellsWhereItIsNoText) {
  const Folder folder;
  folder.write("good", " 10\n\t1 1\r\n0 \n");
  const auto key = open_key(folder.path("good"), KeyFormat::text, std::nullopt);
  EXPECT_EQ(bits_to_text(read_bits(*key, 0, 5)), "10110");
  folder.write("bad", "1010\n10210\n");
  EXPECT_EQ(error_of([&] { open_key(folder.path("bad"), KeyFormat::text, std::nullopt); }),
            folder.path("bad") + ": line 2, column 3: '2' is neither 0 nor 1");
}

TEST(KeyFile, EmptyIsNoKey) {
  const Folder folder;
  folder.write("key", "");
  for (const KeyFormat format : {KeyFormat::packed, KeyFormat::text}) {
    EXPECT_NE(error_of([&] { open_key(folder.path("key"), format, std::nullopt); }).find("empty"),
              std::string::npos);
  }
}

TEST(KeyFile, ThatBecomesShorterIsSeen) {
  const Folder folder;
  folder.write("key", std::string(100, 'x'));
  const auto key = open_key(folder.path("key"), KeyFormat::packed, std::nullopt);
  folder.write("key", std::string(50, 'x'));
  BitString bits(800);
  EXPECT_NE(error_of([&] { key->read(0, 800, bits.words()); }).find("became shorter"),
            std::string::npos);
}

TEST(KeyFile, FormatsHaveTwoNames) {
  EXPECT_EQ(parse_key_format("packed"), KeyFormat::packed);
  EXPECT_EQ(parse_key_format("text"), KeyFormat::text);
  EXPECT_THROW(parse_key_format("Packed"), InputError);
  EXPECT_THROW(parse_key_format(""), InputError);
}

TEST(KeySink, WritesBothFormatsPieceByPiece) {
  Generator generator(2);
  const BitString bits = random_bits(generator, 8 * 40 + 3);
  MemorySink packed_bytes;
  MemorySink text_bytes;
  KeySink packed_sink(packed_bytes, KeyFormat::packed);
  KeySink text_sink(text_bytes, KeyFormat::text);
  for (const auto& [first, count] : {std::pair{0, 8}, {8, 0}, {8, 200}, {208, 115}}) {
    const BitString piece =
        bits.slice(static_cast<std::size_t>(first), static_cast<std::size_t>(count));
    packed_sink.write(piece.words(), piece.size());
    text_sink.write(piece.words(), piece.size());
  }
  packed_sink.finish();
  text_sink.finish();
  EXPECT_EQ(packed_sink.bits(), bits.size());
  EXPECT_EQ(text_sink.bits(), bits.size());
  EXPECT_EQ(std::string(packed_bytes.bytes().begin(), packed_bytes.bytes().end()), packed(bits));
  EXPECT_EQ(std::string(text_bytes.bytes().begin(), text_bytes.bytes().end()),
            bits_to_text(bits) + "\n");
  // Nothing can follow a piece that ends inside a byte.
  EXPECT_THROW(packed_sink.write(bits.words(), 8), std::invalid_argument);
}

}  // namespace
}  // namespace frostline
