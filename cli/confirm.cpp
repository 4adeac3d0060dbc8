// frostline confirm: the receiver applies the verdict.
#include <iostream>

#include "cli/account.h"
#include "cli/command.h"
#include "cli/exchange_options.h"
#include "cli/options.h"
#include "cli/run_state.h"
#include "decode/exchange/receiver.h"
#include "decode/exchange/streams.h"

namespace frostline::cli {
namespace {

Options make_options() {
  Options options("confirm",
                  "Receiver: drops what the verdict rejects from the provisional key; then both "
                  "ends hold the same bits.",
                  {"KEY", "RECEIPT", "VERDICT"});
  options.value("output,o", "FILE", "the settled key");
  add_key_options(options);
  options.flag("quiet", "no progress line and no account");
  options.epilogue(std::string("Example:\n  frostline confirm hall-b.provisional "
                               "hall-b.receipt.json hall-a.verdict.json -o hall-b.settled\n") +
                   kKeyCautions);
  return options;
}

// A provisional key of no bits is a file of no bytes, which is in order here only.
std::unique_ptr<KeySource> open_provisional(const Options& options) {
  FileSource file(options.text("KEY"));
  if (file.size() && *file.size() == 0) {
    return std::make_unique<MemoryKey>(BitString(), options.text("KEY"));
  }
  return open_key_argument(options);
}

}  // namespace

int run_confirm(const std::vector<std::string>& arguments) {
  Options options = make_options();
  if (!options.parse(arguments)) return kDone;
  const std::string path = options.text("output");
  require_distinct_files({options.text("KEY"), options.text("RECEIPT"), options.text("VERDICT")},
                         {path});
  const auto provisional = open_provisional(options);
  const std::string receipt = read_file(options.text("RECEIPT"));
  const std::string verdict = read_file(options.text("VERDICT"));
  RunState state("confirm", 1, options.quiet());
  FileSink file(path, FileAccess::secret);
  KeySink settled(file, key_format(options));
  const ConfirmSummary summary = confirm(*provisional, receipt, options.text("RECEIPT"), verdict,
                                         options.text("VERDICT"), settled, state.control());
  file.commit();
  if (options.json()) {
    Json root;
    root["file"] = path;
    root["test_only"] = summary.test_only;
    root["settled_blocks"] = summary.settled_blocks;
    root["settled_bits"] = summary.settled_bits;
    root["groups"] = summary.groups;
    root["rejected_groups"] = summary.rejected_groups;
    std::cout << root.dump(2) << '\n';
  } else if (!options.quiet()) {
    if (summary.test_only) std::cout << kTestOnlySentence;
    std::cout << counted(summary.settled_blocks, "block") << " settled, "
              << counted(summary.settled_bits, "bit") << " in " << path << "; "
              << grouped(summary.groups - summary.rejected_groups) << " of "
              << counted(summary.groups, "group") << " kept.\n";
  }
  return summary.settled_blocks > 0 && summary.rejected_groups == 0 ? kDone : kNotAsAsked;
}

}  // namespace frostline::cli
