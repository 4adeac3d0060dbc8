// The sender's two steps: the message out of a key, and the settled key out of the receipt.
#pragma once

#include <cstdint>
#include <optional>

#include "decode/exchange/key_files.h"
#include "decode/exchange/ledger.h"
#include "decode/exchange/message.h"
#include "decode/exchange/receipt.h"
#include "decode/exchange/run_control.h"
#include "polar/code.h"

namespace frostline {

struct MessageOptions {
  std::optional<unsigned> lanes;  // default_lanes(N) where not given
  // Test only: the session number comes from this seed and the message is marked.
  std::optional<std::uint64_t> test_seed;
};

struct MessageSummary {
  MessageHeader header;
  std::uint64_t blocks = 0;
  std::uint64_t rest_bits = 0;
  std::uint64_t message_bytes = 0;
  LeakedBits disclosed;
  Sha256 message{};
};

// Writes the message of a key. Throws InputError when the key is shorter than one block.
MessageSummary make_message(const Code& code, const KeySource& key, const MessageOptions& options,
                            ByteSink& out, const RunControl& control = {});

struct SettleSummary {
  Verdict verdict;
  std::uint64_t blocks = 0;
  std::uint64_t accepted_by_receiver = 0;
  std::uint64_t settled_blocks = 0;
  std::uint64_t rejected_groups = 0;
  std::uint64_t settled_bits = 0;
  Ledger ledger;
  double epsilon_correctness = 0;  // sum of the collision bounds of the kept groups' tags
};

// Checks the receipt's tags against the sender's key and writes the accepted blocks of the groups
// that agree. message is the message as it was sent, receipt_text the receipt as it came in.
// Throws InputError when receipt, message, key and code do not belong together, or when a code
// without check bits comes with a group of more than one block.
SettleSummary settle(const Code& code, const KeySource& key, ByteSource& message,
                     std::string_view receipt_text, std::string_view receipt_name, KeySink& settled,
                     const RunControl& control = {});

}  // namespace frostline
