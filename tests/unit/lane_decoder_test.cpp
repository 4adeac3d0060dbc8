// The bit-sliced decoder against the scalar reference, bit for bit, on every target that the
// machine has.
#include <gtest/gtest.h>

#include "construct/designer.h"
#include "decode/lanes/lane_decoder.h"
#include "decode/reference/reference_batch_decoder.h"
#include "polar/lanes.h"
#include "polar/random.h"
#include "polar/simd.h"
#include "polar/syndrome.h"

namespace frostline {
namespace {

// Forces one set of vector instructions while it lives.
class WithSimd {
 public:
  explicit WithSimd(const std::string& name) { force_simd(name); }
  ~WithSimd() { reset_simd(); }
  WithSimd(const WithSimd&) = delete;
  WithSimd& operator=(const WithSimd&) = delete;
};

KeyWords decoded(const BatchDecoder& decoder, const KeyWords& difference, unsigned lanes) {
  KeyWords errors(difference.size());
  decoder.decode({lanes, difference, {}}, errors);
  return errors;
}

// Rows of a batch with the difference bits of random error patterns: values at frozen indices, 0 at
// open ones.
struct Case {
  KeyWords errors;
  KeyWords difference;
};

Case random_case(const SyndromeFormer& former, double p, unsigned lanes, std::uint64_t stream) {
  const std::size_t bits = former.frozen().block_length().bits() * lanes;
  Case random{KeyWords(words_for(bits)), {}};
  RandomStream(77, "lane decoder test", stream).bernoulli(p, bits, random.errors);
  random.difference = random.errors;
  former.to_public_rows(random.difference, lanes);
  former.scatter(former.gather(random.difference, lanes), lanes, random.difference);
  return random;
}

// Numbers of lanes whose pattern was found, and of lanes where it was not.
struct Outcome {
  std::uint64_t right = 0;
  std::uint64_t wrong = 0;
};

void count_outcomes(const Case& random, const KeyWords& found, BlockLength block_length,
                    unsigned lanes, Outcome& outcome) {
  const std::size_t bits = block_length.bits();
  KeyWords sum = found;
  for (std::size_t i = 0; i < sum.size(); ++i) sum[i] ^= random.errors[i];
  KeyWords blocks(sum.size());
  lanes_to_blocks(sum, block_length, lanes, blocks);
  for (unsigned lane = 0; lane < lanes; ++lane) {
    KeyWords block(words_for(bits));
    copy_bits(blocks, bits * lane, block, 0, bits);
    ++(count_ones(block) == 0 ? outcome.right : outcome.wrong);
  }
}

void expect_equal(const Code& code, unsigned planes, double p, unsigned lanes, std::uint64_t stream,
                  Outcome& outcome) {
  const Arithmetic arithmetic = Arithmetic::planes_of(planes);
  const SyndromeFormer former(code.frozen, Precoding::none);
  const Case random = random_case(former, p, lanes, stream);
  const ReferenceBatchDecoder reference(code, arithmetic, 0.05);
  const LaneDecoder fast(code, arithmetic);
  const KeyWords expected = decoded(reference, random.difference, lanes);
  count_outcomes(random, expected, code.block_length(), lanes, outcome);
  for (const std::string& name : simd_names()) {
    const WithSimd forced(name);
    ASSERT_TRUE(decoded(fast, random.difference, lanes) == expected)
        << "N " << code.block_length().bits() << ", lanes " << lanes << ", planes " << planes
        << ", " << name;
  }
}

Code designed_code(unsigned log2, unsigned planes, double p, double fer) {
  const Arithmetic arithmetic = Arithmetic::planes_of(planes);
  const Ranking ranking = rank_indices(BlockLength::from_log2(log2), p,
                                       default_construction(arithmetic), 0, arithmetic);
  return make_design(ranking, {Goal::Kind::fer, fer, 0}, {}, {}).design.code;
}

TEST(LaneDecoder, EqualsReferenceOnDesignsForEveryLaneCount) {
  Outcome outcome;
  for (unsigned log2 = 3; log2 <= 12; ++log2) {
    for (unsigned lanes = 1; lanes <= 512; lanes *= 2) {
      if ((std::size_t{lanes} << log2) > (std::size_t{1} << 17)) continue;
      for (const unsigned planes : {2U, 3U}) {
        const Code code = designed_code(log2, planes, 0.05, 0.5);
        // More errors than the design is for, so that many blocks fail.
        expect_equal(code, planes, 0.058, lanes, 100 * log2 + lanes, outcome);
      }
    }
  }
  EXPECT_GT(3 * outcome.wrong, outcome.right + outcome.wrong);
  EXPECT_GT(outcome.right, 0U);
}

// Any frozen set, outside the partial order too: every density, and runs of either kind.
TEST(LaneDecoder, EqualsReferenceOnRandomFrozenSets) {
  Outcome outcome;
  RandomStream random(78, "random frozen sets", 0);
  for (int k = 0; k < 400; ++k) {
    const auto log2 = static_cast<unsigned>(3 + random.below(9));
    const BlockLength block_length = BlockLength::from_log2(log2);
    unsigned lanes = 1U << random.below(10);
    while ((std::size_t{lanes} << log2) > (std::size_t{1} << 16)) lanes /= 2;
    BitString mask(block_length.bits());
    random.bernoulli(random.uniform(), mask.size(), mask.words());
    const std::size_t runs = random.below(6);
    for (std::size_t r = 0; r < runs; ++r) {
      const std::size_t first = random.below(mask.size());
      const std::size_t count = std::min<std::size_t>(mask.size() - first, 1 + random.below(64));
      const bool value = random.below(2) == 1;
      for (std::size_t i = 0; i < count; ++i) mask.set(first + i, value);
    }
    const Code code{FrozenSet(block_length, mask), Precoding::none, 0};
    expect_equal(code, 2 + static_cast<unsigned>(k % 2), 0.2 * random.uniform(), lanes,
                 static_cast<std::uint64_t>(10000 + k), outcome);
  }
  EXPECT_GT(3 * outcome.wrong, outcome.right + outcome.wrong);
}

TEST(LaneDecoder, EqualsReferenceOnLongBlocks) {
  Outcome outcome;
  for (const auto& [log2, lanes] :
       {std::pair{14U, 8U}, {16U, 4U}, {18U, 2U}, {20U, 1U}, {24U, 1U}}) {
    expect_equal(designed_code(log2, 3, 0.02, 0.1), 3, 0.0205, lanes, log2, outcome);
  }
}

TEST(LaneDecoder, ALaneThatFailsDisturbsNoOther) {
  const Code code = designed_code(10, 3, 0.02, 0.01);
  const SyndromeFormer former(code.frozen, Precoding::none);
  const LaneDecoder decoder(code, Arithmetic::planes_of(3));
  const unsigned lanes = 64;
  Case random = random_case(former, 0.015, lanes, 5);
  const KeyWords before = decoded(decoder, random.difference, lanes);
  // Lane 17 becomes noise: its difference bits are drawn anew.
  KeyWords noise(random.difference.size());
  RandomStream(79, "noise", 0).bernoulli(0.5, 64 * noise.size(), noise);
  for (std::size_t i = 0; i < noise.size(); ++i) {
    const std::uint64_t lane = std::uint64_t{1} << 17;
    if (code.frozen.is_frozen(i)) random.difference[i] ^= noise[i] & lane;
  }
  const KeyWords after = decoded(decoder, random.difference, lanes);
  std::uint64_t changed = 0;
  for (std::size_t i = 0; i < before.size(); ++i) changed |= before[i] ^ after[i];
  EXPECT_EQ(changed, std::uint64_t{1} << 17);
}

TEST(LaneDecoder, ServesOnlyWhatItIsBuiltFor) {
  const Code plain = designed_code(6, 3, 0.05, 0.1);
  EXPECT_TRUE(LaneDecoder::serves(plain, Arithmetic::planes_of(2)));
  EXPECT_TRUE(LaneDecoder::serves(plain, Arithmetic::planes_of(3)));
  EXPECT_FALSE(LaneDecoder::serves(plain, Arithmetic::planes_of(4)));
  EXPECT_FALSE(LaneDecoder::serves(plain, Arithmetic::exact()));
  Code precoded = plain;
  precoded.precoding = Precoding::state8;
  EXPECT_FALSE(LaneDecoder::serves(precoded, Arithmetic::planes_of(3)));
  EXPECT_THROW(LaneDecoder(precoded, Arithmetic::planes_of(3)), std::invalid_argument);
  const LaneDecoder decoder(plain, Arithmetic::planes_of(3));
  KeyWords rows(3);
  EXPECT_THROW(decoder.decode({3, rows, {}}, rows), std::invalid_argument);
}

}  // namespace
}  // namespace frostline
