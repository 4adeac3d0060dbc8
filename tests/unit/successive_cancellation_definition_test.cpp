// The reference SC decoder against independent definitions: sums over all completions in exact
// arithmetic, plain min-sum on wide integers, and the bare recursion without anything left out.
#include <gtest/gtest.h>

#include <algorithm>
#include <cmath>
#include <cstdint>
#include <cstdlib>
#include <utility>
#include <vector>

#include "decode/reference/arithmetic_rules.h"
#include "decode/reference/successive_cancellation.h"
#include "polar/transform.h"
#include "tests/support/difference.h"
#include "tests/support/random_bits.h"

namespace frostline {
namespace {

using testing::difference_of;
using testing::Generator;

constexpr Precoding kPrecodings[] = {Precoding::none, Precoding::state8};

BitString pattern_of(BlockLength length, std::uint64_t bits) {
  BitString pattern(length.bits());
  pattern.words()[0] = bits;
  return pattern;
}

// Successive cancellation by its definition: u_i is the likelier value, all completions of
// u_0 .. u_i summed, the later frozen values unknown too.
class BruteForce {
 public:
  BruteForce(BlockLength length, double p) : bits_(length.bits()), probability_(1U << bits_) {
    for (std::uint32_t u = 0; u < probability_.size(); ++u) {
      // Row i of G has ones at the subsets of i: F's Kronecker power, entry by entry.
      std::uint32_t x = 0;
      for (std::uint32_t i = 0; i < bits_; ++i) {
        for (std::uint32_t j = 0; j < bits_; ++j) {
          if (((u >> i) & 1U) && (j & ~i) == 0) x ^= 1U << j;
        }
      }
      int weight = 0;
      for (std::uint32_t rest = x; rest != 0; rest &= rest - 1) ++weight;
      probability_[u] = std::pow(p, weight) * std::pow(1 - p, static_cast<int>(bits_) - weight);
    }
  }

  // ln P(u_0 .. u_i-1, u_i = 0) - ln P(u_0 .. u_i-1, u_i = 1); past holds u_0 .. u_i-1.
  double log_ratio(std::size_t i, std::uint32_t past) const {
    double sums[2] = {0, 0};
    for (std::uint32_t future = 0; future < (1U << (bits_ - i)); ++future) {
      sums[future & 1U] += probability_[past | (future << i)];
    }
    return std::log(sums[0]) - std::log(sums[1]);
  }

 private:
  std::size_t bits_;
  std::vector<double> probability_;
};

// Checks every decision of one decoding, given the decisions before it. A ratio within rounding of
// 1 may be settled either way: the two sums differ in order.
void expect_defined_decisions(const BruteForce& definition, const Code& code, double p,
                              const BitString& errors, std::size_t& decisions) {
  const BitString difference = difference_of(code, errors);
  const ScDecision decision = decode_sc(code, Arithmetic::exact(), p, difference);
  const auto u = static_cast<std::uint32_t>(decision.u.words()[0]);
  for (std::size_t i = 0; i < decision.u.size(); ++i) {
    if (code.frozen.is_frozen(i)) continue;
    const double ratio = definition.log_ratio(i, u & ((1U << i) - 1));
    if (std::abs(ratio) < 1e-9) continue;
    ++decisions;
    ASSERT_EQ(decision.u[i], ratio < 0) << "index " << i << ", log ratio " << ratio;
  }
}

TEST(SuccessiveCancellation, ExactArithmeticFollowsTheDefinitionOnAllPatternsOfEight) {
  Generator generator(4);
  const BlockLength length(8);
  std::size_t decisions = 0;
  for (const double p : {0.02, 0.11, 0.3}) {
    const BruteForce definition(length, p);
    for (int trial = 0; trial < 12; ++trial) {
      const FrozenSet frozen = testing::random_frozen_set(generator, length, 0.45);
      for (const Precoding precoding : kPrecodings) {
        const Code code{frozen, precoding, 0};
        for (std::uint64_t pattern = 0; pattern < 256; ++pattern) {
          expect_defined_decisions(definition, code, p, pattern_of(length, pattern), decisions);
          if (HasFatalFailure()) return;
        }
      }
    }
  }
  EXPECT_GT(decisions, 10000U);
}

TEST(SuccessiveCancellation, ExactArithmeticFollowsTheDefinitionOnManyPatternsOfSixteen) {
  Generator generator(5);
  const BlockLength length(16);
  std::size_t decisions = 0;
  for (const double p : {0.03, 0.15}) {
    const BruteForce definition(length, p);
    for (int trial = 0; trial < 8; ++trial) {
      const FrozenSet frozen = testing::random_frozen_set(generator, length, 0.5);
      const Code code{frozen, kPrecodings[trial % 2], 0};
      for (int count = 0; count < 60; ++count) {
        // Half of them likely ones, half anything.
        const BitString errors = testing::random_bits(generator, 16, count % 2 == 0 ? 0.12 : 0.5);
        expect_defined_decisions(definition, code, p, errors, decisions);
        if (HasFatalFailure()) return;
      }
    }
  }
  EXPECT_GT(decisions, 2000U);
}

TEST(SuccessiveCancellation, ExactTiesDecideZero) {
  // u_3 = 1 makes every message of the right half exactly 0, whatever the QBER.
  const BlockLength length(8);
  BitString mask(8);
  for (std::size_t i = 0; i < 4; ++i) mask.set(i, true);
  const Code code{FrozenSet(length, mask), Precoding::none, 0};
  BitString difference(8);
  difference.set(3, true);  // partial sums 1111 of the left half
  const ScDecision decision = decode_sc(code, Arithmetic::exact(), 0.07, difference);
  EXPECT_EQ(decision.u, difference);
}

// The rules of min-sum on plain wide integers, without pruning and without a constant chain, in
// units of the channel LLR. Reports whether an open index was a tie.
struct PlainMinSum {
  const FrozenSet& frozen;
  const BitString& frozen_values;
  bool tie = false;

  std::vector<int> decode(std::size_t first, const std::vector<long>& messages) {
    const std::size_t half = messages.size() / 2;
    if (half == 0) {
      if (frozen.is_frozen(first)) return {frozen_values[first] ? 1 : 0};
      tie = tie || messages[0] == 0;
      return {messages[0] < 0 ? 1 : 0};
    }
    std::vector<long> child(half);
    for (std::size_t j = 0; j < half; ++j) {
      const long a = messages[j];
      const long b = messages[half + j];
      child[j] = std::min(std::labs(a), std::labs(b)) * ((a < 0) != (b < 0) ? -1 : 1);
    }
    const std::vector<int> left = decode(first, child);
    for (std::size_t j = 0; j < half; ++j) {
      child[j] = messages[half + j] + (1 - 2 * left[j]) * messages[j];
    }
    const std::vector<int> right = decode(first + half, child);
    std::vector<int> sums(messages.size());
    for (std::size_t j = 0; j < half; ++j) {
      sums[j] = left[j] ^ right[j];
      sums[half + j] = right[j];
    }
    return sums;
  }
};

BitString bits_of(const std::vector<int>& values) {
  BitString bits(values.size());
  for (std::size_t i = 0; i < values.size(); ++i) bits.set(i, values[i] != 0);
  return bits;
}

TEST(SuccessiveCancellation, WideIntegersEqualPlainMinSum) {
  Generator generator(6);
  for (unsigned log2 = 3; log2 <= 11; ++log2) {
    const BlockLength length = BlockLength::from_log2(log2);
    for (int trial = 0; trial < 20; ++trial) {
      const Code code{testing::weight_frozen_set(length, length.bits() * 2 / 5), Precoding::none,
                      0};
      const BitString errors = testing::random_bits(generator, length.bits(), 0.01 * trial);
      const BitString difference = difference_of(code, errors);
      PlainMinSum plain{code.frozen, difference};
      const std::vector<int> sums = plain.decode(0, std::vector<long>(length.bits(), 1));
      // At most 2^11 channel LLRs: below 2^14, no saturation.
      ASSERT_EQ(decode_sc(code, Arithmetic::integer_of(15, 1), 0.1, difference).errors,
                bits_of(sums));
    }
  }
}

TEST(SuccessiveCancellation, SevenPlanesEqualPlainMinSumWhereNoOpenIndexTies) {
  // Up to N = 128 no message exceeds 128 channel LLRs, 64 units: seven planes never saturate.
  Generator generator(7);
  std::size_t compared = 0;
  for (unsigned log2 = 3; log2 <= 7; ++log2) {
    const BlockLength length = BlockLength::from_log2(log2);
    for (int trial = 0; trial < 400; ++trial) {
      const Code code{testing::weight_frozen_set(length, length.bits() / 2), Precoding::none, 0};
      const BitString errors = testing::random_bits(generator, length.bits(), 0.05);
      const BitString difference = difference_of(code, errors);
      PlainMinSum plain{code.frozen, difference};
      const std::vector<int> sums = plain.decode(0, std::vector<long>(length.bits(), 1));
      if (plain.tie) continue;
      ++compared;
      ASSERT_EQ(decode_sc(code, Arithmetic::planes_of(7), 0.1, difference).errors, bits_of(sums));
    }
  }
  EXPECT_GT(compared, 500U);
}

// A whole tree over arbitrary messages, by the rules alone.
template <typename Rules>
std::vector<bool> decode_tree(const Rules& rules, const BitString& frozen, const BitString& values,
                              std::size_t first,
                              const std::vector<typename Rules::Message>& messages) {
  const std::size_t half = messages.size() / 2;
  if (half == 0) return {frozen[first] ? values[first] : rules.decide(messages[0])};
  std::vector<typename Rules::Message> child(half);
  for (std::size_t j = 0; j < half; ++j) child[j] = rules.f(messages[j], messages[half + j]);
  const std::vector<bool> left = decode_tree(rules, frozen, values, first, child);
  for (std::size_t j = 0; j < half; ++j) {
    child[j] = rules.g(messages[j], messages[half + j], left[j]);
  }
  const std::vector<bool> right = decode_tree(rules, frozen, values, first + half, child);
  std::vector<bool> sums(messages.size());
  for (std::size_t j = 0; j < half; ++j) {
    sums[j] = left[j] != right[j];
    sums[half + j] = right[j];
  }
  return sums;
}

TEST(SuccessiveCancellation, HardDecisionsThatShowTheFrozenValuesAreTheResultInPlanes) {
  Generator generator(8);
  for (unsigned planes = 2; planes <= 4; ++planes) {
    const PlanesRules rules(planes);
    for (int trial = 0; trial < 300; ++trial) {
      const std::size_t length = std::size_t{1} << (3 + trial % 5);
      std::vector<SignMagnitude> messages(length);
      BitString hard(length);
      for (std::size_t j = 0; j < length; ++j) {
        messages[j] = {(generator() & 1U) != 0,
                       static_cast<std::uint8_t>(generator() % (1U << planes))};
        hard.set(j, messages[j].negative);
      }
      const BitString frozen = testing::random_bits(generator, length, 0.5);
      const std::vector<bool> sums = decode_tree(rules, frozen, polar_transform(hard), 0, messages);
      for (std::size_t j = 0; j < length; ++j) ASSERT_EQ(sums[j], hard[j]);
    }
  }
}

// What the decoder leaves out changes nothing: every arithmetic against the bare recursion, from
// the channel down, zeros and ties included.
template <typename Rules>
void expect_bare_recursion(const Rules& rules, const Arithmetic& arithmetic, double p,
                           typename Rules::Message channel) {
  Generator generator(9);
  for (int trial = 0; trial < 60; ++trial) {
    const BlockLength length = BlockLength::from_log2(3 + static_cast<unsigned>(trial) % 7);
    const FrozenSet frozen = trial % 2 == 0 ? testing::bytewise_frozen_set(generator, length)
                                            : testing::random_frozen_set(generator, length, 0.3);
    const Code code{frozen, Precoding::none, 0};
    const BitString difference = testing::random_bits(generator, length.bits());
    const std::vector<bool> sums =
        decode_tree(rules, frozen.mask(), difference, 0,
                    std::vector<typename Rules::Message>(length.bits(), channel));
    const ScDecision decision = decode_sc(code, arithmetic, p, difference);
    for (std::size_t j = 0; j < length.bits(); ++j) ASSERT_EQ(decision.errors[j], sums[j]);
  }
}

// planes:W in half units, the channel's messages stored like all others: ordinary signed values of
// twice the range, with the sign of a zero kept apart.
struct HalfUnitPlanes {
  using Message = std::pair<int, bool>;  // value in half units, sign

  int largest;

  Message f(Message a, Message b) const {
    const bool sign = a.second != b.second;
    const int least = std::min(std::abs(a.first), std::abs(b.first));
    return {sign ? -least : least, sign};
  }
  Message g(Message a, Message b, bool bit) const {
    const int sum = std::clamp(bit ? b.first - a.first : b.first + a.first, -largest, largest);
    return {sum, sum == 0 ? b.second : sum < 0};
  }
  bool decide(Message message) const { return message.second; }
};

TEST(SuccessiveCancellation, PruningChangesNothing) {
  // Weak LLRs as well, whose products underflow at deep nodes.
  for (const double p : {0.02, 0.2, 0.499, 0.4999999}) {
    const ExactRules rules(p);
    expect_bare_recursion(rules, Arithmetic::exact(), p, rules.channel());
  }
  for (int planes = 2; planes <= 7; ++planes) {
    expect_bare_recursion(HalfUnitPlanes{2 * ((1 << planes) - 1)},
                          Arithmetic::planes_of(static_cast<unsigned>(planes)), 0.02, {1, false});
  }
  expect_bare_recursion(IntegerRules(5, 3), Arithmetic::integer_of(5, 3), 0.02, 3);
  expect_bare_recursion(IntegerRules(4, 7), Arithmetic::integer_of(4, 7), 0.02, 7);
}

}  // namespace
}  // namespace frostline
