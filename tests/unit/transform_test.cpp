#include "polar/transform.h"

#include <gtest/gtest.h>

#include <stdexcept>
#include <vector>

#include "tests/support/random_bits.h"

namespace frostline {
namespace {

using testing::Generator;

// x = u G of one block: x_j is the sum of the u_i with entry (i, j) of the Kronecker power of
// F = [1 0; 1 1], which is 1 exactly when no binary digit of j exceeds that of i.
BitString times_g(const BitString& u) {
  BitString x(u.size());
  for (std::size_t j = 0; j < u.size(); ++j) {
    bool sum = false;
    for (std::size_t i = 0; i < u.size(); ++i) sum ^= (j & ~i) == 0 && u[i];
    x.set(j, sum);
  }
  return x;
}

// The recursion (x' + x'', x'') for blocks too long for a product of matrices.
std::vector<bool> times_g_recursively(const std::vector<bool>& u) {
  if (u.size() == 1) return u;
  const auto middle = u.begin() + static_cast<std::ptrdiff_t>(u.size() / 2);
  const std::vector<bool> left = times_g_recursively({u.begin(), middle});
  const std::vector<bool> right = times_g_recursively({middle, u.end()});
  std::vector<bool> x;
  for (std::size_t j = 0; j < left.size(); ++j) x.push_back(left[j] != right[j]);
  x.insert(x.end(), right.begin(), right.end());
  return x;
}

TEST(PolarTransform, IsTheProductWithTheKroneckerPower) {
  Generator generator(1);
  for (unsigned log2 = 3; log2 <= 11; ++log2) {
    const std::size_t bits = std::size_t{1} << log2;
    for (int trial = 0; trial < (log2 < 9 ? 20 : 2); ++trial) {
      const BitString u = testing::random_bits(generator, bits);
      ASSERT_EQ(polar_transform(u), times_g(u)) << "N = " << bits;
    }
  }
}

TEST(PolarTransform, FollowsTheRecursionOnLongBlocks) {
  Generator generator(2);
  for (unsigned log2 = 12; log2 <= 20; ++log2) {
    const BitString u = testing::random_bits(generator, std::size_t{1} << log2);
    std::vector<bool> model(u.size());
    for (std::size_t i = 0; i < u.size(); ++i) model[i] = u[i];
    const std::vector<bool> wanted = times_g_recursively(model);
    const BitString x = polar_transform(u);
    for (std::size_t j = 0; j < x.size(); ++j) ASSERT_EQ(x[j], wanted[j]) << "N = " << u.size();
  }
}

TEST(PolarTransform, IsItsOwnInverse) {
  Generator generator(3);
  for (unsigned log2 = 3; log2 <= 16; ++log2) {
    for (const unsigned lanes : {1U, 2U, 16U, 64U, 256U}) {
      if ((std::size_t{lanes} << log2) > (std::size_t{1} << 20)) continue;
      const BlockLength length = BlockLength::from_log2(log2);
      const BitString rows = testing::random_bits(generator, length.bits() * lanes);
      BitString twice = rows;
      polar_transform(twice.words(), length, lanes);
      polar_transform(twice.words(), length, lanes);
      ASSERT_EQ(twice, rows);
    }
  }
}

TEST(PolarTransform, TreatsEveryLaneAsABlockOfItsOwn) {
  Generator generator(4);
  for (unsigned log2 = 3; log2 <= 14; ++log2) {
    const BlockLength length = BlockLength::from_log2(log2);
    for (unsigned lanes = 1; lanes <= kMaxLanes; lanes *= 2) {
      if (length.bits() * lanes > (std::size_t{1} << 20)) continue;
      const BitString rows = testing::random_bits(generator, length.bits() * lanes);
      BitString found = rows;
      polar_transform(found.words(), length, lanes);
      const unsigned stride = lanes > 16 ? lanes / 4 + 1 : 1;
      for (unsigned lane = 0; lane < lanes; lane += stride) {
        BitString block(length.bits());
        for (std::size_t i = 0; i < length.bits(); ++i) block.set(i, rows[i * lanes + lane]);
        const BitString wanted = polar_transform(block);
        for (std::size_t i = 0; i < length.bits(); ++i) {
          ASSERT_EQ(found[i * lanes + lane], wanted[i])
              << "N = " << length.bits() << ", lane " << lane << " of " << lanes;
        }
      }
    }
  }
}

TEST(PolarTransform, RejectsLanesThatAreNoPowerOfTwoUpTo512) {
  BitString rows(64 * 1024);
  for (const unsigned lanes : {0U, 3U, 24U, 1024U}) {
    EXPECT_THROW(polar_transform(rows.words(), BlockLength(64), lanes), std::invalid_argument);
  }
}

}  // namespace
}  // namespace frostline
