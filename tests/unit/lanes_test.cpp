#include "polar/lanes.h"

#include <gtest/gtest.h>

#include <stdexcept>
#include <string>

#include "polar/simd.h"
#include "tests/support/random_bits.h"

namespace frostline {
namespace {

using testing::Generator;

TEST(Lanes, BitIBPlusLOfRowsIsBitLNPlusIOfBlocks) {
  Generator generator(1);
  for (unsigned log2 = 3; log2 <= 14; ++log2) {
    const BlockLength length = BlockLength::from_log2(log2);
    for (unsigned lanes = 1; lanes <= 512; lanes *= 2) {
      const std::size_t bits = length.bits() * lanes;
      if (bits > (std::size_t{1} << 20)) continue;
      const BitString rows = testing::random_bits(generator, bits);
      // What stood there before must not matter, pad bits of a short string included.
      BitString blocks(bits);
      for (std::uint64_t& word : blocks.words()) word = ~std::uint64_t{0};
      lanes_to_blocks(rows.words(), length, lanes, blocks.words());
      for (std::size_t i = 0; i < length.bits(); ++i) {
        for (std::size_t l = 0; l < lanes; ++l) {
          ASSERT_EQ(blocks[l * length.bits() + i], rows[i * lanes + l])
              << "N = " << length.bits() << ", " << lanes << " lanes";
        }
      }
      if (bits < 64) {
        ASSERT_EQ(blocks.words()[0] >> bits, 0U);
      }
      BitString back(bits);
      for (std::uint64_t& word : back.words()) word = ~std::uint64_t{0};
      blocks_to_lanes(blocks.words(), length, lanes, back.words());
      ASSERT_EQ(back, rows) << "N = " << length.bits() << ", " << lanes << " lanes";
    }
  }
}

// What each vector set makes of a batch equals what the plainest does, at the lengths where groups
// of rows begin to go side by side.
TEST(Lanes, AllVectorSetsGiveTheSameBits) {
  Generator generator(2);
  for (const unsigned log2 : {8U, 9U, 10U, 13U}) {
    const BlockLength length = BlockLength::from_log2(log2);
    for (unsigned lanes = 1; lanes <= 512; lanes *= 2) {
      const std::size_t bits = length.bits() * lanes;
      const BitString rows = testing::random_bits(generator, bits);
      for (const std::string& name : simd_names()) {
        force_simd(name);
        BitString blocks(bits);
        lanes_to_blocks(rows.words(), length, lanes, blocks.words());
        for (std::size_t k = 0; k < 200; ++k) {
          const std::size_t i = generator() % length.bits();
          const std::size_t l = generator() % lanes;
          ASSERT_EQ(blocks[l * length.bits() + i], rows[i * lanes + l]) << name;
        }
        BitString back(bits);
        blocks_to_lanes(blocks.words(), length, lanes, back.words());
        ASSERT_EQ(back, rows) << name << ", N = " << length.bits() << ", " << lanes << " lanes";
      }
    }
  }
  reset_simd();
}

TEST(Lanes, OtherNumbersOfLanesAndOtherSizesAreRejected) {
  const BitString rows(64 * 512);
  BitString blocks(64 * 512);
  for (const unsigned lanes : {0U, 3U, 511U, 1024U}) {
    EXPECT_THROW(lanes_to_blocks(rows.words(), BlockLength(64), lanes, blocks.words()),
                 std::invalid_argument);
    EXPECT_THROW(blocks_to_lanes(rows.words(), BlockLength(64), lanes, blocks.words()),
                 std::invalid_argument);
  }
  EXPECT_THROW(lanes_to_blocks(rows.words(), BlockLength(128), 512, blocks.words()),
               std::invalid_argument);
}

}  // namespace
}  // namespace frostline
