#include "polar/limits.h"

#include <algorithm>
#include <boost/math/special_functions/erf.hpp>
#include <cmath>
#include <sstream>
#include <stdexcept>
#include <string>

#include "polar/error.h"

namespace frostline {
namespace {

// Number text as a person would write it: 0.02, not 0.020000.
std::string number_text(double value) {
  std::ostringstream text;
  text << value;
  return text.str();
}

// ln k!. Stirling's series where its first left-out term is below the rounding of a long double.
long double log_factorial(std::uint64_t k) {
  if (k < 24) {
    long double product = 1;
    for (std::uint64_t j = 2; j <= k; ++j) product *= static_cast<long double>(j);
    return std::log(product);
  }
  constexpr long double kHalfLogTwoPi = 0.918938533204672741780329736405617640L;
  const auto x = static_cast<long double>(k) + 1;
  const long double y = 1 / (x * x);
  const long double series =
      (1 / 12.0L +
       y * (-1 / 360.0L +
            y * (1 / 1260.0L + y * (-1 / 1680.0L + y * (1 / 1188.0L + y * (-691 / 360360.0L +
                                                                           y * (1 / 156.0L))))))) /
      x;
  return (x - 0.5L) * std::log(x) - x + kHalfLogTwoPi + series;
}

// The weight W of N independent bits, each 1 with probability p.
class Weight {
 public:
  Weight(std::uint64_t length, double p)
      : length_(length),
        log_p_(std::log(static_cast<long double>(p))),
        log_q_(std::log1p(-static_cast<long double>(p))),
        odds_(static_cast<long double>(p) / (1 - static_cast<long double>(p))),
        mode_(std::min(length,
                       static_cast<std::uint64_t>((static_cast<long double>(length) + 1) * p))) {}

  std::uint64_t length() const { return length_; }
  std::uint64_t mode() const { return mode_; }
  long double log_choose(std::uint64_t w) const {
    return log_factorial(length_) - log_factorial(w) - log_factorial(length_ - w);
  }
  long double probability(std::uint64_t w) const {
    return std::exp(log_choose(w) + static_cast<long double>(w) * log_p_ +
                    static_cast<long double>(length_ - w) * log_q_);
  }
  // P(W = w + 1) / P(W = w).
  long double step_up(std::uint64_t w) const {
    return odds_ * static_cast<long double>(length_ - w) / static_cast<long double>(w + 1);
  }

 private:
  std::uint64_t length_;
  long double log_p_;
  long double log_q_;
  long double odds_;
  std::uint64_t mode_;
};

// The heaviest patterns kept: all of weight below t, and this share of weight t.
struct Boundary {
  std::uint64_t weight;
  long double share;
};

// Sums the upper tail from far out inwards, so that small terms come first, until it exceeds fer.
Boundary boundary_from_above(const Weight& weight, long double fer) {
  std::uint64_t w = weight.mode();
  long double term = weight.probability(w);
  // Where a term is this small, all that lie beyond it are too few to matter.
  const long double negligible = fer * 1e-26L;
  while (w < weight.length() && term > negligible) term *= weight.step_up(w++);
  long double tail = 0;
  while (true) {
    if (tail + term > fer || w == 0) return {w, (tail + term - fer) / term};
    tail += term;
    term /= weight.step_up(--w);
  }
}

// Sums the lower tail from far out inwards until it reaches 1 - fer.
Boundary boundary_from_below(const Weight& weight, long double kept) {
  std::uint64_t w = weight.mode();
  long double term = weight.probability(w);
  const long double negligible = kept * 1e-26L;
  while (w > 0 && term > negligible) term /= weight.step_up(--w);
  long double tail = 0;
  while (true) {
    if (tail + term >= kept || w == weight.length()) return {w, (kept - tail) / term};
    tail += term;
    term *= weight.step_up(w++);
  }
}

// log2 of the number of patterns kept.
long double log2_kept(const Weight& weight, const Boundary& boundary) {
  const auto n = static_cast<long double>(weight.length());
  long double relative = 1;  // C(N, w) / C(N, t)
  long double sum = std::clamp(boundary.share, 0.0L, 1.0L);
  for (std::uint64_t w = boundary.weight; w > 0; --w) {
    const long double step = static_cast<long double>(w) / (n - static_cast<long double>(w) + 1);
    relative *= step;
    sum += relative;
    if (step < 1 && relative < sum * (1 - step) * 1e-22L) break;
  }
  return (weight.log_choose(boundary.weight) + std::log(sum)) / std::log(2.0L);
}

}  // namespace

double binary_entropy(double p) {
  if (!(p >= 0 && p <= 1)) throw std::invalid_argument("binary_entropy: p outside 0..1");
  if (p == 0 || p == 1) return 0;
  constexpr double kLog2E = 1.44269504088896340736;
  return -(p * std::log(p) + (1 - p) * std::log1p(-p)) * kLog2E;
}

void require_error_rate(double p, const char* what) {
  if (!(p > 0 && p < 0.5)) {
    throw InputError(std::string(what) + " " + number_text(p) +
                     " is not above 0 and below 0.5, as it must be");
  }
}

void require_probability(double value, const char* what) {
  if (!(value > 0 && value < 1)) {
    throw InputError(std::string(what) + " " + number_text(value) +
                     " is not above 0 and below 1, as it must be");
  }
}

FiniteLengthLimit finite_length_limit(std::uint64_t length, double p, double fer) {
  if (length < 1 || length > (std::uint64_t{1} << 32)) {
    throw InputError("block length " + std::to_string(length) + " is not from 1 to 2^32");
  }
  require_error_rate(p, "QBER");
  require_probability(fer, "FER");

  const Weight weight(length, p);
  // The smaller tail is the one whose sum loses nothing.
  const Boundary boundary = fer < 0.5
                                ? boundary_from_above(weight, fer)
                                : boundary_from_below(weight, 1 - static_cast<long double>(fer));
  // A power of two kept exactly must not be rounded up.
  const long double log2_count = std::ceil(log2_kept(weight, boundary) - 1e-7L);

  FiniteLengthLimit limit{};
  limit.bits = log2_count > 0 ? static_cast<std::uint64_t>(log2_count) : 0;
  const double n = static_cast<double>(length);
  const double entropy_bits = n * binary_entropy(p);
  limit.efficiency = static_cast<double>(limit.bits) / entropy_bits;
  const double deviation = std::sqrt(n * p * (1 - p)) * std::log2((1 - p) / p);
  const double q_inverse = std::sqrt(2.0) * boost::math::erfc_inv(2 * fer);
  limit.second_order_bits = entropy_bits + deviation * q_inverse - 0.5 * std::log2(n);
  return limit;
}

}  // namespace frostline
