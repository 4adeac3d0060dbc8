// frostline inspect: checks a design file, describes it, and compares it.
#include <algorithm>
#include <cmath>
#include <iostream>
#include <optional>

#include "cli/account.h"
#include "cli/command.h"
#include "cli/design_file.h"
#include "cli/grid.h"
#include "cli/hardware_account.h"
#include "cli/options.h"
#include "cli/plot.h"
#include "construct/designer.h"
#include "construct/metric_weights.h"
#include "construct/selection.h"
#include "polar/error.h"
#include "polar/limits.h"

namespace frostline::cli {
namespace {

// Error rates at which the FER curve is drawn, as multiples of the design's.
constexpr double kCurveLow = 0.6;
constexpr double kCurveHigh = 1.4;
constexpr int kCurvePoints = 33;
// Bins of the picture that shows where the frozen indices lie.
constexpr std::size_t kIndexBins = 256;

Options make_options() {
  Options options("inspect", "Checks a design file and describes it.", {"FILE"});
  options.value("qber", "P", "also predict the FER of this frozen set at another error rate")
      .value("against", "FILE", "show how another design of the same block length differs")
      .value("plot", "FILE",
             "draw error probabilities and frozen indices, or with --qber the FER over p; .svg or "
             ".png");
  add_hardware_options(options);
  options.computing().epilogue(
      "Example: how far does the design carry when the link drifts to 2.6 %?\n"
      "  frostline inspect link.design.json --qber 0.026 --plot drift.svg\n"
      "And what does a decoder at 200 MHz take?\n"
      "  frostline inspect link.design.json --clock-mhz 200 --processing-elements 64\n");
  return options;
}

// How two frozen sets of one block length differ, both judged at the first one's QBER and
// arithmetic by the most trusted method.
struct Difference {
  std::size_t frozen_only_here = 0;
  std::size_t frozen_only_there = 0;
  Prediction here;
  Prediction there;
  // Frozen counts that the judge's own order needs for the FER of each with its list size; none
  // where that FER is not known.
  std::optional<std::size_t> best_here;
  std::optional<std::size_t> best_there;
  double entropy = 0;  // N h2(p)
};

Difference differ(const Design& here, const Design& there, const Judgement& judgement) {
  Difference difference;
  for (std::size_t i = 0; i < here.code.block_length().bits(); ++i) {
    const bool frozen_here = here.code.frozen.is_frozen(i);
    const bool frozen_there = there.code.frozen.is_frozen(i);
    if (frozen_here && !frozen_there) ++difference.frozen_only_here;
    if (frozen_there && !frozen_here) ++difference.frozen_only_there;
  }
  const ListSetting setting_here = list_setting(here, here.qber, here.list);
  ListSetting setting_there = list_setting(there, here.qber, there.list);
  setting_there.arithmetic = here.arithmetic;
  difference.here = predict(here.code.frozen, judgement, setting_here);
  difference.there = predict(there.code.frozen, judgement, setting_there);
  const std::vector<std::uint32_t> order = freezing_order(judgement.reliability);
  const std::vector<double> sums = union_sums(judgement.reliability, order);
  // A union of 1 or more is no target: what such a set could save is not told.
  const auto best = [&](const Prediction& predicted,
                        const ListSetting& setting) -> std::optional<std::size_t> {
    if (!predicted.fer) return std::nullopt;
    const double fer = std::clamp(*predicted.fer, 1e-300, 1 - 1e-12);
    return smallest_frozen_count(setting.list == 1 ? sums : list_fer_estimates(setting, sums), fer);
  };
  difference.best_here = best(difference.here, setting_here);
  difference.best_there = best(difference.there, setting_there);
  difference.entropy =
      static_cast<double>(here.code.block_length().bits()) * binary_entropy(here.qber);
  return difference;
}

Json side_json(const Design& design, const Prediction& predicted, std::optional<std::size_t> best,
               std::size_t frozen_only, double entropy) {
  const auto frozen = static_cast<double>(design.code.frozen.frozen_count());
  Json object;
  object["frozen_count"] = design.code.frozen.frozen_count();
  object["frozen_only_here"] = frozen_only;
  object["predicted"] = to_json(predicted);
  object["list"] = design.list;
  object["syndrome_efficiency"] = frozen / entropy;
  object["least_frozen_count_at_this_fer"] = best ? Json(*best) : Json(nullptr);
  object["cost_in_efficiency"] =
      best ? Json((frozen - static_cast<double>(*best)) / entropy) : Json(nullptr);
  return object;
}

std::string side_text(const Design& design, const Prediction& predicted,
                      std::optional<std::size_t> best, std::size_t frozen_only, double entropy) {
  const auto frozen = static_cast<double>(design.code.frozen.frozen_count());
  std::string text = grouped(design.code.frozen.frozen_count()) + " frozen (" +
                     grouped(frozen_only) + " of them only here), syndrome f " +
                     fixed(frozen / entropy, 4) + ", list size " + std::to_string(design.list) +
                     ", FER " + prediction_sentence(predicted);
  if (best) {
    text += ", costs " + fixed((frozen - static_cast<double>(*best)) / entropy, 4) +
            " in f against the best set of that FER";
  }
  return text;
}

std::vector<Diagram> picture_of_indices(const Design& design, const Judgement& judgement) {
  const std::size_t length = design.code.block_length().bits();
  const std::vector<double>& log_probability = judgement.reliability.log_error_probability;
  std::vector<std::uint32_t> order = freezing_order(judgement.reliability);
  std::reverse(order.begin(), order.end());
  Diagram sorted{
      "Error probability of the indices, sorted (p " + shortest(design.qber) + ", " +
          judgement.by.name + ")",
      "rank, most reliable first",
      "log10 of the error probability",
      "set yrange [-20:0]\nset xrange [0:" + std::to_string(length) + "]\n",
      {{"open", "dots lw 2 lc rgb '#1f6f9f'", {}}, {"frozen", "dots lw 2 lc rgb '#c0562b'", {}}}};
  // More points than the picture is wide add nothing.
  const std::size_t stride = std::max<std::size_t>(1, length / 4096);
  for (std::size_t rank = 0; rank < length; rank += stride) {
    const double y = std::max(-20.0, log_probability[order[rank]] / std::log(10.0));
    sorted.series[design.code.frozen.is_frozen(order[rank]) ? 1 : 0].points.emplace_back(
        static_cast<double>(rank), y);
  }
  const auto boundary = static_cast<double>(length - design.code.frozen.frozen_count());
  sorted.series.push_back(
      {"N - M", "lines dt 2 lc rgb '#444444'", {{boundary, -20}, {boundary, 0}}});
  Diagram where{"Where the frozen indices lie",
                "index",
                "share frozen",
                "set yrange [0:1.05]\nset xrange [0:" + std::to_string(length) +
                    "]\nset style fill solid 0.6\n",
                {{"frozen", "boxes lc rgb '#c0562b'", {}}}};
  const std::size_t bins = std::min(length, kIndexBins);
  const std::size_t width = length / bins;
  for (std::size_t bin = 0; bin < bins; ++bin) {
    const BitString part = design.code.frozen.mask().slice(bin * width, width);
    where.series[0].points.emplace_back(
        (static_cast<double>(bin) + 0.5) * static_cast<double>(width),
        static_cast<double>(part.count()) / static_cast<double>(width));
  }
  // A series without points is an error to gnuplot.
  sorted.series.erase(std::remove_if(sorted.series.begin(), sorted.series.end(),
                                     [](const Series& series) { return series.points.empty(); }),
                      sorted.series.end());
  return {sorted, where};
}

// With the design's own list size.
Prediction predict_at(const Design& design, double qber) {
  return predict(design.code.frozen, judge(design.code.block_length(), qber, design.arithmetic),
                 list_setting(design, qber, design.list));
}

std::vector<Diagram> picture_of_drift(const Design& design, double qber) {
  Diagram diagram{"Predicted FER of the frozen set when the QBER drifts",
                  "QBER",
                  design.list == 1 ? "FER (union over open indices)" : "FER (estimate)",
                  "set logscale y\nset format y '10^{%L}'\n"
                  "set yrange [1e-9:1.5]\n",
                  {}};
  const double low = std::min(kCurveLow * design.qber, qber);
  const double high = std::min(0.49, std::max(kCurveHigh * design.qber, qber));
  Series curve{"this design", "linespoints pt 7 ps 0.5 lc rgb '#1f6f9f'", {}};
  for (int k = 0; k < kCurvePoints; ++k) {
    const double p = low + (high - low) * k / (kCurvePoints - 1);
    const Prediction predicted = predict_at(design, p);
    if (!predicted.fer) {
      throw InputError("--plot: the FER of list size " + std::to_string(design.list) + " in " +
                       to_string(design.arithmetic) + " is not known");
    }
    if (*predicted.fer > 1e-9) curve.points.emplace_back(p, *predicted.fer);
  }
  if (curve.points.empty()) curve.points.emplace_back(high, 1e-9);
  diagram.series = {
      curve,
      {"design QBER", "lines dt 2 lc rgb '#444444'", {{design.qber, 1e-9}, {design.qber, 1}}},
      {"asked QBER", "lines dt 3 lc rgb '#c0562b'", {{qber, 1e-9}, {qber, 1}}}};
  return {diagram};
}

// What --qber adds.
struct Drift {
  double qber;
  Prediction predicted;
  double efficiency;
};

Drift drift_to(const Design& design, double qber) {
  require_error_rate(qber, "--qber");
  const double entropy =
      static_cast<double>(design.code.block_length().bits()) * binary_entropy(qber);
  return {qber, predict_at(design, qber),
          static_cast<double>(design.code.leakage_bits()) / entropy};
}

// Open indices at which a list decoder of planes lets every path follow the sign.
std::optional<std::size_t> never_forking(const Design& design) {
  if (design.list == 1 || design.arithmetic.kind != Arithmetic::Kind::planes) return std::nullopt;
  return metric_weights(design.code.frozen, design.qber, design.arithmetic).never_forks.count();
}

}  // namespace

int run_inspect(const std::vector<std::string>& arguments) {
  Options options = make_options();
  if (!options.parse(arguments)) return kDone;
  if (options.has("plot")) {
    require_plot(options.text("plot"));
    require_distinct_files({options.text("FILE")}, {options.text("plot")});
  }
  const Design design = read_design(options.text("FILE"));
  const HardwareChoice hardware = hardware_choice(options, design);
  Json root = design_summary(design);
  std::string account =
      options.text("FILE") + " is whole: counts and digests fit.\n" + describe(design);
  if (const auto indices = never_forking(design)) {
    root["never_forks"] = *indices;
    const std::size_t open = design.code.block_length().bits() - design.code.frozen.frozen_count();
    account += "A list decoder need not fork at " + grouped(*indices) + " of the " + grouped(open) +
               " open indices; it does at the other " + grouped(open - *indices) + ".\n";
  }
  root["hardware"] = hardware_json(design, hardware);
  account += describe_hardware(design, hardware);
  if (options.has("qber")) {
    const Drift drift = drift_to(design, options.number("qber"));
    root["at_qber"] = {{"qber", drift.qber},
                       {"predicted", to_json(drift.predicted)},
                       {"efficiency", drift.efficiency}};
    account += "At QBER " + shortest(drift.qber) + " the predicted FER is " +
               prediction_sentence(drift.predicted) + ", and f is " + fixed(drift.efficiency, 4) +
               ".\n";
  }
  if (options.has("against")) {
    const Design other = read_design(options.text("against"));
    if (other.code.block_length() != design.code.block_length()) {
      throw InputError("'" + options.text("against") + "' has block length " +
                       std::to_string(other.code.block_length().bits()) + ", not " +
                       std::to_string(design.code.block_length().bits()));
    }
    const Judgement judgement = judge(design.code.block_length(), design.qber, design.arithmetic);
    const Difference d = differ(design, other, judgement);
    root["against"] = {
        {"file", options.text("against")},
        {"judged_by", judgement.by.name},
        {"this", side_json(design, d.here, d.best_here, d.frozen_only_here, d.entropy)},
        {"other", side_json(other, d.there, d.best_there, d.frozen_only_there, d.entropy)}};
    Table table;
    table.row("this", side_text(design, d.here, d.best_here, d.frozen_only_here, d.entropy))
        .row("other", side_text(other, d.there, d.best_there, d.frozen_only_there, d.entropy));
    account += "Against " + options.text("against") + ", both judged at QBER " +
               shortest(design.qber) + " by " + judgement.by.name + ":\n" + table.text();
  }
  if (options.has("plot")) {
    draw(options.text("plot"),
         options.has("qber") ? picture_of_drift(design, options.number("qber"))
                             : picture_of_indices(design, judge(design.code.block_length(),
                                                                design.qber, design.arithmetic)));
    account += "Picture in " + options.text("plot") + ".\n";
  }
  if (options.json()) {
    std::cout << root.dump(2) << '\n';
  } else if (!options.quiet()) {
    std::cout << account;
  }
  return kDone;
}

}  // namespace frostline::cli
