// Sender and receiver together, in memory, with decoders that are right, wrong, slow or broken.
#include <gtest/gtest.h>
#include <tbb/parallel_for.h>

#include <atomic>
#include <functional>
#include <set>
#include <vector>

#include "decode/batch_decoder.h"
#include "decode/exchange/receiver.h"
#include "decode/exchange/sender.h"
#include "polar/check_bits.h"
#include "polar/error.h"
#include "polar/lanes.h"
#include "tests/support/random_bits.h"

namespace frostline {
namespace {

using testing::Generator;
using testing::random_bits;

constexpr std::size_t kLength = 64;
constexpr unsigned kLanes = 4;

// A decoder that knows no code: every batch is handed to a function.
class ScriptedDecoder : public BatchDecoder {
 public:
  using Script = std::function<void(Span<const std::uint64_t>, unsigned, Span<std::uint64_t>)>;
  explicit ScriptedDecoder(Script script) : script_(std::move(script)) {}
  void decode(const BatchDifference& difference, Span<std::uint64_t> error_rows) const override {
    script_(difference.rows, difference.lanes, error_rows);
  }

 private:
  Script script_;
};

// Equal keys of 10 blocks at both ends, cut 4, 4, 2; all frozen but four indices.
class Exchange : public ::testing::Test {
 protected:
  Exchange()
      : design_{{testing::weight_frozen_set(BlockLength(kLength), 60), Precoding::none, 8},
                0.02,
                {"user-mask", {}},
                1,
                Arithmetic::planes_of(3),
                {},
                {},
                {},
                {}},
        key_(random_bits(generator_, kLength * 10), "key") {
    MemorySink sink;
    MessageOptions options;
    options.lanes = kLanes;
    make_message(design_.code, key_, options, sink);
    message_ = sink.bytes();
  }

  ReconcileSummary run_reconcile(const ScriptedDecoder::Script& script,
                                 const RunControl& control = {}) {
    MemorySource message(message_, "message");
    provisional_ = MemorySink();
    KeySink keys(provisional_, KeyFormat::packed);
    ReconcileSinks sinks;
    sinks.provisional = &keys;
    ReconcileOptions options;
    options.group_bits = kLength * 3;
    return reconcile(design_, ScriptedDecoder(script), key_, message, options, sinks, control);
  }
  SettleSummary run_settle(const Receipt& receipt) {
    MemorySource message(message_, "message");
    settled_ = MemorySink();
    KeySink keys(settled_, KeyFormat::packed);
    return settle(design_.code, key_, message, receipt_to_json(receipt), "receipt", keys);
  }
  ConfirmSummary run_confirm(const Receipt& receipt, const Verdict& verdict) {
    confirmed_ = MemorySink();
    KeySink keys(confirmed_, KeyFormat::packed);
    const MemoryKey provisional(
        bits_from_packed(provisional_.bytes(), 8 * provisional_.bytes().size()), "provisional");
    return confirm(provisional, receipt_to_json(receipt), "receipt", verdict_to_json(verdict),
                   "verdict", keys);
  }

  static void no_errors(Span<const std::uint64_t>, unsigned, Span<std::uint64_t> errors) {
    std::fill(errors.begin(), errors.end(), 0);
  }

  Generator generator_{3};
  Design design_;
  MemoryKey key_;
  KeyBytes message_;
  MemorySink provisional_;
  MemorySink settled_;
  MemorySink confirmed_;
};

TEST_F(Exchange, SettlesEqualKeys) {
  const ReconcileSummary received = run_reconcile(no_errors);
  EXPECT_EQ(received.accepted, 10U);
  const SettleSummary settled = run_settle(received.receipt);
  EXPECT_EQ(settled.settled_blocks, 10U);
  EXPECT_EQ(settled.rejected_groups, 0U);
  const ConfirmSummary confirmed = run_confirm(received.receipt, settled.verdict);
  EXPECT_EQ(confirmed.settled_blocks, 10U);
  EXPECT_EQ(settled_.bytes(), confirmed_.bytes());
  EXPECT_DOUBLE_EQ(settled.epsilon_correctness, received.epsilon_correctness);
}

// Any key but the one that the message was made of is found out before a bit is written.
TEST_F(Exchange, SettleRefusesAnotherKey) {
  const ReconcileSummary received = run_reconcile(no_errors);
  BitString bits(key_.bits());
  key_.read(0, bits.size(), bits.words());
  bits.flip(kLength * 7 + 5);
  const MemoryKey other(std::move(bits), "other");
  MemorySource message(message_, "message");
  MemorySink out;
  KeySink keys(out, KeyFormat::packed);
  try {
    settle(design_.code, other, message, receipt_to_json(received.receipt), "receipt", keys);
    FAIL() << "settled another key";
  } catch (const InputError& error) {
    EXPECT_STREQ(error.what(),
                 "message 'message' was not made of key 'other': block 5 or one of the next has "
                 "another syndrome");
  }
  EXPECT_TRUE(out.bytes().empty());
}

// The undetected error: a block recovered wrongly whose check bits agree. Only the tag stands
// between it and two different keys.
TEST_F(Exchange, AWrongBlockThatFoolsTheCheckBitsCostsItsGroup) {
  // A multiple of the generator X^8 + X^4 + X^3 + X^2 + 1 (1D, SAE J1850) has check value 0.
  BitString invisible(kLength);
  for (const std::size_t i : {0, 4, 5, 6, 8}) invisible.set(i, true);
  ASSERT_EQ(check_bits(invisible, 8), 0U);
  const ReconcileSummary received =
      run_reconcile([&](Span<const std::uint64_t>, unsigned lanes, Span<std::uint64_t> errors) {
        std::fill(errors.begin(), errors.end(), 0);
        if (lanes != 2) return;  // the last batch: blocks 8 and 9, group 2 and group 3
        for (std::size_t i = 0; i < kLength; ++i) {
          if (invisible[i]) errors[i * lanes / 64] |= std::uint64_t{1} << (i * lanes % 64);
        }
      });
  EXPECT_EQ(received.accepted, 10U);
  EXPECT_EQ(received.errors[8], 5U);
  const SettleSummary settled = run_settle(received.receipt);
  EXPECT_EQ(bits_to_text(settled.verdict.group_kept), "1101");
  EXPECT_EQ(settled.settled_blocks, 7U);
  EXPECT_EQ(settled.ledger.accepted.tag, 3U * 128);
  EXPECT_LT(settled.epsilon_correctness, received.epsilon_correctness);
  const ConfirmSummary confirmed = run_confirm(received.receipt, settled.verdict);
  EXPECT_EQ(confirmed.rejected_groups, 1U);
  EXPECT_EQ(settled_.bytes(), confirmed_.bytes());
  EXPECT_EQ(settled_.bytes().size(), 7 * kLength / 8);
}

TEST_F(Exchange, AWrongBlockThatTheCheckBitsSeeIsLeftOut) {
  const ReconcileSummary received =
      run_reconcile([](Span<const std::uint64_t>, unsigned lanes, Span<std::uint64_t> errors) {
        std::fill(errors.begin(), errors.end(), 0);
        errors[0] ^= std::uint64_t{1} << (lanes - 1);  // position 0 of the last lane
      });
  // Blocks 3, 7 and 9.
  EXPECT_EQ(bits_to_text(received.receipt.accepted), "1110111010");
  EXPECT_EQ(received.failed(), 3U);
  EXPECT_EQ(received.errors[3], std::nullopt);
  const SettleSummary settled = run_settle(received.receipt);
  EXPECT_EQ(settled.rejected_groups, 0U);
  run_confirm(received.receipt, settled.verdict);
  EXPECT_EQ(settled_.bytes(), confirmed_.bytes());
  // Groups of three blocks: 0-2, 3-5, 6-8; block 9 failed, and group 3 with it.
  ASSERT_EQ(received.receipt.groups.size(), 3U);
  EXPECT_EQ(received.receipt.groups[1].accepted, 2U);
}

TEST_F(Exchange, StopsWhenAsked) {
  std::atomic<bool> stop{false};
  std::atomic<unsigned> decoded{0};
  RunControl control;
  control.stop = &stop;
  EXPECT_THROW(run_reconcile(
                   [&](Span<const std::uint64_t> rows, unsigned lanes, Span<std::uint64_t> errors) {
                     no_errors(rows, lanes, errors);
                     ++decoded;
                     stop = true;
                   },
                   control),
               Interrupted);
  EXPECT_GE(decoded, 1U);
  stop = true;
  MemorySink sink;
  EXPECT_THROW(make_message(design_.code, key_, {}, sink, control), Interrupted);
}

TEST_F(Exchange, TellsItsProgressInOrder) {
  std::vector<std::uint64_t> told;
  RunControl control;
  control.progress = [&](std::uint64_t done, std::uint64_t total) {
    EXPECT_EQ(total, 10U);
    told.push_back(done);
  };
  run_reconcile(no_errors, control);
  EXPECT_EQ(told, (std::vector<std::uint64_t>{4, 8, 10}));
}

TEST_F(Exchange, LetsABrokenDecodersErrorThrough) {
  EXPECT_THROW(run_reconcile([](Span<const std::uint64_t>, unsigned, Span<std::uint64_t>) {
                 throw std::runtime_error("broken");
               }),
               std::runtime_error);
}

// A damaged record cancels the run while other batches are being decoded.
TEST_F(Exchange, ABatchIsDecodedToItsEndInACancelledRun) {
  const auto decoder = make_batch_decoder(design_);
  const std::size_t words = words_for(kLength * kLanes);
  const KeyWords differences(words);
  KeyWords errors(words, ~std::uint64_t{0});
  tbb::task_group_context context;
  tbb::parallel_for(
      0, 1,
      [&](int) {
        context.cancel_group_execution();
        decoder->decode({kLanes, differences, {}}, errors);
      },
      context);
  EXPECT_EQ(count_ones(errors), 0U);
}

TEST_F(Exchange, HashKeysAreFresh) {
  std::set<HashKey> keys;
  for (int run = 0; run < 3; ++run) {
    for (const Group& group : run_reconcile(no_errors).receipt.groups) keys.insert(group.hash_key);
  }
  EXPECT_EQ(keys.size(), 3U * 4);
}

TEST_F(Exchange, GroupsBalanceTagsAgainstLostKey) {
  // sqrt(128 / (N FER 2^-c)): N = 64, c = 8, FER 0.5 gives sqrt(128 256 / 32) = 32 blocks.
  design_.predicted.fer = 0.5;
  EXPECT_EQ(default_group_blocks(design_), 32U);
  // Without a prediction one block in ten is taken to fail: sqrt(128 256 / 6.4) = 71.55.
  design_.predicted.fer.reset();
  EXPECT_EQ(default_group_blocks(design_), 71U);
  design_.code.check_bits = 0;
  EXPECT_EQ(default_group_blocks(design_), 1U);
  // At most 2^26 bits.
  design_.code.check_bits = 24;
  design_.predicted.fer = 1e-9;
  EXPECT_EQ(default_group_blocks(design_), (std::uint64_t{1} << 26) / kLength);
}

}  // namespace
}  // namespace frostline
