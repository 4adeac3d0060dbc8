// trial --curve: the FER of every frozen count, and what reveals would cost, from one run.
#pragma once

#include <memory>

#include "cli/options.h"
#include "decode/trial/channel.h"
#include "decode/trial/trial.h"
#include "polar/design.h"

namespace frostline::cli {

// --curve, --plot.
void add_curve_options(Options& options);

// Throws InputError when an option does not go with --curve, or --plot stands alone. Call it before
// long work. lists: of the decoder, which must be {1}.
void require_curve_options(const Options& options, const std::vector<unsigned>& lists);

// Runs the blocks of the trial with a genie, writes the CSV and the picture, and prints the
// account. Returns the exit status.
int run_curve(const Options& options, const Design& design, const Channel& channel,
              const TrialOptions& trial);

}  // namespace frostline::cli
