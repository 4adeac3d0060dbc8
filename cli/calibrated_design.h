// --by trial of design: the frozen count chosen by trials of the very decoder.
//
// It stands here because it joins construct, which ranks the indices, and decode, which tries them.
#pragma once

#include <string>

#include "cli/options.h"
#include "construct/designer.h"
#include "polar/design_json.h"

namespace frostline::cli {

// --by and --effort.
void add_calibration_options(Options& options);

// Whether --by trial is asked for. Throws InputError when another option does not go with it.
bool asks_for_calibration(const Options& options);

struct CalibratedDesign {
  Design design;
  unsigned trials;       // spent
  std::uint64_t blocks;  // in all of them
  double seconds;
};
// The smallest frozen count along the ranking whose FER meets --fer; with a progress line. Throws
// InputError on a value out of range and Interrupted when the user stops it.
CalibratedDesign calibrated_design(const Options& options, const Ranking& ranking,
                                   const CodeOptions& code, Parameters asked);

// What it spent, in a sentence and as an object.
std::string spent_sentence(const CalibratedDesign& calibrated);
Json spent_json(const CalibratedDesign& calibrated);

}  // namespace frostline::cli
