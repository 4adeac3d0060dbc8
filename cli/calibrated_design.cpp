#include "cli/calibrated_design.h"

#include "cli/account.h"
#include "cli/decoder_plan.h"
#include "cli/run_state.h"
#include "construct/selection.h"
#include "decode/trial/calibration.h"
#include "polar/error.h"
#include "polar/limits.h"

namespace frostline::cli {
namespace {

// Where bisection starts: what a bound or a table says.
std::size_t first_guess(const Ranking& ranking, const CodeOptions& code, double fer) {
  if (code.list == 1 || !has_list_estimate(ranking.arithmetic, code.list)) {
    return smallest_frozen_count(ranking.sums, fer);
  }
  return smallest_frozen_count(list_fer_estimates({ranking.block_length, ranking.qber, code.list,
                                                   code.precoding, ranking.arithmetic},
                                                  ranking.sums),
                               fer);
}

}  // namespace

void add_calibration_options(Options& options) {
  options
      .value("by", "METHOD",
             "what --fer is met by: bound, the predicted FER, or trial, the FER that trials of the "
             "decoder show with 95 % confidence (bound)")
      .value("effort", "EFFORT", "of --by trial: quick, normal or thorough (normal)");
}

bool asks_for_calibration(const Options& options) {
  const std::string by = options.optional_text("by").value_or("bound");
  if (by != "bound" && by != "trial") {
    throw InputError("--by: '" + by + "' is neither bound nor trial");
  }
  if (by == "bound") {
    if (options.has("effort")) throw InputError("design: --effort goes with --by trial");
    return false;
  }
  if (!options.has("fer")) throw InputError("design: --by trial goes with --fer");
  if (options.optional_text("construction") == "genie-trial") {
    throw InputError("design: --by trial is not for --construction genie-trial");
  }
  return true;
}

CalibratedDesign calibrated_design(const Options& options, const Ranking& ranking,
                                   const CodeOptions& code, Parameters asked) {
  const double fer = options.number("fer");
  require_probability(fer, "FER");
  const std::string effort = options.optional_text("effort").value_or("normal");
  asked.emplace_back("by", std::string("trial"));
  asked.emplace_back("effort", effort);
  const std::uint64_t seed = options.optional_whole("seed").value_or(1);
  asked.emplace_back("calibration_seed", static_cast<std::int64_t>(seed));
  const auto design_of = [&](std::size_t frozen_count, Parameters parameters) {
    return make_design(ranking, {Goal::Kind::frozen, 0, frozen_count}, code, std::move(parameters))
        .design;
  };
  CalibrationTask task;
  task.candidate = [&](std::size_t frozen_count) {
    const Design design = design_of(frozen_count, {});
    return Candidate{design.code, make_batch_decoder(design, decoder_plan(options, design))};
  };
  task.block_length = ranking.block_length.bits();
  task.guess = first_guess(ranking, code, fer);
  task.target_fer = fer;
  task.effort = parse_effort(effort);
  task.seed = seed;
  RunState state("calibration", 0, options.quiet(), "trials");
  const Calibration found = calibrate(task, SymmetricChannel(ranking.qber), state.control());
  Design design = design_of(found.frozen_count, std::move(asked));
  const TrialCounts& counts = found.confirmed;
  design.predicted.fer = static_cast<double>(counts.failures) / static_cast<double>(counts.blocks);
  design.predicted.kind = "trial";
  design.predicted.interval = {found.fer_interval.low, found.fer_interval.high};
  design.predicted.blocks = counts.blocks;
  design.seed = found.confirmed_seed;
  return {std::move(design), found.trials, found.blocks, state.seconds()};
}

std::string spent_sentence(const CalibratedDesign& calibrated) {
  return "Calibrated by " + counted(calibrated.trials, "trial") + " of " +
         grouped(calibrated.blocks) + " blocks in all, " + fixed(calibrated.seconds, 1) +
         " s; confirmed on " + grouped(calibrated.design.predicted.blocks.value_or(0)) +
         " fresh ones ('frostline trial' with --blocks " +
         std::to_string(calibrated.design.predicted.blocks.value_or(0)) + " --seed " +
         std::to_string(calibrated.design.seed.value_or(0)) + " repeats them).\n";
}

Json spent_json(const CalibratedDesign& calibrated) {
  return {{"trials", calibrated.trials},
          {"blocks", calibrated.blocks},
          {"seconds", calibrated.seconds}};
}

}  // namespace frostline::cli
