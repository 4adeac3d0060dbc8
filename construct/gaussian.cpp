#include "construct/gaussian.h"

#include <algorithm>
#include <array>
#include <cmath>
#include <stdexcept>
#include <string>
#include <type_traits>

#include "construct/symmetric_channel.h"
#include "polar/error.h"
#include "polar/limits.h"
#include "polar/span.h"

namespace frostline {
namespace {

constexpr double kPi = 3.14159265358979323846;
constexpr double kLog2 = 0.69314718055994530942;

// Above this mean functions of a Gaussian LLR are taken from their decaying form, below it from the
// complement, so that neither loses its digits.
constexpr double kSmallMean = 1.0;

// ln of E[g(u)] where u ~ N(mean, 2 mean) and g(u) = exp(-u/2) even(u): the density is then an even
// function, and the trapezoidal rule converges exponentially in 1 / step (the nearest singularity
// of the functions used here is at +-i pi, and the normal curve needs a step below sqrt(mean)).
template <typename Even>
double log_gaussian_mean(double mean, Even even) {
  const double step = std::min(0.5, std::sqrt(mean));
  const double exponent = step * step / (4 * mean);
  double sum = 0;
  for (int k = 1;; ++k) {
    const double normal = exponent * k * k;
    const double u = step * k;
    if (normal > 45 || u > 170) break;
    sum += std::exp(-normal) * even(u);
  }
  sum = step * (even(0.0) + 2 * sum);
  return std::log(sum) - mean / 4 - 0.5 * std::log(4 * kPi * mean);
}

// Both functions of the mean that the approximation needs fall from 1 at mean 0 like exp(-mean / 4)
// at large means; value and complement are given, each to full precision where it is the smaller.
struct Phi {  // 1 - E[tanh(u/2)]
  static double log_value(double mean) {
    return log_gaussian_mean(mean, [](double u) { return 1 / std::cosh(u / 2); });
  }
  static double log_complement(double mean) {
    return log_gaussian_mean(mean, [](double u) {
      const double s = std::sinh(u / 2);
      return s * s / std::cosh(u / 2);
    });
  }
};

// Conditional entropy of a bit with a Gaussian LLR, in bits: E[log2(1 + exp(-u))].
struct Entropy {
  // By symmetry of the density half of the mass at |u| carries the binary entropy of
  // 1 / (1 + exp(|u|)), ln(2 cosh(u/2)) - (u/2) tanh(u/2) nats.
  static double log_value(double mean) {
    return log_gaussian_mean(mean, [](double u) {
      const double tail = std::exp(-u);
      const double nats = std::log1p(tail) + u * tail / (1 + tail);
      return nats * std::cosh(u / 2) / kLog2;
    });
  }
  static double log_complement(double mean) {
    return log_gaussian_mean(mean, [](double u) {
      const double t = u / 2;
      const double series = t * t * (0.5 + t * t * (-0.25 + t * t * (1.0 / 9 - t * t * 17 / 360)));
      const double nats = t < 0.02 ? series : t * std::tanh(t) - std::log(std::cosh(t));
      return nats * std::cosh(t) / kLog2;
    });
  }
};

// ln of the function.
template <typename Function>
double log_function(double mean) {
  if (mean <= 0) return 0;
  if (mean > kSmallMean) return Function::log_value(mean);
  return std::log1p(-std::exp(Function::log_complement(mean)));
}

// ln mean at which ln(-ln function) has the given value. As a function of ln mean that is almost a
// straight line of slope 1, on which the secant method needs a handful of steps.
template <typename Function>
double solve_log_mean(double log_minus_log) {
  if (log_minus_log < -40)
    return log_minus_log + (std::is_same_v<Function, Phi> ? kLog2 : std::log(4 * kLog2));
  if (log_minus_log > 600) return log_minus_log + 2 * kLog2;
  const auto excess = [&](double log_mean) {
    return std::log(-log_function<Function>(std::exp(log_mean))) - log_minus_log;
  };
  double x0 = log_minus_log + 1;
  double y0 = excess(x0);
  double x1 = x0 - y0;
  for (int step = 0; step < 50; ++step) {
    const double y1 = excess(x1);
    if (y1 == y0) break;
    const double x2 = x1 - y1 * (x1 - x0) / (y1 - y0);
    x0 = x1;
    y0 = y1;
    x1 = x2;
    if (std::abs(x1 - x0) < 1e-14 * std::max(1.0, std::abs(x1))) break;
  }
  return x1;
}

// The minus step 1 - phi(m') = (1 - phi(m))^2 as ln m' of ln m: one smooth function, tabulated once
// and read by cubic interpolation. For tiny m it is m^2 / 2, for huge m it is m - 4 ln 2.
class MinusTable {
 public:
  MinusTable() {
    for (std::size_t k = 0; k < values_.size(); ++k) {
      const double mean = std::exp(kFirst + (static_cast<double>(k) - 1) * kStep);
      double log_minus_log;  // ln(-ln phi(m'))
      if (mean > kSmallMean) {
        const double log_phi = Phi::log_value(mean);
        log_minus_log = std::log(-(log_phi + std::log1p(-std::expm1(log_phi))));
      } else {
        const double square = std::exp(2 * Phi::log_complement(mean));
        log_minus_log = std::log(-std::log1p(-square));
      }
      values_[k] = solve_log_mean<Phi>(log_minus_log);
    }
  }

  double operator()(double log_mean) const {
    if (!(log_mean > kFirst)) return 2 * log_mean - kLog2;
    if (log_mean >= kLast) {
      const double mean = std::exp(log_mean);
      return log_mean + std::log1p(-4 * kLog2 / (mean + 2));
    }
    const double place = (log_mean - kFirst) / kStep;
    const auto k = static_cast<std::size_t>(place);
    const double t = place - static_cast<double>(k);
    const double* v = &values_[k];  // at -1, 0, 1, 2 of the unit interval that holds t
    const double inner = (1 - t) * v[1] + t * v[2];
    const double left = v[0] - 2 * v[1] + v[2];
    const double right = v[1] - 2 * v[2] + v[3];
    return inner - t * (1 - t) / 6 * ((2 - t) * left + (1 + t) * right);
  }

 private:
  static constexpr double kFirst = -24;
  static constexpr double kLast = 9;
  static constexpr double kStep = 1.0 / 64;
  std::array<double, 33 * 64 + 4> values_;
};

const MinusTable& minus_table() {
  static const MinusTable table;
  return table;
}

// ln(erfc(sqrt(mean) / 2) / 2): an LLR ~ N(mean, 2 mean) is negative.
double log_gaussian_error(double log_mean) {
  const double mean = std::exp(log_mean);
  const double z = std::sqrt(mean) / 2;
  if (z < 0.5) return std::log1p(-std::erf(z)) - kLog2;
  if (z < 20) return std::log(std::erfc(z)) - kLog2;
  const double y = 1 / (2 * z * z);
  const double series = -y * (1 - 3 * y * (1 - 5 * y * (1 - 7 * y)));
  return -mean / 4 - std::log(z) - 0.5 * std::log(kPi) + std::log1p(series) - kLog2;
}

void gaussian_leaves(double log_mean, const MinusTable& minus, Span<double> log_p) {
  if (log_p.size() == 1) {
    log_p[0] = log_gaussian_error(log_mean);
    return;
  }
  const std::size_t half = log_p.size() / 2;
  gaussian_leaves(minus(log_mean), minus, log_p.subspan(0, half));
  gaussian_leaves(log_mean + kLog2, minus, log_p.subspan(half, half));
}

// Enough letters that their merging costs nothing beside the approximation that follows.
constexpr std::size_t kLetters = 48;
// Where fewer nats than this are left of the entropy, or of the mutual information, the letters
// may have lost them to underflow or rounding; recursions in the log domain stand in.
constexpr double kSmallestEntropy = 1e-250;
constexpr double kSmallestInformation = 1e-12;

struct ExactNode {
  SymmetricChannel channel;
  double log_z;              // ln Z: exact after plus, an upper bound after minus
  double log_second_moment;  // ln E[tanh^2(LLR/2)]: exact after minus, additive where it is tiny
};

ExactNode minus_child(const ExactNode& node) {
  ExactNode child;
  minus_step(node.channel, child.channel);
  degrade(child.channel, kLetters);
  child.log_z = node.log_z + std::log1p(-std::expm1(node.log_z));
  child.log_second_moment = 2 * node.log_second_moment;
  return child;
}

ExactNode plus_child(const ExactNode& node) {
  ExactNode child;
  plus_step(node.channel, child.channel);
  degrade(child.channel, kLetters);
  child.log_z = 2 * node.log_z;
  child.log_second_moment = std::min(0.0, node.log_second_moment + kLog2);
  return child;
}

// ln of the mean of the Gaussian LLR that leaves the same conditional entropy.
double log_equivalent_mean(const ExactNode& node) {
  const double entropy = conditional_entropy_nats(node.channel) / kLog2;
  const double information = mutual_information_nats(node.channel) / kLog2;
  if (entropy < kSmallestEntropy) return std::log(-4 * node.log_z);               // Z = exp(-m/4)
  if (information < kSmallestInformation) return kLog2 + node.log_second_moment;  // E = m/2
  const double log_entropy = entropy < 0.5 ? std::log(entropy) : std::log1p(-information);
  return solve_log_mean<Entropy>(std::log(-log_entropy));
}

void exact_levels_then_gaussian(const ExactNode& node, unsigned levels, Span<double> log_p) {
  if (levels == 0) {
    const double error = log_p.size() == 1 ? error_probability(node.channel) : 0;
    if (error > kSmallestEntropy) {
      log_p[0] = std::min(std::log(error), -kLog2);
    } else {
      gaussian_leaves(log_equivalent_mean(node), minus_table(), log_p);
    }
    return;
  }
  const std::size_t half = log_p.size() / 2;
  exact_levels_then_gaussian(minus_child(node), levels - 1, log_p.subspan(0, half));
  exact_levels_then_gaussian(plus_child(node), levels - 1, log_p.subspan(half, half));
}

}  // namespace

double log_phi(double mean) {
  if (!(mean >= 0)) throw std::invalid_argument("log_phi: negative mean");
  return log_function<Phi>(mean);
}

double mean_from_log_phi(double value) {
  if (!(value <= 0)) throw std::invalid_argument("mean_from_log_phi: positive logarithm");
  return value == 0 ? 0 : std::exp(solve_log_mean<Phi>(std::log(-value)));
}

Reliability gaussian_approximation(BlockLength block_length, double p, unsigned exact_levels) {
  require_error_rate(p, "QBER");
  if (exact_levels > 12) {
    throw InputError("exact levels " + std::to_string(exact_levels) + " is not from 0 to 12");
  }
  Reliability reliability;
  reliability.kind = ReliabilityKind::estimate;
  reliability.log_error_probability.resize(block_length.bits());
  const ExactNode root{bsc_channel(p), std::min(0.0, std::log(2 * std::sqrt(p * (1 - p)))),
                       2 * std::log1p(-2 * p)};
  exact_levels_then_gaussian(root, std::min(exact_levels, block_length.log2()),
                             reliability.log_error_probability);
  return reliability;
}

}  // namespace frostline
