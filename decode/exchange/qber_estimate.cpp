#include "decode/exchange/qber_estimate.h"

#include <algorithm>
#include <boost/math/tools/minima.hpp>
#include <boost/math/tools/roots.hpp>
#include <cmath>
#include <limits>
#include <stdexcept>
#include <utility>

#include "polar/bits.h"
#include "polar/transform.h"

namespace frostline {
namespace {

// Half the quantiles of the chi-square distribution of one degree of freedom: at 95 %, and at
// 1 - 2e-6, as 0.5 lies at the edge of the range, where half of the unrelated pairs have their
// maximum.
constexpr double kIntervalDrop = 1.92;
constexpr double kRelatedRise = 11.3;
// QBERs below this are not told apart from 0.
constexpr double kLeastQber = 1e-12;
// The lightest nodes tell the most; so many are enough, and few enough to look at every pair.
constexpr std::size_t kMostNodes = 3000;

unsigned popcount(std::uint32_t value) {
  unsigned count = 0;
  for (; value != 0; value &= value - 1) ++count;
  return count;
}

// ((1-2p)^w - 1) for w = 2^k, without cancellation where w p is small: twice the probability q of
// a one, negated.
double twice_minus_q(double p, std::size_t k) {
  return std::expm1(std::ldexp(std::log1p(-2 * p), static_cast<int>(k)));
}

// count times log(probability), 0 log 0 = 0.
double weighted_log(std::uint64_t count, double probability) {
  return count == 0 ? 0 : static_cast<double>(count) * std::log(probability);
}

double log_likelihood(const DifferenceCounts& counts, double p) {
  double sum = 0;
  for (std::size_t k = 0; k < counts.bits.size(); ++k) {
    if (counts.bits[k] == 0) continue;
    const double q = -twice_minus_q(p, k) / 2;
    sum += weighted_log(counts.ones[k], q) + weighted_log(counts.bits[k] - counts.ones[k], 1 - q);
  }
  return sum;
}

// The maximum over kLeastQber .. 0.5, on a logarithmic scale: the best of a grid, then Brent's
// method between its neighbours.
double most_likely(const DifferenceCounts& counts) {
  constexpr int kSteps = 200;
  const double start = std::log(kLeastQber);
  const double step = (std::log(0.5) - start) / kSteps;
  const auto p_at = [&](double place) { return std::min(std::exp(start + place * step), 0.5); };
  const auto cost = [&](double place) { return -log_likelihood(counts, p_at(place)); };
  int best = 0;
  for (int place = 1; place <= kSteps; ++place) {
    if (cost(place) < cost(best)) best = place;
  }
  const auto [place, least] = boost::math::tools::brent_find_minima(
      cost, std::max(best - 1.0, 0.0), std::min(best + 1.0, double{kSteps}), 30);
  return p_at(least < cost(best) ? place : best);
}

// Where the likelihood falls to a level on the way from the maximum to the end of the range; the
// end where it does not.
double fall_to(const DifferenceCounts& counts, double level, double maximum, double end) {
  const auto above = [&](double p) { return log_likelihood(counts, p) - level; };
  if (!(above(end) < 0)) return end;
  const auto near = [](double a, double b) { return std::abs(a - b) <= 1e-6 * std::abs(a + b); };
  const auto [low, high] =
      boost::math::tools::bisect(above, std::min(maximum, end), std::max(maximum, end), near);
  return (low + high) / 2;
}

}  // namespace

DifferenceCounts& DifferenceCounts::operator+=(const DifferenceCounts& other) {
  for (std::size_t k = 0; k < bits.size(); ++k) {
    bits[k] += other.bits[k];
    ones[k] += other.ones[k];
  }
  blocks += other.blocks;
  return *this;
}

DifferenceCounter::DifferenceCounter(const FrozenSet& frozen, Precoding precoding)
    : block_length_(frozen.block_length()) {
  const PrecodingSchedule schedule(frozen, precoding);
  const auto is_plain = [&](std::size_t i) {
    return frozen.is_frozen(i) && !schedule.adds_state(i / 8);
  };
  const std::size_t length = block_length_.bits();
  for (std::size_t i = 0; i < length;) {
    if (!is_plain(i)) {
      ++i;
      continue;
    }
    std::size_t end = i;
    while (end < length && is_plain(end)) ++end;
    // Cut the stretch into nodes: ranges of 2^d indices whose start is a multiple of 2^d.
    while (i < end) {
      unsigned log2 = 0;
      while (i % (std::size_t{2} << log2) == 0 && i + (std::size_t{2} << log2) <= end) ++log2;
      const auto prefix = static_cast<std::uint32_t>(i >> log2);
      const unsigned prefix_bits = block_length_.log2() - log2;
      nodes_.push_back({prefix, prefix_bits, prefix_bits - popcount(prefix)});
      i += std::size_t{1} << log2;
    }
  }
  std::stable_sort(nodes_.begin(), nodes_.end(),
                   [](const Node& a, const Node& b) { return a.log2_weight < b.log2_weight; });
  if (nodes_.size() > kMostNodes) nodes_.resize(kMostNodes);
}

DifferenceCounts DifferenceCounter::count(Span<const std::uint64_t> difference_rows, unsigned lanes,
                                          unsigned counted) const {
  if (counted > lanes) throw std::invalid_argument("more lanes counted than there are");
  if (lanes == 0 || lanes > kMaxLanes || (lanes & (lanes - 1)) != 0) {
    throw std::invalid_argument("lanes must be a power of two from 1 to 512");
  }
  DifferenceCounts counts;
  counts.blocks = counted;
  KeyWords sums;
  for (const Node& node : nodes_) {
    const unsigned log2 = block_length_.log2() - node.prefix_bits;
    const std::size_t bits = std::size_t{lanes} << log2;
    // A node of fewer than 8 indices is the start of one of 8 whose other indices are 0: their
    // partial sums are 0 and count for nothing.
    const BlockLength length = BlockLength::from_log2(std::max(log2, BlockLength::kMinLog2));
    sums.assign(words_for(length.bits() * lanes), 0);
    copy_bits(difference_rows, node.prefix * bits, sums, 0, bits);
    polar_transform(sums, length, lanes);
    counts.bits[node.log2_weight] += std::size_t{counted} << log2;
    counts.ones[node.log2_weight] += count_ones(sums);
  }
  return counts;
}

// Bit j of the node at prefix a sums the positions whose upper bits contain a and whose lower bits
// are j. For a second node whose prefix b is not shorter, cut b into an upper part, as long as a,
// and a lower part: bit l of it shares positions with the bits j that end in l and contain b's
// lower part above, namely those whose upper bits contain both a and b's upper part.
std::vector<DifferenceCounter::SharedPositions> DifferenceCounter::shared_positions() const {
  constexpr std::size_t kKinds = BlockLength::kMaxLog2 + 1;
  std::vector<double> pairs(kKinds * kKinds * kKinds);
  const auto count_of = [&](unsigned first, unsigned second, unsigned shared) -> double& {
    return pairs[(first * kKinds + second) * kKinds + shared];
  };
  const unsigned n = block_length_.log2();
  for (const Node& a : nodes_) {
    for (const Node& b : nodes_) {
      if (b.prefix_bits < a.prefix_bits) continue;  // seen from the other side
      const unsigned lower_bits = b.prefix_bits - a.prefix_bits;
      const std::uint32_t lower = b.prefix & ((std::uint32_t{1} << lower_bits) - 1);
      const std::uint32_t upper = b.prefix >> lower_bits;
      const unsigned shared = a.prefix_bits - popcount(a.prefix | upper);
      const auto found = static_cast<double>(std::uint64_t{1}
                                             << (n - b.prefix_bits + lower_bits - popcount(lower)));
      count_of(a.log2_weight, b.log2_weight, shared) += found;
      if (lower_bits != 0) count_of(b.log2_weight, a.log2_weight, shared) += found;
    }
  }
  std::vector<SharedPositions> kinds;
  for (unsigned first = 0; first < kKinds; ++first) {
    for (unsigned second = 0; second < kKinds; ++second) {
      for (unsigned shared = 0; shared < kKinds; ++shared) {
        const double found = count_of(first, second, shared);
        if (found > 0) kinds.push_back({first, second, shared, found});
      }
    }
  }
  return kinds;
}

double DifferenceCounter::variance_ratio(const DifferenceCounts& counts, double p) const {
  // Derivative for one bit of weight 2^k: score[k] (d - q).
  std::array<double, BlockLength::kMaxLog2 + 1> score{};
  double independent = 0;
  for (std::size_t k = 0; k < score.size(); ++k) {
    if (counts.bits[k] == 0) continue;
    const double q = -twice_minus_q(p, k) / 2;
    const double slope = std::ldexp((1 - 2 * q) / (1 - 2 * p), static_cast<int>(k));  // dq/dp
    score[k] = slope / (q * (1 - q));
    independent += static_cast<double>(counts.bits[k]) * score[k] * slope;
  }
  double variance = 0;
  const double log_theta = std::log1p(-2 * p);
  for (const SharedPositions& kind : shared_positions()) {
    // With signs (-1)^d: E = theta^(positions in one of the two sums only).
    const double both = std::ldexp(1.0, static_cast<int>(kind.first)) +
                        std::ldexp(1.0, static_cast<int>(kind.second));
    const double shared = std::ldexp(2.0, static_cast<int>(kind.shared));
    const double covariance =
        -std::exp((both - shared) * log_theta) * std::expm1(shared * log_theta) / 4;
    variance += kind.pairs * score[kind.first] * score[kind.second] * covariance;
  }
  const double ratio = static_cast<double>(counts.blocks) * variance / independent;
  return std::isfinite(ratio) ? std::max(ratio, 1.0) : 1.0;
}

QberEstimate estimate_qber(const DifferenceCounter& counter, const DifferenceCounts& counts) {
  QberEstimate estimate;
  if (std::all_of(counts.bits.begin(), counts.bits.end(), [](auto n) { return n == 0; })) {
    return estimate;
  }
  const double qber = most_likely(counts);
  const double maximum = log_likelihood(counts, qber);
  const double level =
      maximum - kIntervalDrop * (qber < 0.5 ? counter.variance_ratio(counts, qber) : 1.0);
  estimate.low = fall_to(counts, level, qber, kLeastQber);
  estimate.high = fall_to(counts, level, qber, 0.5);
  if (estimate.low <= kLeastQber) estimate.low = 0;
  estimate.qber = qber <= 2 * kLeastQber ? 0 : qber;
  // Unrelated strings differ in independent fair bits: there the likelihood is a true one.
  estimate.looks_unrelated = maximum - log_likelihood(counts, 0.5) < kRelatedRise;
  if (estimate.looks_unrelated) estimate.high = 0.5;
  return estimate;
}

}  // namespace frostline
