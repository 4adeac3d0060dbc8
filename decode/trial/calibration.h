// The smallest frozen count whose FER meets a target, found by trials instead of a bound: for any
// decoder, lists too, whose FER no formula tells.
//
// A candidate passes when a trial shows its FER to be at most the target: its upper confidence
// bound (Clopper-Pearson) is. All candidates see the same error patterns (common random numbers),
// so that passing hardly depends on luck from one to the next, and bisection works; with successive
// cancellation and nested frozen sets it is exactly monotone. As the choice has seen those
// patterns, it is confirmed on fresh ones, four times as many; where it fails there it grows a
// little and is tried again on yet other patterns, with half of what was left of the error
// probability of 5 % each time (union bound), so that the confidence of 95 % holds for the whole
// procedure.
#pragma once

#include <cstdint>
#include <functional>
#include <memory>
#include <string_view>

#include "decode/trial/trial.h"

namespace frostline {

// How many failures a trial of bisection would see at the target: 25, 100, 400.
enum class Effort { quick, normal, thorough };
// Throws InputError on another word.
Effort parse_effort(std::string_view word);

struct Candidate {
  Code code;
  std::unique_ptr<BatchDecoder> decoder;
};

struct CalibrationTask {
  std::function<Candidate(std::size_t frozen_count)> candidate;  // frozen_count 0..N
  std::size_t block_length = 0;                                  // N
  std::size_t guess = 0;                                         // where to start, 0..N
  double target_fer = 0.1;                                       // above 0 and below 1
  Effort effort = Effort::normal;
  std::uint64_t seed = 1;
};

struct Calibration {
  std::size_t frozen_count = 0;
  TrialCounts confirmed;             // the trial on fresh patterns that it passed
  RateInterval fer_interval{};       // 95 %, of that trial
  std::uint64_t confirmed_seed = 0;  // run_trial with it gives the same counts
  unsigned trials = 0;               // spent in all, with
  std::uint64_t blocks = 0;          // so many blocks
};

// Largest number of failures in a fixed number of blocks that shows, with the given one-sided
// confidence, a FER of at most target; none where even no failure does not.
std::optional<std::uint64_t> allowed_failures(std::uint64_t blocks, double target,
                                              double confidence);

// Progress is told in trials; their number is not known before. Throws InputError when the target
// is out of range or needs more than kMostTrialBlocks blocks, and Interrupted.
Calibration calibrate(const CalibrationTask& task, const Channel& channel,
                      const RunControl& control = {});

}  // namespace frostline
