// The constructions by name, as commands and files call them.
#pragma once

#include <optional>
#include <string>
#include <string_view>
#include <vector>

#include "polar/arithmetic.h"
#include "polar/block_length.h"
#include "polar/design.h"
#include "polar/reliability.h"

namespace frostline {

// "density-evolution", "degrading-merge", "gaussian", "bhattacharyya", "polarization-weight",
// "nr-sequence".
std::vector<std::string> construction_names();

// What some constructions can be told; the default where not given.
struct ConstructionOptions {
  std::optional<std::uint64_t> exact_levels;   // gaussian
  std::optional<std::uint64_t> merge_letters;  // degrading-merge
};

// A construction with its parameters, as a design file records it. Throws InputError on an unknown
// name, or an option that the construction does not have.
Construction make_construction(std::string_view name, const ConstructionOptions& options);

// Whether it gives an order of the indices and no probabilities. Throws InputError on an unknown
// name.
bool is_order_only(const Construction& construction);

// mu of a degrading-merge construction. Throws InputError where it is missing.
unsigned merge_letters_of(const Construction& construction);

// Runs it for a BSC(p) and the arithmetic of the decoder, which density-evolution alone looks at.
// Throws InputError on an unknown name or a bad parameter.
Reliability run_construction(const Construction& construction, BlockLength block_length, double p,
                             const Arithmetic& arithmetic);

}  // namespace frostline
