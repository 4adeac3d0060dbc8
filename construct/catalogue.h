// The constructions by name, as commands and files call them.
#pragma once

#include <string>
#include <string_view>
#include <vector>

#include "polar/block_length.h"
#include "polar/design.h"
#include "polar/reliability.h"

namespace frostline {

// "gaussian", "bhattacharyya".
std::vector<std::string> construction_names();

// A construction with its parameters, as a design file records it.
// exact_levels: of "gaussian" only. Throws InputError on an unknown name.
Construction make_construction(std::string_view name, unsigned exact_levels);

// Runs it for a BSC(p). Throws InputError on an unknown name or a bad parameter.
Reliability run_construction(const Construction& construction, BlockLength block_length, double p);

}  // namespace frostline
