// Monte Carlo of a design: random error patterns through the decoder, failures counted.
//
// Works in the error domain: the pattern is drawn, its public values are the difference that the
// decoder gets, and a block fails when the decoder finds another pattern. No key is involved.
// Batches are numbered, each draws from streams of its own, and they are counted in order, so that
// a trial can be spread over threads, be cut into shards, or stop and go on, and counts the same.
#pragma once

#include <cstdint>
#include <functional>
#include <optional>

#include "decode/batch_decoder.h"
#include "decode/exchange/cut.h"
#include "decode/exchange/run_control.h"
#include "decode/trial/channel.h"
#include "decode/trial/interval.h"
#include "polar/code.h"

namespace frostline {

// The index-th of `count` disjoint parts, index from 1: the batches index - 1, index - 1 + count,
// ...
struct Shard {
  std::uint64_t index = 1;
  std::uint64_t count = 1;
};

// What was counted; the counts of shards simply add up.
struct TrialCounts {
  std::uint64_t batches = 0;
  std::uint64_t blocks = 0;
  std::uint64_t failures = 0;    // another pattern was found than the right one
  std::uint64_t undetected = 0;  // of them: check bits agree all the same
  std::uint64_t errors = 0;      // ones in all patterns
  bool over = false;             // all blocks done, or the last failure seen
  bool stopped_at_failure = false;
};

struct TrialOptions {
  std::uint64_t blocks = 1000000;         // at most so many, of all shards together
  std::optional<std::uint64_t> failures;  // stop at so many
  std::uint64_t seed = 1;
  std::optional<double> seconds = {};  // stop after so long, at the end of a batch
  std::optional<unsigned> lanes = {};  // B, default_lanes(N) where not given
  Shard shard = {};
  TrialCounts resume = {};  // what an earlier run of the same trial has counted
  // Sees the counts after each batch, in order, one call at a time.
  std::function<void(const TrialCounts&)> observe = {};
};

struct TrialSummary : TrialCounts {
  bool interrupted = false;
  bool out_of_time = false;
  RateInterval fer_interval{};  // 95 %; 0 to 1 where no block was counted
  unsigned lanes = 0;
  // Of this run, without what it resumed. The decoder alone, over all batches: key bits a second of
  // one core, and time from difference to error pattern, which is that of a batch of `lanes`
  // blocks.
  double throughput_mbit_s = 0;
  double latency_median_us = 0;
  double latency_p99_us = 0;
  // Key bits a second of the whole run, all threads, drawing and counting included.
  double total_throughput_mbit_s = 0;

  double fer() const {
    return blocks == 0 ? 0 : static_cast<double>(failures) / static_cast<double>(blocks);
  }
};

// The largest number of blocks of a trial.
constexpr std::uint64_t kMostTrialBlocks = 1000000000000;

// How a trial of at most options.blocks blocks is cut into batches: as the exchange would cut the
// sifted string. No more lanes than blocks, so that a short trial of long blocks is not made
// longer. Throws InputError on options out of range, and when the channel cannot serve one block.
Cut trial_cut(BlockLength block_length, const Channel& channel, const TrialOptions& options);

// The same seed gives the same counts whatever the number of threads, unless it ends by the clock.
// When control asks to stop, what was counted so far is returned and marked. Throws InputError on
// options out of range.
TrialSummary run_trial(const Code& code, const BatchDecoder& decoder, const Channel& channel,
                       const TrialOptions& options, const RunControl& control = {});
// On a BSC of error rate p, 0 <= p <= 0.5 (InputError otherwise).
TrialSummary run_trial(const Code& code, const BatchDecoder& decoder, double p,
                       const TrialOptions& options, const RunControl& control = {});

// The 95 % interval of the FER that the counts tell: by the inverse-sampling form where they end at
// a failure. 0 to 1 without blocks.
RateInterval fer_interval(const TrialCounts& counts);

// What the rate of undetected errors is below with 95 % confidence (one-sided, C. J. Clopper,
// E. S. Pearson, 1934; with none seen 1 - 0.05^(1/blocks)). 1 without blocks.
double undetected_upper_bound(const TrialCounts& counts);

// Time of the decoder for one block that is alone in its batch.
struct SingleBlockLatency {
  std::uint64_t blocks;
  double median_us;
  double p99_us;
};
// Over at most `blocks` blocks, and no new one after `seconds`. REQUIRES: blocks > 0.
SingleBlockLatency single_block_latency(const Code& code, const BatchDecoder& decoder,
                                        const Channel& channel, std::uint64_t seed,
                                        std::uint64_t blocks, double seconds);

}  // namespace frostline
