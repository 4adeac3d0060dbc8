// frostline design: chooses one frozen set and writes the design file.
#include <cmath>
#include <iostream>

#include "cli/account.h"
#include "cli/command.h"
#include "cli/design_file.h"
#include "cli/options.h"
#include "construct/catalogue.h"
#include "construct/gaussian.h"
#include "construct/selection.h"
#include "decode/exchange/streams.h"
#include "polar/check_bits.h"
#include "polar/error.h"
#include "polar/limits.h"

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
      .value("mask-format", "FORMAT", "text, hex or packed (text); 1 means frozen")
      .value("construction", "NAME", "gaussian or bhattacharyya (gaussian)")
      .value("exact-levels", "K", "levels of gaussian that are tracked exactly, 0 to 12 (6)")
      .value("check-bits", "C", "0, 6, 8, 11, 16 or 24 (11 up to N = 2^11, 16 up to 2^13, then 24)")
      .value("precoding", "NAME", "none or state8 (none)")
      .value("arithmetic", "A", "exact, planes:W or integer:Q:A (exact)")
      .value("output,o", "FILE", "the design file")
      .computing()
      .epilogue(
          "Example: a fibre that shows 2.3 % errors, one block in ten may fail:\n"
          "  frostline design --block-length 65536 --qber 0.023 --fer 0.1 -o link.design.json\n");
  return options;
}

// What the user asked the frozen count to be chosen by.
enum class Goal { fer, frozen, efficiency, best_key, mask };

Goal parse_goal(const Options& options) {
  std::optional<Goal> goal;
  const auto take = [&](const char* name, Goal candidate) {
    if (!options.has(name)) return;
    if (goal)
      throw InputError(
          "design: give only one of --fer, --frozen, --efficiency, --best-key, --mask");
    goal = candidate;
  };
  take("fer", Goal::fer);
  take("frozen", Goal::frozen);
  take("efficiency", Goal::efficiency);
  take("best-key", Goal::best_key);
  take("mask", Goal::mask);
  if (!goal) {
    throw InputError("design: give one of --fer, --frozen, --efficiency, --best-key, --mask");
  }
  return *goal;
}

struct Choice {
  FrozenSet frozen;
  double union_sum;
  std::optional<double> net_key_rate;  // of --best-key
};

std::size_t frozen_for_efficiency(const Options& options, BlockLength block_length, double p,
                                  unsigned check_bits) {
  const double f = options.number("efficiency");
  const double bits = f * static_cast<double>(block_length.bits()) * binary_entropy(p);
  if (!(bits >= check_bits && bits <= static_cast<double>(block_length.bits() + check_bits))) {
    throw InputError("--efficiency: " + short_number(f) + " asks for " + fixed(bits, 1) +
                     " public bits a block, which a block of " +
                     std::to_string(block_length.bits()) + " with " + std::to_string(check_bits) +
                     " check bits cannot have");
  }
  return static_cast<std::size_t>(std::floor(bits)) - check_bits;
}

Choice choose(const Options& options, Goal goal, BlockLength block_length, double p,
              unsigned check_bits, const Reliability& reliability) {
  const std::vector<std::uint32_t> order = freezing_order(reliability);
  const std::vector<double> sums = union_sums(reliability, order);
  std::optional<double> rate;
  std::size_t frozen_count = 0;
  if (goal == Goal::fer) {
    const double fer = options.number("fer");
    require_probability(fer, "--fer");
    frozen_count = smallest_frozen_count(sums, fer);
  } else if (goal == Goal::frozen) {
    frozen_count = options.whole("frozen");
    if (frozen_count > block_length.bits()) {
      throw InputError("--frozen: " + std::to_string(frozen_count) + " is more than the block of " +
                       std::to_string(block_length.bits()));
    }
  } else if (goal == Goal::efficiency) {
    frozen_count = frozen_for_efficiency(options, block_length, p, check_bits);
  } else {
    const double phase_error = options.optional_number("phase-error").value_or(p);
    if (!(phase_error >= 0 && phase_error <= 0.5)) {
      throw InputError("--phase-error: " + short_number(phase_error) + " is not from 0 to 0.5");
    }
    const BestKey best = best_key(sums, phase_error, check_bits);
    frozen_count = best.frozen_count;
    rate = best.net_key_rate;
  }
  return {freeze_first(order, frozen_count), sums[frozen_count], rate};
}

Choice from_mask(const Options& options, BlockLength block_length, const Reliability& reliability) {
  const std::string path = options.text("mask");
  const MaskFormat format =
      parse_mask_format(options.optional_text("mask-format").value_or("text"));
  FrozenSet frozen = parse_mask(read_file(path), format, block_length, path);
  double sum = 0;
  for (std::size_t i = 0; i < block_length.bits(); ++i) {
    if (!frozen.is_frozen(i)) sum += std::exp(reliability.log_error_probability[i]);
  }
  return {std::move(frozen), sum, std::nullopt};
}

// The options that shaped the design, for its provenance.
Parameters asked(const Options& options) {
  Parameters parameters;
  for (const char* name : {"fer", "efficiency", "phase-error"}) {
    if (options.has(name)) parameters.emplace_back(name, options.number(name));
  }
  if (options.has("frozen")) {
    parameters.emplace_back("frozen", static_cast<std::int64_t>(options.whole("frozen")));
  }
  if (options.has("best-key")) parameters.emplace_back("best-key", std::int64_t{1});
  if (options.has("mask")) parameters.emplace_back("mask", std::string("user"));
  return parameters;
}

Design make_design(const Options& options, std::optional<double>& net_key_rate) {
  const BlockLength block_length(options.whole("block-length"));
  const double p = options.number("qber");
  require_error_rate(p, "--qber");
  const Goal goal = parse_goal(options);
  if (options.has("phase-error") && goal != Goal::best_key) {
    throw InputError("design: --phase-error goes with --best-key");
  }
  const auto check_bits = static_cast<unsigned>(std::min<std::uint64_t>(
      options.optional_whole("check-bits").value_or(default_check_bits(block_length)), 1000));
  require_check_width(check_bits);
  const std::string name = options.optional_text("construction").value_or("gaussian");
  const auto levels = static_cast<unsigned>(std::min<std::uint64_t>(
      options.optional_whole("exact-levels").value_or(kDefaultExactLevels), 1000));
  Construction construction = make_construction(name, levels);
  const Reliability reliability = run_construction(construction, block_length, p);
  Choice choice = goal == Goal::mask
                      ? from_mask(options, block_length, reliability)
                      : choose(options, goal, block_length, p, check_bits, reliability);
  net_key_rate = choice.net_key_rate;
  if (goal == Goal::mask) construction = {"user-mask", {{"judged_by", name}}};

  Code code{std::move(choice.frozen),
            parse_precoding(options.optional_text("precoding").value_or("none")), check_bits};
  Design design{std::move(code), p, construction, 1, {}, {}, {}, asked(options), {}};
  design.arithmetic = parse_arithmetic(options.optional_text("arithmetic").value_or("exact"));
  design.predicted.kind = prediction_kind(reliability.kind);
  design.predicted.fer = std::min(1.0, choice.union_sum);
  return design;
}

void print_account(const Design& design, const std::optional<double>& net_key_rate,
                   const std::string& path) {
  std::cout << "Design written to " << path << ".\n";
  if (design.predicted.fer && *design.predicted.fer >= 1) {
    std::cout << "The predicted FER is 1: nearly every block would fail.\n";
  }
  if (design.arithmetic.kind != Arithmetic::Kind::exact) {
    std::cout << "The prediction is for exact arithmetic; " << to_string(design.arithmetic)
              << " fails somewhat more often.\n";
  }
  if (net_key_rate) {
    std::cout << (*net_key_rate > 0 ? "Net key, failed blocks discarded: " +
                                          fixed(*net_key_rate, 4) + " bits a sifted bit.\n"
                                    : std::string("No key at this error rate.\n"));
  }
  std::cout << describe(design);
}

}  // namespace

int run_design(const std::vector<std::string>& arguments) {
  Options options = make_options();
  if (!options.parse(arguments)) return kDone;
  const std::string path = options.text("output");
  std::vector<std::string> inputs;
  if (options.has("mask")) inputs.push_back(options.text("mask"));
  require_distinct_files(inputs, {path});
  std::optional<double> net_key_rate;
  const Design design = make_design(options, net_key_rate);
  FileSink file(path);
  file.write(design_to_json(design));
  file.commit();
  if (options.json()) {
    Json summary = design_summary(design);
    summary["file"] = path;
    if (net_key_rate) summary["net_key_rate"] = *net_key_rate;
    std::cout << summary.dump(2) << '\n';
  } else if (!options.quiet()) {
    print_account(design, net_key_rate, path);
  }
  return net_key_rate && *net_key_rate <= 0 ? kNotAsAsked : kDone;
}

}  // namespace frostline::cli
