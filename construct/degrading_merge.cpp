#include "construct/degrading_merge.h"

#include <tbb/parallel_invoke.h>

#include <algorithm>
#include <cmath>
#include <string>

#include "construct/log_bhattacharyya.h"
#include "construct/symmetric_channel.h"
#include "polar/error.h"
#include "polar/limits.h"
#include "polar/span.h"

namespace frostline {
namespace {

constexpr double kLog2 = 0.69314718055994530942;
// A channel that fails less often, or that is this useless together with all that can be made of
// it, is closed: its leaves are bounded through Z alone, in the log domain, where nothing
// underflows. All leaves closed as almost perfect add less than 2^24 sqrt(4e-60) to any union.
constexpr double kAlmostPerfect = 1e-60;
constexpr double kUseless = 1e-14;
// Subtrees of fewer leaves are not worth a task.
constexpr std::size_t kSmallestTask = 512;

enum class Side { degrade, upgrade };

using Reduce = void (*)(SymmetricChannel&, std::size_t);

// Bounds through Z (Arikan 2009): on the degraded side Z(W-) <= 2Z - Z^2 and P <= Z / 2. On the
// upgraded side Z(W-)^2 >= 1 - (1 - Z^2)^2, so that Z^2 follows the same recursion, and
// P >= (1 - sqrt(1 - Z^2)) / 2.
void close(LogBhattacharyya value, Side side, Span<double> log_p) {
  if (log_p.size() == 1) {
    log_p[0] = value.log_z - kLog2;
    if (side == Side::upgrade) log_p[0] -= std::log1p(std::exp(value.log_complement / 2));
    return;
  }
  const std::size_t half = log_p.size() / 2;
  close(minus_on_bec(value), side, log_p.subspan(0, half));
  close(plus(value), side, log_p.subspan(half, half));
}

LogBhattacharyya start_of_closing(double z, double complement, Side side) {
  const double log_z = complement < 0.5 ? std::log1p(-complement) : std::log(z);
  if (side == Side::degrade) return {log_z, std::log(complement)};
  return {2 * log_z, std::log(complement) + std::log1p(z)};
}

class Merger {
 public:
  Merger(Side side, Reduce reduce, std::size_t letters)
      : side_(side), reduce_(reduce), letters_(letters) {}

  // The leaves below a channel.
  void leaves(const SymmetricChannel& w, Span<double> log_p) const {
    if (close_early(w, log_p)) return;
    if (log_p.size() == 2) {
      log_p[0] = std::min(std::log(minus_error_probability(w)), -kLog2);
      log_p[1] = std::min(std::log(plus_error_probability(w)), -kLog2);
      return;
    }
    const std::size_t half = log_p.size() / 2;
    const auto below_minus = [&] {
      SymmetricChannel child;
      minus_step(w, child);
      reduce_(child, letters_);
      leaves(child, log_p.subspan(0, half));
    };
    const auto below_plus = [&] {
      SymmetricChannel child;
      plus_step(w, child);
      reduce_(child, letters_);
      leaves(child, log_p.subspan(half, half));
    };
    if (half >= kSmallestTask) {
      // Isolated: a cancelled run around this one must not leave half of the indices without a
      // value.
      tbb::task_group_context context(tbb::task_group_context::isolated);
      tbb::parallel_invoke(below_minus, below_plus, context);
    } else {
      below_minus();
      below_plus();
    }
  }

 private:
  bool close_early(const SymmetricChannel& w, Span<double> log_p) const {
    const double error = error_probability(w);
    // 1 - Z <= 1 - 2P, and 1 - Z at most doubles with each step.
    if (error > kAlmostPerfect && error < 0.25) return false;
    const double complement = bhattacharyya_complement(w);
    const double largest = kUseless / static_cast<double>(log_p.size());
    if (error > kAlmostPerfect && complement > largest) return false;
    const double z = bhattacharyya_parameter(w);
    if (z <= 0 || complement <= 0) return false;
    close(start_of_closing(z, complement, side_), side_, log_p);
    return true;
  }

  Side side_;
  Reduce reduce_;
  std::size_t letters_;
};

Reliability merge(BlockLength block_length, double p, unsigned letters, Side side, Reduce reduce) {
  require_error_rate(p, "QBER");
  if (letters < 4 || letters > 1024 || letters % 2 != 0) {
    throw InputError("output letters " + std::to_string(letters) +
                     " is not an even number from 4 to 1024");
  }
  Reliability reliability;
  reliability.kind =
      side == Side::degrade ? ReliabilityKind::upper_bound : ReliabilityKind::lower_bound;
  reliability.log_error_probability.resize(block_length.bits());
  // A mirrored pair of letters is stored as one.
  Merger(side, reduce, letters / 2).leaves(bsc_channel(p), reliability.log_error_probability);
  return reliability;
}

}  // namespace

Reliability degrading_merge(BlockLength block_length, double p, unsigned letters, Merging merging) {
  return merge(block_length, p, letters, Side::degrade,
               merging == Merging::greedy ? degrade : degrade_quickly);
}

Reliability upgrading_merge(BlockLength block_length, double p, unsigned letters) {
  return merge(block_length, p, letters, Side::upgrade, upgrade);
}

}  // namespace frostline
