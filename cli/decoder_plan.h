// --list: the list sizes that reconcile and trial decode with.
#pragma once

#include <string>

#include "cli/options.h"
#include "decode/batch_decoder.h"
#include "polar/design.h"
#include "polar/design_json.h"

namespace frostline::cli {

void add_list_option(Options& options);

// The passes asked for, or one with the design's list size, and what they need: the metric weights
// of the design at its QBER, where there is a list in planes. Throws InputError on list sizes that
// cannot be, and on several passes without check bits to tell which blocks need the next one.
DecoderPlan decoder_plan(const Options& options, const Design& design);

// "list size 8, then 32; planes:3".
std::string describe_decoder(const DecoderPlan& plan, const Arithmetic& arithmetic);
// {"lists": [8, 32], "arithmetic": "planes:3"}.
Json decoder_json(const DecoderPlan& plan, const Arithmetic& arithmetic);

}  // namespace frostline::cli
