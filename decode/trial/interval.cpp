#include "decode/trial/interval.h"

#include <boost/math/special_functions/beta.hpp>
#include <stdexcept>

namespace frostline {
namespace {

// The quantile of Beta(a, b), with its limits where a or b is 0.
double beta_quantile(double a, double b, double probability) {
  if (a <= 0) return 0;
  if (b <= 0) return 1;
  return boost::math::ibeta_inv(a, b, probability);
}

void require_counts(std::uint64_t failures, std::uint64_t blocks, double confidence) {
  if (blocks == 0 || failures > blocks || !(confidence > 0 && confidence < 1)) {
    throw std::invalid_argument("an interval of impossible counts");
  }
}

}  // namespace

RateInterval fixed_blocks_interval(std::uint64_t failures, std::uint64_t blocks,
                                   double confidence) {
  require_counts(failures, blocks, confidence);
  const double tail = (1 - confidence) / 2;
  const auto k = static_cast<double>(failures);
  const double rest = static_cast<double>(blocks) - k;
  return {beta_quantile(k, rest + 1, tail), beta_quantile(k + 1, rest, 1 - tail)};
}

RateInterval stopped_at_failure_interval(std::uint64_t failures, std::uint64_t blocks,
                                         double confidence) {
  require_counts(failures, blocks, confidence);
  if (failures == 0) throw std::invalid_argument("a trial that stopped at no failure");
  const double tail = (1 - confidence) / 2;
  const auto k = static_cast<double>(failures);
  const double rest = static_cast<double>(blocks) - k;
  return {beta_quantile(k, rest + 1, tail), beta_quantile(k, rest, 1 - tail)};
}

}  // namespace frostline
