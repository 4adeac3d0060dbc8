#include "cli/trial_curve.h"

#include <algorithm>
#include <cmath>
#include <iostream>

#include "cli/account.h"
#include "cli/command.h"
#include "cli/grid.h"
#include "cli/plot.h"
#include "cli/run_state.h"
#include "construct/designer.h"
#include "construct/selection.h"
#include "decode/exchange/streams.h"
#include "decode/trial/frozen_curve.h"
#include "polar/design_json.h"
#include "polar/error.h"
#include "polar/limits.h"

namespace frostline::cli {
namespace {

// Reveals a step, of which the cost is told.
constexpr std::size_t kRevealSteps[] = {1, 4, 16, 64, 256};

// The design's frozen set first, then its open indices, each from the most likely to fail on. For a
// design that freezes the least reliable indices this is its very order.
std::vector<std::uint32_t> design_order(const Design& design) {
  std::vector<std::uint32_t> order =
      freezing_order(judge(design.code.block_length(), design.qber, design.arithmetic).reliability);
  std::stable_partition(order.begin(), order.end(),
                        [&](std::uint32_t i) { return design.code.frozen.is_frozen(i); });
  return order;
}

struct CurveReport {
  const Design& design;
  const Channel& channel;
  const FrozenCurve& curve;
  std::vector<std::vector<double>> revealed;  // of each step, for every frozen count

  std::size_t length() const { return curve.failures.size() - 1; }
  double entropy() const {
    return static_cast<double>(length()) * binary_entropy(channel.mean_qber());
  }
  double fer(std::size_t frozen) const {
    return static_cast<double>(curve.failures[frozen]) / static_cast<double>(curve.blocks);
  }
  // Mean public bits a block with reveals of the k-th step, check bits counted.
  double leakage(std::size_t frozen, std::size_t k) const {
    return static_cast<double>(frozen) + design.code.check_bits + revealed[k][frozen];
  }
  // The frozen counts at which something fails and something does not, and the first ones beyond.
  std::size_t first() const {
    std::size_t m = 0;
    while (m < length() && curve.failures[m + 1] == curve.blocks) ++m;
    return m;
  }
  std::size_t last() const {
    std::size_t m = 0;
    while (curve.failures[m] > 0) ++m;
    return std::max(m, design.code.frozen.frozen_count());
  }
  // The frozen count to start from that leaks least with reveals of the k-th step.
  std::size_t best_start(std::size_t k) const {
    std::size_t best = first();
    for (std::size_t m = first(); m <= last(); ++m) {
      if (leakage(m, k) < leakage(best, k)) best = m;
    }
    return best;
  }
};

std::string csv_text(const CurveReport& report) {
  std::string text = "frozen_count,blocks,failures,fer,fer_low,fer_high,syndrome_efficiency";
  for (const std::size_t step : kRevealSteps) {
    text += ",leakage_with_reveals_of_" + std::to_string(step);
  }
  text += '\n';
  for (std::size_t m = report.first(); m <= report.last(); ++m) {
    const RateInterval interval =
        fixed_blocks_interval(report.curve.failures[m], report.curve.blocks);
    text += std::to_string(m) + ',' + std::to_string(report.curve.blocks) + ',' +
            std::to_string(report.curve.failures[m]) + ',' + shortest(report.fer(m)) + ',' +
            shortest(interval.low) + ',' + shortest(interval.high) + ',' +
            shortest(static_cast<double>(m) / report.entropy());
    for (std::size_t k = 0; k < report.revealed.size(); ++k) {
      text += ',' + shortest(report.leakage(m, k));
    }
    text += '\n';
  }
  return text;
}

std::vector<Diagram> diagrams(const CurveReport& report) {
  const std::size_t own = report.design.code.frozen.frozen_count();
  Series fer{"measured", "lines lw 2", {}};
  Series low{"95 % interval", "lines dt 2 lc rgb '#777777'", {}};
  Series high{"", "lines dt 2 lc rgb '#777777'", {}};
  for (std::size_t m = report.first(); m <= report.last(); ++m) {
    const auto x = static_cast<double>(m);
    const RateInterval interval =
        fixed_blocks_interval(report.curve.failures[m], report.curve.blocks);
    if (report.curve.failures[m] > 0) {
      fer.points.emplace_back(x, report.fer(m));
      low.points.emplace_back(x, interval.low);
    }
    high.points.emplace_back(x, interval.high);
  }
  Series design{"the design",
                "points pt 7 ps 1.2",
                {{static_cast<double>(own), std::max(report.fer(own), 1e-300)}}};
  std::vector<Series> rates{fer, low, high};
  if (report.curve.failures[own] > 0) rates.push_back(design);
  std::vector<Series> costs;
  for (std::size_t k = 0; k < report.revealed.size(); ++k) {
    Series cost{"reveals of " + std::to_string(kRevealSteps[k]), "lines lw 2", {}};
    for (std::size_t m = report.first(); m <= report.last(); ++m) {
      cost.points.emplace_back(static_cast<double>(m), report.leakage(m, k) / report.entropy());
    }
    costs.push_back(std::move(cost));
  }
  return {{"FER of every frozen count, " + report.channel.name(), "frozen count M", "FER",
           "set logscale y\nset format y '10^{%T}'\n", rates},
          {"Leakage with reveals until the block decodes", "frozen count M to start from",
           "mean leakage / (N h_2)", "", costs}};
}

Json curve_json(const CurveReport& report, const std::string& path) {
  const std::size_t own = report.design.code.frozen.frozen_count();
  const RateInterval interval =
      fixed_blocks_interval(report.curve.failures[own], report.curve.blocks);
  Json root;
  root["block_length"] = report.length();
  root["frozen_count"] = own;
  root["arithmetic"] = to_string(report.design.arithmetic);
  root["channel"] = report.channel.name();
  root["qber"] = report.channel.mean_qber();
  root["blocks"] = report.curve.blocks;
  root["failures"] = report.curve.failures[own];
  root["fer"] = report.fer(own);
  root["fer_interval"] = {interval.low, interval.high};
  root["errors"] = report.curve.errors;
  root["interrupted"] = report.curve.interrupted;
  root["curve"] = path;
  root["reveals"] = Json::array();
  for (std::size_t k = 0; k < report.revealed.size(); ++k) {
    const std::size_t best = report.best_start(k);
    root["reveals"].push_back({{"step", kRevealSteps[k]},
                               {"from_design_bits", report.leakage(own, k)},
                               {"best_frozen_count", best},
                               {"best_bits", report.leakage(best, k)},
                               {"best_efficiency", report.leakage(best, k) / report.entropy()}});
  }
  return root;
}

void print_account(std::ostream& out, const CurveReport& report, const std::string& path) {
  const std::size_t own = report.design.code.frozen.frozen_count();
  const RateInterval interval =
      fixed_blocks_interval(report.curve.failures[own], report.curve.blocks);
  out << "Curve of " << grouped(report.curve.blocks) << " blocks"
      << (report.curve.interrupted ? ", interrupted," : "") << " written to " << path << ".\n";
  Table table;
  table.row("FER of the design", short_number(report.fer(own)) + " (" + short_number(interval.low) +
                                     " to " + short_number(interval.high) + " at 95 %), M " +
                                     grouped(own));
  for (const double target : {0.1, 0.01, 0.001}) {
    if (target * static_cast<double>(report.curve.blocks) < 1) continue;
    std::size_t m = report.first();
    while (report.fer(m) > target) ++m;
    table.row("FER " + short_number(target),
              "M " + grouped(m) + ", syndrome efficiency " +
                  fixed(static_cast<double>(m) / report.entropy(), 4));
  }
  for (std::size_t k = 0; k < report.revealed.size(); ++k) {
    const std::size_t best = report.best_start(k);
    table.row("reveals of " + std::to_string(kRevealSteps[k]),
              "f " + fixed(report.leakage(own, k) / report.entropy(), 4) + " from the design, " +
                  fixed(report.leakage(best, k) / report.entropy(), 4) + " at best, from M " +
                  grouped(best));
  }
  out << table.text();
}

}  // namespace

void add_curve_options(Options& options) {
  options
      .value("curve", "FILE",
             "instead: FER of every frozen count, and leakage with reveals, as CSV; for list size "
             "1, by a genie in the reference decoder (10000 blocks where --blocks is not given)")
      .value("plot", "FILE", "a picture of the curve, .svg or .png");
}

void require_curve_options(const Options& options, const std::vector<unsigned>& lists) {
  if (!options.has("curve")) {
    if (options.has("plot")) throw InputError("trial: --plot goes with --curve");
    return;
  }
  for (const char* other : {"failures", "seconds", "shard", "checkpoint", "merge", "phase-error"}) {
    if (options.has(other)) {
      throw InputError(std::string("trial: --") + other + " does not go with --curve");
    }
  }
  if (lists != std::vector<unsigned>{1}) {
    throw InputError(
        "trial: --curve is for list size 1: a list has no decision of its own at each "
        "index");
  }
  std::vector<std::string> outputs{options.text("curve")};
  if (options.has("plot")) {
    require_plot(options.text("plot"));
    outputs.push_back(options.text("plot"));
  }
  require_distinct_files({options.text("FILE")}, outputs);
}

int run_curve(const Options& options, const Design& design, const Channel& channel,
              const TrialOptions& trial) {
  RunState state("curve", static_cast<double>(design.code.block_length().bits()), options.quiet());
  const FrozenCurve curve = run_frozen_curve(design_order(design), design.arithmetic, design.qber,
                                             channel, trial, state.control());
  if (curve.blocks == 0) throw Interrupted();
  CurveReport report{design, channel, curve, {}};
  for (const std::size_t step : kRevealSteps) {
    report.revealed.push_back(mean_revealed_bits(curve, step));
  }
  const std::string path = options.text("curve");
  FileSink file(path);
  file.write(csv_text(report));
  file.finish();
  if (options.has("plot")) draw(options.text("plot"), diagrams(report));
  file.commit();
  if (options.json()) {
    std::cout << curve_json(report, path).dump(2) << '\n';
  } else if (!options.quiet()) {
    print_account(options.account(), report, path);
  }
  return curve.interrupted ? kInterrupted : kDone;
}

}  // namespace frostline::cli
