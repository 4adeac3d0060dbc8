#include "decode/hardware/golden_vectors.h"

#include <gtest/gtest.h>

#include <algorithm>

#include "construct/metric_weights.h"
#include "decode/hardware/hex_words.h"
#include "decode/reference/successive_cancellation.h"
#include "polar/error.h"
#include "polar/random.h"
#include "polar/syndrome.h"
#include "polar/transform.h"
#include "tests/support/node_messages.h"
#include "tests/support/polarized_frozen_set.h"

namespace frostline {
namespace {

using testing::bsc_bhattacharyya;
using testing::polarized_frozen_set;

FrozenSet frozen_set(std::size_t length, double p, std::size_t frozen_count) {
  return polarized_frozen_set(BlockLength(length), bsc_bhattacharyya(p), frozen_count);
}

BitString random_errors(std::size_t length, double p, std::uint64_t stream) {
  BitString errors(length);
  RandomStream(9, "golden test", stream).bernoulli(p, length, errors.words());
  return errors;
}

// Partial sums of the node of 2^k indices from first on.
BitString node_bits(const BitString& u, unsigned k, std::size_t first) {
  BitString bits = u.slice(first, std::size_t{1} << k);
  return k < 3 ? bits : polar_transform(bits);
}

// Against messages written from the rules alone (tests/support/node_messages.h).
TEST(MessageDump, HoldsTheMessagesOfEveryNode) {
  const std::size_t length = 64;
  const FrozenSet frozen = frozen_set(length, 0.1, 40);
  for (const unsigned planes : {2U, 3U, 5U}) {
    const BitString errors = random_errors(length, 0.2, planes);
    const BitString u = polar_transform(errors);
    const MessageDump dump = dump_messages(frozen, Arithmetic::planes_of(planes), u);
    std::size_t seen = 0;
    unsigned last_k = 99;
    std::size_t last_first = 99;
    std::size_t j = 0;
    const testing::NodeMessages judge(
        planes, [&](unsigned k, std::size_t first, bool wrong, std::size_t magnitude) {
          j = k == last_k && first == last_first ? j + 1 : 0;
          last_k = k;
          last_first = first;
          const unsigned code = dump.levels[k][first + j];
          ++seen;
          if (first == 0) {
            EXPECT_EQ(code, kConstantMessage);
            return;
          }
          EXPECT_EQ(code & ((1U << planes) - 1), magnitude);
          if (k < 3) return;  // below a byte the library transforms nothing
          const bool negative = wrong != node_bits(u, k, first)[j];
          EXPECT_EQ(code >> planes != 0, negative);
        });
    std::vector<bool> x;
    for (std::size_t i = 0; i < length; ++i) x.push_back(errors[i]);
    judge.walk(x);
    EXPECT_EQ(seen, length * 7);
    EXPECT_GT(dump.zero_messages, 0U);
  }
}

TEST(MessageDump, LevelZeroDecidesWhatTheDecoderDecides) {
  const Code code{frozen_set(256, 0.05, 120), Precoding::none, 0};
  for (const Arithmetic& arithmetic :
       {Arithmetic::planes_of(3), Arithmetic::integer_of(5, 2), Arithmetic::integer_of(4, 1)}) {
    const unsigned bits = stored_message_bits(arithmetic);
    for (unsigned k = 0; k < 20; ++k) {
      const BitString difference = polar_transform(random_errors(256, 0.08, k));
      const BitString u = decode_sc(code, arithmetic, 0.05, difference).u;
      const MessageDump dump = dump_messages(code.frozen, arithmetic, u);
      for (std::size_t i = 1; i < 256; ++i) {
        if (code.frozen.is_frozen(i)) continue;
        ASSERT_EQ(dump.levels[0][i] >> (bits - 1) != 0, u[i]) << i;
      }
    }
  }
}

TEST(Faults, ChangeNothingWhereTheyCannotHappen) {
  const Code code{frozen_set(64, 0.1, 30), Precoding::none, 0};
  for (unsigned k = 0; k < 50; ++k) {
    const BitString difference = polar_transform(random_errors(64, 0.15, k));
    // At N = 64 no magnitude is above 32, and no sum of integers above 64.
    EXPECT_EQ(
        decode_with_fault(code.frozen, Arithmetic::planes_of(7), Fault::wrapping_sum, difference),
        decode_sc(code, Arithmetic::planes_of(7), 0.1, difference).errors);
    EXPECT_EQ(decode_with_fault(code.frozen, Arithmetic::integer_of(9, 1), Fault::wrapping_sum,
                                difference),
              decode_sc(code, Arithmetic::integer_of(9, 1), 0.1, difference).errors);
  }
  EXPECT_THROW(decode_with_fault(code.frozen, Arithmetic::planes_of(3), Fault::zero_decides_one,
                                 BitString(64)),
               std::invalid_argument);
  EXPECT_TRUE(possible_faults(Arithmetic::exact()).empty());
}

void expect_whole(const GoldenSetup& setup, const GoldenCase& golden) {
  const SyndromeFormer former(setup.code.frozen, setup.code.precoding);
  BitString sum = golden.sender_key;
  sum ^= golden.receiver_key;
  EXPECT_EQ(sum, golden.errors);
  EXPECT_EQ(former.syndrome(golden.sender_key), golden.syndrome);
  EXPECT_EQ(former.syndrome(golden.output), former.syndrome(golden.errors));
  EXPECT_EQ(polar_transform(golden.output), golden.decisions);
  EXPECT_EQ(golden.recovered, golden.output == golden.errors);
}

TEST(GoldenVectors, FailInAThirdOfTheCasesAndShowEveryFault) {
  const Code code{frozen_set(1024, 0.11, 700), Precoding::none, 11};
  for (const Arithmetic& arithmetic : {Arithmetic::planes_of(3), Arithmetic::integer_of(4, 1)}) {
    const GoldenSetup setup{code, arithmetic, 0.11};
    std::uint64_t progress = 0;
    const auto cases = golden_cases(setup, 13, [&](std::uint64_t done) { progress = done; });
    EXPECT_EQ(progress, 13U);
    ASSERT_EQ(cases.size(), 13U);
    EXPECT_EQ(cases[0].errors.count(), 0U);
    EXPECT_EQ(cases[1].errors.count(), 1024U);
    std::size_t failed = 0;
    for (const GoldenCase& golden : cases) {
      expect_whole(setup, golden);
      failed += golden.recovered ? 0 : 1;
      for (const Fault fault : possible_faults(arithmetic)) {
        const bool shows =
            std::find(golden.shows.begin(), golden.shows.end(), fault) != golden.shows.end();
        EXPECT_EQ(shows, decode_with_fault(code.frozen, arithmetic, fault, golden.difference) !=
                             golden.output);
      }
    }
    EXPECT_GE(failed, 5U);
    EXPECT_GE(cases.size() - failed, 5U);
    for (const Fault fault : possible_faults(arithmetic)) {
      EXPECT_TRUE(std::any_of(cases.begin(), cases.end(), [&](const GoldenCase& golden) {
        return std::find(golden.shows.begin(), golden.shows.end(), fault) != golden.shows.end();
      })) << fault_name(fault);
    }
  }
}

TEST(GoldenVectors, AreTheSameForTheSameSeedAndPrecodingIsFollowed) {
  const Code code{frozen_set(256, 0.05, 130), Precoding::state8, 11};
  GoldenSetup setup{code, Arithmetic::planes_of(3), 0.05};
  const auto ignored = [](std::uint64_t) {};
  const auto once = golden_cases(setup, 6, ignored);
  const auto again = golden_cases(setup, 6, ignored);
  setup.seed = 2;
  const auto other = golden_cases(setup, 6, ignored);
  for (std::size_t k = 0; k < 6; ++k) {
    expect_whole(setup, once[k]);
    EXPECT_EQ(once[k].sender_key, again[k].sender_key);
    EXPECT_EQ(once[k].errors, again[k].errors);
    EXPECT_NE(once[k].sender_key, other[k].sender_key);
  }
}

TEST(GoldenVectors, OfListsCarryTheMetricsOfAllSurvivors) {
  const Code code{frozen_set(128, 0.05, 60), Precoding::state8, 8};
  const MetricWeights weights = metric_weights(code.frozen, 0.05, Arithmetic::planes_of(3));
  const GoldenSetup setup{code, Arithmetic::planes_of(3), 0.05, 4, &weights, 3};
  for (const GoldenCase& golden : golden_cases(setup, 9, [](std::uint64_t) {})) {
    expect_whole(setup, golden);
    EXPECT_EQ(golden.path_metrics.size(), 4U);
    EXPECT_TRUE(std::is_sorted(golden.path_metrics.begin(), golden.path_metrics.end()));
    EXPECT_LT(golden.chosen, 4U);
  }
}

TEST(GoldenVectors, RefuseWhatCannotBe) {
  const auto ignored = [](std::uint64_t) {};
  const Code all_frozen{frozen_set(64, 0.05, 64), Precoding::none, 0};
  EXPECT_THROW(golden_cases({all_frozen, Arithmetic::planes_of(3), 0.05}, 6, ignored), InputError);
  const Code code{frozen_set(64, 0.05, 30), Precoding::none, 0};
  EXPECT_THROW(golden_cases({code, Arithmetic::exact(), 0.05}, 6, ignored), std::invalid_argument);
  EXPECT_THROW(golden_cases({code, Arithmetic::planes_of(3), 0.05}, 2, ignored),
               std::invalid_argument);
  EXPECT_THROW(golden_cases({code, Arithmetic::planes_of(3), 0.05, 4}, 6, ignored),
               std::invalid_argument);
}

TEST(HexWords, AreReadAsReadmemhReadsThem) {
  const std::vector<std::string> expected = {"0a", "ff", "x1"};
  EXPECT_EQ(parse_hex_words("// a\n0A /* b\n c */ f_f\nZ1 // end", "m"), expected);
  EXPECT_TRUE(parse_hex_words("", "m").empty());
  const auto error = [](const char* text) -> std::string {
    try {
      parse_hex_words(text, "m");
    } catch (const InputError& wrong) {
      return wrong.what();
    }
    return "none";
  };
  EXPECT_EQ(error("00\n0g"), "m: line 2: 'g' is no hexadecimal digit");
  EXPECT_EQ(error("@0 00"), "m: line 1: addresses (@) are not read");
  EXPECT_EQ(error("00 /* no end"), "m: line 1: a comment without an end");
  EXPECT_EQ(error("/ 00"), "m: line 1: '/' is no hexadecimal digit");
}

TEST(HexWords, PutTheFirstBitHighest) {
  EXPECT_EQ(hex_word(bits_from_text("10100101", "b")), "a5");
  EXPECT_EQ(hex_word(bits_from_text("110100", "b")), "34");
  EXPECT_EQ(hex_word(bits_from_text("1", "b")), "1");
}

}  // namespace
}  // namespace frostline
