// The construction "genie-trial" of design: indices ranked by how often a trial saw them decided
// wrongly, in any arithmetic.
//
// It stands here and not in the catalogue because it runs a decoder, which construct does not know.
#pragma once

#include "cli/options.h"
#include "construct/designer.h"

namespace frostline::cli {

// --trial-blocks and --seed.
void add_genie_options(Options& options);

// Whether --construction names it. Throws InputError when an option does not go with the
// construction.
bool asks_for_genie_trial(const Options& options);

// Runs the trial, with a progress line, and chooses from its estimate. The design records blocks
// and seed. Throws InputError on a value out of range and Interrupted when the user stops it.
Designed design_by_genie_trial(const Options& options, BlockLength block_length, double qber,
                               const Arithmetic& arithmetic, const Goal& goal,
                               const CodeOptions& code, Parameters asked);

}  // namespace frostline::cli
