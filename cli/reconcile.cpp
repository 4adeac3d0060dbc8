// frostline reconcile: the receiver's provisional key and receipt out of key and message.
#include <iostream>

#include "cli/account.h"
#include "cli/command.h"
#include "cli/decoder_plan.h"
#include "cli/design_file.h"
#include "cli/exchange_options.h"
#include "cli/options.h"
#include "cli/report.h"
#include "cli/run_state.h"
#include "decode/batch_decoder.h"
#include "decode/exchange/receiver.h"
#include "polar/error.h"

namespace frostline::cli {
namespace {

Options make_options() {
  Options options("reconcile",
                  "Receiver: corrects the key with the help of the message, and writes the "
                  "provisional key, the public receipt and a private report.",
                  {"DESIGN", "KEY", "MESSAGE"});
  options.value("output,o", "FILE", "the provisional key: accepted blocks, corrected")
      .value("receipt", "FILE", "the public receipt for the sender")
      .value("report", "FILE", "the private report")
      .value("group", "BITS", "key bits that one tag covers (a balance of leakage and loss)")
      .value("keep-failed", "FILE", "failed blocks as they were received")
      .value("rest", "FILE", "the last bits, that fill no block")
      .value("phase-error", "E", "phase error rate for the net key (the observed QBER)")
      .flag("strict", "exit status 1 when a block failed");
  add_list_option(options);
  add_key_options(options);
  add_test_seed(options);
  options.computing().epilogue(
      std::string("Example:\n  frostline reconcile link.design.json hall-b.bin hall-a.syn \\\n"
                  "    -o hall-b.provisional --receipt hall-b.receipt.json "
                  "--report hall-b.report.json\n"
                  "Nothing is settled before the verdict: run 'confirm' when it comes.\n") +
      kKeyCautions);
  return options;
}

// Up to three files of key bits, written together or not at all.
class KeyOutputs {
 public:
  KeyOutputs(const Options& options) : format_(key_format(options)) {
    open(options, "output", provisional_);
    open(options, "keep-failed", failed_);
    open(options, "rest", rest_);
  }
  ReconcileSinks sinks() { return {pointer(provisional_), pointer(failed_), pointer(rest_)}; }
  void finish() {
    for (Output* output : all()) {
      if (output->file) output->file->finish();
    }
  }
  void commit() {
    for (Output* output : all()) {
      if (output->file) output->file->commit();
    }
  }

 private:
  struct Output {
    std::unique_ptr<FileSink> file;
    std::unique_ptr<KeySink> sink;
  };
  void open(const Options& options, const char* name, Output& output) {
    if (!options.has(name)) return;
    output.file = std::make_unique<FileSink>(options.text(name), FileAccess::secret);
    output.sink = std::make_unique<KeySink>(*output.file, format_);
  }
  static KeySink* pointer(Output& output) { return output.sink.get(); }
  std::array<Output*, 3> all() { return {&provisional_, &failed_, &rest_}; }

  KeyFormat format_;
  Output provisional_;
  Output failed_;
  Output rest_;
};

std::vector<std::string> output_paths(const Options& options) {
  std::vector<std::string> paths = {options.text("output"), options.text("receipt")};
  for (const char* name : {"report", "keep-failed", "rest"}) {
    if (options.has(name)) paths.push_back(options.text(name));
  }
  return paths;
}

// The best that is known: of all blocks, else of the accepted ones, else what the design is for.
double observed_qber(const Design& design, const ReconcileSummary& summary) {
  if (summary.all_blocks_qber) return summary.all_blocks_qber->qber;
  return summary.accepted > 0 ? summary.accepted_qber : design.qber;
}

std::optional<double> phase_error(const Options& options) {
  const std::optional<double> value = options.optional_number("phase-error");
  if (value && !(*value >= 0 && *value <= 0.5)) {
    throw InputError("--phase-error: " + short_number(*value) + " is not from 0 to 0.5");
  }
  return value;
}

void print_account(std::ostream& out, const Design& design, const DecoderPlan& plan,
                   const ReconcileSummary& summary, const RunFigures& figures, double seconds) {
  const std::uint64_t bits = summary.blocks * figures.block_length;
  out << grouped(summary.accepted) << " of " << counted(summary.blocks, "block")
      << " accepted; provisional until the verdict comes.\n";
  if (summary.receipt.test_only) out << kTestOnlySentence;
  out << failure_diagnosis(design, summary);
  Table table;
  table.row("decoder", describe_decoder(plan, design.arithmetic))
      .row("blocks", grouped(summary.blocks) + " of " + grouped(figures.block_length) +
                         " bits, rest " + counted(summary.rest_bits, "bit"))
      .row("failed", grouped(summary.failed()) + ", FER " + fixed(figures.fer, 4) +
                         ", the design predicts " + prediction_sentence(design.predicted));
  if (summary.accepted > 0) {
    table.row("errors corrected", grouped(summary.errors_corrected))
        .row("observed QBER",
             percent(summary.accepted_qber, 3) +
                 (summary.failed() > 0 ? " in accepted blocks (biased low: bad blocks fail)"
                                       : " in all blocks"));
  }
  if (const auto& all = summary.all_blocks_qber; all && summary.failed() > 0) {
    table.row("QBER of all blocks", percent(all->qber, 3) + " (" + percent(all->low, 3) + " to " +
                                        percent(all->high, 3) +
                                        ", failed ones by their syndromes)");
  }
  add_figures(table, figures, summary.ledger, summary.epsilon_correctness);
  table.row("time", fixed(seconds, 2) + " s, " +
                        fixed(static_cast<double>(bits) / seconds / 1e6, 1) + " Mbit/s of key");
  out << table.text();
}

}  // namespace

int run_reconcile(const std::vector<std::string>& arguments) {
  Options options = make_options();
  if (!options.parse(arguments)) return kDone;
  require_distinct_files({options.text("DESIGN"), options.text("KEY"), options.text("MESSAGE")},
                         output_paths(options));
  const Design design = read_design(options.text("DESIGN"));
  const auto key = open_key_argument(options);
  FileSource message(options.text("MESSAGE"));
  const std::optional<double> phase = phase_error(options);
  ReconcileOptions reconcile_options;
  reconcile_options.group_bits = options.optional_whole("group");
  reconcile_options.test_seed = options.optional_whole("test-only-seed");
  const DecoderPlan plan = decoder_plan(options, design);
  const auto decoder = make_batch_decoder(design, plan);

  // Before the outputs, so that no signal leaves their temporary files behind.
  RunState state("reconcile", static_cast<double>(design.code.block_length().bits()),
                 options.quiet());
  KeyOutputs keys(options);
  std::unique_ptr<FileSink> report;
  if (options.has("report"))
    report = std::make_unique<FileSink>(options.text("report"), FileAccess::secret);
  FileSink receipt(options.text("receipt"), FileAccess::exchanged);
  const ReconcileSummary summary =
      reconcile(design, *decoder, *key, message, reconcile_options, keys.sinks(), state.control());
  const double seconds = state.seconds();
  const RunFigures figures = run_figures(design, summary.blocks, summary.accepted, summary.ledger,
                                         observed_qber(design, summary), phase);
  Json report_json = receiver_report(design, summary, figures);
  report_json["decoder"] = decoder_json(plan, design.arithmetic);
  if (report) report->write(report_json.dump(1) + "\n");
  receipt.write(receipt_to_json(summary.receipt));
  // The receipt is what the sender acts on: it is put in place last.
  keys.finish();
  if (report) report->finish();
  receipt.finish();
  keys.commit();
  if (report) report->commit();
  receipt.commit();

  if (options.json()) {
    report_json.erase("errors_corrected");
    report_json["seconds"] = seconds;
    std::cout << report_json.dump(2) << '\n';
  } else if (!options.quiet()) {
    print_account(options.account(), design, plan, summary, figures, seconds);
  }
  const bool as_asked = summary.accepted > 0 && figures.net_key.plain > 0 &&
                        !(options.has("strict") && summary.failed() > 0);
  return as_asked ? kDone : kNotAsAsked;
}

}  // namespace frostline::cli
