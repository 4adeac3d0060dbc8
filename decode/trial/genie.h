// Genie-aided Monte Carlo: how often each index is decided wrongly when all earlier ones are known,
// counted over random error patterns.
//
// The construction that came with polar codes (E. Arikan, IEEE Trans. IT 55(7), 2009), and the one
// that asks nothing of the decoder but that it run: any arithmetic will do. What it costs is
// blocks: a probability that matters must have been seen.
#pragma once

#include <cstdint>
#include <vector>

#include "decode/exchange/run_control.h"
#include "polar/arithmetic.h"
#include "polar/block_length.h"
#include "polar/reliability.h"

namespace frostline {

struct GenieTrial {
  BlockLength block_length;
  double qber = 0;        // 0 < p < 0.5: the errors of the blocks, and the LLR of exact arithmetic
  Arithmetic arithmetic;  // of the reference decoder
  std::uint64_t blocks = 0;  // 1 to 2^32 - 1
  std::uint64_t seed = 0;    // block b takes its errors from stream b
};

struct GenieCounts {
  std::uint64_t blocks = 0;
  std::vector<std::uint32_t> wrong;  // N entries: blocks in which index i was decided wrongly
};

// Runs the trial, blocks in parallel (oneTBB); the counts do not depend on the number of threads.
// Takes O(N) memory a thread. Throws InputError on a value out of range and Interrupted when the
// control says so.
GenieCounts run_genie_trial(const GenieTrial& trial, const RunControl& control = {});

// The error probability of index i from k wrong decisions in B blocks, kind estimate:
//   (k + h) / (B + 1),  h = B q / (1 + 2 B q),
// q the error probability that the prior gives it. Where the prior expects wrong decisions, h is
// the half count of Jeffreys' rule (H. Jeffreys, Proc. R. Soc. A 186, 1946); where it expects none,
// h is the prior's own expected count, for half a count at each of thousands of reliable indices
// would be nothing but a wrong sum. h is below 1/2, so the order is that of the counts, and the
// prior settles the order among equal ones, above all among those never seen wrong. Choosing the
// best of many estimates makes their sum too small, counting the rare ones twice too large: it is
// no bound.
// REQUIRES: counts.blocks > 0, a prior of N entries that are probabilities, no mere order
// (std::invalid_argument otherwise).
Reliability genie_reliability(const GenieCounts& counts, const Reliability& prior);

}  // namespace frostline
