// Monte Carlo of a design: random error patterns through the decoder, failures counted.
//
// Works in the error domain: the pattern is drawn, its public values are the difference that the
// decoder gets, and a block fails when the decoder finds another pattern. No key is involved.
#pragma once

#include <cstdint>
#include <optional>

#include "decode/batch_decoder.h"
#include "decode/exchange/run_control.h"
#include "decode/trial/interval.h"
#include "polar/code.h"

namespace frostline {

struct TrialOptions {
  std::uint64_t blocks = 1000000;         // at most so many
  std::optional<std::uint64_t> failures;  // stop at so many
  std::uint64_t seed = 1;
};

struct TrialSummary {
  std::uint64_t blocks = 0;
  std::uint64_t failures = 0;    // another pattern was found than the right one
  std::uint64_t undetected = 0;  // of them: check bits agree all the same
  bool stopped_at_failure = false;
  bool interrupted = false;
  std::uint64_t errors = 0;     // ones in all patterns
  RateInterval fer_interval{};  // 95 %
  unsigned lanes = 0;
  // Of the decoder alone, over all batches: key bits a second of one core, and time from difference
  // to error pattern, which is that of a batch of `lanes` blocks.
  double throughput_mbit_s = 0;
  double latency_median_us = 0;
  double latency_p99_us = 0;

  double fer() const {
    return blocks == 0 ? 0 : static_cast<double>(failures) / static_cast<double>(blocks);
  }
};

// p: error rate of the BSC, 0 <= p <= 0.5 (InputError otherwise). Blocks are drawn and counted in
// order, one random stream a batch of default_lanes(N) blocks: the same seed gives the same counts
// whatever the number of threads. Throws InputError when blocks or failures is 0. When control asks
// to stop, what was counted so far is returned and marked.
TrialSummary run_trial(const Code& code, const BatchDecoder& decoder, double p,
                       const TrialOptions& options, const RunControl& control = {});

}  // namespace frostline
