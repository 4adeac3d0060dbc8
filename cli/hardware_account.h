// What a design costs in hardware, as commands ask for it and tell it.
#pragma once

#include <optional>
#include <string>

#include "cli/options.h"
#include "decode/hardware/cost_model.h"
#include "polar/design.h"
#include "polar/design_json.h"

namespace frostline::cli {

// --clock-mhz, --processing-elements, --llr-bits, --sorter.
void add_hardware_options(Options& options);

struct HardwareChoice {
  HardwareSetup setup;
  std::optional<double> clock_mhz;  // none: cycles only
};

// What was asked; by default 64 processing elements, and as many LLR bits as the design's
// arithmetic has (6 for exact arithmetic). Throws InputError on a value out of range.
HardwareChoice hardware_choice(const Options& options, const Design& design);

// Bits of a message in an arithmetic: W + 1, Q, or 6, with which [2] of cost_model.h saw no loss
// against floating point at (1024,512).
unsigned message_bits(const Arithmetic& arithmetic);

// Nodes of the pruned tree and the model's figures, for a person and as JSON.
std::string describe_hardware(const Design& design, const HardwareChoice& choice);
Json hardware_json(const Design& design, const HardwareChoice& choice);

}  // namespace frostline::cli
