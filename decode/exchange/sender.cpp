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

// What the sender's first pass over its key finds out.
struct FirstPass {
  BitString agree;  // which groups' tags agree with the sender's own blocks
  Sha256 message;   // digest of the whole message
};

struct TagsWork {
  Batch batch;
  MessageRecord record;
  KeyWords rows;
  KeyWords blocks;
  KeyBytes packed;
  bool made_of_key = false;
};

// Reads the message beside the key and makes sure that it was made of it: another key would only
// show in tags that all disagree, after everything was lost.
FirstPass check_tags(const Code& code, const KeySource& key, MessageReader& reader,
                     const std::string& message_name, const Receipt& receipt,
                     const RunControl& control) {
  const Cut& cut = reader.cut();
  const SyndromeFormer former(code.frozen, code.precoding);
  FirstPass result{BitString(receipt.groups.size()), {}};
  std::size_t group = 0;
  std::uint64_t seen = 0;
  std::optional<TagHasher> hasher;
  run_batches<TagsWork>(
      cut, control,
      [&](const Batch& batch, TagsWork& work) {
        work.record = reader.next();
        read_rows(key, cut, batch, work.rows);
      },
      [&](TagsWork& work) {
        rows_as_blocks(work.rows, cut, work.batch, work.blocks);
        pack_blocks(work.blocks, cut, work.batch, work.packed);
        work.made_of_key = lane_checks(work.blocks, code, work.batch.lanes) == work.record.checks;
        former.to_public_rows(work.rows, work.batch.lanes);
        work.made_of_key =
            work.made_of_key && former.gather(work.rows, work.batch.lanes) == work.record.syndrome;
      },
      [&](TagsWork& work) {
        if (!work.made_of_key) {
          throw InputError("message '" + message_name + "' was not made of key '" + key.name() +
                           "': block " + std::to_string(work.batch.first_block + 1) +
                           " or one of the next has another syndrome");
        }
        for (unsigned lane = 0; lane < work.batch.lanes; ++lane) {
          if (!receipt.accepted[work.batch.first_block + lane]) continue;
          const Group& current = receipt.groups[group];
          if (seen == 0) hasher.emplace(current.hash_key);
          hasher->update(packed_block(work.packed, cut, lane));
          if (++seen == current.accepted) {
            result.agree.set(group, tags_equal(hasher->finish(), current.tag));
            ++group;
            seen = 0;
          }
        }
      });
  result.message = reader.finish();
  return result;
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

[[noreturn]] void fail_other_message(const std::string& name) {
  throw InputError("receipt '" + name + "' answers another message");
}

// All but the message's digest, which is known at its end only.
void require_belongs(const Receipt& receipt, const MessageReader& reader, const Code& code,
                     const std::string& name) {
  if (receipt.session != reader.header().session) fail_other_message(name);
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
  require_belongs(receipt, reader, code, std::string(receipt_name));

  const Cut& cut = reader.cut();
  const std::size_t bits = code.block_length().bits();
  SettleSummary summary;
  Verdict& verdict = summary.verdict;
  verdict.session = receipt.session;
  verdict.test_only = receipt.test_only;
  verdict.receipt = sha256(receipt_text);
  // Two passes over the key, so that no group has to wait in memory for its tag.
  FirstPass first = check_tags(code, key, reader, message.name(), receipt, {{}, control.stop});
  if (receipt.message != first.message) fail_other_message(std::string(receipt_name));
  verdict.group_kept = std::move(first.agree);
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
