#include "cli/genie_construction.h"

#include "cli/design_options.h"
#include "cli/run_state.h"
#include "construct/gaussian.h"
#include "decode/trial/genie.h"
#include "polar/error.h"

namespace frostline::cli {
namespace {

constexpr const char* kName = "genie-trial";
constexpr std::uint64_t kDefaultBlocks = 10000;
constexpr std::uint64_t kDefaultSeed = 1;

}  // namespace

void add_genie_options(Options& options) {
  options.value("trial-blocks", "B", "blocks of the genie-trial construction (10000)")
      .value("seed", "S", "of genie-trial and of --by trial: the same seed, the same design (1)");
}

bool asks_for_genie_trial(const Options& options) {
  const bool asked = options.optional_text("construction") == kName;
  for (const char* own : {"trial-blocks", "seed"}) {
    const bool calibrates = own == std::string("seed") && options.optional_text("by") == "trial";
    if (options.has(own) && !asked && !calibrates) {
      throw InputError(std::string("design: --") + own + " goes with --construction genie-trial");
    }
  }
  for (const char* other : {"exact-levels", "merge-letters"}) {
    if (options.has(other) && asked) {
      throw InputError(std::string("design: --") + other + " is not for genie-trial");
    }
  }
  return asked;
}

Designed design_by_genie_trial(const Options& options, BlockLength block_length, double qber,
                               const Arithmetic& arithmetic, const Goal& goal,
                               const CodeOptions& code, Parameters asked) {
  const GenieTrial trial{block_length, qber, arithmetic,
                         options.optional_whole("trial-blocks").value_or(kDefaultBlocks),
                         options.optional_whole("seed").value_or(kDefaultSeed)};
  const auto blocks = static_cast<std::int64_t>(trial.blocks);
  // The indices that no block of the trial saw fail: their order is not worth an exact method,
  // which would leave nothing for the trial to say.
  const Construction construction{kName, {{"blocks", blocks}, {"prior", std::string("gaussian")}}};
  const Reliability prior = gaussian_approximation(block_length, qber);
  const auto ranked_by = [&](Reliability reliability) {
    return rank_by(block_length, qber, {construction, std::move(reliability), {}},
                   order_alpha_option(options), arithmetic);
  };
  // A goal out of range is told before the trial, not after it.
  make_design(ranked_by(prior), goal, code, {});
  RunState state("genie trial", static_cast<double>(block_length.bits()), options.quiet());
  const GenieCounts counts = run_genie_trial(trial, state.control());
  const Ranking ranking = ranked_by(genie_reliability(counts, prior));
  asked.emplace_back("trial_blocks", blocks);
  Designed designed = make_design(ranking, goal, code, std::move(asked));
  designed.design.predicted.blocks = trial.blocks;
  designed.design.seed = trial.seed;
  return designed;
}

}  // namespace frostline::cli
