#include "construct/density_evolution.h"

#include <tbb/parallel_invoke.h>

#include <algorithm>
#include <cmath>
#include <limits>
#include <stdexcept>

#include "construct/integer_density.h"
#include "construct/planes_density.h"
#include "polar/limits.h"
#include "polar/span.h"

namespace frostline {
namespace {

constexpr double kLog2 = 0.69314718055994530942;
constexpr double kPerfect = 1e-200;
constexpr double kUseless = 1e-10;
// Subtrees of fewer leaves are not worth a task.
constexpr std::size_t kSmallestTask = 4096;

// The smallest double stands for what underflowed: it is above it.
double log_of_error(double error) {
  return std::log(std::max(error, std::numeric_limits<double>::min()));
}

// A Density has
//   f(), g()          the density of a left or right child
//   error()           probability that a decision here is wrong
//   f_error(), g_error()  the same one step below, without forming the density
//   doubt()           probability that a message is not strictly on the right side; what comes of
//                     two right messages is right, so no step more than doubles it
//   bias()            total variation between the densities of the two bits; f multiplies it with
//                     itself, g at most doubles it, and a decision is right with probability
//                     (1 + bias) / 2 at most
template <typename Density>
void leaves(const Density& density, Span<double> log_p) {
  const double size = static_cast<double>(log_p.size());
  if (const double doubt = density.doubt(); doubt < kPerfect) {
    std::fill(log_p.begin(), log_p.end(), log_of_error(doubt) + std::log(size));
    return;
  }
  if (density.bias() * size < kUseless) {
    std::fill(log_p.begin(), log_p.end(), -kLog2);
    return;
  }
  if (log_p.size() == 2) {
    log_p[0] = log_of_error(density.f_error());
    log_p[1] = log_of_error(density.g_error());
    return;
  }
  const std::size_t half = log_p.size() / 2;
  const auto left = [&] { leaves(density.f(), log_p.subspan(0, half)); };
  const auto right = [&] { leaves(density.g(), log_p.subspan(half, half)); };
  if (half >= kSmallestTask) {
    // Isolated: a cancelled run around this one must not leave half of the indices without a value.
    tbb::task_group_context context(tbb::task_group_context::isolated);
    tbb::parallel_invoke(left, right, context);
  } else {
    left();
    right();
  }
}

// The nodes that start at index 0: every message there is the channel's, since all channel LLRs
// are equal and f keeps their magnitude; the bit is 1 with probability (1 - (1-2p)^(2^level)) / 2.
template <typename BelowChain>
void leaves_of_chain(double p, Span<double> log_p, BelowChain below_chain) {
  double log_contrast = std::log1p(-2 * p);
  while (log_p.size() > 1) {
    const double error = -0.5 * std::expm1(log_contrast);
    const std::size_t half = log_p.size() / 2;
    const auto density = below_chain(error);
    if (half == 1) {
      log_p[1] = log_of_error(density.error());
    } else {
      leaves(density, log_p.subspan(half, half));
    }
    log_p = log_p.subspan(0, half);
    log_contrast *= 2;
  }
  log_p[0] = std::log(-0.5 * std::expm1(log_contrast));
}

template <unsigned kPlanes>
void planes_leaves(double p, Span<double> log_p) {
  leaves_of_chain(p, log_p,
                  [](double error) { return PlanesDensity<kPlanes>::below_chain(error); });
}

void planes_leaves(unsigned planes, double p, Span<double> log_p) {
  switch (planes) {
    case 2:
      return planes_leaves<2>(p, log_p);
    case 3:
      return planes_leaves<3>(p, log_p);
    case 4:
      return planes_leaves<4>(p, log_p);
    case 5:
      return planes_leaves<5>(p, log_p);
    case 6:
      return planes_leaves<6>(p, log_p);
    case 7:
      return planes_leaves<7>(p, log_p);
    default:
      throw std::invalid_argument("density_evolution: planes outside 2..7");
  }
}

}  // namespace

Reliability density_evolution(BlockLength block_length, double p, const Arithmetic& arithmetic) {
  require_error_rate(p, "QBER");
  Reliability reliability;
  reliability.kind = ReliabilityKind::exact;
  reliability.log_error_probability.resize(block_length.bits());
  const Span<double> log_p(reliability.log_error_probability);
  switch (arithmetic.kind) {
    case Arithmetic::Kind::planes:
      planes_leaves(arithmetic.planes, p, log_p);
      break;
    case Arithmetic::Kind::integer: {
      const IntegerValues values(arithmetic.llr_bits, arithmetic.channel_level);
      leaves_of_chain(p, log_p,
                      [&](double error) { return IntegerDensity::below_chain(values, error); });
      break;
    }
    case Arithmetic::Kind::exact:
      throw std::invalid_argument("density_evolution: exact arithmetic has no finite density");
  }
  return reliability;
}

}  // namespace frostline
