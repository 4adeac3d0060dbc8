#include "decode/exchange/receiver.h"

#include <algorithm>
#include <cmath>
#include <optional>

#include "decode/exchange/batches.h"
#include "decode/exchange/lane_checks.h"
#include "decode/exchange/session.h"
#include "polar/error.h"
#include "polar/syndrome.h"
#include "polar/tag.h"

namespace frostline {
namespace {

constexpr double kAssumedFer = 0.1;
constexpr double kMaxDefaultGroupBits = 67108864;  // 2^26

// One batch on its way through the receiver.
struct ReconcileWork {
  Batch batch;
  MessageRecord record;
  KeyWords rows;          // of x_B as it lies in the key
  KeyWords blocks;        // block after block: x_B, then x_B plus the error pattern
  KeyWords difference;    // rows
  KeyWords error_rows;    //
  KeyWords errors;        // block after block: the error pattern
  KeyBytes packed;        // of blocks
  BitString lane_agrees;  // check bits of the corrected block equal the sender's
  std::vector<std::uint32_t> lane_errors;
  DifferenceCounts counts;
};

// Sets the bits of the given lanes to 0 in every row.
void clear_lanes(const BitString& cleared, KeyWords& rows) {
  const std::size_t lanes = cleared.size();
  // The pattern of one row, repeated until it fills a word, or the words of a row.
  BitString pattern(std::max<std::size_t>(lanes, 64));
  for (std::size_t i = 0; i < pattern.size(); ++i) pattern.set(i, cleared[i % lanes]);
  const Span<const std::uint64_t> words = pattern.words();
  for (std::size_t i = 0; i < rows.size(); ++i) rows[i] &= ~words[i % words.size()];
}

// The QBER over all blocks from what was corrected and from the failed blocks' syndromes.
std::optional<ReconcileSummary::Interval> qber_of_all_blocks(const ReconcileSummary& summary,
                                                             std::size_t block_bits) {
  if (summary.failed() > 0 && summary.failed_qber.looks_unrelated) return std::nullopt;
  const auto total = static_cast<double>(summary.blocks);
  const double known =
      static_cast<double>(summary.errors_corrected) / (total * static_cast<double>(block_bits));
  const double share = static_cast<double>(summary.failed()) / total;
  const QberEstimate& failed = summary.failed_qber;
  if (share == 0) return ReconcileSummary::Interval{known, known, known};
  return ReconcileSummary::Interval{known + share * failed.qber, known + share * failed.low,
                                    known + share * failed.high};
}

// Which lanes have all bits of the rows 0.
BitString lanes_without_ones(const BitString& rows, unsigned lanes) {
  BitString clear(lanes);
  for (unsigned lane = 0; lane < lanes; ++lane) {
    bool ones = false;
    for (std::size_t i = lane; i < rows.size(); i += lanes) ones = ones || rows[i];
    clear.set(lane, !ones);
  }
  return clear;
}

// Number of ones of every block.
void count_errors(const KeyWords& blocks, std::size_t block_bits,
                  std::vector<std::uint32_t>& errors) {
  KeyWords block(words_for(block_bits));
  for (std::size_t lane = 0; lane < errors.size(); ++lane) {
    Span<const std::uint64_t> words = block;
    if (block_bits % 64 == 0) {
      words = Span<const std::uint64_t>(blocks).subspan(lane * (block_bits / 64), block_bits / 64);
    } else {
      copy_bits(blocks, block_bits * lane, block, 0, block_bits);
    }
    errors[lane] = static_cast<std::uint32_t>(count_ones(words));
  }
}

// Forms the syndrome difference, decodes it, and checks every lane.
void reconcile_batch(const SyndromeFormer& former, const DifferenceCounter& counter,
                     const Code& code, const BatchDecoder& decoder, const Cut& cut,
                     ReconcileWork& work) {
  const unsigned lanes = work.batch.lanes;
  rows_as_blocks(work.rows, cut, work.batch, work.blocks);
  // Before the decoder's answer is known, so that it may use the check bits to choose paths.
  BitString checks = lane_checks(work.blocks, code, lanes);
  checks ^= work.record.checks;
  work.difference = work.rows;
  former.to_public_rows(work.difference, lanes);
  former.subtract(work.record.syndrome, lanes, work.difference);

  work.error_rows.resize(work.rows.size());
  decoder.decode({lanes, work.difference, checks.words()}, work.error_rows);
  rows_as_blocks(work.error_rows, cut, work.batch, work.errors);
  checks ^= lane_checks(work.errors, code, lanes);
  work.lane_agrees = lanes_without_ones(checks, lanes);
  work.lane_errors.resize(lanes);
  count_errors(work.errors, cut.block_length().bits(), work.lane_errors);
  for (std::size_t i = 0; i < work.blocks.size(); ++i) work.blocks[i] ^= work.errors[i];
  pack_blocks(work.blocks, cut, work.batch, work.packed);
  work.counts = {};
  const auto failed = static_cast<unsigned>(lanes - work.lane_agrees.count());
  if (failed == 0) return;
  clear_lanes(work.lane_agrees, work.difference);
  work.counts = counter.count(work.difference, lanes, failed);
}

// Tags accepted blocks group by group while they come by in ascending order.
class GroupTagger {
 public:
  GroupTagger(std::uint64_t blocks, std::uint64_t group_blocks,
              std::optional<std::uint64_t> test_seed)
      : blocks_(blocks), group_blocks_(group_blocks), test_seed_(test_seed) {}

  void add(std::uint64_t block, Span<const std::uint8_t> packed) {
    const std::uint64_t first = block / group_blocks_ * group_blocks_;
    if (!hasher_ || groups_.back().first_block != first) {
      close();
      Group group;
      group.first_block = first;
      group.block_count = std::min(group_blocks_, blocks_ - first);
      // The key is fresh, and stays here until the receipt is written: by then both ends' strings
      // and the message are fixed.
      group.hash_key = make_hash_key(test_seed_, first / group_blocks_);
      hasher_.emplace(group.hash_key);
      groups_.push_back(group);
    }
    hasher_->update(packed);
    ++groups_.back().accepted;
  }

  std::vector<Group> finish() {
    close();
    return std::move(groups_);
  }

 private:
  void close() {
    if (!hasher_) return;
    groups_.back().tag = hasher_->finish();
    hasher_.reset();
  }

  std::uint64_t blocks_;
  std::uint64_t group_blocks_;
  std::optional<std::uint64_t> test_seed_;
  std::vector<Group> groups_;
  std::optional<TagHasher> hasher_;
};

std::uint64_t choose_group_blocks(const Design& design, const ReconcileOptions& options) {
  const std::uint64_t bits = design.code.block_length().bits();
  if (!options.group_bits) return default_group_blocks(design);
  const std::uint64_t blocks = std::max<std::uint64_t>(1, *options.group_bits / bits);
  if (design.code.check_bits == 0 && blocks > 1) {
    throw InputError(
        "the design has no check bits, so a tag must cover each block alone: groups of " +
        std::to_string(bits) + " bits, not " + std::to_string(*options.group_bits));
  }
  return blocks;
}

void write_rest(const KeySource& key, const Cut& cut, KeySink& sink) {
  const auto bits = static_cast<std::size_t>(cut.rest_bits());
  if (bits > 0) {
    KeyWords rest(words_for(bits));
    key.read(cut.key_bits() - bits, bits, rest);
    sink.write(rest, bits);
  }
  sink.finish();
}

// Hands the blocks of a batch on in order: to the sinks, to the tags and to the summary.
void hand_on(const ReconcileWork& work, const Cut& cut, const ReconcileSinks& sinks,
             GroupTagger& tagger, ReconcileSummary& summary) {
  const std::size_t bits = cut.block_length().bits();
  for (unsigned lane = 0; lane < work.batch.lanes; ++lane) {
    const std::uint64_t number = work.batch.first_block + lane;
    if (work.lane_agrees[lane]) {
      const Span<const std::uint8_t> packed = packed_block(work.packed, cut, lane);
      tagger.add(number, packed);
      if (sinks.provisional != nullptr) sinks.provisional->write_packed(packed);
      summary.errors[number] = work.lane_errors[lane];
      summary.errors_corrected += work.lane_errors[lane];
      summary.receipt.accepted.set(number, true);
    } else if (sinks.failed != nullptr) {
      // As it was received: the pattern that was found is taken off again.
      KeyWords block(words_for(bits));
      KeyWords pattern(block.size());
      copy_bits(work.blocks, bits * lane, block, 0, bits);
      copy_bits(work.errors, bits * lane, pattern, 0, bits);
      for (std::size_t i = 0; i < block.size(); ++i) block[i] ^= pattern[i];
      sinks.failed->write(block, bits);
    }
  }
}

// The tags of the receipt tell the key that it was made of from another run's of the same size.
void require_tagged(const KeySource& provisional, const Receipt& receipt,
                    const RunControl& control) {
  const std::size_t bits = receipt.block_length;
  KeyWords block(words_for(bits));
  KeyBytes packed(bytes_for(bits));
  std::uint64_t next = 0;
  for (const Group& group : receipt.groups) {
    TagHasher hasher(group.hash_key);
    for (std::uint64_t b = 0; b < group.accepted; ++b, ++next) {
      if (control.stopped()) throw Interrupted();
      provisional.read(next * bits, bits, block);
      pack_bits(block, bits, packed);
      hasher.update(packed);
    }
    if (!tags_equal(hasher.finish(), group.tag)) {
      throw InputError("key '" + provisional.name() +
                       "' is not the provisional key that the receipt was made of");
    }
  }
}

void require_answers(const Verdict& verdict, const Receipt& receipt, std::string_view receipt_text,
                     const std::string& verdict_name) {
  if (verdict.receipt != sha256(receipt_text) || verdict.session != receipt.session) {
    throw InputError("verdict '" + verdict_name + "' answers another receipt");
  }
  if (verdict.group_kept.size() != receipt.groups.size()) {
    throw InputError("verdict '" + verdict_name + "' tells of " +
                     std::to_string(verdict.group_kept.size()) + " groups where the receipt has " +
                     std::to_string(receipt.groups.size()));
  }
}

}  // namespace

std::uint64_t default_group_blocks(const Design& design) {
  if (design.code.check_bits == 0) return 1;
  const auto bits = static_cast<double>(design.code.block_length().bits());
  const double fer = std::max(design.predicted.fer.value_or(kAssumedFer), 1e-9);
  const double undetected = std::ldexp(fer, -static_cast<int>(design.code.check_bits));
  const double blocks = std::sqrt(kTagBits / (bits * undetected));
  return static_cast<std::uint64_t>(
      std::max(1.0, std::floor(std::min(blocks, kMaxDefaultGroupBits / bits))));
}

ReconcileSummary reconcile(const Design& design, const BatchDecoder& decoder, const KeySource& key,
                           ByteSource& message, const ReconcileOptions& options,
                           const ReconcileSinks& sinks, const RunControl& control) {
  const Code& code = design.code;
  const std::uint64_t group_blocks = choose_group_blocks(design, options);
  MessageReader reader(message, code);
  require_same_length(key, reader.header(), message.name());
  require_a_block(key, code.block_length());
  const Cut& cut = reader.cut();
  const SyndromeFormer former(code.frozen, code.precoding);
  ReconcileSummary summary;
  summary.header = reader.header();
  summary.blocks = cut.block_count();
  summary.rest_bits = cut.rest_bits();
  summary.errors.resize(summary.blocks);
  summary.receipt.accepted = BitString(summary.blocks);

  GroupTagger tagger(summary.blocks, group_blocks, options.test_seed);
  const DifferenceCounter counter(code.frozen, code.precoding);
  DifferenceCounts counts;
  run_batches<ReconcileWork>(
      cut, control,
      [&](const Batch& batch, ReconcileWork& work) {
        work.record = reader.next();
        read_rows(key, cut, batch, work.rows);
      },
      [&](ReconcileWork& work) { reconcile_batch(former, counter, code, decoder, cut, work); },
      [&](ReconcileWork& work) {
        counts += work.counts;
        hand_on(work, cut, sinks, tagger, summary);
      });
  Receipt& receipt = summary.receipt;
  receipt.message = reader.finish();
  receipt.session = summary.header.session;
  receipt.test_only = summary.header.test_only || options.test_seed.has_value();
  receipt.code = code_sha256(code);
  receipt.block_length = static_cast<std::uint32_t>(code.block_length().bits());
  receipt.frozen_count = code.frozen.frozen_count();
  receipt.check_bits = code.check_bits;
  receipt.groups = tagger.finish();
  if (sinks.provisional != nullptr) sinks.provisional->finish();
  if (sinks.failed != nullptr) sinks.failed->finish();
  if (sinks.rest != nullptr) write_rest(key, cut, *sinks.rest);

  const std::size_t bits = code.block_length().bits();
  summary.accepted = receipt.accepted.count();
  summary.ledger = book_leakage(code, summary.blocks, summary.accepted, receipt.groups.size(),
                                receipt.groups.size());
  for (const Group& group : receipt.groups) {
    summary.epsilon_correctness += tag_collision_bound(group.accepted * bits / 8);
  }
  if (summary.accepted > 0) {
    summary.accepted_qber = static_cast<double>(summary.errors_corrected) /
                            static_cast<double>(summary.accepted * bits);
  }
  if (summary.failed() > 0) summary.failed_qber = estimate_qber(counter, counts);
  summary.all_blocks_qber = qber_of_all_blocks(summary, bits);
  return summary;
}

ConfirmSummary confirm(const KeySource& provisional, std::string_view receipt_text,
                       std::string_view receipt_name, std::string_view verdict_text,
                       std::string_view verdict_name, KeySink& settled, const RunControl& control) {
  const Receipt receipt = receipt_from_json(receipt_text, receipt_name);
  const Verdict verdict = verdict_from_json(verdict_text, verdict_name);
  require_answers(verdict, receipt, receipt_text, std::string(verdict_name));
  const std::uint64_t accepted = receipt.accepted.count();
  const std::size_t bits = receipt.block_length;
  if (provisional.bits() != accepted * bits) {
    throw InputError("key '" + provisional.name() + "' holds " +
                     std::to_string(provisional.bits()) + " bits, but the receipt accepted " +
                     std::to_string(accepted) + " blocks of " + std::to_string(bits));
  }
  require_tagged(provisional, receipt, control);
  ConfirmSummary summary;
  summary.groups = receipt.groups.size();
  summary.test_only = receipt.test_only || verdict.test_only;
  KeyWords block(words_for(bits));
  std::uint64_t next = 0;
  for (std::size_t g = 0; g < receipt.groups.size(); ++g) {
    for (std::uint64_t b = 0; b < receipt.groups[g].accepted; ++b, ++next) {
      if (control.stopped()) throw Interrupted();
      if (!verdict.group_kept[g]) continue;
      provisional.read(next * bits, bits, block);
      settled.write(block, bits);
    }
    if (!verdict.group_kept[g]) ++summary.rejected_groups;
    if (control.progress) control.progress(next, accepted);
  }
  settled.finish();
  summary.session = receipt.session;
  summary.block_length = receipt.block_length;
  summary.blocks = receipt.accepted.size();
  summary.settled_bits = settled.bits();
  summary.settled_blocks = settled.bits() / bits;
  summary.ledger =
      book_leakage(receipt.frozen_count, receipt.check_bits, summary.blocks, summary.settled_blocks,
                   summary.groups, summary.groups - summary.rejected_groups);
  for (std::size_t g = 0; g < receipt.groups.size(); ++g) {
    if (!verdict.group_kept[g]) continue;
    summary.epsilon_correctness += tag_collision_bound(receipt.groups[g].accepted * bits / 8);
  }
  return summary;
}

}  // namespace frostline
