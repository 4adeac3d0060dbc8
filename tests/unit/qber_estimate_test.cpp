#include "decode/exchange/qber_estimate.h"

#include <gtest/gtest.h>

#include <algorithm>
#include <cmath>
#include <iterator>
#include <stdexcept>
#include <vector>

#include "polar/syndrome.h"
#include "tests/support/polarized_frozen_set.h"
#include "tests/support/random_bits.h"

namespace frostline {
namespace {

using testing::Generator;
using testing::polarized_frozen_set;

constexpr Precoding kPrecodings[] = {Precoding::none, Precoding::state8};

// The public differences of `lanes` blocks whose positions are wrong with probability p.
BitString difference_rows(const SyndromeFormer& former, Generator& generator, unsigned lanes,
                          double p) {
  BitString rows =
      testing::random_bits(generator, former.frozen().block_length().bits() * lanes, p);
  former.to_public_rows(rows.words(), lanes);
  return rows;
}

DifferenceCounts count_batches(const SyndromeFormer& former, const DifferenceCounter& counter,
                               Generator& generator, int batches, double p) {
  DifferenceCounts counts;
  for (int batch = 0; batch < batches; ++batch) {
    counts += counter.count(difference_rows(former, generator, 64, p).words(), 64);
  }
  return counts;
}

void expect_equal(const DifferenceCounts& a, const DifferenceCounts& b) {
  EXPECT_EQ(a.bits, b.bits);
  EXPECT_EQ(a.ones, b.ones);
  EXPECT_EQ(a.blocks, b.blocks);
}

// One bit that the counter counts: the sum of the positions whose lower part is `lower` and whose
// upper part, all bits from log2 on, contains the prefix of its node.
struct NodeSum {
  unsigned log2_weight;
  std::vector<std::size_t> positions;
};

// All of them, from the definition: a node counts when all its indices show plain u and its
// parent's do not.
std::vector<NodeSum> node_sums(const FrozenSet& frozen, Precoding precoding) {
  const PrecodingSchedule schedule(frozen, precoding);
  const unsigned n = frozen.block_length().log2();
  const auto all_plain = [&](std::size_t first, std::size_t length) {
    for (std::size_t i = first; i < first + length; ++i) {
      if (!frozen.is_frozen(i) || schedule.adds_state(i / 8)) return false;
    }
    return true;
  };
  std::vector<NodeSum> sums;
  for (unsigned log2 = 0; log2 <= n; ++log2) {
    const std::size_t length = std::size_t{1} << log2;
    for (std::size_t prefix = 0; prefix < (std::size_t{1} << (n - log2)); ++prefix) {
      const bool largest = log2 == n || !all_plain(prefix / 2 * 2 * length, 2 * length);
      if (!largest || !all_plain(prefix * length, length)) continue;
      for (std::size_t lower = 0; lower < length; ++lower) {
        NodeSum sum{0, {}};
        for (std::size_t upper = 0; upper < (std::size_t{1} << (n - log2)); ++upper) {
          if ((upper & prefix) == prefix) sum.positions.push_back(upper * length + lower);
        }
        while ((std::size_t{1} << sum.log2_weight) < sum.positions.size()) ++sum.log2_weight;
        sums.push_back(sum);
      }
    }
  }
  return sums;
}

DifferenceCounts count_by_definition(const std::vector<NodeSum>& sums, const BitString& errors,
                                     unsigned lanes) {
  DifferenceCounts counts;
  counts.blocks = lanes;
  for (const NodeSum& sum : sums) {
    for (unsigned lane = 0; lane < lanes; ++lane) {
      bool bit = false;
      for (const std::size_t position : sum.positions) bit ^= errors[position * lanes + lane];
      ++counts.bits[sum.log2_weight];
      counts.ones[sum.log2_weight] += bit;
    }
  }
  return counts;
}

TEST(QberEstimate, CountsThePartialSumsOfAllFrozenNodes) {
  Generator generator(1);
  for (unsigned log2 = 3; log2 <= 8; ++log2) {
    const BlockLength length = BlockLength::from_log2(log2);
    for (unsigned lanes = 1; lanes <= 512; lanes *= 8) {
      for (const Precoding precoding : kPrecodings) {
        for (const FrozenSet& frozen : {testing::random_frozen_set(generator, length, 0.6),
                                        testing::bytewise_frozen_set(generator, length),
                                        testing::weight_frozen_set(length, length.bits() / 2),
                                        testing::weight_frozen_set(length, length.bits())}) {
          const SyndromeFormer former(frozen, precoding);
          const BitString errors = testing::random_bits(generator, length.bits() * lanes, 0.2);
          BitString rows = errors;
          former.to_public_rows(rows.words(), lanes);
          // What stands at open indices does not matter.
          for (std::size_t i = 0; i < rows.size(); ++i) {
            if (!frozen.is_frozen(i / lanes)) rows.set(i, generator() & 1U);
          }
          expect_equal(DifferenceCounter(frozen, precoding).count(rows.words(), lanes),
                       count_by_definition(node_sums(frozen, precoding), errors, lanes));
        }
      }
    }
  }
}

TEST(QberEstimate, CountsDoNotDependOnTheOrderOfBatches) {
  Generator generator(2);
  const FrozenSet frozen = polarized_frozen_set(BlockLength(1024), 0.3, 300);
  const SyndromeFormer former(frozen, Precoding::state8);
  const DifferenceCounter counter(frozen, Precoding::state8);
  std::vector<DifferenceCounts> batches;
  for (int batch = 0; batch < 5; ++batch) {
    batches.push_back(counter.count(difference_rows(former, generator, 64, 0.03).words(), 64));
  }
  DifferenceCounts forward;
  for (const DifferenceCounts& batch : batches) forward += batch;
  DifferenceCounts pairs = batches[4];
  DifferenceCounts rest = batches[2];
  rest += batches[0];
  pairs += rest;
  pairs += batches[1];
  pairs += batches[3];
  expect_equal(forward, pairs);
  EXPECT_EQ(forward.blocks, 320U);
}

// The sum over all pairs of bits of a block, their shared positions counted one by one.
double variance_ratio_by_definition(const std::vector<NodeSum>& sums, double p) {
  const double theta = 1 - 2 * p;
  // q = (1 - theta^w) / 2, its derivative, and the derivative of the likelihood for d - q = 1.
  const auto q = [&](double w) { return (1 - std::pow(theta, w)) / 2; };
  const auto slope = [&](double w) { return w * std::pow(theta, w - 1); };
  const auto score = [&](double w) { return slope(w) / (q(w) * (1 - q(w))); };
  double independent = 0;
  double variance = 0;
  for (const NodeSum& a : sums) {
    const auto wa = static_cast<double>(a.positions.size());
    independent += slope(wa) * score(wa);
    for (const NodeSum& b : sums) {
      const auto wb = static_cast<double>(b.positions.size());
      std::vector<std::size_t> shared;
      std::set_intersection(a.positions.begin(), a.positions.end(), b.positions.begin(),
                            b.positions.end(), std::back_inserter(shared));
      const double apart = wa + wb - 2 * static_cast<double>(shared.size());
      const double covariance = (std::pow(theta, apart) - std::pow(theta, wa + wb)) / 4;
      variance += score(wa) * score(wb) * covariance;
    }
  }
  return std::max(variance / independent, 1.0);
}

TEST(QberEstimate, WidensTheIntervalByWhatSharedPositionsDo) {
  Generator generator(7);
  for (const std::size_t length : {8, 64, 256}) {
    for (const FrozenSet& frozen : {testing::random_frozen_set(generator, BlockLength(length), 0.6),
                                    testing::bytewise_frozen_set(generator, BlockLength(length)),
                                    polarized_frozen_set(BlockLength(length), 0.3, length / 2),
                                    polarized_frozen_set(BlockLength(length), 0.3, length)}) {
      for (const Precoding precoding : kPrecodings) {
        const std::vector<NodeSum> sums = node_sums(frozen, precoding);
        if (sums.empty()) continue;
        const DifferenceCounter counter(frozen, precoding);
        const DifferenceCounts counts = counter.count(BitString(length * 4).words(), 4);
        for (const double p : {0.001, 0.03, 0.2, 0.45}) {
          const double wanted = variance_ratio_by_definition(sums, p);
          ASSERT_NEAR(counter.variance_ratio(counts, p), wanted, 1e-9 * wanted)
              << "N = " << length << ", p = " << p;
        }
      }
    }
  }
}

struct Case {
  std::size_t length;
  std::size_t frozen;
  double p;
};

TEST(QberEstimate, FindsTheErrorRateWithinItsInterval) {
  // 24 estimates a case. An interval of exactly 95 % misses 6 or more of 24 with chance 1e-3, and
  // the estimates lie within five of their deviations.
  for (const Case& c : {Case{1024, 512, 0.01}, Case{1024, 512, 0.05}, Case{1024, 700, 0.1},
                        Case{1024, 900, 0.2}, Case{4096, 1024, 0.01}, Case{4096, 1024, 0.02},
                        Case{4096, 2400, 0.05}, Case{4096, 3000, 0.1}, Case{4096, 3850, 0.2}}) {
    const FrozenSet frozen = polarized_frozen_set(BlockLength(c.length), 0.3, c.frozen);
    for (const Precoding precoding : kPrecodings) {
      const SyndromeFormer former(frozen, precoding);
      const DifferenceCounter counter(frozen, precoding);
      Generator generator(3);
      int missed = 0;
      for (int trial = 0; trial < 24; ++trial) {
        const DifferenceCounts counts = count_batches(former, counter, generator, 1, c.p);
        const QberEstimate estimate = estimate_qber(counter, counts);
        EXPECT_FALSE(estimate.looks_unrelated) << c.length << " " << c.frozen << " " << c.p;
        EXPECT_LE(estimate.low, estimate.qber);
        EXPECT_GE(estimate.high, estimate.qber);
        EXPECT_LT(estimate.high - estimate.low, c.p / 2);
        EXPECT_NEAR(estimate.qber, c.p, 5 * (estimate.high - estimate.low) / 3.92);
        missed += estimate.low > c.p || estimate.high < c.p;
      }
      EXPECT_LE(missed, 5) << c.length << " " << c.frozen << " " << c.p;
    }
  }
}

TEST(QberEstimate, NarrowsAsBlocksAreAdded) {
  const FrozenSet frozen = polarized_frozen_set(BlockLength(1024), 0.3, 512);
  const SyndromeFormer former(frozen, Precoding::state8);
  const DifferenceCounter counter(frozen, Precoding::state8);
  Generator generator(4);
  const QberEstimate few =
      estimate_qber(counter, count_batches(former, counter, generator, 1, 0.04));
  const QberEstimate many =
      estimate_qber(counter, count_batches(former, counter, generator, 100, 0.04));
  const double ratio = (few.high - few.low) / (many.high - many.low);
  EXPECT_NEAR(ratio, 10, 2);  // the square root of 100
  EXPECT_NEAR(many.qber, 0.04, 0.001);
}

TEST(QberEstimate, IsNoNarrowerThanTheErrorPatternItselfWouldTell) {
  // Cramer-Rao: sqrt(p (1-p) / positions), reached only by who sees all positions.
  for (const double p : {0.002, 0.01, 0.05}) {
    const FrozenSet frozen = polarized_frozen_set(BlockLength(4096), 0.3, 2400);
    const SyndromeFormer former(frozen, Precoding::none);
    const DifferenceCounter counter(frozen, Precoding::none);
    Generator generator(5);
    const QberEstimate estimate =
        estimate_qber(counter, count_batches(former, counter, generator, 4, p));
    const double least = 2 * 1.96 * std::sqrt(p * (1 - p) / (4096.0 * 256));
    EXPECT_GT(estimate.high - estimate.low, 0.95 * least);
  }
}

TEST(QberEstimate, TellsUnrelatedStrings) {
  for (const std::size_t length : {1024, 4096}) {
    const FrozenSet frozen = polarized_frozen_set(BlockLength(length), 0.3, length / 2);
    for (const Precoding precoding : kPrecodings) {
      const SyndromeFormer former(frozen, precoding);
      const DifferenceCounter counter(frozen, precoding);
      Generator generator(6);
      for (int trial = 0; trial < 40; ++trial) {
        const QberEstimate estimate =
            estimate_qber(counter, count_batches(former, counter, generator, 1, 0.5));
        EXPECT_TRUE(estimate.looks_unrelated);
        EXPECT_EQ(estimate.high, 0.5);
        EXPECT_GT(estimate.low, 0.04);  // not as few errors as designs are made for
      }
    }
  }
}

TEST(QberEstimate, OfEqualStringsIsZero) {
  const FrozenSet frozen = polarized_frozen_set(BlockLength(1024), 0.3, 300);
  const DifferenceCounter counter(frozen, Precoding::state8);
  const QberEstimate estimate =
      estimate_qber(counter, counter.count(BitString(1024 * 64).words(), 64));
  EXPECT_EQ(estimate.qber, 0);
  EXPECT_EQ(estimate.low, 0);
  EXPECT_FALSE(estimate.looks_unrelated);
  // No error among 65536 positions: at most 1.92 of them could be expected, and more where not
  // every position is seen.
  EXPECT_GT(estimate.high, 1.9 / 65536);
  EXPECT_LT(estimate.high, 10.0 / 65536);
}

TEST(QberEstimate, HasNothingToGoByWithoutFrozenBits) {
  const DifferenceCounter counter(testing::weight_frozen_set(BlockLength(64), 0), Precoding::none);
  const QberEstimate estimate = estimate_qber(counter, counter.count(BitString(64).words(), 1));
  EXPECT_EQ(estimate.qber, 0.5);
  EXPECT_EQ(estimate.low, 0);
  EXPECT_TRUE(estimate.looks_unrelated);
}

TEST(QberEstimate, RejectsLanesThatAreNoPowerOfTwoUpTo512) {
  const DifferenceCounter counter(testing::weight_frozen_set(BlockLength(8), 4), Precoding::none);
  const BitString rows(8 * 1024);
  for (const unsigned lanes : {0U, 3U, 1024U}) {
    EXPECT_THROW(counter.count(rows.words(), lanes), std::invalid_argument);
  }
}

}  // namespace
}  // namespace frostline
