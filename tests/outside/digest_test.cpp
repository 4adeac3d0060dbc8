// Digests and tags against the vectors of the standards that define them.
#include "polar/digest.h"

#include <gtest/gtest.h>

#include <boost/crc.hpp>
#include <cmath>
#include <cstdint>
#include <string>
#include <vector>

#include "polar/random.h"
#include "polar/simd.h"
#include "polar/tag.h"

namespace frostline {
namespace {

// Texts are cut at these places, to prove that a stream is digested as the whole is.
constexpr std::size_t kCuts[] = {0, 1, 7, 16, 33, 64};

TEST(Digest, Sha256ShowsTheExamplesOfFips180) {
  // FIPS 180-4 examples published by NIST: "abc", the 448-bit text, and a million "a". The digest
  // of the empty text is from memory.
  EXPECT_EQ(to_hex(sha256("abc")),
            "ba7816bf8f01cfea414140de5dae2223b00361a396177a9cb410ff61f20015ad");
  EXPECT_EQ(to_hex(sha256("abcdbcdecdefdefgefghfghighijhijkijkljklmklmnlmnomnopnopq")),
            "248d6a61d20638b8e5c026930c3e6039a33ce45964ff2167f6ecedd419db06c1");
  EXPECT_EQ(to_hex(sha256(std::string(1000000, 'a'))),
            "cdc76e5c9914fb9281a1c7e284d73e67f1809a48a497200e046d39ccc7112cd0");
  EXPECT_EQ(to_hex(sha256("")), "e3b0c44298fc1c149afbf4c8996fb92427ae41e4649b934ca495991b7852b855");
}

TEST(Digest, Sha256OfPiecesIsThatOfTheWhole) {
  const std::string text(100, 'x');
  for (const std::size_t cut : kCuts) {
    Sha256Hasher hasher;
    hasher.update(bytes_of(text.substr(0, cut)));
    hasher.update(bytes_of(text.substr(cut)));
    EXPECT_EQ(hasher.finish(), sha256(text));
  }
}

TEST(Digest, Crc32cShowsTheExamplesOfRfc3720) {
  // RFC 3720, appendix B.4, gives the CRC as bytes in order of transmission: least significant
  // first. The check value over "123456789" is the one of public catalogues of CRCs.
  std::vector<std::uint8_t> ascending(32);
  std::vector<std::uint8_t> descending(32);
  for (std::size_t i = 0; i < 32; ++i) {
    ascending[i] = static_cast<std::uint8_t>(i);
    descending[i] = static_cast<std::uint8_t>(31 - i);
  }
  EXPECT_EQ(crc32c(std::vector<std::uint8_t>(32, 0x00)), 0x8A9136AAU);  // aa 36 91 8a
  EXPECT_EQ(crc32c(std::vector<std::uint8_t>(32, 0xFF)), 0x62A8AB43U);  // 43 ab a8 62
  EXPECT_EQ(crc32c(ascending), 0x46DD794EU);                            // 4e 79 dd 46
  EXPECT_EQ(crc32c(descending), 0x113FDB5CU);                           // 5c db 3f 11
  EXPECT_EQ(crc32c(bytes_of("123456789")), 0xE3069283U);
  EXPECT_EQ(crc32c({}), 0U);
}

TEST(Digest, Crc32cOfPiecesIsThatOfTheWhole) {
  std::string text;
  for (int i = 0; i < 100; ++i) text += static_cast<char>(i * 37);
  for (const std::size_t cut : kCuts) {
    Crc32c crc;
    crc.update(bytes_of(text.substr(0, cut)));
    crc.update(bytes_of(text.substr(cut)));
    EXPECT_EQ(crc.value(), crc32c(bytes_of(text)));
  }
}

// boost::crc_32c's parameters, bit by bit, beside folding on every vector set, in pieces of any
// length.
TEST(Digest, Crc32cIsThatOfBoostOnEveryVectorSet) {
  std::vector<std::uint8_t> bytes(3000);
  RandomStream random(1, "crc", 0);
  for (std::uint8_t& byte : bytes) byte = static_cast<std::uint8_t>(random.next());
  for (const std::string& name : simd_names()) {
    force_simd(name);
    for (std::size_t first = 0; first < 20; ++first) {
      for (std::size_t count = 100; count < 700; count += 37) {
        boost::crc_basic<32> expected(0x1EDC6F41, 0xFFFFFFFF, 0xFFFFFFFF, true, true);
        expected.process_bytes(bytes.data() + first, 2 * count);
        Crc32c crc;
        crc.update({bytes.data() + first, count});
        crc.update({bytes.data() + first + count, count});
        ASSERT_EQ(crc.value(), expected.checksum()) << name << ", " << first << " + " << count;
      }
    }
  }
  reset_simd();
}

TEST(Digest, HexReadsBackAndNothingElse) {
  const std::vector<std::uint8_t> bytes = {0x00, 0x9a, 0xff, 0x10};
  EXPECT_EQ(to_hex(bytes), "009aff10");
  std::vector<std::uint8_t> back(4);
  EXPECT_TRUE(from_hex("009aff10", back));
  EXPECT_EQ(back, bytes);
  for (const char* hex : {"009aff1", "009aff1000", "009aff1g", "009AFF10", "0 9aff10", ""}) {
    EXPECT_FALSE(from_hex(hex, back)) << hex;
  }
}

Tag tag_of(const HashKey& key, const std::string& text, std::size_t cut) {
  TagHasher hasher(key);
  hasher.update(bytes_of(text.substr(0, cut)));
  hasher.update(bytes_of(text.substr(cut)));
  return hasher.finish();
}

TEST(Tag, ShowsThePoly1305ExampleOfRfc8439) {
  // RFC 8439, section 2.5.2.
  HashKey key;
  ASSERT_TRUE(from_hex("85d6be7857556d337f4452fe42d506a80103808afb0db2fd4abff6af4149f51b", key));
  const std::string text = "Cryptographic Forum Research Group";
  for (const std::size_t cut : {0, 1, 15, 16, 17, 34}) {
    EXPECT_EQ(to_hex(tag_of(key, text, cut)), "a8061dc1305136c6c22b8baf0c0127a9");
  }
}

TEST(Tag, DiffersWithTextAndKey) {
  const HashKey key = fresh_hash_key();
  const HashKey other = fresh_hash_key();
  EXPECT_NE(key, other);  // equal with chance 2^-256
  EXPECT_TRUE(tags_equal(tag_of(key, "block", 0), tag_of(key, "block", 3)));
  EXPECT_FALSE(tags_equal(tag_of(key, "block", 0), tag_of(key, "blocl", 0)));
  EXPECT_FALSE(tags_equal(tag_of(key, "block", 0), tag_of(other, "block", 0)));
}

TEST(Tag, CollisionBoundIsThatOfTheorem33) {
  // D. J. Bernstein, "The Poly1305-AES message-authentication code", FSE 2005, theorem 3.3:
  // 8 ceil(L / 16) / 2^106 for texts of at most L bytes.
  EXPECT_EQ(tag_collision_bound(1), std::pow(2.0, -103));
  EXPECT_EQ(tag_collision_bound(16), std::pow(2.0, -103));
  EXPECT_EQ(tag_collision_bound(17), std::pow(2.0, -102));
  EXPECT_EQ(tag_collision_bound(std::uint64_t{1} << 23), std::pow(2.0, -84));
}

}  // namespace
}  // namespace frostline
