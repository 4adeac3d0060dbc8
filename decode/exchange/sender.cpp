#include "decode/exchange/sender.h"

#include <optional>
#include <string>

#include "decode/exchange/batches.h"
#include "decode/exchange/lane_checks.h"
#include "decode/exchange/session.h"
#include "polar/error.h"
#include "polar/syndrome.h"
#include "polar/tag.h"

namespace frostline {
namespace {

struct MessageWork {
  Batch batch;
  KeyWords rows;
  KeyWords blocks;
  MessageRecord record;
};

struct BlocksWork {
  Batch batch;
  KeyWords rows;
  KeyWords blocks;
  KeyBytes packed;
};

// Calls visit(block number, packed block) for every accepted block in ascending order.
template <typename Visit>
void for_accepted_blocks(const KeySource& key, const Cut& cut, const BitString& accepted,
                         const RunControl& control, Visit&& visit) {
  run_batches<BlocksWork>(
      cut, control,
      [&](const Batch& batch, BlocksWork& work) { read_rows(key, cut, batch, work.rows); },
      [&](BlocksWork& work) {
        rows_as_blocks(work.rows, cut, work.batch, work.blocks);
        pack_blocks(work.blocks, cut, work.batch, work.packed);
      },
      [&](BlocksWork& work) {
        for (unsigned lane = 0; lane < work.batch.lanes; ++lane) {
          const std::uint64_t number = work.batch.first_block + lane;
          if (accepted[number]) visit(number, packed_block(work.packed, cut, lane));
        }
      });
}

// Which groups' tags agree with the sender's own blocks.
BitString agreeing_groups(const KeySource& key, const Cut& cut, const Receipt& receipt,
                          const RunControl& control) {
  BitString agree(receipt.groups.size());
  std::size_t group = 0;
  std::uint64_t seen = 0;
  std::optional<TagHasher> hasher;
  for_accepted_blocks(key, cut, receipt.accepted, control,
                      [&](std::uint64_t, Span<const std::uint8_t> block) {
                        const Group& current = receipt.groups[group];
                        if (seen == 0) hasher.emplace(current.hash_key);
                        hasher->update(block);
                        if (++seen == current.accepted) {
                          agree.set(group, tags_equal(hasher->finish(), current.tag));
                          ++group;
                          seen = 0;
                        }
                      });
  return agree;
}

// Accepted blocks of the groups that are kept.
BitString kept_blocks(const Receipt& receipt, const BitString& group_kept) {
  BitString kept = receipt.accepted;
  for (std::size_t g = 0; g < receipt.groups.size(); ++g) {
    if (group_kept[g]) continue;
    const Group& group = receipt.groups[g];
    for (std::uint64_t b = 0; b < group.block_count; ++b) kept.set(group.first_block + b, false);
  }
  return kept;
}

// Reads the message to its end, so that it is known to be whole, and gives its digest.
Sha256 read_through(MessageReader& reader) {
  for (std::uint64_t i = 0; i < reader.cut().batch_count(); ++i) reader.next();
  return reader.finish();
}

void require_belongs(const Receipt& receipt, const MessageReader& reader, const Sha256& message,
                     const Code& code, const std::string& name) {
  if (receipt.message != message || receipt.session != reader.header().session) {
    throw InputError("receipt '" + name + "' answers another message");
  }
  if (receipt.code != code_sha256(code) || receipt.block_length != code.block_length().bits() ||
      receipt.frozen_count != code.frozen.frozen_count() || receipt.check_bits != code.check_bits) {
    throw InputError("receipt '" + name + "' was made with another design");
  }
  if (receipt.accepted.size() != reader.cut().block_count()) {
    throw InputError("receipt '" + name + "' tells of " + std::to_string(receipt.accepted.size()) +
                     " blocks where the message has " + std::to_string(reader.cut().block_count()));
  }
  if (code.check_bits > 0) return;
  for (const Group& group : receipt.groups) {
    if (group.block_count != 1) {
      throw InputError("receipt '" + name +
                       "': without check bits a tag must cover each block alone");
    }
  }
}

}  // namespace

MessageSummary make_message(const Code& code, const KeySource& key, const MessageOptions& options,
                            ByteSink& out, const RunControl& control) {
  const BlockLength block_length = code.block_length();
  require_a_block(key, block_length);
  const Cut cut(block_length, key.bits(), options.lanes.value_or(default_lanes(block_length)));
  MessageSummary summary;
  MessageHeader& header = summary.header;
  header.session = make_session_number(options.test_seed);
  header.test_only = options.test_seed.has_value();
  header.code = code_sha256(code);
  header.block_length = static_cast<std::uint32_t>(block_length.bits());
  header.lanes = cut.lanes();
  header.key_bits = key.bits();
  header.check_bits = code.check_bits;

  const SyndromeFormer former(code.frozen, code.precoding);
  MessageWriter writer(out, header);
  run_batches<MessageWork>(
      cut, control,
      [&](const Batch& batch, MessageWork& work) { read_rows(key, cut, batch, work.rows); },
      [&](MessageWork& work) {
        rows_as_blocks(work.rows, cut, work.batch, work.blocks);
        work.record.checks = lane_checks(work.blocks, code, work.batch.lanes);
        former.to_public_rows(work.rows, work.batch.lanes);
        work.record.syndrome = former.gather(work.rows, work.batch.lanes);
      },
      [&](MessageWork& work) { writer.write(work.batch.lanes, work.record); });
  summary.message = writer.finish();
  summary.message_bytes = writer.bytes();
  summary.blocks = cut.block_count();
  summary.rest_bits = cut.rest_bits();
  summary.disclosed.syndrome = cut.block_count() * code.frozen.frozen_count();
  summary.disclosed.check = cut.block_count() * code.check_bits;
  return summary;
}

SettleSummary settle(const Code& code, const KeySource& key, ByteSource& message,
                     std::string_view receipt_text, std::string_view receipt_name, KeySink& settled,
                     const RunControl& control) {
  const Receipt receipt = receipt_from_json(receipt_text, receipt_name);
  MessageReader reader(message, code);
  require_same_length(key, reader.header(), message.name());
  require_a_block(key, code.block_length());
  require_belongs(receipt, reader, read_through(reader), code, std::string(receipt_name));

  const Cut& cut = reader.cut();
  const std::size_t bits = code.block_length().bits();
  SettleSummary summary;
  Verdict& verdict = summary.verdict;
  verdict.session = receipt.session;
  verdict.test_only = receipt.test_only;
  verdict.receipt = sha256(receipt_text);
  // Two passes over the key, so that no group has to wait in memory for its tag.
  verdict.group_kept = agreeing_groups(key, cut, receipt, RunControl{{}, control.stop});
  for_accepted_blocks(
      key, cut, kept_blocks(receipt, verdict.group_kept), control,
      [&](std::uint64_t, Span<const std::uint8_t> block) { settled.write_packed(block); });
  settled.finish();

  summary.blocks = cut.block_count();
  summary.accepted_by_receiver = receipt.accepted.count();
  summary.rejected_groups = receipt.groups.size() - verdict.group_kept.count();
  summary.settled_bits = settled.bits();
  summary.settled_blocks = settled.bits() / bits;
  summary.ledger = book_leakage(code, summary.blocks, summary.settled_blocks, receipt.groups.size(),
                                verdict.group_kept.count());
  for (std::size_t g = 0; g < receipt.groups.size(); ++g) {
    if (!verdict.group_kept[g]) continue;
    summary.epsilon_correctness += tag_collision_bound(receipt.groups[g].accepted * bits / 8);
  }
  return summary;
}

}  // namespace frostline
