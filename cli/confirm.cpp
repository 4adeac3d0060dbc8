// frostline confirm: the receiver applies the verdict.
#include <iostream>

#include "cli/account.h"
#include "cli/command.h"
#include "cli/exchange_options.h"
#include "cli/options.h"
#include "cli/report.h"
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
  options.value("output,o", "FILE", "the settled key")
      .value("report", "FILE", "the private report with the final ledger");
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

void print_account(std::ostream& out, const ConfirmSummary& summary, const std::string& path) {
  if (summary.test_only) out << kTestOnlySentence;
  out << counted(summary.settled_blocks, "block") << " settled, "
      << counted(summary.settled_bits, "bit") << " in " << path << "; "
      << grouped(summary.groups - summary.rejected_groups) << " of "
      << counted(summary.groups, "group") << " kept.\n";
  Table table;
  table.row("disclosed", leaked_by_kind(summary.ledger.disclosed))
      .row("of it, of kept blocks", leaked_by_kind(summary.ledger.accepted))
      .row("eps_cor", short_number(summary.epsilon_correctness))
      .row("to be subtracted", grouped(summary.ledger.accepted.total()) +
                                   " bits of leakage, besides what the phase error costs");
  out << table.text();
}

}  // namespace

int run_confirm(const std::vector<std::string>& arguments) {
  Options options = make_options();
  if (!options.parse(arguments)) return kDone;
  std::vector<std::string> outputs = {options.text("output")};
  if (options.has("report")) outputs.push_back(options.text("report"));
  require_distinct_files({options.text("KEY"), options.text("RECEIPT"), options.text("VERDICT")},
                         outputs);
  const auto provisional = open_provisional(options);
  const std::string receipt = read_file(options.text("RECEIPT"));
  const std::string verdict = read_file(options.text("VERDICT"));
  RunState state("confirm", 1, options.quiet());
  std::unique_ptr<FileSink> report;
  if (options.has("report")) {
    report = std::make_unique<FileSink>(options.text("report"), FileAccess::secret);
  }
  FileSink file(outputs[0], FileAccess::secret);
  KeySink settled(file, key_format(options));
  const ConfirmSummary summary = confirm(*provisional, receipt, options.text("RECEIPT"), verdict,
                                         options.text("VERDICT"), settled, state.control());
  Json report_json = confirm_report(summary);
  if (report) {
    report->write(report_json.dump(1) + "\n");
    report->finish();
  }
  file.finish();
  if (report) report->commit();
  file.commit();
  if (options.json()) {
    report_json["file"] = outputs[0];
    std::cout << report_json.dump(2) << '\n';
  } else if (!options.quiet()) {
    print_account(options.account(), summary, outputs[0]);
  }
  return summary.settled_blocks > 0 && summary.rejected_groups == 0 ? kDone : kNotAsAsked;
}

}  // namespace frostline::cli
