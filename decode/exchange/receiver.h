// The receiver's two steps: provisional key and receipt out of key and message, and the settled key
// out of the verdict.
#pragma once

#include <cstdint>
#include <optional>
#include <vector>

#include "decode/batch_decoder.h"
#include "decode/exchange/key_files.h"
#include "decode/exchange/ledger.h"
#include "decode/exchange/message.h"
#include "decode/exchange/qber_estimate.h"
#include "decode/exchange/receipt.h"
#include "decode/exchange/run_control.h"
#include "polar/design.h"

namespace frostline {

struct ReconcileOptions {
  // Blocks a group, from --group BITS; default_group_blocks where not given.
  std::optional<std::uint64_t> group_bits;
  // Test only: hash keys come from this seed and the receipt is marked.
  std::optional<std::uint64_t> test_seed;
};

// Where the receiver's bits go; null where not wanted.
struct ReconcileSinks {
  KeySink* provisional = nullptr;  // accepted blocks, corrected, by ascending number
  KeySink* failed = nullptr;       // failed blocks as they were received, by ascending number
  KeySink* rest = nullptr;         // bits that are in no block
};

struct ReconcileSummary {
  MessageHeader header;
  Receipt receipt;
  std::uint64_t blocks = 0;
  std::uint64_t rest_bits = 0;
  // Number of corrected positions of each block, none where it failed.
  std::vector<std::optional<std::uint32_t>> errors;
  std::uint64_t accepted = 0;
  std::uint64_t errors_corrected = 0;
  Ledger ledger;  // if every group is kept
  double epsilon_correctness = 0;
  // Over accepted blocks: biased low, because blocks with many errors fail. 0 where there is none.
  double accepted_qber = 0;
  // Of the failed blocks: maximum likelihood from their syndrome differences.
  QberEstimate failed_qber;
  // Over all blocks: what was corrected in accepted ones, and the estimate for failed ones. None
  // where the failed blocks tell nothing.
  struct Interval {
    double qber;
    double low;
    double high;
  };
  std::optional<Interval> all_blocks_qber;

  std::uint64_t failed() const { return blocks - accepted; }
};

// Blocks a group that balance the tag's leakage (128 bits a group) against the key lost when a
// group is rejected because a wrong block slipped through its check bits, which happens with
// probability FER 2^-c a block: sqrt(128 / (N FER 2^-c)), at least 1, at most 2^26 bits. 1 without
// check bits. FER is the design's prediction, 0.1 where it has none.
std::uint64_t default_group_blocks(const Design& design);

// Decodes. Throws InputError when key, message and design do not belong together, or when a design
// without check bits is asked for groups of more than one block.
ReconcileSummary reconcile(const Design& design, const BatchDecoder& decoder, const KeySource& key,
                           ByteSource& message, const ReconcileOptions& options,
                           const ReconcileSinks& sinks, const RunControl& control = {});

struct ConfirmSummary {
  SessionNumber session{};
  std::uint64_t block_length = 0;
  std::uint64_t blocks = 0;
  std::uint64_t settled_bits = 0;
  std::uint64_t settled_blocks = 0;
  std::uint64_t rejected_groups = 0;
  std::uint64_t groups = 0;
  Ledger ledger;
  double epsilon_correctness = 0;
  bool test_only = false;
};

// Drops the groups that the verdict rejects from the provisional key.
// Throws InputError when the three do not belong together: the verdict names the receipt's digest,
// and the provisional key shows the receipt's tags.
ConfirmSummary confirm(const KeySource& provisional, std::string_view receipt_text,
                       std::string_view receipt_name, std::string_view verdict_text,
                       std::string_view verdict_name, KeySink& settled,
                       const RunControl& control = {});

}  // namespace frostline
