// The fast list decoder against successive cancellation, against enumeration, and beside the
// reference list decoder.
#include "decode/list/list_decoder.h"

#include <gtest/gtest.h>

#include <algorithm>
#include <cmath>
#include <memory>
#include <stdexcept>
#include <string>
#include <utility>
#include <vector>

#include "construct/metric_weights.h"
#include "decode/lanes/lane_decoder.h"
#include "decode/list/passes.h"
#include "decode/reference/list_decoder.h"
#include "decode/reference/successive_cancellation.h"
#include "polar/check_bits.h"
#include "polar/error.h"
#include "polar/lanes.h"
#include "polar/simd.h"
#include "tests/support/difference.h"
#include "tests/support/polarized_frozen_set.h"
#include "tests/support/random_bits.h"

namespace frostline {
namespace {

using testing::difference_of;
using testing::Generator;

constexpr Precoding kPrecodings[] = {Precoding::none, Precoding::state8};
constexpr unsigned kLists[] = {1, 2, 4, 8, 16, 32};
const Arithmetic kPlanes3 = Arithmetic::planes_of(3);

// Blocks side by side with what the two ends' public bits differ in.
struct Blocks {
  Blocks(const Code& of, std::vector<BitString> patterns) : code(of), errors(std::move(patterns)) {
    const std::size_t bits = code.block_length().bits();
    KeyWords blocks(words_for(bits * lanes()));
    rows.resize(blocks.size());
    checks.resize(words_for(std::size_t{code.check_bits} * lanes()));
    for (unsigned l = 0; l < lanes(); ++l) {
      copy_bits(difference_of(code, errors[l]).words(), 0, blocks, bits * l, bits);
      if (code.check_bits == 0) continue;
      const std::uint32_t check = check_bits(errors[l], code.check_bits);
      for (unsigned t = 0; t < code.check_bits; ++t) {
        const std::size_t bit = std::size_t{t} * lanes() + l;
        checks[bit / 64] |= std::uint64_t{(check >> (code.check_bits - 1 - t)) & 1U} << (bit % 64);
      }
    }
    blocks_to_lanes(blocks, code.block_length(), lanes(), rows);
  }
  unsigned lanes() const { return static_cast<unsigned>(errors.size()); }

  std::vector<BitString> decoded_by(const BatchDecoder& decoder) const {
    KeyWords out(rows.size());
    decoder.decode({lanes(), rows, checks}, out);
    const std::size_t bits = code.block_length().bits();
    KeyWords blocks(out.size());
    lanes_to_blocks(out, code.block_length(), lanes(), blocks);
    std::vector<BitString> decoded(lanes(), BitString(bits));
    for (unsigned l = 0; l < lanes(); ++l) {
      copy_bits(blocks, bits * l, decoded[l].words(), 0, bits);
    }
    return decoded;
  }

  Code code;
  std::vector<BitString> errors;
  KeyWords rows;
  KeyWords checks;
};

std::vector<BitString> patterns(Generator& generator, std::size_t bits, unsigned count, double p) {
  std::vector<BitString> errors;
  for (unsigned l = 0; l < count; ++l) errors.push_back(testing::random_bits(generator, bits, p));
  return errors;
}

// Random ones, ones of whole bytes, and ones shaped as a design's.
FrozenSet some_frozen_set(Generator& generator, BlockLength length, int kind) {
  switch (kind % 3) {
    case 0:
      return testing::random_frozen_set(generator, length, 0.4);
    case 1:
      return testing::bytewise_frozen_set(generator, length);
    default:
      return testing::weight_frozen_set(length, length.bits() * 2 / 5);
  }
}

TEST(FastListDecoder, OfOnePathIsSuccessiveCancellation) {
  Generator generator(1);
  for (unsigned log2 = 3; log2 <= 11; ++log2) {
    const BlockLength length = BlockLength::from_log2(log2);
    for (int trial = 0; trial < 6; ++trial) {
      const FrozenSet frozen = some_frozen_set(generator, length, trial);
      for (const Precoding precoding : kPrecodings) {
        const Code code{frozen, precoding, 0};
        const Arithmetic arithmetic = Arithmetic::planes_of(2 + static_cast<unsigned>(trial) / 3);
        const unsigned lanes = 1U << (generator() % (log2 < 9 ? 9 : 6));
        const Blocks blocks(code,
                            patterns(generator, length.bits(), lanes, trial % 2 == 0 ? 0.3 : 0.04));
        const auto decoded = blocks.decoded_by(ListDecoder(code, arithmetic, 1, nullptr));
        if (precoding == Precoding::none) {
          EXPECT_EQ(decoded, blocks.decoded_by(LaneDecoder(code, arithmetic)));
        }
        for (unsigned l = 0; l < std::min(lanes, 4U); ++l) {
          ASSERT_EQ(decoded[l],
                    decode_sc(code, arithmetic, 0.05, difference_of(code, blocks.errors[l])).errors)
              << "N " << length.bits() << ", frozen set " << trial << ", lane " << l;
        }
      }
    }
  }
}

TEST(FastListDecoder, AlwaysShowsTheGivenPublicBits) {
  Generator generator(2);
  for (unsigned log2 = 3; log2 <= 9; ++log2) {
    const BlockLength length = BlockLength::from_log2(log2);
    for (int trial = 0; trial < 6; ++trial) {
      const FrozenSet frozen = some_frozen_set(generator, length, trial);
      for (const Precoding precoding : kPrecodings) {
        const Code code{frozen, precoding, 6};
        const Arithmetic arithmetic = Arithmetic::planes_of(2 + static_cast<unsigned>(trial) % 2);
        const MetricWeights weights = metric_weights(frozen, 0.05, arithmetic);
        const unsigned lanes = 1U << (generator() % 7);
        const Blocks blocks(code,
                            patterns(generator, length.bits(), lanes, trial < 3 ? 0.3 : 0.04));
        for (const unsigned list : kLists) {
          const auto decoded = blocks.decoded_by(ListDecoder(code, arithmetic, list, &weights));
          for (unsigned l = 0; l < lanes; ++l) {
            ASSERT_EQ(difference_of(code, decoded[l]), difference_of(code, blocks.errors[l]))
                << "N " << length.bits() << ", frozen set " << trial << ", L " << list;
          }
        }
      }
    }
  }
}

// Every target, every number of lanes, and every place in a batch.
TEST(FastListDecoder, DecodesABlockAlikeWhereverItIsDecoded) {
  Generator generator(3);
  for (const unsigned log2 : {4U, 7U, 9U}) {
    const BlockLength length = BlockLength::from_log2(log2);
    for (int trial = 0; trial < 3; ++trial) {
      const Code code{some_frozen_set(generator, length, trial), kPrecodings[trial % 2], 6};
      for (const unsigned planes : {2U, 3U}) {
        const Arithmetic arithmetic = Arithmetic::planes_of(planes);
        const MetricWeights weights = metric_weights(code.frozen, 0.05, arithmetic);
        const Blocks all(code, patterns(generator, length.bits(), 64, 0.06));
        for (const unsigned list : kLists) {
          const ListDecoder decoder(code, arithmetic, list, &weights);
          const auto expected = all.decoded_by(decoder);
          for (const std::string& name : simd_names()) {
            force_simd(name);
            EXPECT_EQ(all.decoded_by(decoder), expected) << name << ", L " << list;
            reset_simd();
          }
          // In reverse, and a few alone.
          for (const unsigned lanes : {1U, 4U, 64U}) {
            const Blocks some(code, {all.errors.rbegin(), all.errors.rbegin() + lanes});
            const auto decoded = some.decoded_by(decoder);
            for (unsigned l = 0; l < lanes; ++l) {
              ASSERT_EQ(decoded[l], expected[63 - l]) << "L " << list << ", lanes " << lanes;
            }
          }
        }
      }
    }
  }
}

// With at most log2 L open indices every word of the code is on the list, so that the check bits
// pick the one that was sent.
TEST(FastListDecoder, FullListHoldsTheWordThatWasSent) {
  Generator generator(4);
  for (const std::size_t bits : {8, 16}) {
    const BlockLength length(bits);
    for (std::size_t open = 1; open <= 5; ++open) {
      for (int trial = 0; trial < 12; ++trial) {
        BitString mask(bits);
        for (std::size_t i = 0; i < bits; ++i) mask.set(i, true);
        while (bits - mask.count() < open) mask.set(generator() % bits, false);
        // Enough check bits to tell the one word that was sent from the other 31.
        const Code code{FrozenSet(length, mask), kPrecodings[trial % 2], 24};
        const MetricWeights weights = metric_weights(code.frozen, 0.05, kPlanes3, 0);
        const Blocks blocks(code, patterns(generator, bits, 16, 0.3));
        const ListDecoder decoder(code, kPlanes3, 1U << open, &weights);
        EXPECT_EQ(blocks.decoded_by(decoder), blocks.errors)
            << "N " << bits << ", open " << bits_to_text(mask);
      }
    }
  }
}

Code design_like(std::size_t bits, std::size_t frozen_count, Precoding precoding, unsigned check) {
  return {testing::polarized_frozen_set(BlockLength(bits), testing::bsc_bhattacharyya(0.05),
                                        frozen_count),
          precoding, check};
}

std::size_t count_wrong(const std::vector<BitString>& decoded,
                        const std::vector<BitString>& errors) {
  std::size_t wrong = 0;
  for (std::size_t l = 0; l < errors.size(); ++l) wrong += decoded[l] != errors[l];
  return wrong;
}

// On the same errors: the blocks that only one of the two decoders loses are few, and none of them
// loses more often than chance allows (a sign test at 4 sigma).
TEST(FastListDecoder, FailsAsRarelyAsTheReference) {
  Generator generator(5);
  struct Case {
    std::size_t bits;
    std::size_t frozen_count;
    unsigned list;
  };
  for (const Case& c : {Case{256, 104, 2}, Case{256, 93, 8}, Case{256, 87, 32}, Case{1024, 383, 4},
                        Case{1024, 356, 16}}) {
    for (const Precoding precoding : kPrecodings) {
      const Code code = design_like(c.bits, c.frozen_count, precoding, 11);
      const MetricWeights weights = metric_weights(code.frozen, 0.05, kPlanes3);
      const Blocks blocks(code, patterns(generator, c.bits, 256, 0.05));
      const auto fast = blocks.decoded_by(ListDecoder(code, kPlanes3, c.list, &weights));
      double only_fast = 0;
      double only_reference = 0;
      double reference_losses = 0;
      for (unsigned l = 0; l < blocks.lanes(); ++l) {
        const bool lost =
            decode_list(code, kPlanes3, 0.05, c.list, &weights,
                        difference_of(code, blocks.errors[l]), check_bits(blocks.errors[l], 11))
                .errors() != blocks.errors[l];
        reference_losses += lost;
        only_fast += !lost && fast[l] != blocks.errors[l];
        only_reference += lost && fast[l] == blocks.errors[l];
      }
      EXPECT_GT(reference_losses, 5) << "a case that tells nothing";
      EXPECT_LE(only_fast - only_reference, 4 * std::sqrt(only_fast + only_reference))
          << "N " << c.bits << ", L " << c.list << ", " << precoding_name(precoding);
      EXPECT_LE(only_fast + only_reference, 0.06 * blocks.lanes());
    }
  }
}

// A wrong word is accepted only where the right path is not chosen and one of L words has the check
// bits by chance.
TEST(FastListDecoder, AcceptsWrongWordsNoMoreOftenThanTheCheckBitsAllow) {
  Generator generator(6);
  const unsigned list = 4;
  const Code code = design_like(256, 80, Precoding::none, 6);
  const MetricWeights weights = metric_weights(code.frozen, 0.05, kPlanes3);
  const ListDecoder decoder(code, kPlanes3, list, &weights);
  std::size_t wrong = 0;
  std::size_t accepted = 0;
  for (int batch = 0; batch < 16; ++batch) {
    const Blocks blocks(code, patterns(generator, 256, 512, 0.05));
    const auto decoded = blocks.decoded_by(decoder);
    for (unsigned l = 0; l < blocks.lanes(); ++l) {
      if (decoded[l] == blocks.errors[l]) continue;
      ++wrong;
      accepted += check_bits(decoded[l], 6) == check_bits(blocks.errors[l], 6);
    }
  }
  EXPECT_GT(wrong, 1000U);
  const double bound = static_cast<double>(list) / 64 * static_cast<double>(wrong);
  EXPECT_LE(static_cast<double>(accepted), bound + 4 * std::sqrt(bound));
  EXPECT_GT(accepted, 0U);
}

TEST(FastListDecoder, WantsWeightsPowersOfTwoAndPlanes) {
  const Code code = design_like(64, 30, Precoding::none, 6);
  const MetricWeights weights = metric_weights(code.frozen, 0.05, kPlanes3);
  const MetricWeights others =
      metric_weights(design_like(128, 60, Precoding::none, 6).frozen, 0.05, kPlanes3);
  EXPECT_THROW(ListDecoder(code, kPlanes3, 2, nullptr), std::invalid_argument);
  EXPECT_THROW(ListDecoder(code, kPlanes3, 2, &others), std::invalid_argument);
  EXPECT_THROW(ListDecoder(code, kPlanes3, 3, &weights), std::invalid_argument);
  EXPECT_THROW(ListDecoder(code, kPlanes3, 64, &weights), std::invalid_argument);
  EXPECT_THROW(ListDecoder(code, Arithmetic::exact(), 2, &weights), std::invalid_argument);
  EXPECT_THROW(ListDecoder(code, Arithmetic::planes_of(4), 2, &weights), std::invalid_argument);
}

TEST(PassesDecoder, DecodesWithEachListWhatTheOneBeforeRejects) {
  Generator generator(7);
  const Code code = design_like(1024, 380, Precoding::state8, 24);
  const MetricWeights weights = metric_weights(code.frozen, 0.05, kPlanes3);
  const Blocks blocks(code, patterns(generator, 1024, 64, 0.05));
  std::vector<std::vector<BitString>> alone;
  std::vector<std::unique_ptr<BatchDecoder>> passes;
  for (const unsigned list : {2U, 8U, 32U}) {
    passes.push_back(std::make_unique<ListDecoder>(code, kPlanes3, list, &weights));
    alone.push_back(blocks.decoded_by(*passes.back()));
  }
  const auto decoded = blocks.decoded_by(PassesDecoder(code.block_length(), 24, std::move(passes)));
  for (unsigned l = 0; l < blocks.lanes(); ++l) {
    std::size_t pass = 0;
    while (pass < 2 && alone[pass][l] != blocks.errors[l]) ++pass;
    EXPECT_EQ(decoded[l], alone[pass][l]);
  }
  EXPECT_LT(count_wrong(decoded, blocks.errors), count_wrong(alone[0], blocks.errors));
  EXPECT_THROW(PassesDecoder(code.block_length(), 24, {}), std::invalid_argument);
}

}  // namespace
}  // namespace frostline
