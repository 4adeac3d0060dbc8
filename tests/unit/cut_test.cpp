// The cut of a key into batches and blocks.
#include "decode/exchange/cut.h"

#include <gtest/gtest.h>

#include <vector>

#include "polar/error.h"

namespace frostline {
namespace {

// designs/FORMATS.md, "Cut", word for word.
std::vector<Batch> cut_by_the_rule(std::uint64_t block_length, std::uint64_t key_bits,
                                   unsigned lanes) {
  std::vector<Batch> batches;
  std::uint64_t rest = key_bits;
  std::uint64_t blocks = 0;
  while (rest >= block_length) {
    unsigned largest = 1;
    for (unsigned power = 1; power <= lanes; power *= 2) {
      if (block_length * power <= rest) largest = power;
    }
    batches.push_back({key_bits - rest, blocks, largest});
    blocks += largest;
    rest -= block_length * largest;
  }
  return batches;
}

void expect_same(std::uint64_t block_length, std::uint64_t key_bits, unsigned lanes) {
  const Cut cut(BlockLength(block_length), key_bits, lanes);
  const std::vector<Batch> expected = cut_by_the_rule(block_length, key_bits, lanes);
  ASSERT_EQ(cut.batch_count(), expected.size()) << key_bits << " bits, lanes " << lanes;
  std::uint64_t blocks = 0;
  for (std::size_t i = 0; i < expected.size(); ++i) {
    const Batch batch = cut.batch(i);
    ASSERT_EQ(batch.first_bit, expected[i].first_bit) << key_bits << " bits, batch " << i;
    ASSERT_EQ(batch.first_block, expected[i].first_block) << key_bits << " bits, batch " << i;
    ASSERT_EQ(batch.lanes, expected[i].lanes) << key_bits << " bits, batch " << i;
    blocks += batch.lanes;
  }
  EXPECT_EQ(cut.block_count(), blocks);
  EXPECT_EQ(cut.rest_bits(), key_bits - blocks * block_length);
  EXPECT_LT(cut.rest_bits(), block_length);
}

TEST(Cut, FollowsTheRuleForEveryLengthAndAllLanes) {
  for (unsigned lanes = 1; lanes <= 512; lanes *= 2) {
    for (std::uint64_t bits = 0; bits <= 8 * 600; bits += (bits < 300 ? 1 : 37)) {
      expect_same(8, bits, lanes);
    }
    for (const std::uint64_t blocks :
         {1ULL, 2ULL, 3ULL, 511ULL, 512ULL, 513ULL, 1023ULL, 5000ULL}) {
      expect_same(1024, 1024 * blocks - 1, lanes);
      expect_same(1024, 1024 * blocks, lanes);
      expect_same(1024, 1024 * blocks + 1, lanes);
    }
    expect_same(std::uint64_t{1} << 24, (std::uint64_t{1} << 33) + 12345678901, lanes);
  }
}

TEST(Cut, NeedsNoTableForKeysOfAnyLength) {
  // A petabit: the batch count is computed, not walked.
  const Cut cut(BlockLength(1024), (std::uint64_t{1} << 50) + 1024 * 5 + 3, 512);
  EXPECT_EQ(cut.batch_count(), (std::uint64_t{1} << 31) + 2);
  const Batch last = cut.batch(cut.batch_count() - 1);
  EXPECT_EQ(last.lanes, 1U);
  EXPECT_EQ(last.first_block, (std::uint64_t{1} << 40) + 4);
  EXPECT_EQ(cut.rest_bits(), 3U);
}

TEST(Cut, HasNoBatchBeyondTheLast) {
  const Cut cut(BlockLength(8), 8 * 5, 4);
  EXPECT_EQ(cut.batch_count(), 2U);
  EXPECT_THROW(cut.batch(2), std::invalid_argument);
  EXPECT_THROW(Cut(BlockLength(8), 7, 4).batch(0), std::invalid_argument);
}

TEST(Cut, TakesPowersOfTwoUpTo512) {
  for (unsigned lanes = 0; lanes <= 1025; ++lanes) {
    const bool power = lanes != 0 && (lanes & (lanes - 1)) == 0 && lanes <= 512;
    if (power) {
      EXPECT_NO_THROW(require_lanes(lanes));
    } else {
      EXPECT_THROW(require_lanes(lanes), InputError) << lanes;
      EXPECT_THROW(Cut(BlockLength(8), 800, lanes), InputError) << lanes;
    }
  }
}

TEST(Cut, DefaultLanesAreTheTableOfTheFormat) {
  // designs/FORMATS.md: 256 up to N = 2^12, 128 up to 2^14, 64 up to 2^16, 32 up to 2^18, 16 up to
  // 2^21, 8 above.
  const unsigned table[] = {256, 256, 256, 256, 256, 256, 256, 256, 256, 256, 128,
                            128, 64,  64,  32,  32,  16,  16,  16,  8,   8,   8};
  for (unsigned n = 3; n <= 24; ++n) {
    EXPECT_EQ(default_lanes(BlockLength::from_log2(n)), table[n - 3]) << "2^" << n;
  }
}

}  // namespace
}  // namespace frostline
