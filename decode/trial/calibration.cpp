#include "decode/trial/calibration.h"

#include <algorithm>
#include <cmath>
#include <stdexcept>
#include <string>

#include "polar/error.h"
#include "polar/limits.h"
#include "polar/random.h"

namespace frostline {
namespace {

constexpr double kErrorProbability = 0.05;
// Blocks of the confirmation for one of bisection.
constexpr std::uint64_t kConfirmFactor = 4;

double failures_at_target(Effort effort) {
  switch (effort) {
    case Effort::quick:
      return 25;
    case Effort::normal:
      return 100;
    case Effort::thorough:
      return 400;
  }
  throw std::invalid_argument("unknown effort");
}

class Calibrator {
 public:
  Calibrator(const CalibrationTask& task, const Channel& channel, const RunControl& control)
      : task_(task), channel_(channel), control_(control) {
    require_probability(task.target_fer, "FER");
    const double blocks = std::ceil(failures_at_target(task.effort) / task.target_fer);
    if (!(blocks * kConfirmFactor <= static_cast<double>(kMostTrialBlocks))) {
      throw InputError("a FER that low cannot be shown by a trial of at most " +
                       std::to_string(kMostTrialBlocks) + " blocks");
    }
    blocks_ = static_cast<std::uint64_t>(blocks);
  }

  Calibration run() {
    std::size_t frozen = bisect();
    std::size_t growth = std::max<std::size_t>(1, task_.block_length / 2048);
    double left = kErrorProbability;
    for (std::uint64_t attempt = 1;; ++attempt) {
      left /= 2;
      // Below 2^52, so that any reader of the design file gets it whole.
      const std::uint64_t seed = RandomStream(task_.seed, "calibration", attempt).next() >> 12;
      if (passes(frozen, kConfirmFactor * blocks_, 1 - left, seed)) {
        result_.frozen_count = frozen;
        result_.confirmed_seed = seed;
        result_.fer_interval = fer_interval(result_.confirmed);
        return result_;
      }
      frozen = std::min(task_.block_length, frozen + growth);
      growth *= 2;
    }
  }

 private:
  // Whether a trial shows the target. It ends at the failure that is one too many.
  bool passes(std::size_t frozen, std::uint64_t blocks, double confidence, std::uint64_t seed) {
    const auto allowed = allowed_failures(blocks, task_.target_fer, confidence);
    if (!allowed) {
      throw InputError("the FER asked for cannot be shown with " + std::to_string(blocks) +
                       " blocks: take a greater effort");
    }
    const Candidate candidate = task_.candidate(frozen);
    TrialOptions options;
    options.blocks = blocks;
    options.failures = *allowed + 1;
    options.seed = seed;
    RunControl inner;
    inner.stop = control_.stop;
    const TrialSummary summary =
        run_trial(candidate.code, *candidate.decoder, channel_, options, inner);
    if (summary.interrupted) throw Interrupted();
    if (summary.blocks < blocks && !summary.stopped_at_failure) {
      throw InputError("the channel holds " + std::to_string(summary.blocks) +
                       " blocks; this calibration takes " + std::to_string(blocks));
    }
    ++result_.trials;
    result_.blocks += summary.blocks;
    result_.confirmed = summary;
    if (control_.progress) control_.progress(result_.trials, result_.trials + 1);
    return summary.failures <= *allowed;
  }
  bool passes(std::size_t frozen) {
    return passes(frozen, blocks_, 1 - kErrorProbability, task_.seed);
  }

  // Smallest frozen count that passes on the common patterns. With all frozen nothing can fail.
  std::size_t bisect() {
    const std::size_t length = task_.block_length;
    std::size_t step = std::max<std::size_t>(1, length / 256);
    std::size_t pass = std::min(task_.guess, length);
    std::optional<std::size_t> fail;  // none: below 0
    if (passes(pass)) {
      while (pass > 0 && !fail) {
        const std::size_t lower = pass - std::min(pass, step);
        step *= 2;
        if (passes(lower)) {
          pass = lower;
        } else {
          fail = lower;
        }
      }
    } else {
      do {
        fail = pass;
        pass = std::min(length, pass + step);
        step *= 2;
      } while (!passes(pass));
    }
    while (fail && pass - *fail > 1) {
      const std::size_t middle = *fail + (pass - *fail) / 2;
      (passes(middle) ? pass : *fail) = middle;
    }
    return pass;
  }

  const CalibrationTask& task_;
  const Channel& channel_;
  const RunControl& control_;
  std::uint64_t blocks_ = 0;
  Calibration result_;
};

}  // namespace

Effort parse_effort(std::string_view word) {
  if (word == "quick") return Effort::quick;
  if (word == "normal") return Effort::normal;
  if (word == "thorough") return Effort::thorough;
  throw InputError("effort '" + std::string(word) + "' is not quick, normal or thorough");
}

std::optional<std::uint64_t> allowed_failures(std::uint64_t blocks, double target,
                                              double confidence) {
  const auto shows = [&](std::uint64_t failures) {
    return fixed_blocks_interval(failures, blocks, 2 * confidence - 1).high <= target;
  };
  if (!shows(0)) return std::nullopt;
  std::uint64_t low = 0;  // shows
  std::uint64_t high = blocks;
  while (high - low > 1) {
    const std::uint64_t middle = low + (high - low) / 2;
    (shows(middle) ? low : high) = middle;
  }
  return low;
}

Calibration calibrate(const CalibrationTask& task, const Channel& channel,
                      const RunControl& control) {
  return Calibrator(task, channel, control).run();
}

}  // namespace frostline
