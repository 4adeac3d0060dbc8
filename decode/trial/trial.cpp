#include "decode/trial/trial.h"

#include <tbb/global_control.h>
#include <tbb/parallel_pipeline.h>

#include <algorithm>
#include <atomic>
#include <chrono>
#include <memory>
#include <stdexcept>
#include <vector>

#include "decode/exchange/lane_checks.h"
#include "polar/check_bits.h"
#include "polar/error.h"
#include "polar/lanes.h"
#include "polar/syndrome.h"

namespace frostline {
namespace {

using Clock = std::chrono::steady_clock;

double seconds_since(Clock::time_point begin) {
  return std::chrono::duration<double>(Clock::now() - begin).count();
}

// Outcome of the blocks of one batch, in the order of its lanes.
struct BatchOutcome {
  Batch batch{};
  std::vector<bool> failed;
  std::vector<bool> undetected;
  std::vector<std::uint32_t> errors;
  double seconds = 0;
};

class BatchTrial {
 public:
  BatchTrial(const Code& code, const BatchDecoder& decoder, const Channel& channel,
             std::uint64_t seed)
      : code_(code),
        decoder_(decoder),
        former_(code.frozen, code.precoding),
        channel_(channel),
        seed_(seed) {}

  BatchOutcome run(const Batch& batch) const {
    const BlockLength block_length = code_.block_length();
    const unsigned lanes = batch.lanes;
    KeyWords errors(words_for(block_length.bits() * lanes));
    channel_.draw(seed_, {block_length, batch.first_block, lanes}, errors);
    KeyWords difference = errors;
    former_.to_public_rows(difference, lanes);
    former_.scatter(former_.gather(difference, lanes), lanes, difference);
    KeyWords patterns(errors.size());
    lanes_to_blocks(errors, block_length, lanes, patterns);
    const BitString checks = lane_checks(patterns, code_, lanes);
    KeyWords found(errors.size());
    BatchOutcome outcome;
    outcome.batch = batch;
    const auto begin = Clock::now();
    decoder_.decode({lanes, difference, checks.words()}, found);
    outcome.seconds = seconds_since(begin);
    count(errors, patterns, found, outcome);
    return outcome;
  }

 private:
  void count(const KeyWords& errors, const KeyWords& patterns, KeyWords& found,
             BatchOutcome& outcome) const {
    const BlockLength block_length = code_.block_length();
    const std::size_t bits = block_length.bits();
    for (std::size_t i = 0; i < found.size(); ++i) found[i] ^= errors[i];
    KeyWords residues(found.size());
    lanes_to_blocks(found, block_length, outcome.batch.lanes, residues);
    KeyWords block(words_for(bits));
    for (unsigned lane = 0; lane < outcome.batch.lanes; ++lane) {
      copy_bits(patterns, bits * lane, block, 0, bits);
      outcome.errors.push_back(static_cast<std::uint32_t>(count_ones(block)));
      copy_bits(residues, bits * lane, block, 0, bits);
      const bool failed = count_ones(block) != 0;
      outcome.failed.push_back(failed);
      // The check is linear: it agrees when that of the residue is zero.
      outcome.undetected.push_back(failed && check_bits(block, 0, bits, code_.check_bits) == 0);
    }
  }

  const Code& code_;
  const BatchDecoder& decoder_;
  SyndromeFormer former_;
  const Channel& channel_;
  std::uint64_t seed_;
};

// Adds the blocks of a batch in order, up to the one at which the trial ends.
void add_outcome(const BatchOutcome& outcome, const TrialOptions& options, TrialCounts& counts) {
  ++counts.batches;
  for (unsigned lane = 0; lane < outcome.batch.lanes; ++lane) {
    if (outcome.batch.first_block + lane >= options.blocks) return;
    ++counts.blocks;
    counts.errors += outcome.errors[lane];
    counts.undetected += outcome.undetected[lane];
    if (!outcome.failed[lane]) continue;
    ++counts.failures;
    if (options.failures && counts.failures == *options.failures) {
      counts.stopped_at_failure = true;
      counts.over = true;
      return;
    }
  }
}

// Batches of the shard: those of all with a number of index - 1 modulo count.
std::uint64_t shard_batches(const Cut& cut, const Shard& shard) {
  const std::uint64_t all = cut.batch_count();
  return all < shard.index ? 0 : (all - shard.index) / shard.count + 1;
}

// How many blocks the trial will take, as far as one can tell by now.
std::uint64_t expected_blocks(const TrialCounts& counts, const TrialOptions& options,
                              double elapsed) {
  const auto done = static_cast<double>(counts.blocks);
  double total = static_cast<double>(options.blocks) / static_cast<double>(options.shard.count);
  if (options.failures && counts.failures > 0) {
    total = std::min(total, done * static_cast<double>(*options.failures) /
                                static_cast<double>(counts.failures));
  }
  if (options.seconds && elapsed > 0) total = std::min(total, done * *options.seconds / elapsed);
  return std::max(counts.blocks, static_cast<std::uint64_t>(total));
}

double quantile(std::vector<double>& values, double share) {
  const auto index = static_cast<std::size_t>(share * static_cast<double>(values.size() - 1));
  std::nth_element(values.begin(), values.begin() + static_cast<std::ptrdiff_t>(index),
                   values.end());
  return values[index];
}

void add_times(std::vector<double>& seconds, std::uint64_t bits, TrialSummary& summary) {
  if (seconds.empty()) return;
  double total = 0;
  for (const double each : seconds) total += each;
  summary.throughput_mbit_s = static_cast<double>(bits) / total / 1e6;
  summary.latency_median_us = 1e6 * quantile(seconds, 0.5);
  summary.latency_p99_us = 1e6 * quantile(seconds, 0.99);
}

void require_options(const TrialOptions& options) {
  if (options.blocks == 0) throw InputError("a trial of 0 blocks");
  if (options.blocks > kMostTrialBlocks) {
    throw InputError("a trial of " + std::to_string(options.blocks) + " blocks; the most is " +
                     std::to_string(kMostTrialBlocks));
  }
  if (options.failures && *options.failures == 0) throw InputError("a trial up to 0 failures");
  if (options.seconds && !(*options.seconds > 0)) {
    throw InputError("a trial of no more than 0 seconds");
  }
  if (options.shard.index < 1 || options.shard.index > options.shard.count) {
    throw InputError("shard " + std::to_string(options.shard.index) + " of " +
                     std::to_string(options.shard.count) + " is none");
  }
  if (options.shard.count > 1 && options.failures) {
    throw InputError("a shard cannot stop at a number of failures: it does not see the others'");
  }
}

// The run itself: batches drawn and decoded in parallel, counted in order.
class TrialRun {
 public:
  TrialRun(const Cut& cut, const BatchTrial& trial, const TrialOptions& options,
           const RunControl& control)
      : cut_(cut),
        trial_(trial),
        options_(options),
        control_(control),
        batches_(shard_batches(cut, options.shard)),
        next_(options.resume.batches) {
    if (next_ > batches_) throw std::invalid_argument("run_trial: resumed beyond its end");
    static_cast<TrialCounts&>(summary_) = options.resume;
    summary_.lanes = cut.lanes();
    summary_.over = summary_.over || next_ == batches_;
  }

  TrialSummary run() {
    if (!summary_.over) run_pipeline();
    summary_.interrupted = !summary_.over && control_.stopped();
    summary_.out_of_time = !summary_.over && !summary_.interrupted;
    summary_.fer_interval = fer_interval(summary_);
    add_times(seconds_, decoded_bits_, summary_);
    const double elapsed = seconds_since(begin_);
    if (elapsed > 0) {
      summary_.total_throughput_mbit_s = static_cast<double>(decoded_bits_) / elapsed / 1e6;
    }
    return summary_;
  }

 private:
  using Token = std::shared_ptr<BatchOutcome>;

  void run_pipeline() {
    const std::size_t threads =
        tbb::global_control::active_value(tbb::global_control::max_allowed_parallelism);
    tbb::parallel_pipeline(
        2 * threads,
        tbb::make_filter<void, std::uint64_t>(tbb::filter_mode::serial_in_order,
                                              [this](tbb::flow_control& flow) {
                                                if (ended()) flow.stop();
                                                return next_++;
                                              }) &
            tbb::make_filter<std::uint64_t, Token>(
                tbb::filter_mode::parallel,
                [this](std::uint64_t k) {
                  const std::uint64_t number = k * options_.shard.count + options_.shard.index - 1;
                  return std::make_shared<BatchOutcome>(trial_.run(cut_.batch(number)));
                }) &
            tbb::make_filter<Token, void>(tbb::filter_mode::serial_in_order,
                                          [this](const Token& outcome) { count(*outcome); }));
  }

  bool ended() const {
    if (over_ || next_ >= batches_ || control_.stopped()) return true;
    return options_.seconds && next_ > options_.resume.batches &&
           seconds_since(begin_) >= *options_.seconds;
  }

  void count(const BatchOutcome& outcome) {
    if (over_) return;
    seconds_.push_back(outcome.seconds);
    decoded_bits_ += cut_.block_length().bits() * outcome.batch.lanes;
    add_outcome(outcome, options_, summary_);
    if (summary_.batches == batches_) summary_.over = true;
    over_ = summary_.over;
    if (options_.observe) options_.observe(summary_);
    if (control_.progress) {
      control_.progress(summary_.blocks,
                        expected_blocks(summary_, options_, seconds_since(begin_)));
    }
  }

  const Cut& cut_;
  const BatchTrial& trial_;
  const TrialOptions& options_;
  const RunControl& control_;
  std::uint64_t batches_;
  std::uint64_t next_;  // batch of the shard that is drawn next
  std::atomic<bool> over_{false};
  std::vector<double> seconds_;
  std::uint64_t decoded_bits_ = 0;
  TrialSummary summary_;
  Clock::time_point begin_ = Clock::now();
};

}  // namespace

Cut trial_cut(BlockLength block_length, const Channel& channel, const TrialOptions& options) {
  require_options(options);
  const std::uint64_t available = channel.available_bits() / block_length.bits();
  if (available == 0) {
    throw InputError(channel.name() + ": " + std::to_string(channel.available_bits()) +
                     " bits do not fill a block of " + std::to_string(block_length.bits()));
  }
  const std::uint64_t blocks = std::min(options.blocks, available);
  unsigned lanes = options.lanes.value_or(default_lanes(block_length));
  require_lanes(lanes);
  while (lanes > 1 && lanes > blocks) lanes /= 2;
  const std::uint64_t whole_batches = (blocks + lanes - 1) / lanes * lanes;
  return {block_length, std::min(whole_batches, available) * block_length.bits(), lanes};
}

TrialSummary run_trial(const Code& code, const BatchDecoder& decoder, const Channel& channel,
                       const TrialOptions& options, const RunControl& control) {
  const Cut cut = trial_cut(code.block_length(), channel, options);
  const BatchTrial trial(code, decoder, channel, options.seed);
  return TrialRun(cut, trial, options, control).run();
}

TrialSummary run_trial(const Code& code, const BatchDecoder& decoder, double p,
                       const TrialOptions& options, const RunControl& control) {
  return run_trial(code, decoder, SymmetricChannel(p), options, control);
}

RateInterval fer_interval(const TrialCounts& counts) {
  if (counts.blocks == 0) return {0, 1};
  return counts.stopped_at_failure ? stopped_at_failure_interval(counts.failures, counts.blocks)
                                   : fixed_blocks_interval(counts.failures, counts.blocks);
}

double undetected_upper_bound(const TrialCounts& counts) {
  if (counts.blocks == 0) return 1;
  // The upper end of a two-sided interval of 90 % is the one-sided bound of 95 %.
  return fixed_blocks_interval(counts.undetected, counts.blocks, 0.9).high;
}

SingleBlockLatency single_block_latency(const Code& code, const BatchDecoder& decoder,
                                        const Channel& channel, std::uint64_t seed,
                                        std::uint64_t blocks, double seconds) {
  const BatchTrial trial(code, decoder, channel, seed);
  const std::uint64_t available = channel.available_bits() / code.block_length().bits();
  const auto begin = Clock::now();
  std::vector<double> times;
  for (std::uint64_t block = 0; block < std::min(blocks, available); ++block) {
    if (!times.empty() && seconds_since(begin) >= seconds) break;
    times.push_back(trial.run({block * code.block_length().bits(), block, 1}).seconds);
  }
  if (times.empty()) throw std::invalid_argument("single_block_latency: no block");
  return {times.size(), 1e6 * quantile(times, 0.5), 1e6 * quantile(times, 0.99)};
}

}  // namespace frostline
