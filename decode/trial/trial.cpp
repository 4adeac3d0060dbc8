#include "decode/trial/trial.h"

#include <tbb/global_control.h>
#include <tbb/parallel_pipeline.h>

#include <algorithm>
#include <atomic>
#include <chrono>
#include <memory>
#include <vector>

#include "decode/exchange/cut.h"
#include "decode/exchange/lane_checks.h"
#include "polar/check_bits.h"
#include "polar/error.h"
#include "polar/lanes.h"
#include "polar/random.h"
#include "polar/syndrome.h"

namespace frostline {
namespace {

using Clock = std::chrono::steady_clock;

// Outcome of the blocks of one batch, in the order of its lanes.
struct BatchOutcome {
  std::uint64_t first_block = 0;
  std::vector<bool> failed;
  std::vector<bool> undetected;
  std::vector<std::uint32_t> errors;
  double seconds = 0;
};

class BatchTrial {
 public:
  BatchTrial(const Code& code, const BatchDecoder& decoder, double p, std::uint64_t seed,
             unsigned lanes)
      : code_(code),
        decoder_(decoder),
        former_(code.frozen, code.precoding),
        p_(p),
        seed_(seed),
        lanes_(lanes) {}

  BatchOutcome run(std::uint64_t first_block) const {
    const BlockLength block_length = code_.block_length();
    const std::size_t bits = block_length.bits();
    KeyWords errors(words_for(bits * lanes_));
    RandomStream(seed_, "trial errors", first_block).bernoulli(p_, bits * lanes_, errors);
    KeyWords difference = errors;
    former_.to_public_rows(difference, lanes_);
    former_.scatter(former_.gather(difference, lanes_), lanes_, difference);
    KeyWords patterns(errors.size());
    lanes_to_blocks(errors, block_length, lanes_, patterns);
    const BitString checks = lane_checks(patterns, code_, lanes_);
    KeyWords found(errors.size());
    const auto begin = Clock::now();
    decoder_.decode({lanes_, difference, checks.words()}, found);
    BatchOutcome outcome;
    outcome.seconds = std::chrono::duration<double>(Clock::now() - begin).count();
    outcome.first_block = first_block;
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
    lanes_to_blocks(found, block_length, lanes_, residues);
    KeyWords block(words_for(bits));
    for (unsigned lane = 0; lane < lanes_; ++lane) {
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
  double p_;
  std::uint64_t seed_;
  unsigned lanes_;
};

// Adds blocks in order until the trial is over. Returns whether it is.
bool add_outcome(const BatchOutcome& outcome, const TrialOptions& options, TrialSummary& summary) {
  for (std::size_t lane = 0; lane < outcome.failed.size(); ++lane) {
    if (summary.blocks == options.blocks) return true;
    ++summary.blocks;
    summary.errors += outcome.errors[lane];
    summary.undetected += outcome.undetected[lane];
    if (!outcome.failed[lane]) continue;
    ++summary.failures;
    if (options.failures && summary.failures == *options.failures) {
      summary.stopped_at_failure = true;
      return true;
    }
  }
  return summary.blocks == options.blocks;
}

double quantile(std::vector<double>& values, double share) {
  const auto index = static_cast<std::size_t>(share * static_cast<double>(values.size() - 1));
  std::nth_element(values.begin(), values.begin() + static_cast<std::ptrdiff_t>(index),
                   values.end());
  return values[index];
}

void add_times(std::vector<double>& seconds, std::size_t bits, TrialSummary& summary) {
  if (seconds.empty()) return;
  double total = 0;
  for (const double each : seconds) total += each;
  summary.throughput_mbit_s =
      static_cast<double>(bits) * static_cast<double>(seconds.size()) / total / 1e6;
  summary.latency_median_us = 1e6 * quantile(seconds, 0.5);
  summary.latency_p99_us = 1e6 * quantile(seconds, 0.99);
}

}  // namespace

TrialSummary run_trial(const Code& code, const BatchDecoder& decoder, double p,
                       const TrialOptions& options, const RunControl& control) {
  if (!(p >= 0 && p <= 0.5)) throw InputError("error rate outside 0 .. 0.5");
  if (options.blocks == 0) throw InputError("a trial of 0 blocks");
  if (options.failures && *options.failures == 0) throw InputError("a trial up to 0 failures");
  TrialSummary summary;
  // No more lanes than blocks: a short trial of long blocks is not made longer.
  summary.lanes = default_lanes(code.block_length());
  while (summary.lanes > 1 && summary.lanes > options.blocks) summary.lanes /= 2;
  const BatchTrial trial(code, decoder, p, options.seed, summary.lanes);
  using Token = std::shared_ptr<BatchOutcome>;
  std::uint64_t next = 0;
  std::atomic<bool> over{false};
  std::vector<double> seconds;
  const std::size_t threads =
      tbb::global_control::active_value(tbb::global_control::max_allowed_parallelism);
  tbb::parallel_pipeline(
      2 * threads, tbb::make_filter<void, std::uint64_t>(tbb::filter_mode::serial_in_order,
                                                         [&](tbb::flow_control& flow) {
                                                           if (over || next >= options.blocks ||
                                                               control.stopped()) {
                                                             flow.stop();
                                                           }
                                                           const std::uint64_t first = next;
                                                           next += summary.lanes;
                                                           return first;
                                                         }) &
                       tbb::make_filter<std::uint64_t, Token>(
                           tbb::filter_mode::parallel,
                           [&](std::uint64_t first) {
                             return std::make_shared<BatchOutcome>(trial.run(first));
                           }) &
                       tbb::make_filter<Token, void>(
                           tbb::filter_mode::serial_in_order, [&](const Token& outcome) {
                             if (over) return;
                             seconds.push_back(outcome->seconds);
                             if (add_outcome(*outcome, options, summary)) over = true;
                             if (control.progress) control.progress(summary.blocks, options.blocks);
                           }));
  summary.interrupted = !over && control.stopped();
  if (summary.blocks > 0) {
    summary.fer_interval = summary.stopped_at_failure
                               ? stopped_at_failure_interval(summary.failures, summary.blocks)
                               : fixed_blocks_interval(summary.failures, summary.blocks);
  }
  add_times(seconds, code.block_length().bits() * summary.lanes, summary);
  return summary;
}

}  // namespace frostline
