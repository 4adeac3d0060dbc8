#include "decode/trial/genie.h"

#include <tbb/blocked_range.h>
#include <tbb/enumerable_thread_specific.h>
#include <tbb/parallel_for.h>

#include <cmath>
#include <limits>
#include <mutex>
#include <stdexcept>
#include <string>

#include "decode/reference/successive_cancellation.h"
#include "polar/error.h"
#include "polar/limits.h"
#include "polar/random.h"

namespace frostline {
namespace {

using Counts = std::vector<std::uint32_t>;

void add_ones(const BitString& bits, Counts& counts) {
  const Span<const std::uint64_t> words = bits.words();
  for (std::size_t w = 0; w < words.size(); ++w) {
    for (std::uint64_t rest = words[w]; rest != 0; rest &= rest - 1) {
      ++counts[64 * w + static_cast<std::size_t>(__builtin_ctzll(rest))];
    }
  }
}

BitString error_pattern(const GenieTrial& trial, std::uint64_t block) {
  BitString errors(trial.block_length.bits());
  RandomStream random(trial.seed, "genie trial", block);
  random.bernoulli(trial.qber, errors.size(), errors.words());
  return errors;
}

}  // namespace

GenieCounts run_genie_trial(const GenieTrial& trial, const RunControl& control) {
  require_error_rate(trial.qber, "QBER");
  if (trial.blocks < 1 || trial.blocks > std::numeric_limits<std::uint32_t>::max()) {
    throw InputError("a genie trial of " + std::to_string(trial.blocks) +
                     " blocks; it takes 1 to 4294967295");
  }
  const std::size_t length = trial.block_length.bits();
  tbb::enumerable_thread_specific<Counts> counts([length] { return Counts(length, 0); });
  std::mutex mutex;
  std::uint64_t done = 0;
  // A context of its own: a cancelled run around this one must not leave blocks out of the count.
  tbb::task_group_context context(tbb::task_group_context::isolated);
  tbb::parallel_for(
      std::uint64_t{0}, trial.blocks,
      [&](std::uint64_t block) {
        if (control.stopped()) return;
        add_ones(
            wrong_decisions_with_genie(error_pattern(trial, block), trial.arithmetic, trial.qber),
            counts.local());
        if (!control.progress) return;
        const std::lock_guard<std::mutex> lock(mutex);
        control.progress(++done, trial.blocks);
      },
      context);
  if (control.stopped()) throw Interrupted();
  GenieCounts total{trial.blocks, Counts(length, 0)};
  for (const Counts& part : counts) {
    for (std::size_t i = 0; i < length; ++i) total.wrong[i] += part[i];
  }
  return total;
}

Reliability genie_reliability(const GenieCounts& counts, const Reliability& prior) {
  if (counts.blocks == 0) throw std::invalid_argument("genie_reliability: no blocks");
  if (prior.kind == ReliabilityKind::order_only ||
      prior.log_error_probability.size() != counts.wrong.size()) {
    throw std::invalid_argument("genie_reliability: the prior does not fit");
  }
  const auto blocks = static_cast<double>(counts.blocks);
  Reliability reliability;
  reliability.kind = ReliabilityKind::estimate;
  reliability.log_error_probability.reserve(counts.wrong.size());
  for (std::size_t i = 0; i < counts.wrong.size(); ++i) {
    const double log_expected = std::log(blocks) + prior.log_error_probability[i];
    // h in the logarithm, where a prior below the smallest double keeps its place in the order.
    const double log_h = log_expected - std::log1p(2 * std::exp(log_expected));
    const double log_count = counts.wrong[i] == 0
                                 ? log_h
                                 : std::log(static_cast<double>(counts.wrong[i]) + std::exp(log_h));
    reliability.log_error_probability.push_back(log_count - std::log1p(blocks));
  }
  return reliability;
}

}  // namespace frostline
