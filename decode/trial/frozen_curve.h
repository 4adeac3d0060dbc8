// One trial for every frozen count: how many indices, in the order in which they are frozen, each
// block would have needed.
//
// Successive cancellation fails exactly when it would decide some open index wrongly with all
// earlier ones known. So a genie-aided run (genie.h) of a block tells the smallest frozen count
// that decodes it: up to the last index in the order that is decided wrongly. Blocks are those of
// run_trial with the same options, so that the curve goes through its counts exactly.
#pragma once

#include <cstdint>
#include <vector>

#include "decode/exchange/run_control.h"
#include "decode/trial/trial.h"
#include "polar/arithmetic.h"

namespace frostline {

struct FrozenCurve {
  std::uint64_t blocks = 0;
  std::uint64_t errors = 0;             // ones in all patterns
  std::vector<std::uint64_t> failures;  // N + 1 entries: blocks that fail with the first M frozen
  bool interrupted = false;
};

// order: all N indices, the first to freeze first (std::invalid_argument otherwise). qber: of exact
// arithmetic's LLRs. Takes blocks, seed and lanes of the options; they must ask for no other stop
// and for no shard (std::invalid_argument). Batches in parallel, counts whatever the number of
// threads.
FrozenCurve run_frozen_curve(const std::vector<std::uint32_t>& order, const Arithmetic& arithmetic,
                             double qber, const Channel& channel, const TrialOptions& options,
                             const RunControl& control = {});

// What reveals cost where each block starts with M public values and, as long as it fails, gets the
// next `step` of the order: the mean number of revealed bits a block, for M = 0..N.
// REQUIRES: step > 0, a curve of at least one block (std::invalid_argument otherwise).
std::vector<double> mean_revealed_bits(const FrozenCurve& curve, std::size_t step);

}  // namespace frostline
