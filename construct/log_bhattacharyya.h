// One step of the Bhattacharyya parameter Z, kept as ln Z and ln(1 - Z) so that neither end of the
// interval loses its digits or underflows.
//
// E. Arikan, IEEE Trans. IT 55(7), 2009, prop. 5: Z(W+) = Z^2; sqrt(1 - (1 - Z^2)^2) <= Z(W-) <=
// 2Z - Z^2, the upper end exact on a BEC, the lower end exact on a BSC.
#pragma once

#include <cmath>

namespace frostline {

struct LogBhattacharyya {
  double log_z;           // ln Z
  double log_complement;  // ln(1 - Z)
};

namespace internal {

// Of ln v and ln(1 - v) the one that is below ln(1/2) fixes the other to full precision; where it
// is not, the sum given for the other has no cancellation.
inline double log_one_minus(double log_v, double otherwise) {
  constexpr double kLogHalf = -0.69314718055994530942;
  return log_v < kLogHalf ? std::log1p(-std::exp(log_v)) : otherwise;
}

}  // namespace internal

// Z^2.
inline LogBhattacharyya plus(LogBhattacharyya z) {
  const double log_z = 2 * z.log_z;
  const double sum = z.log_complement + std::log1p(std::exp(z.log_z));  // (1-Z)(1+Z)
  return {log_z, internal::log_one_minus(log_z, sum)};
}

// 2Z - Z^2.
inline LogBhattacharyya minus_on_bec(LogBhattacharyya z) {
  const double log_complement = 2 * z.log_complement;
  const double sum = z.log_z + std::log1p(std::exp(z.log_complement));  // Z(2-Z)
  return {internal::log_one_minus(log_complement, sum), log_complement};
}

}  // namespace frostline
