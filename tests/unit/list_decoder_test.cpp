// The reference list decoder against enumeration, against its definition, and against successive
// cancellation.
#include "decode/reference/list_decoder.h"

#include <gtest/gtest.h>

#include <algorithm>
#include <cmath>
#include <set>
#include <stdexcept>
#include <string>
#include <vector>

#include "construct/metric_weights.h"
#include "decode/reference/reference_list_batch_decoder.h"
#include "decode/reference/successive_cancellation.h"
#include "polar/check_bits.h"
#include "polar/error.h"
#include "polar/lanes.h"
#include "polar/transform.h"
#include "tests/support/binomial.h"
#include "tests/support/difference.h"
#include "tests/support/list_definition.h"
#include "tests/support/polarized_frozen_set.h"
#include "tests/support/random_bits.h"

namespace frostline {
namespace {

using testing::difference_of;
using testing::Generator;
using testing::ListDefinition;

constexpr Precoding kPrecodings[] = {Precoding::none, Precoding::state8};

std::vector<Arithmetic> all_kinds() {
  return {Arithmetic::exact(),      Arithmetic::planes_of(2),     Arithmetic::planes_of(3),
          Arithmetic::planes_of(7), Arithmetic::integer_of(5, 2), Arithmetic::integer_of(15, 1)};
}

// The weights of a code at p = 0.05 in planes; those of planes:3 for other arithmetics, which take
// no notice. All indices may fork.
MetricWeights weights_for(const Code& code, const Arithmetic& arithmetic) {
  const bool planes = arithmetic.kind == Arithmetic::Kind::planes;
  return metric_weights(code.frozen, 0.05, planes ? arithmetic : Arithmetic::planes_of(3), 0);
}

ListDecision decode(const Code& code, const Arithmetic& arithmetic, double p, unsigned list,
                    const BitString& errors) {
  const MetricWeights weights = weights_for(code, arithmetic);
  return decode_list(code, arithmetic, p, list, &weights, difference_of(code, errors),
                     check_bits(errors, code.check_bits));
}

std::vector<bool> bits_of(const BitString& string) {
  std::vector<bool> bits;
  for (std::size_t i = 0; i < string.size(); ++i) bits.push_back(string[i]);
  return bits;
}

// A frozen set with at most 7 open indices, so that a list of 128 holds every word.
FrozenSet nearly_frozen_set(Generator& generator, BlockLength length, std::size_t open) {
  BitString mask(length.bits());
  for (std::size_t i = 0; i < length.bits(); ++i) mask.set(i, true);
  while (length.bits() - mask.count() < open) mask.set(generator() % length.bits(), false);
  return FrozenSet(length, mask);
}

// All words of N <= 16 bits whose public values are those of errors.
std::vector<BitString> words_that_show(const Code& code, const BitString& errors) {
  const BitString difference = difference_of(code, errors);
  std::vector<BitString> words;
  for (std::uint64_t x = 0; x < (std::uint64_t{1} << errors.size()); ++x) {
    BitString word(errors.size());
    word.words()[0] = x;
    if (difference_of(code, word) == difference) words.push_back(word);
  }
  return words;
}

double log_probability(const BitString& word, double p) {
  const auto ones = static_cast<double>(word.count());
  return ones * std::log(p) + (static_cast<double>(word.size()) - ones) * std::log1p(-p);
}

TEST(ListDecoder, FullListIsMaximumLikelihoodInExactArithmetic) {
  Generator generator(1);
  for (const std::size_t bits : {8, 16}) {
    for (std::size_t open = 1; open <= 7; ++open) {
      for (int trial = 0; trial < 4; ++trial) {
        const Code code{nearly_frozen_set(generator, BlockLength(bits), open),
                        kPrecodings[trial % 2], 0};
        const double p = trial < 2 ? 0.03 : 0.2;
        const BitString errors = testing::random_bits(generator, bits, 0.3);
        const ListDecision decision = decode(code, Arithmetic::exact(), p, 1U << open, errors);
        const std::vector<BitString> words = words_that_show(code, errors);
        ASSERT_EQ(words.size(), std::size_t{1} << open);
        std::size_t least = bits;
        for (const BitString& word : words) least = std::min(least, word.count());
        EXPECT_EQ(decision.errors().count(), least);
        // Every word is there, and its metric is minus the logarithm of its probability.
        ASSERT_EQ(decision.paths.size(), words.size());
        std::set<std::uint64_t> seen;
        for (const ListPath& path : decision.paths) {
          seen.insert(path.errors.words()[0]);
          EXPECT_NEAR(path.metric, -log_probability(path.errors, p), 1e-9);
        }
        for (const BitString& word : words) EXPECT_EQ(seen.count(word.words()[0]), 1U);
      }
    }
  }
}

TEST(ListDecoder, FullListHoldsTheSmallestMetricOfAllWordsInPlanesAndIntegers) {
  Generator generator(2);
  for (const std::size_t bits : {8, 16}) {
    for (const Arithmetic& arithmetic : all_kinds()) {
      if (arithmetic == Arithmetic::exact()) continue;
      for (std::size_t open = 1; open <= 7; open += 2) {
        const Code code{nearly_frozen_set(generator, BlockLength(bits), open),
                        kPrecodings[open / 2 % 2], 0};
        const MetricWeights weights = weights_for(code, arithmetic);
        const ListDefinition definition(code, arithmetic, 1U << open, &weights);
        const BitString errors = testing::random_bits(generator, bits, 0.3);
        const ListDecision decision = decode(code, arithmetic, 0.05, 1U << open, errors);
        double least = 1e9;
        for (const BitString& word : words_that_show(code, errors)) {
          least = std::min(least, definition.metric(bits_of(polar_transform(word))));
        }
        EXPECT_EQ(decision.paths[0].metric, least) << to_string(arithmetic);
        EXPECT_EQ(decision.chosen, 0U);
        EXPECT_EQ(decision.paths.size(), std::size_t{1} << open);
      }
    }
  }
}

TEST(ListDecoder, KeepsThePathsOfItsDefinitionTiesIncluded) {
  Generator generator(3);
  std::size_t ties = 0;
  for (const Arithmetic& arithmetic : all_kinds()) {
    if (arithmetic == Arithmetic::exact()) continue;
    for (int trial = 0; trial < 24; ++trial) {
      const BlockLength length = BlockLength::from_log2(3 + static_cast<unsigned>(trial) % 4);
      const Code code{testing::random_frozen_set(generator, length, 0.4), kPrecodings[trial % 2],
                      0};
      MetricWeights weights = weights_for(code, arithmetic);
      weights.never_forks = testing::random_bits(generator, length.bits(), 0.2);
      const unsigned list = 1U << (static_cast<unsigned>(trial) / 2 % 5);
      const BitString difference =
          difference_of(code, testing::random_bits(generator, length.bits(), 0.2));
      const ListDecision decision =
          decode_list(code, arithmetic, 0.05, list, &weights, difference, 0);
      auto expected = ListDefinition(code, arithmetic, list, &weights).decode(difference);
      std::stable_sort(expected.begin(), expected.end(),
                       [](const auto& a, const auto& b) { return a.metric < b.metric; });
      ASSERT_EQ(decision.paths.size(), expected.size());
      for (std::size_t k = 0; k < expected.size(); ++k) {
        ASSERT_EQ(bits_of(polar_transform(decision.paths[k].errors)), expected[k].u)
            << to_string(arithmetic) << ", N " << length.bits() << ", L " << list << ", path " << k;
        ASSERT_EQ(decision.paths[k].metric, expected[k].metric);
        ties += k > 0 && expected[k].metric == expected[k - 1].metric;
      }
    }
  }
  EXPECT_GT(ties, 100U);
}

TEST(ListDecoder, ExactMetricIsMinusTheLogarithmOfTheWordsProbability) {
  Generator generator(4);
  for (const std::size_t bits : {64, 256, 1024}) {
    for (const Precoding precoding : kPrecodings) {
      const double p = 0.05;
      const Code code{testing::polarized_frozen_set(BlockLength(bits),
                                                    testing::bsc_bhattacharyya(p), bits * 2 / 5),
                      precoding, 0};
      for (int trial = 0; trial < 4; ++trial) {
        const BitString errors = testing::random_bits(generator, bits, p);
        for (const ListPath& path : decode(code, Arithmetic::exact(), p, 8, errors).paths) {
          ASSERT_NEAR(path.metric / -log_probability(path.errors, p), 1, 1e-9);
        }
      }
    }
  }
}

TEST(ListDecoder, OfOnePathIsSuccessiveCancellation) {
  Generator generator(5);
  for (unsigned log2 = 3; log2 <= 10; ++log2) {
    const BlockLength length = BlockLength::from_log2(log2);
    for (int trial = 0; trial < 6; ++trial) {
      const FrozenSet frozen = trial % 3 == 0 ? testing::random_frozen_set(generator, length, 0.4)
                               : trial % 3 == 1
                                   ? testing::bytewise_frozen_set(generator, length)
                                   : testing::weight_frozen_set(length, length.bits() * 2 / 5);
      // Any d at all, or that of a likely pattern.
      const BitString errors =
          testing::random_bits(generator, length.bits(), trial < 3 ? 0.5 : 0.04);
      for (const Precoding precoding : kPrecodings) {
        const Code code{frozen, precoding, 11};
        const BitString difference = difference_of(code, errors);
        for (const Arithmetic& arithmetic : all_kinds()) {
          const ListDecision decision = decode(code, arithmetic, 0.03, 1, errors);
          ASSERT_EQ(decision.paths.size(), 1U);
          ASSERT_EQ(decision.errors(), decode_sc(code, arithmetic, 0.03, difference).errors)
              << to_string(arithmetic) << ", N " << length.bits();
        }
      }
    }
  }
}

TEST(ListDecoder, WhereNothingForksIsSuccessiveCancellation) {
  Generator generator(6);
  const BlockLength length(256);
  const Arithmetic arithmetic = Arithmetic::planes_of(3);
  for (const Precoding precoding : kPrecodings) {
    const Code code{testing::weight_frozen_set(length, 100), precoding, 0};
    MetricWeights weights = weights_for(code, arithmetic);
    for (std::size_t i = 0; i < length.bits(); ++i) weights.never_forks.set(i, true);
    for (int trial = 0; trial < 20; ++trial) {
      const BitString difference =
          difference_of(code, testing::random_bits(generator, length.bits(), 0.06));
      const ListDecision decision =
          decode_list(code, arithmetic, 0.05, 16, &weights, difference, 0);
      ASSERT_EQ(decision.paths.size(), 1U);
      ASSERT_EQ(decision.errors(), decode_sc(code, arithmetic, 0.05, difference).errors);
    }
  }
}

TEST(ListDecoder, AllPathsShowTheDifferenceAndAreDistinct) {
  Generator generator(7);
  for (const unsigned list : {2U, 8U, 32U, 128U}) {
    for (const Arithmetic& arithmetic : all_kinds()) {
      for (const Precoding precoding : kPrecodings) {
        const BlockLength length(128);
        const Code code{testing::random_frozen_set(generator, length, 0.5), precoding, 8};
        const BitString errors = testing::random_bits(generator, length.bits());
        const ListDecision decision = decode(code, arithmetic, 0.05, list, errors);
        ASSERT_EQ(decision.paths.size(), list);
        std::set<std::string> seen;
        double last = 0;
        for (const ListPath& path : decision.paths) {
          ASSERT_EQ(difference_of(code, path.errors), difference_of(code, errors));
          seen.insert(bits_to_text(path.errors));
          ASSERT_GE(path.metric, last);
          last = path.metric;
        }
        ASSERT_EQ(seen.size(), list);
      }
    }
  }
}

TEST(ListDecoder, TakesTheBestPathWithTheGivenCheckBits) {
  Generator generator(8);
  const BlockLength length(128);
  std::size_t agreed = 0;
  std::size_t not_the_best = 0;
  std::size_t none = 0;
  for (int trial = 0; trial < 300; ++trial) {
    const Code code{testing::weight_frozen_set(length, 50), kPrecodings[trial % 2], 6};
    const BitString errors = testing::random_bits(generator, length.bits(), 0.08);
    const ListDecision decision = decode(code, Arithmetic::planes_of(3), 0.05, 8, errors);
    const auto expected = std::find_if(
        decision.paths.begin(), decision.paths.end(),
        [&](const ListPath& path) { return check_bits(path.errors, 6) == check_bits(errors, 6); });
    for (const ListPath& path : decision.paths) {
      ASSERT_EQ(path.check_agrees, check_bits(path.errors, 6) == check_bits(errors, 6));
    }
    if (expected == decision.paths.end()) {
      ASSERT_EQ(decision.chosen, 0U);
      ++none;
    } else {
      ASSERT_EQ(&decision.errors(), &expected->errors);
      ++agreed;
      not_the_best += decision.chosen != 0;
    }
  }
  EXPECT_GT(agreed, 30U);
  EXPECT_GT(not_the_best, 10U);
  EXPECT_GT(none, 30U);
}

// A wrong word passes c check bits with chance 2^-c, and there are at most L of them. Where the
// best path is the right one it is chosen.
TEST(ListDecoder, AcceptsWrongPathsNoMoreOftenThanItsCheckBitsAllow) {
  Generator generator(9);
  const BlockLength length(128);
  const unsigned list = 8;
  const unsigned width = 6;
  const Code code{testing::polarized_frozen_set(length, testing::bsc_bhattacharyya(0.05), 50),
                  Precoding::state8, width};
  const MetricWeights weights = weights_for(code, Arithmetic::planes_of(3));
  std::size_t best_is_wrong = 0;
  std::size_t wrongly_accepted = 0;
  for (int block = 0; block < 4000; ++block) {
    const BitString errors = testing::random_bits(generator, length.bits(), 0.05);
    const ListDecision decision =
        decode_list(code, Arithmetic::planes_of(3), 0.05, list, &weights,
                    difference_of(code, errors), check_bits(errors, width));
    best_is_wrong += decision.paths[0].errors != errors;
    wrongly_accepted += decision.paths[decision.chosen].check_agrees && decision.errors() != errors;
  }
  ASSERT_GT(best_is_wrong, 1000U);
  EXPECT_GT(wrongly_accepted, 20U);
  const double allowed = list / 64.0;
  const auto trials = static_cast<double>(best_is_wrong);
  const auto count = static_cast<double>(wrongly_accepted);
  EXPECT_TRUE(count <= allowed * trials || testing::smaller_tail(count, trials, allowed) > 1e-4)
      << wrongly_accepted << " of " << best_is_wrong;
}

TEST(ListDecoder, FindsMoreThanSuccessiveCancellation) {
  Generator generator(10);
  const BlockLength length(512);
  for (const Arithmetic& arithmetic :
       {Arithmetic::exact(), Arithmetic::planes_of(3), Arithmetic::integer_of(6, 4)}) {
    const Code code{testing::polarized_frozen_set(length, testing::bsc_bhattacharyya(0.05), 205),
                    Precoding::state8, 16};
    int found_by_list = 0;
    int found_by_sc = 0;
    for (int block = 0; block < 150; ++block) {
      const BitString errors = testing::random_bits(generator, length.bits(), 0.05);
      found_by_list += decode(code, arithmetic, 0.05, 8, errors).errors() == errors;
      found_by_sc +=
          decode_sc(code, arithmetic, 0.05, difference_of(code, errors)).errors == errors;
    }
    EXPECT_GT(found_by_list, found_by_sc + 10) << to_string(arithmetic);
  }
}

TEST(ListDecoder, RejectsWrongArguments) {
  const BlockLength length(64);
  const Code code{testing::weight_frozen_set(length, 20), Precoding::none, 0};
  const MetricWeights weights = weights_for(code, Arithmetic::planes_of(3));
  const MetricWeights of_another =
      weights_for({testing::weight_frozen_set(BlockLength(32), 10), Precoding::none, 0},
                  Arithmetic::planes_of(3));
  const BitString difference(64);
  for (const unsigned list : {0U, 3U, 256U}) {
    EXPECT_THROW(decode_list(code, Arithmetic::planes_of(3), 0.05, list, &weights, difference, 0),
                 std::invalid_argument);
  }
  EXPECT_THROW(decode_list(code, Arithmetic::planes_of(3), 0.05, 2, nullptr, difference, 0),
               std::invalid_argument);
  EXPECT_THROW(decode_list(code, Arithmetic::planes_of(3), 0.05, 2, &of_another, difference, 0),
               std::invalid_argument);
  EXPECT_THROW(decode_list(code, Arithmetic::exact(), 0.05, 2, nullptr, BitString(32), 0),
               std::invalid_argument);
  EXPECT_NO_THROW(decode_list(code, Arithmetic::exact(), 0.05, 2, nullptr, difference, 0));
}

TEST(ListBatchDecoder, DecodesEveryLaneAsABlockOfItsOwn) {
  Generator generator(11);
  const Arithmetic arithmetic = Arithmetic::planes_of(3);
  for (const std::size_t bits : {8, 128}) {
    for (const unsigned lanes : {1U, 2U, 64U}) {
      const BlockLength length(bits);
      const Code code{testing::weight_frozen_set(length, bits * 2 / 5), Precoding::state8, 8};
      const auto weights = std::make_shared<const MetricWeights>(weights_for(code, arithmetic));
      KeyWords blocks(words_for(bits * lanes));
      BitString checks(std::size_t{8} * lanes);
      std::vector<BitString> expected;
      for (unsigned lane = 0; lane < lanes; ++lane) {
        const BitString errors = testing::random_bits(generator, bits, 0.08);
        const BitString difference = difference_of(code, errors);
        copy_bits(difference.words(), 0, blocks, bits * lane, bits);
        const std::uint32_t check = check_bits(errors, 8);
        for (unsigned t = 0; t < 8; ++t) checks.set(t * lanes + lane, (check >> (7 - t)) & 1U);
        expected.push_back(
            decode_list(code, arithmetic, 0.05, 4, weights.get(), difference, check).errors());
      }
      KeyWords rows(blocks.size());
      blocks_to_lanes(blocks, length, lanes, rows);
      KeyWords error_rows(blocks.size());
      ReferenceListBatchDecoder(code, arithmetic, 0.05, 4, weights)
          .decode({lanes, rows, checks.words()}, error_rows);
      lanes_to_blocks(error_rows, length, lanes, blocks);
      for (unsigned lane = 0; lane < lanes; ++lane) {
        BitString found(bits);
        copy_bits(blocks, bits * lane, found.words(), 0, bits);
        ASSERT_EQ(found, expected[lane]);
      }
    }
  }
}

TEST(ListBatchDecoder, ListSizesThatCannotBeAreRejected) {
  const BlockLength length(64);
  Design design{{testing::weight_frozen_set(length, 20), Precoding::none, 0},
                0.05,
                {},
                1,
                Arithmetic::exact(),
                {},
                {},
                {},
                {}};
  EXPECT_NO_THROW(make_batch_decoder(design, {{32}, nullptr}));
  for (const std::vector<unsigned>& lists :
       {std::vector<unsigned>{0}, {3}, {4096}, {8, 8}, {32, 8}}) {
    EXPECT_THROW(make_batch_decoder(design, {lists, nullptr}), InputError);
  }
  EXPECT_THROW(make_batch_decoder(design, {{}, nullptr}), std::invalid_argument);
  design.arithmetic = Arithmetic::planes_of(5);
  EXPECT_THROW(make_batch_decoder(design, {{8}, nullptr}), std::invalid_argument);
}

}  // namespace
}  // namespace frostline
