// frostline design: chooses one frozen set and writes the design file.
#include <iostream>

#include "cli/account.h"
#include "cli/calibrated_design.h"
#include "cli/command.h"
#include "cli/design_file.h"
#include "cli/design_options.h"
#include "cli/genie_construction.h"
#include "cli/options.h"
#include "construct/designer.h"
#include "decode/exchange/streams.h"
#include "polar/error.h"

namespace frostline::cli {
namespace {

Options make_options() {
  Options options("design", "Chooses the frozen set for a block length and a QBER.", {});
  options.value("block-length", "N", "block length, a power of two from 8 to 16777216")
      .value("qber", "P", "probability that one position differs, above 0 and below 0.5")
      .value("fer", "T", "smallest frozen count whose predicted FER is at most T")
      .value("frozen", "M", "exactly this frozen count")
      .value("efficiency", "F", "largest leakage M + c of at most F N h2(P)")
      .flag("best-key", "the frozen count with the largest net key, failed blocks discarded")
      .value("phase-error", "E", "phase error rate for --best-key (the QBER)")
      .value("mask", "FILE", "your own frozen set instead of a construction's")
      .value("mask-format", "FORMAT", "text, hex or packed (text); 1 means frozen");
  options.value("list", "L", "list size of the decoder, a power of two from 1 to 128 (1)");
  add_code_options(options);
  options.value("construction", "NAME",
                "how indices are ranked: " + construction_list() + "; genie-trial");
  add_genie_options(options);
  add_calibration_options(options);
  options.flag("reveal-order", "list the open indices in the file, most likely to fail first")
      .value("output,o", "FILE", "the design file")
      .computing()
      .epilogue(
          "Example: a fibre that shows 2.3 % errors, one block in ten may fail:\n"
          "  frostline design --block-length 65536 --qber 0.023 --fer 0.1 -o link.design.json\n"
          "The same for a list decoder, which leaks less and is slower:\n"
          "  frostline design --block-length 65536 --qber 0.023 --fer 0.1 --list 8 -o "
          "link.design.json\n");
  return options;
}

constexpr const char* kGoals[] = {"fer", "frozen", "efficiency", "best-key", "mask"};

// The one goal that the user named.
std::string goal_name(const Options& options) {
  std::string found;
  for (const char* name : kGoals) {
    if (!options.has(name)) continue;
    if (!found.empty()) {
      throw InputError(
          "design: give only one of --fer, --frozen, --efficiency, --best-key, --mask");
    }
    found = name;
  }
  if (found.empty()) {
    throw InputError("design: give one of --fer, --frozen, --efficiency, --best-key, --mask");
  }
  if (options.has("phase-error") && found != "best-key") {
    throw InputError("design: --phase-error goes with --best-key");
  }
  if (options.has("mask-format") && found != "mask") {
    throw InputError("design: --mask-format goes with --mask");
  }
  return found;
}

Goal goal_of(const Options& options, const std::string& name, double qber) {
  if (name == "fer") return {Goal::Kind::fer, options.number("fer"), 0};
  if (name == "frozen") return {Goal::Kind::frozen, 0, options.whole("frozen")};
  if (name == "efficiency") return {Goal::Kind::efficiency, options.number("efficiency"), 0};
  return {Goal::Kind::best_key, options.optional_number("phase-error").value_or(qber), 0};
}

// The goal, for the provenance.
Parameters asked(const Options& options) {
  Parameters parameters;
  for (const char* name : {"fer", "efficiency", "phase-error"}) {
    if (options.has(name)) parameters.emplace_back(name, options.number(name));
  }
  if (options.has("frozen")) {
    parameters.emplace_back("frozen", static_cast<std::int64_t>(options.whole("frozen")));
  }
  if (options.has("best-key")) parameters.emplace_back("goal", std::string("best-key"));
  if (options.has("mask")) parameters.emplace_back("goal", std::string("mask"));
  return parameters;
}

// calibrated: receives what --by trial spent, where it was asked for.
Designed design_as_asked(const Options& options, std::optional<CalibratedDesign>& calibrated) {
  const BlockLength block_length(options.whole("block-length"));
  const double qber = options.number("qber");
  const std::string goal = goal_name(options);
  const bool by_trial = asks_for_calibration(options);
  const bool by_genie_trial = asks_for_genie_trial(options);
  const Arithmetic arithmetic = arithmetic_option(options);
  CodeOptions code =
      code_options(options, block_length, options.optional_whole("list").value_or(1));
  code.reveal_order = options.has("reveal-order");
  if (goal == "mask") {
    if (options.has("construction") || options.has("order")) {
      throw InputError("design: --mask takes the place of --construction and --order");
    }
    const std::string path = options.text("mask");
    const FrozenSet mask = parse_mask(
        read_file(path), parse_mask_format(options.optional_text("mask-format").value_or("text")),
        block_length, path);
    return {design_from_mask(mask, qber, arithmetic, code, asked(options)), std::nullopt};
  }
  const Goal wanted = goal_of(options, goal, qber);
  if (by_genie_trial) {
    return design_by_genie_trial(options, block_length, qber, arithmetic, wanted, code,
                                 asked(options));
  }
  const Ranking ranking = rank_indices(block_length, qber, construction_option(options, arithmetic),
                                       order_alpha_option(options), arithmetic);
  if (by_trial) {
    calibrated = calibrated_design(options, ranking, code, asked(options));
    return {calibrated->design, std::nullopt};
  }
  return make_design(ranking, wanted, code, asked(options));
}

void print_account(std::ostream& out, const Designed& designed, const std::string& path) {
  const Design& design = designed.design;
  out << "Design written to " << path << ".\n";
  if (design.predicted.fer && *design.predicted.fer >= 1) {
    out << "The predicted FER is 1: nearly every block would fail.\n";
  }
  if (design.predicted.kind == "estimate" || design.predicted.kind == "upper-bound") {
    if (design.list > 1) {
      out << "The prediction is a table's, from lists measured before: try it with 'frostline "
             "trial'.\n";
    } else if (design.arithmetic.kind != Arithmetic::Kind::exact && !design.predicted.blocks) {
      out << "The prediction is for exact arithmetic; " << to_string(design.arithmetic)
          << " fails somewhat more often.\n";
    }
  }
  if (designed.net_key_rate) {
    out << "Net key, failed blocks discarded: " << fixed(*designed.net_key_rate, 4)
        << " bits a sifted bit.\n";
  }
  out << describe(design);
}

// No frozen count leaves a key, so there is no best one and no file.
int report_no_key(const Options& options, double net_key_rate) {
  if (options.json()) {
    std::cout << Json{{"file", nullptr}, {"net_key_rate", net_key_rate}}.dump(2) << '\n';
  } else if (!options.quiet()) {
    std::cout << "No key at this error rate: whatever the frozen count, failed blocks and leakage "
                 "leave nothing. No design was written.\n";
  }
  return kNotAsAsked;
}

}  // namespace

int run_design(const std::vector<std::string>& arguments) {
  Options options = make_options();
  if (!options.parse(arguments)) return kDone;
  const std::string path = options.text("output");
  std::vector<std::string> inputs;
  if (options.has("mask")) inputs.push_back(options.text("mask"));
  require_distinct_files(inputs, {path});
  std::optional<CalibratedDesign> calibrated;
  const Designed designed = design_as_asked(options, calibrated);
  if (designed.net_key_rate && *designed.net_key_rate <= 0) {
    return report_no_key(options, *designed.net_key_rate);
  }
  FileSink file(path);
  file.write(design_to_json(designed.design));
  file.commit();
  if (options.json()) {
    Json summary = design_summary(designed.design);
    summary["file"] = path;
    if (designed.net_key_rate) summary["net_key_rate"] = *designed.net_key_rate;
    if (calibrated) summary["calibration"] = spent_json(*calibrated);
    std::cout << summary.dump(2) << '\n';
  } else if (!options.quiet()) {
    if (calibrated) options.account() << spent_sentence(*calibrated);
    print_account(options.account(), designed, path);
  }
  return kDone;
}

}  // namespace frostline::cli
