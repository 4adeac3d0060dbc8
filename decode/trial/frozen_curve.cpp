#include "decode/trial/frozen_curve.h"

#include <tbb/parallel_for.h>

#include <algorithm>
#include <mutex>
#include <stdexcept>

#include "decode/reference/successive_cancellation.h"
#include "polar/lanes.h"

namespace frostline {
namespace {

// Place of each index in the order.
std::vector<std::uint32_t> places(const std::vector<std::uint32_t>& order) {
  std::vector<std::uint32_t> place(order.size(), static_cast<std::uint32_t>(order.size()));
  for (std::size_t k = 0; k < order.size(); ++k) {
    if (order[k] >= order.size() || place[order[k]] != order.size()) {
      throw std::invalid_argument("run_frozen_curve: the order is no permutation");
    }
    place[order[k]] = static_cast<std::uint32_t>(k);
  }
  return place;
}

// The smallest frozen count that leaves none of the wrong decisions open.
std::size_t needed(const BitString& wrong, const std::vector<std::uint32_t>& place) {
  std::size_t count = 0;
  const Span<const std::uint64_t> words = wrong.words();
  for (std::size_t w = 0; w < words.size(); ++w) {
    for (std::uint64_t rest = words[w]; rest != 0; rest &= rest - 1) {
      const std::size_t i = 64 * w + static_cast<std::size_t>(__builtin_ctzll(rest));
      count = std::max<std::size_t>(count, place[i] + std::size_t{1});
    }
  }
  return count;
}

struct BatchNeeds {
  std::vector<std::size_t> needed;  // of each block
  std::uint64_t errors = 0;
};

}  // namespace

FrozenCurve run_frozen_curve(const std::vector<std::uint32_t>& order, const Arithmetic& arithmetic,
                             double qber, const Channel& channel, const TrialOptions& options,
                             const RunControl& control) {
  if (options.failures || options.seconds || options.shard.count != 1) {
    throw std::invalid_argument("run_frozen_curve: runs a fixed number of blocks, all of them");
  }
  const BlockLength block_length(order.size());
  const std::vector<std::uint32_t> place = places(order);
  const Cut cut = trial_cut(block_length, channel, options);
  const auto needs_of = [&](const Batch& batch) {
    BatchNeeds needs;
    const Stretch stretch{block_length, batch.first_block, batch.lanes};
    KeyWords rows(words_for(stretch.bits()));
    channel.draw(options.seed, stretch, rows);
    KeyWords blocks(rows.size());
    lanes_to_blocks(rows, block_length, batch.lanes, blocks);
    for (unsigned lane = 0; lane < batch.lanes; ++lane) {
      if (batch.first_block + lane >= options.blocks) break;
      BitString errors(block_length.bits());
      copy_bits(blocks, block_length.bits() * lane, errors.words(), 0, block_length.bits());
      needs.errors += count_ones(errors.words());
      needs.needed.push_back(needed(wrong_decisions_with_genie(errors, arithmetic, qber), place));
    }
    return needs;
  };
  FrozenCurve curve;
  std::vector<std::uint64_t> blocks_needing(order.size() + 1, 0);
  std::mutex mutex;
  // A context of its own: a cancelled run around this one must not leave blocks out of the count.
  tbb::task_group_context context(tbb::task_group_context::isolated);
  tbb::parallel_for(
      std::uint64_t{0}, cut.batch_count(),
      [&](std::uint64_t k) {
        if (control.stopped()) return;
        const BatchNeeds needs = needs_of(cut.batch(k));
        const std::lock_guard<std::mutex> lock(mutex);
        curve.blocks += needs.needed.size();
        curve.errors += needs.errors;
        for (const std::size_t count : needs.needed) ++blocks_needing[count];
        if (control.progress) {
          control.progress(curve.blocks, std::min(options.blocks, cut.block_count()));
        }
      },
      context);
  curve.interrupted = control.stopped();
  curve.failures.assign(order.size() + 1, 0);
  for (std::size_t m = order.size(); m-- > 0;) {
    curve.failures[m] = curve.failures[m + 1] + blocks_needing[m + 1];
  }
  return curve;
}

std::vector<double> mean_revealed_bits(const FrozenCurve& curve, std::size_t step) {
  if (step == 0 || curve.blocks == 0 || curve.failures.empty()) {
    throw std::invalid_argument("mean_revealed_bits: no step, or an empty curve");
  }
  const std::size_t length = curve.failures.size() - 1;
  std::vector<double> revealed(length + 1, 0);
  // Every block that fails at M pays one step, and goes on from M + step.
  for (std::size_t m = length; m-- > 0;) {
    const std::size_t next = std::min(length, m + step);
    revealed[m] = static_cast<double>(curve.failures[m]) / static_cast<double>(curve.blocks) *
                      static_cast<double>(next - m) +
                  revealed[next];
  }
  return revealed;
}

}  // namespace frostline
