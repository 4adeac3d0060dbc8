// The main job, design to confirm, with everything that can be computed from the two keys alone
// computed again here: the cut, the accepted blocks, the errors, the ledger.
//
// Nothing of the library is used for that, so that an error in it cannot hide itself. The rule of
// the cut is transcribed from designs/FORMATS.md in its recursive form ("while the rest holds at
// least N bits, ..."), not in the closed form that the library uses.
#pragma once

#include <cstdint>
#include <nlohmann/json.hpp>
#include <string>
#include <vector>

#include "tests/end_to_end/run_command.h"

namespace frostline::testing {

using Json = nlohmann::json;
using Bits = std::vector<std::uint8_t>;  // one bit a byte

// Packed (most significant bit first) and text forms of a key.
Bits bits_of_packed(const std::string& bytes, std::size_t count);
std::string packed_of_bits(const Bits& bits);
Bits bits_of_text(const std::string& text);

// The blocks of a key by number, and what is left.
struct CutKey {
  std::vector<Bits> blocks;
  Bits rest;
  std::vector<unsigned> batch_lanes;  // B' of each batch
};
CutKey cut_by_the_rule(const Bits& key, std::size_t block_length, unsigned lanes);

double entropy(double p);  // h2

struct WholeJob {
  std::uint64_t block_length = 1024;
  std::uint64_t key_bits = 65536;
  double design_qber = 0.02;
  double key_qber = 0.02;
  unsigned lanes = 0;  // 0: the command's own choice
  std::string key_format = "packed";
  std::string seed = "7";
  Arguments goal = {"--fer", "0.1"};
  Arguments design;     // further options of each command
  Arguments computing;  // --threads, --simd
  Arguments exchange;   // of syndrome and reconcile: --test-only-seed
  Arguments reconcile;
};

// What a job left behind.
struct JobOutcome {
  CommandResult design, sample, syndrome, reconcile, settle, confirm;
  Json design_file, message_account, receipt, verdict, receiver_report, sender_report,
      confirm_report;
  std::size_t block_length = 0;
  std::size_t frozen_count = 0;  // counted in the mask
  unsigned check_bits = 0;
  CutKey sender, receiver;          // the two keys, cut
  std::vector<bool> accepted;       // by the receipt
  std::vector<bool> settled;        // by receipt and verdict
  std::vector<std::size_t> errors;  // differing positions of each block, from the keys

  std::size_t blocks() const { return sender.blocks.size(); }
  std::size_t accepted_count() const;
  std::size_t settled_count() const;
};

// Files are a.key, b.key, link.design.json, a.syn, b.provisional, receipt.json, b.report,
// a.settled, verdict.json, a.report, b.settled, b.final. Fails the test when a command does not end
// with status 0 or 1 or writes to stderr.
JobOutcome run_whole_job(const Folder& folder, const WholeJob& job);
// The steps from design and sample to the message, for tests that go on by themselves.
void run_to_message(const Folder& folder, const WholeJob& job);

// Everything that must hold whatever happened: both settled files equal what the cut rule makes of
// the sender's accepted blocks; errors, failed blocks, QBER, ledger and sizes are right to the bit.
void expect_all_accounted(const Folder& folder, const WholeJob& job, const JobOutcome& outcome);
// Both at once.
JobOutcome run_and_check(const Folder& folder, const WholeJob& job);

}  // namespace frostline::testing
