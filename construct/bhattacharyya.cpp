#include "construct/bhattacharyya.h"

#include <algorithm>
#include <cmath>

#include "construct/log_bhattacharyya.h"
#include "polar/limits.h"
#include "polar/span.h"

namespace frostline {
namespace {

void polarize(LogBhattacharyya z, Span<double> log_z) {
  if (log_z.size() == 1) {
    log_z[0] = z.log_z;
    return;
  }
  const std::size_t half = log_z.size() / 2;
  polarize(minus_on_bec(z), log_z.subspan(0, half));
  polarize(plus(z), log_z.subspan(half, half));
}

}  // namespace

std::vector<double> log_bhattacharyya(BlockLength block_length, double z) {
  require_probability(z, "Bhattacharyya parameter");
  std::vector<double> log_z(block_length.bits());
  polarize({std::log(z), std::log1p(-z)}, log_z);
  return log_z;
}

Reliability bhattacharyya_bound(BlockLength block_length, double p) {
  require_error_rate(p, "QBER");
  // 1 - 2 sqrt(p q) = (1 - 2p)^2 / (1 + 2 sqrt(p q)) keeps its digits where p is near one half.
  const double z = 2 * std::sqrt(p * (1 - p));
  const double log_complement = 2 * std::log1p(-2 * p) - std::log1p(z);
  Reliability reliability;
  reliability.kind = ReliabilityKind::upper_bound;
  reliability.log_error_probability.resize(block_length.bits());
  polarize({std::min(0.0, std::log(z)), log_complement}, reliability.log_error_probability);
  return reliability;
}

}  // namespace frostline
