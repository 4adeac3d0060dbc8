// frostline syndrome: the sender's message out of a key.
#include <iostream>

#include "cli/account.h"
#include "cli/command.h"
#include "cli/design_file.h"
#include "cli/exchange_options.h"
#include "cli/options.h"
#include "cli/run_state.h"
#include "decode/exchange/sender.h"
#include "decode/exchange/streams.h"
#include "polar/error.h"

namespace frostline::cli {
namespace {

Options make_options() {
  Options options("syndrome", "Sender: makes the public message of a key.", {"DESIGN", "KEY"});
  options.value("lanes", "B", "blocks side by side, a power of two from 1 to 512 (by N)")
      .value("output,o", "FILE", "the message; refused when it is already there");
  add_key_options(options);
  add_test_seed(options);
  options.computing().epilogue(
      std::string("Example:\n  frostline syndrome link.design.json hall-a.bin -o hall-a.syn\n"
                  "After a loss send the same file again: another message for the same key costs\n"
                  "the sum of both leakages.\n") +
      kKeyCautions);
  return options;
}

FileSink open_message(const std::string& path) {
  try {
    return FileSink(path, FileAccess::exchanged, FileReplace::refuse_if_there);
  } catch (const InputError& error) {
    throw InputError(std::string(error.what()) +
                     "; send a message that is there again rather than make another");
  }
}

void print_account(std::ostream& out, const MessageSummary& summary, const std::string& path,
                   double seconds) {
  const std::uint64_t bits = summary.blocks * summary.header.block_length;
  out << "Message of " << counted(summary.blocks, "block") << " written to " << path << ".\n";
  if (summary.header.test_only) out << kTestOnlySentence;
  Table table;
  table
      .row("key",
           counted(summary.header.key_bits, "bit") + ", rest " + counted(summary.rest_bits, "bit"))
      .row("blocks", grouped(summary.blocks) + " of " + grouped(summary.header.block_length) +
                         " bits, lanes " + std::to_string(summary.header.lanes))
      .row("disclosed", leaked_by_kind(summary.disclosed))
      .row("message", counted(summary.message_bytes, "byte"))
      .row("time", fixed(seconds, 2) + " s, " +
                       fixed(static_cast<double>(bits) / seconds / 1e6, 1) + " Mbit/s of key");
  out << table.text();
}

}  // namespace

int run_syndrome(const std::vector<std::string>& arguments) {
  Options options = make_options();
  if (!options.parse(arguments)) return kDone;
  const std::string path = options.text("output");
  require_distinct_files({options.text("DESIGN"), options.text("KEY")}, {path});
  const Design design = read_design(options.text("DESIGN"));
  const auto key = open_key_argument(options);
  MessageOptions message_options;
  if (options.has("lanes")) {
    require_lanes(options.whole("lanes"));
    message_options.lanes = static_cast<unsigned>(options.whole("lanes"));
  }
  message_options.test_seed = options.optional_whole("test-only-seed");
  RunState state("syndrome", static_cast<double>(design.code.block_length().bits()),
                 options.quiet());
  FileSink file = open_message(path);
  const MessageSummary summary =
      make_message(design.code, *key, message_options, file, state.control());
  file.commit();
  if (options.json()) {
    Json root;
    root["file"] = path;
    root["session"] = to_hex(summary.header.session);
    root["test_only"] = summary.header.test_only;
    root["block_length"] = summary.header.block_length;
    root["lanes"] = summary.header.lanes;
    root["key_bits"] = summary.header.key_bits;
    root["blocks"] = summary.blocks;
    root["rest_bits"] = summary.rest_bits;
    root["message_bytes"] = summary.message_bytes;
    root["message_sha256"] = to_hex(summary.message);
    root["disclosed"] = to_json(summary.disclosed);
    root["disclosed_bits"] = summary.disclosed.total();
    root["seconds"] = state.seconds();
    std::cout << root.dump(2) << '\n';
  } else if (!options.quiet()) {
    print_account(options.account(), summary, path, state.seconds());
  }
  return kDone;
}

}  // namespace frostline::cli
