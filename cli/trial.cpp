// frostline trial: Monte Carlo of a design.
#include <iostream>

#include "cli/account.h"
#include "cli/command.h"
#include "cli/decoder_plan.h"
#include "cli/design_file.h"
#include "cli/options.h"
#include "cli/run_state.h"
#include "construct/designer.h"
#include "decode/batch_decoder.h"
#include "decode/trial/trial.h"
#include "polar/error.h"
#include "polar/limits.h"

namespace frostline::cli {
namespace {

constexpr std::uint64_t kDefaultBlocks = 1000000;
constexpr std::uint64_t kDefaultFailures = 100;

Options make_options() {
  Options options("trial", "Runs a design against random errors and counts the blocks that fail.",
                  {"FILE"});
  options.value("qber", "P", "error rate of the channel (the design's QBER)")
      .value("channel", "CHANNEL", "bsc:P, the long form of --qber")
      .value("arithmetic", "A", "exact, planes:W or integer:Q:A (the design's)");
  add_list_option(options);
  options.value("blocks", "B", "stop at so many blocks (1000000; with it no stop at failures)")
      .value("failures", "E", "stop at so many failures (100)")
      .value("seed", "S", "the same seed gives the same counts (1)")
      .computing()
      .epilogue(
          "Example: is the predicted FER what the decoder does?\n"
          "  frostline trial fibre.design.json --blocks 100000\n"
          "With a small list first and a large one for what it leaves:\n"
          "  frostline trial fibre.design.json --list 8,32\n");
  return options;
}

double channel_qber(const Options& options, const Design& design) {
  if (options.has("qber") && options.has("channel")) {
    throw InputError("trial: give only one of --qber and --channel");
  }
  double p = options.optional_number("qber").value_or(design.qber);
  if (options.has("channel")) {
    const std::string channel = options.text("channel");
    if (channel.rfind("bsc:", 0) != 0) {
      throw InputError("--channel: '" + channel + "' is not bsc:P");
    }
    p = parse_number(channel.substr(4), "--channel");
  }
  require_error_rate(p, "the channel's error rate");
  return p;
}

TrialOptions trial_options(const Options& options) {
  TrialOptions trial;
  trial.blocks = options.optional_whole("blocks").value_or(kDefaultBlocks);
  trial.failures = options.optional_whole("failures");
  if (!options.has("blocks") && !options.has("failures")) trial.failures = kDefaultFailures;
  trial.seed = options.optional_whole("seed").value_or(1);
  return trial;
}

// What the run is measured against.
struct Expectation {
  double qber;
  Prediction predicted;  // of this frozen set in this arithmetic at that QBER
  double efficiency;
  double syndrome_efficiency;
  std::optional<double> limit_efficiency;  // at the upper end of the FER interval
};

Expectation expect(const Design& design, double p, unsigned list, const TrialSummary& summary) {
  const std::uint64_t length = design.code.block_length().bits();
  const double entropy = static_cast<double>(length) * binary_entropy(p);
  Expectation expectation{
      p,
      predict(design.code.frozen, judge(design.code.block_length(), p, design.arithmetic),
              list_setting(design, p, list)),
      static_cast<double>(design.code.leakage_bits()) / entropy,
      static_cast<double>(design.code.frozen.frozen_count()) / entropy, std::nullopt};
  const double high = summary.fer_interval.high;
  if (high > 0 && high < 1) {
    expectation.limit_efficiency = finite_length_limit(length, p, high).efficiency;
  }
  return expectation;
}

Json trial_json(const Design& design, const DecoderPlan& plan, const TrialSummary& summary,
                const Expectation& expectation) {
  Json root;
  root["block_length"] = design.code.block_length().bits();
  root["frozen_count"] = design.code.frozen.frozen_count();
  root["arithmetic"] = to_string(design.arithmetic);
  root["lists"] = plan.lists;
  root["precoding"] = precoding_name(design.code.precoding);
  root["qber"] = expectation.qber;
  root["blocks"] = summary.blocks;
  root["failures"] = summary.failures;
  root["undetected"] = summary.undetected;
  root["fer"] = summary.fer();
  root["fer_interval"] = {summary.fer_interval.low, summary.fer_interval.high};
  root["stopped_at_failure"] = summary.stopped_at_failure;
  root["interrupted"] = summary.interrupted;
  root["predicted"] = to_json(expectation.predicted);
  root["efficiency"] = expectation.efficiency;
  root["syndrome_efficiency"] = expectation.syndrome_efficiency;
  root["limit_efficiency"] =
      expectation.limit_efficiency ? Json(*expectation.limit_efficiency) : Json(nullptr);
  root["errors"] = summary.errors;
  root["lanes"] = summary.lanes;
  root["throughput_mbit_s"] = summary.throughput_mbit_s;
  root["latency_us"] = {{"median", summary.latency_median_us}, {"p99", summary.latency_p99_us}};
  return root;
}

void print_account(const Design& design, const DecoderPlan& plan, const TrialSummary& summary,
                   const Expectation& expectation) {
  std::cout << counted(summary.failures, "block") << " of " << grouped(summary.blocks) << " failed"
            << (summary.interrupted ? "; interrupted" : "") << ".\n";
  Table table;
  table
      .row("decoder", describe_decoder(plan, design.arithmetic) + ", precoding " +
                          std::string(precoding_name(design.code.precoding)) + ", QBER " +
                          short_number(expectation.qber))
      .row("FER", short_number(summary.fer()) + " (" + short_number(summary.fer_interval.low) +
                      " to " + short_number(summary.fer_interval.high) + " at 95 %)")
      .row("predicted", prediction_sentence(expectation.predicted))
      .row("undetected", grouped(summary.undetected) + " passed the " +
                             std::to_string(design.code.check_bits) + " check bits")
      .row("f", fixed(expectation.efficiency, 4) + " (syndrome alone " +
                    fixed(expectation.syndrome_efficiency, 4) + ")");
  if (expectation.limit_efficiency) {
    table.row("finite-length limit",
              "f " + fixed(*expectation.limit_efficiency, 4) + " at the upper end of the FER");
  }
  table.row("decoder's speed", fixed(summary.throughput_mbit_s, 1) + " Mbit/s of key on one core")
      .row("latency", fixed(summary.latency_median_us, 1) + " us, 99 % below " +
                          fixed(summary.latency_p99_us, 1) + " us, for " +
                          std::to_string(summary.lanes) + " blocks in step");
  std::cout << table.text();
}

}  // namespace

int run_trial(const std::vector<std::string>& arguments) {
  Options options = make_options();
  if (!options.parse(arguments)) return kDone;
  Design design = read_design(options.text("FILE"));
  if (options.has("arithmetic")) design.arithmetic = parse_arithmetic(options.text("arithmetic"));
  const double p = channel_qber(options, design);
  const DecoderPlan plan = decoder_plan(options, design);
  const auto decoder = make_batch_decoder(design, plan);
  RunState state("trial", static_cast<double>(design.code.block_length().bits()), options.quiet());
  const TrialSummary summary =
      frostline::run_trial(design.code, *decoder, p, trial_options(options), state.control());
  if (summary.blocks == 0) throw Interrupted();
  const Expectation expectation = expect(design, p, plan.lists.back(), summary);
  if (options.json()) {
    std::cout << trial_json(design, plan, summary, expectation).dump(2) << '\n';
  } else if (!options.quiet()) {
    print_account(design, plan, summary, expectation);
  }
  return summary.interrupted ? kInterrupted : kDone;
}

}  // namespace frostline::cli
