// frostline settle: the sender checks the receipt and writes the settled key and the verdict.
#include <iostream>

#include "cli/account.h"
#include "cli/command.h"
#include "cli/design_file.h"
#include "cli/exchange_options.h"
#include "cli/options.h"
#include "cli/report.h"
#include "cli/run_state.h"
#include "decode/exchange/sender.h"
#include "polar/error.h"

namespace frostline::cli {
namespace {

Options make_options() {
  Options options("settle",
                  "Sender: checks the receipt's tags against the key, keeps the groups that agree, "
                  "and writes the settled key and the verdict.",
                  {"DESIGN", "KEY", "MESSAGE", "RECEIPT"});
  options.value("output,o", "FILE", "the settled key")
      .value("verdict", "FILE", "the public verdict for the receiver")
      .value("report", "FILE", "the private report")
      .value("phase-error", "E", "phase error rate for the net key (the design's QBER)");
  add_key_options(options);
  options.computing().epilogue(
      std::string("Example:\n  frostline settle link.design.json hall-a.bin hall-a.syn "
                  "hall-b.receipt.json \\\n"
                  "    -o hall-a.settled --verdict hall-a.verdict.json "
                  "--report hall-a.report.json\n") +
      kKeyCautions);
  return options;
}

void print_account(std::ostream& out, const SettleSummary& summary, const RunFigures& figures,
                   double seconds) {
  out << grouped(summary.settled_blocks) << " of " << counted(summary.blocks, "block")
      << " settled, " << counted(summary.settled_bits, "bit") << ".\n";
  if (summary.verdict.test_only) out << kTestOnlySentence;
  if (summary.rejected_groups > 0) {
    out << counted(summary.rejected_groups, "group") << " of "
        << grouped(summary.verdict.group_kept.size())
        << " rejected whole: the tags differ, so the two ends are not equal there.\n";
    if (summary.settled_blocks == 0) {
      out << "No group agrees: is this the key that the message was made of?\n";
    }
  }
  Table table;
  table.row("accepted by receiver", counted(summary.accepted_by_receiver, "block"))
      .row("groups", grouped(summary.verdict.group_kept.count()) + " kept, " +
                         grouped(summary.rejected_groups) + " rejected");
  add_figures(table, figures, summary.ledger, summary.epsilon_correctness);
  table.row("time", fixed(seconds, 2) + " s");
  out << table.text();
}

}  // namespace

int run_settle(const std::vector<std::string>& arguments) {
  Options options = make_options();
  if (!options.parse(arguments)) return kDone;
  std::vector<std::string> outputs = {options.text("output"), options.text("verdict")};
  if (options.has("report")) outputs.push_back(options.text("report"));
  require_distinct_files({options.text("DESIGN"), options.text("KEY"), options.text("MESSAGE"),
                          options.text("RECEIPT")},
                         outputs);
  const Design design = read_design(options.text("DESIGN"));
  const auto key = open_key_argument(options);
  FileSource message(options.text("MESSAGE"));
  const std::string receipt = read_file(options.text("RECEIPT"));
  const double phase = options.optional_number("phase-error").value_or(design.qber);
  if (!(phase >= 0 && phase <= 0.5)) {
    throw InputError("--phase-error: " + short_number(phase) + " is not from 0 to 0.5");
  }

  RunState state("settle", static_cast<double>(design.code.block_length().bits()), options.quiet());
  FileSink settled_file(options.text("output"), FileAccess::secret);
  KeySink settled(settled_file, key_format(options));
  std::unique_ptr<FileSink> report;
  if (options.has("report"))
    report = std::make_unique<FileSink>(options.text("report"), FileAccess::secret);
  FileSink verdict(options.text("verdict"), FileAccess::exchanged);
  const SettleSummary summary = settle(design.code, *key, message, receipt, options.text("RECEIPT"),
                                       settled, state.control());
  const double seconds = state.seconds();
  const RunFigures figures = run_figures(design, summary.blocks, summary.settled_blocks,
                                         summary.ledger, design.qber, phase);
  Json report_json = sender_report(design, summary, figures);
  if (report) report->write(report_json.dump(1) + "\n");
  verdict.write(verdict_to_json(summary.verdict));
  settled_file.finish();
  if (report) report->finish();
  verdict.finish();
  settled_file.commit();
  if (report) report->commit();
  verdict.commit();

  if (options.json()) {
    report_json["seconds"] = seconds;
    std::cout << report_json.dump(2) << '\n';
  } else if (!options.quiet()) {
    print_account(options.account(), summary, figures, seconds);
  }
  const bool as_asked =
      summary.settled_blocks > 0 && summary.rejected_groups == 0 && figures.net_key.plain > 0;
  return as_asked ? kDone : kNotAsAsked;
}

}  // namespace frostline::cli
