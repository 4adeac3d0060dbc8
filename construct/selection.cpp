#include "construct/selection.h"

#include <tbb/parallel_for.h>
#include <tbb/parallel_sort.h>

#include <algorithm>
#include <cmath>
#include <numeric>
#include <sstream>
#include <stdexcept>

#include "polar/error.h"
#include "polar/limits.h"

namespace frostline {
namespace {

struct RankedIndex {
  double rounded;  // ln P in units of 1e-9
  std::uint32_t index;
};

}  // namespace

std::vector<std::uint32_t> freezing_order(const Reliability& reliability) {
  const std::vector<double>& log_p = reliability.log_error_probability;
  std::vector<RankedIndex> ranked(log_p.size());
  for (std::size_t i = 0; i < log_p.size(); ++i) {
    if (!(log_p[i] <= 0)) throw std::invalid_argument("freezing_order: ln P is not at most 0");
    ranked[i] = {std::nearbyint(log_p[i] * 1e9), static_cast<std::uint32_t>(i)};
  }
  // The order is total, so the number of threads cannot show in it. Isolated: in a cancelled run
  // around this one the sort would return with nothing sorted.
  tbb::task_group_context context(tbb::task_group_context::isolated);
  tbb::parallel_for(
      0, 1,
      [&](int) {
        tbb::parallel_sort(
            ranked.begin(), ranked.end(), [](const RankedIndex& a, const RankedIndex& b) {
              return a.rounded != b.rounded ? a.rounded > b.rounded : a.index < b.index;
            });
      },
      context);
  std::vector<std::uint32_t> order(ranked.size());
  std::transform(ranked.begin(), ranked.end(), order.begin(),
                 [](const RankedIndex& entry) { return entry.index; });
  return order;
}

std::vector<double> union_sums(const Reliability& reliability,
                               const std::vector<std::uint32_t>& order) {
  const std::vector<double>& log_p = reliability.log_error_probability;
  if (order.size() != log_p.size()) throw std::invalid_argument("union_sums: sizes differ");
  std::vector<double> sums(order.size() + 1, 0.0);
  for (std::size_t m = order.size(); m-- > 0;) sums[m] = sums[m + 1] + std::exp(log_p[order[m]]);
  return sums;
}

FrozenSet freeze_first(const std::vector<std::uint32_t>& order, std::size_t frozen_count) {
  if (frozen_count > order.size()) throw std::invalid_argument("freeze_first: more than all");
  BitString mask(order.size());
  for (std::size_t m = 0; m < frozen_count; ++m) mask.set(order[m], true);
  return FrozenSet(BlockLength(order.size()), std::move(mask));
}

std::size_t smallest_frozen_count(const std::vector<double>& sums, double fer) {
  require_probability(fer, "FER");
  if (sums.empty()) throw std::invalid_argument("smallest_frozen_count: no sums");
  const auto first =
      std::partition_point(sums.begin(), sums.end() - 1, [fer](double sum) { return sum > fer; });
  return static_cast<std::size_t>(first - sums.begin());
}

BestKey best_key(const std::vector<double>& sums, double phase_error, unsigned check_bits) {
  if (!(phase_error >= 0 && phase_error <= 0.5)) {
    std::ostringstream message;
    message << "phase error rate " << phase_error << " is not from 0 to 0.5";
    throw InputError(message.str());
  }
  if (sums.size() < 2) throw std::invalid_argument("best_key: no sums");
  const double n = static_cast<double>(sums.size() - 1);
  const double secret_share = 1 - binary_entropy(phase_error);
  BestKey best{0, -HUGE_VAL};
  for (std::size_t m = 0; m < sums.size(); ++m) {
    const double leakage_share = (static_cast<double>(m) + check_bits) / n;
    const double rate = (1 - std::min(1.0, sums[m])) * (secret_share - leakage_share);
    if (rate > best.net_key_rate) best = {m, rate};
  }
  return best;
}

}  // namespace frostline
