#include "polar/random.h"

#include <gtest/gtest.h>
#include <sodium.h>

#include <algorithm>
#include <boost/math/distributions/chi_squared.hpp>
#include <cmath>
#include <cstring>
#include <stdexcept>
#include <string>
#include <vector>

#include "polar/bits.h"
#include "polar/digest.h"

namespace frostline {
namespace {

// Five standard deviations: two of a million honest counts lie outside.
void expect_share(std::size_t ones, std::size_t trials, double p) {
  const auto count = static_cast<double>(trials);
  EXPECT_NEAR(static_cast<double>(ones), count * p, 5 * std::sqrt(count * p * (1 - p)))
      << "p = " << p;
}

TEST(RandomStream, IsTheChaCha20KeyStreamOfItsSeedAndPurpose) {
  // libsodium's own stream, the key and nonce written out by hand.
  for (const std::uint64_t seed : {std::uint64_t{0}, std::uint64_t{0x0123456789ABCDEF}}) {
    for (const std::uint64_t stream : {std::uint64_t{0}, std::uint64_t{1} << 40}) {
      std::string text = "frostline stream errors";
      text.push_back('\0');
      for (int i = 0; i < 8; ++i) text.push_back(static_cast<char>(seed >> (8 * i)));
      const Sha256 key = sha256(text);
      unsigned char nonce[crypto_stream_chacha20_NONCEBYTES];
      for (int i = 0; i < 8; ++i) nonce[i] = static_cast<unsigned char>(stream >> (8 * i));
      std::vector<unsigned char> bytes(8 * 1000);
      crypto_stream_chacha20(bytes.data(), bytes.size(), nonce, key.data());
      RandomStream random(seed, "errors", stream);
      for (std::size_t k = 0; k < 1000; ++k) {
        std::uint64_t wanted = 0;
        for (std::size_t i = 0; i < 8; ++i) wanted |= std::uint64_t{bytes[8 * k + i]} << (8 * i);
        ASSERT_EQ(random.next(), wanted) << "word " << k;
      }
    }
  }
}

TEST(RandomStream, DiffersInSeedPurposeAndStream) {
  const std::uint64_t first = RandomStream(1, "a", 0).next();
  EXPECT_EQ(RandomStream(1, "a", 0).next(), first);
  EXPECT_NE(RandomStream(2, "a", 0).next(), first);
  EXPECT_NE(RandomStream(1, "b", 0).next(), first);
  EXPECT_NE(RandomStream(1, "a", 1).next(), first);
}

TEST(RandomStream, BernoulliHasItsFrequencyAtEveryPlace) {
  RandomStream random(3, "test", 0);
  for (const double p : {0.001, 0.02, 0.11, 0.25, 0.5, 0.9}) {
    const std::size_t rounds = 2000;
    std::size_t total = 0;
    std::vector<std::size_t> at_place(64);
    std::size_t neighbours = 0;
    for (std::size_t round = 0; round < rounds; ++round) {
      std::uint64_t words[2];
      random.bernoulli(p, 128, {words, 2});
      total += count_ones({words, 2});
      neighbours += count_ones(std::vector<std::uint64_t>{words[0] & words[1]});
      for (std::size_t b = 0; b < 64; ++b) at_place[b] += (words[0] >> b) & 1U;
    }
    expect_share(total, 128 * rounds, p);
    expect_share(neighbours, 64 * rounds, p * p);  // independent words
    for (const std::size_t ones : at_place) expect_share(ones, rounds, p);
  }
}

// Pearson's test; the quantile comes from Boost.Math.
TEST(RandomStream, GapsBetweenOnesAreGeometric) {
  for (const double p : {0.004, 0.02, 0.124}) {
    RandomStream random(5, "test", 0);
    BitString bits(std::size_t{1} << 24);
    random.bernoulli(p, bits.size(), bits.words());
    constexpr std::size_t kBins = 400;  // the last one is for all longer gaps
    std::vector<double> seen(kBins);
    double gaps = 0;
    std::size_t gap = 0;
    for (std::size_t i = 0; i < bits.size(); ++i) {
      if (!bits[i]) {
        ++gap;
        continue;
      }
      ++seen[std::min(gap, kBins - 1)];
      ++gaps;
      gap = 0;
    }
    double chi_squared = 0;
    double bins = 0;
    double expected_rest = gaps;
    double seen_rest = gaps;
    for (std::size_t k = 0; k + 1 < kBins; ++k) {
      const double expected = gaps * p * std::pow(1 - p, static_cast<double>(k));
      if (expected < 10) break;
      chi_squared += (seen[k] - expected) * (seen[k] - expected) / expected;
      expected_rest -= expected;
      seen_rest -= seen[k];
      ++bins;
    }
    chi_squared += (seen_rest - expected_rest) * (seen_rest - expected_rest) / expected_rest;
    const boost::math::chi_squared distribution(bins);
    EXPECT_LT(chi_squared, quantile(distribution, 1 - 1e-5)) << "p = " << p;
    EXPECT_GT(chi_squared, quantile(distribution, 1e-5)) << "p = " << p;
  }
}

TEST(RandomStream, RareOnesAreDrawnToo) {
  RandomStream random(6, "test", 0);
  BitString bits(std::size_t{1} << 24);
  random.bernoulli(1e-5, bits.size(), bits.words());
  expect_share(bits.count(), bits.size(), 1e-5);
  random.bernoulli(1e-17, bits.size(), bits.words());  // 1 - p rounds to 1
  EXPECT_EQ(bits.count(), 0U);
}

TEST(RandomStream, BernoulliFillsTheLastWordWithZeros) {
  RandomStream random(4, "test", 0);
  for (std::size_t bits = 0; bits <= 130; ++bits) {
    for (const double p : {0.0, 0.5, 1.0}) {
      BitString string(bits);
      for (std::uint64_t& word : string.words()) word = ~std::uint64_t{0};
      random.bernoulli(p, bits, string.words());
      if (bits % 64 != 0) {
        ASSERT_EQ(string.words()[bits / 64] >> (bits % 64), 0U);
      }
      if (p != 0.5) {
        ASSERT_EQ(string.count(), p == 0 ? 0 : bits);
      }
    }
  }
  BitString string(64);
  for (const double p : {-0.1, 1.1, std::nan("")}) {
    EXPECT_THROW(random.bernoulli(p, 64, string.words()), std::invalid_argument);
  }
}

TEST(RandomStream, BelowIsUniform) {
  RandomStream random(5, "test", 0);
  for (const std::uint64_t bound : {1, 2, 3, 7, 100}) {
    std::vector<std::size_t> seen(bound);
    const std::size_t draws = 20000;
    for (std::size_t k = 0; k < draws; ++k) {
      const std::uint64_t value = random.below(bound);
      ASSERT_LT(value, bound);
      ++seen[value];
    }
    if (bound == 1) continue;
    for (const std::size_t count : seen) expect_share(count, draws, 1 / static_cast<double>(bound));
  }
  // A quarter of 2^64 is drawn again for this bound: without that the lower third of the values
  // would be twice as frequent.
  const std::uint64_t bound = (std::uint64_t{1} << 63) + (std::uint64_t{1} << 62);
  std::size_t lower = 0;
  for (int k = 0; k < 20000; ++k) lower += random.below(bound) < bound / 2;
  expect_share(lower, 20000, 0.5);
  EXPECT_THROW(random.below(0), std::invalid_argument);
}

TEST(RandomStream, UniformLiesInZeroToOneInStepsOf53Bits) {
  RandomStream random(6, "test", 0);
  std::vector<std::size_t> tenths(10);
  for (int k = 0; k < 20000; ++k) {
    const double value = random.uniform();
    ASSERT_GE(value, 0);
    ASSERT_LT(value, 1);
    ASSERT_EQ(std::ldexp(value, 53), std::floor(std::ldexp(value, 53)));
    ++tenths[static_cast<std::size_t>(value * 10)];
  }
  for (const std::size_t count : tenths) expect_share(count, 20000, 0.1);
}

}  // namespace
}  // namespace frostline
