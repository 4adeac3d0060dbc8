#include "decode/trial/channel.h"

#include <gtest/gtest.h>

#include <boost/math/distributions/binomial.hpp>
#include <cmath>

#include "polar/error.h"

namespace frostline {
namespace {

const BlockLength kLength = BlockLength::from_log2(12);

BitString drawn(const Channel& channel, std::uint64_t seed, std::uint64_t first_block,
                unsigned lanes) {
  BitString errors(kLength.bits() * lanes);
  channel.draw(seed, {kLength, first_block, lanes}, errors.words());
  return errors;
}

std::size_t ones(const BitString& bits) { return count_ones(bits.words()); }

TEST(Channel, SymmetricErrorsAreBinomial) {
  // Quantiles of the binomial distribution by Boost.Math, at 1e-6.
  for (const double p : {0.001, 0.02, 0.11, 0.5}) {
    const std::size_t count = ones(drawn(SymmetricChannel(p), 3, 0, 256));
    const boost::math::binomial_distribution<double> law(static_cast<double>(kLength.bits() * 256),
                                                         p);
    EXPECT_GE(static_cast<double>(count), boost::math::quantile(law, 1e-6)) << p;
    EXPECT_LE(static_cast<double>(count), boost::math::quantile(boost::math::complement(law, 1e-6)))
        << p;
  }
}

TEST(Channel, DriftRisesAndFallsBackOncePerPeriod) {
  const DriftingChannel drift(0.01, 0.05, 8);
  const double expected[] = {0.01, 0.02, 0.03, 0.04, 0.05, 0.04, 0.03, 0.02};
  for (std::uint64_t block = 0; block < 24; ++block) {
    EXPECT_NEAR(drift.qber_at(block), expected[block % 8], 1e-15);
  }
  EXPECT_DOUBLE_EQ(drift.mean_qber(), 0.03);
  // Each block length of the string shows the QBER of its time.
  std::vector<std::size_t> seen(8, 0);
  constexpr unsigned kPeriods = 64;
  for (unsigned k = 0; k < kPeriods; ++k) {
    const BitString errors = drawn(drift, 5, 8 * k, 8);
    for (unsigned step = 0; step < 8; ++step) {
      seen[step] += ones(errors.slice(step * kLength.bits(), kLength.bits()));
    }
  }
  const double bits = kPeriods * static_cast<double>(kLength.bits());
  for (unsigned step = 0; step < 8; ++step) {
    const double p = expected[step];
    EXPECT_NEAR(static_cast<double>(seen[step]), bits * p, 5 * std::sqrt(bits * p * (1 - p)));
  }
}

TEST(Channel, BurstSpendsTheStationaryShareInTheBadState) {
  const BurstChannel burst(0.001, 0.3, 0.002, 0.01);
  // Balance of the two-state chain: a sixth of the time in the bad state.
  EXPECT_NEAR(burst.mean_qber(), 0.001 + 0.299 / 6, 1e-12);
  std::size_t count = 0;
  constexpr unsigned kBatches = 400;
  for (unsigned k = 0; k < kBatches; ++k) count += ones(drawn(burst, 7, 64 * k, 8));
  const double bits = kBatches * 8.0 * static_cast<double>(kLength.bits());
  // Variance of the time in the bad state of a chain with correlation r = 1 - to_bad - to_good:
  // n pi (1 - pi) (1 + r) / (1 - r).
  const double r = 1 - 0.012;
  const double deviation =
      std::sqrt(bits * (5.0 / 36) * (1 + r) / (1 - r)) * 0.299 + std::sqrt(bits * 0.05);
  EXPECT_NEAR(static_cast<double>(count), bits * burst.mean_qber(), 5 * deviation);
}

// With no errors in the good state and half of the bad positions wrong: lengths of stays in the bad
// state are geometric, so the errors of a stay tell the law of pairs at distance k: P(both wrong) =
// pi/4 (pi + (1 - pi) r^k).
TEST(Channel, BurstErrorsAreCorrelatedAsTheChainSays) {
  const double to_bad = 0.01, to_good = 0.04;
  const BurstChannel burst(0, 0.5, to_bad, to_good);
  const double share = to_bad / (to_bad + to_good);
  const std::size_t distances[] = {1, 5, 20};
  double pairs[3] = {};
  double positions = 0;
  for (unsigned k = 0; k < 300; ++k) {
    const BitString errors = drawn(burst, 9, 8 * k, 8);
    for (std::size_t i = 0; i + 20 < errors.size(); ++i) {
      if (!errors[i]) continue;
      for (unsigned d = 0; d < 3; ++d) pairs[d] += errors[i + distances[d]];
    }
    positions += static_cast<double>(errors.size() - 20);
  }
  for (unsigned d = 0; d < 3; ++d) {
    const double r = std::pow(1 - to_bad - to_good, static_cast<double>(distances[d]));
    const double expected = share / 4 * (share + (1 - share) * r);
    EXPECT_NEAR(pairs[d] / positions / expected, 1, 0.03) << distances[d];
  }
}

TEST(Channel, DrawsDependOnSeedAndBatchOnly) {
  const BurstChannel burst(0.01, 0.2, 0.001, 0.01);
  const DriftingChannel drift(0.01, 0.05, 100);
  for (const Channel* channel :
       {static_cast<const Channel*>(&burst), static_cast<const Channel*>(&drift)}) {
    const BitString once = drawn(*channel, 1, 16, 4);
    drawn(*channel, 2, 0, 8);
    EXPECT_EQ(once, drawn(*channel, 1, 16, 4));
    EXPECT_NE(once, drawn(*channel, 1, 20, 4));
    EXPECT_NE(once, drawn(*channel, 2, 16, 4));
  }
}

TEST(Channel, CaptureGivesTheDifferencesThatItHolds) {
  const std::size_t bits = 10 * kLength.bits() + 24;
  BitString a(bits), b(bits);
  RandomStream random(4, "test capture", 0);
  random.bernoulli(0.5, bits, a.words());
  random.bernoulli(0.03, bits, b.words());
  const BitString errors = b;
  for (std::size_t w = 0; w < a.words().size(); ++w) b.words()[w] ^= a.words()[w];
  const CapturedChannel channel(std::make_unique<MemoryKey>(a, "a"),
                                std::make_unique<MemoryKey>(b, "b"));
  EXPECT_EQ(channel.available_bits(), bits);
  EXPECT_DOUBLE_EQ(channel.mean_qber(),
                   static_cast<double>(ones(errors)) / static_cast<double>(bits));
  EXPECT_EQ(drawn(channel, 1, 2, 4), errors.slice(2 * kLength.bits(), 4 * kLength.bits()));
}

TEST(Channel, RefusesCapturesThatDoNotFit) {
  const auto key = [](std::size_t bits, bool one) {
    BitString text(bits);
    if (one) text.words()[0] = 1;
    return std::make_unique<MemoryKey>(text, "key");
  };
  EXPECT_THROW(CapturedChannel(key(64, true), key(72, false)), InputError);
  EXPECT_THROW(CapturedChannel(key(64, true), key(64, true)), InputError);
  EXPECT_THROW(CapturedChannel(key(2, true), key(2, false)), InputError);
}

TEST(Channel, ReadsItsTextAndSaysWhatIsWrong) {
  for (const char* text : {"bsc:0.02", "drift:0.01:0.05:1000", "burst:0.01:0.1:0.001:0.01"}) {
    EXPECT_EQ(parse_channel(text)->name(), text);
  }
  for (const char* text :
       {"", "bsc", "bsc:", "bsc:x", "bsc:0.6", "bsc:-0.1", "bsc:nan", "bsc:0.1:0.2",
        "drift:0.1:0.05:10", "drift:0.1:0.2:1", "drift:0.1:0.2:1.5", "drift:0.1:0.2",
        "burst:0.1:0.2:0:0.1", "burst:0.1:0.2:0.1:1.1", "burst:0.6:0.2:0.1:0.1", "burst:1:2:3",
        "file:a", "file:none-a:none-b", "rain:0.1"}) {
    EXPECT_THROW(parse_channel(text), InputError) << text;
  }
}

}  // namespace
}  // namespace frostline
