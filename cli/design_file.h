// Design files as commands read, describe and write them.
#pragma once

#include <string>

#include "polar/design.h"
#include "polar/design_json.h"

namespace frostline::cli {

// Throws InputError "cannot read ..." or "FILE: ...".
Design read_design(const std::string& path);

// The rows and the JSON object by which design and inspect describe a design alike.
std::string describe(const Design& design);
Json design_summary(const Design& design);

// The sentence about a prediction: "estimate of the FER: 0.0998 (union of ...)".
std::string prediction_sentence(const Prediction& predicted);

}  // namespace frostline::cli
