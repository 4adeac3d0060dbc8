// Options that design and batch share: arithmetic, construction, order, check bits, precoding.
#pragma once

#include <string>

#include "cli/options.h"
#include "construct/catalogue.h"
#include "construct/designer.h"

namespace frostline::cli {

// --arithmetic, --exact-levels, --merge-letters, --order, --check-bits, --precoding.
void add_code_options(Options& options);
// "density-evolution (default), degrading-merge, ...", for help texts.
std::string construction_list();

// planes:3 where not given.
Arithmetic arithmetic_option(const Options& options);
// default_construction(arithmetic) where --construction is not given.
Construction construction_option(const Options& options, const Arithmetic& arithmetic);
// The named construction with the options' parameters.
Construction construction_named(const std::string& name, const Options& options);
// alpha of --order weighted:ALPHA; 0 for reliability.
double order_alpha_option(const Options& options);
// Check bits (by block length where not given), precoding (by list size), and the list size, which
// must be a power of two from 1 to 128 (InputError otherwise).
CodeOptions code_options(const Options& options, BlockLength block_length, std::uint64_t list);

}  // namespace frostline::cli
