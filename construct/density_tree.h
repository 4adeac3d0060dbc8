// The tree of a decoder's densities, visited once, depth first: what density evolution and the
// metric weights share.
//
// Nodes whose density is useless or perfect to double precision are closed early: what stands below
// them is known without looking. So only a few densities a thread are in memory at a time, whatever
// the block length.
//
// A Density has
//   f(), g()          the density of a left or right child
//   error()           probability that a decision here is wrong
//   f_error(), g_error()  the same one step below, without forming the density
//   doubt()           probability that a message is not strictly on the right side; what comes of
//                     two right messages is right, so no step more than doubles it
//   bias()            total variation between the densities of the two bits; f multiplies it with
//                     itself, g at most doubles it, and a decision is right with probability
//                     (1 + bias) / 2 at most
//
// A Visitor has, for the node of the indices first .. first + length - 1,
//   chain(error, length)             the node starts at 0: every message there is the channel's,
//   and
//                                    the bits are 1 with probability error
//   inner(density, first, length)    called before the node's children, length >= 2
//   pair(density, first)             after inner of a node of two indices: settles both, so that it
//                                    need not form their densities
//   leaf(density, i)                 the one index below the chain that is in no pair
//   perfect(doubt, first, length)    nothing below is called: doubt < 1e-200
//   useless(first, length)           nothing below is called: bias < 1e-10 / length
// Calls for disjoint nodes may come from several threads at once.
#pragma once

#include <tbb/parallel_invoke.h>

#include <algorithm>
#include <cmath>
#include <cstddef>
#include <limits>
#include <stdexcept>

#include "construct/planes_density.h"
#include "polar/span.h"

namespace frostline {

constexpr double kPerfectDoubt = 1e-200;
constexpr double kUselessBias = 1e-10;

template <typename Density, typename Visitor>
void visit_densities(const Density& density, std::size_t first, std::size_t length,
                     Visitor& visitor) {
  // Subtrees of fewer leaves are not worth a task.
  constexpr std::size_t kSmallestTask = 4096;
  if (length == 1) return visitor.leaf(density, first);
  if (const double doubt = density.doubt(); doubt < kPerfectDoubt) {
    return visitor.perfect(doubt, first, length);
  }
  if (density.bias() * static_cast<double>(length) < kUselessBias) {
    return visitor.useless(first, length);
  }
  visitor.inner(density, first, length);
  if (length == 2) return visitor.pair(density, first);
  const std::size_t half = length / 2;
  const auto left = [&] { visit_densities(density.f(), first, half, visitor); };
  const auto right = [&] { visit_densities(density.g(), first + half, half, visitor); };
  if (half >= kSmallestTask) {
    // Isolated: a cancelled run around this one must not leave half of the indices without a value.
    tbb::task_group_context context(tbb::task_group_context::isolated);
    tbb::parallel_invoke(left, right, context);
  } else {
    left();
    right();
  }
}

// The whole tree of a BSC(p). Nodes that start at index 0: all channel LLRs are equal and f keeps
// their magnitude; the bit is 1 with probability (1 - (1-2p)^length') / 2, length' the number of
// key bits that it sums. below_chain(error) is the density of the right child of such a node.
template <typename BelowChain, typename Visitor>
void visit_density_tree(double p, std::size_t length, BelowChain below_chain, Visitor& visitor) {
  double log_contrast = std::log1p(-2 * p);
  for (; length > 1; length /= 2) {
    const double error = -0.5 * std::expm1(log_contrast);
    visitor.chain(error, length);
    visit_densities(below_chain(error), length / 2, length / 2, visitor);
    log_contrast *= 2;
  }
  visitor.chain(-0.5 * std::expm1(log_contrast), 1);
}

// The same for planes:W. REQUIRES: 2 <= W <= 7 (std::invalid_argument otherwise).
template <typename Visitor>
void visit_planes_tree(double p, std::size_t length, unsigned planes, Visitor& visitor) {
  const auto visit = [&](auto below_chain) { visit_density_tree(p, length, below_chain, visitor); };
  switch (planes) {
    case 2:
      return visit(PlanesDensity<2>::below_chain);
    case 3:
      return visit(PlanesDensity<3>::below_chain);
    case 4:
      return visit(PlanesDensity<4>::below_chain);
    case 5:
      return visit(PlanesDensity<5>::below_chain);
    case 6:
      return visit(PlanesDensity<6>::below_chain);
    case 7:
      return visit(PlanesDensity<7>::below_chain);
    default:
      throw std::invalid_argument("density evolution: planes outside 2..7");
  }
}

// The visitor that writes ln of every leaf's error probability.
class LeafErrors {
 public:
  // log_p: N entries.
  explicit LeafErrors(Span<double> log_p) : log_p_(log_p) {}

  void chain(double error, std::size_t length) {
    if (length == 1) log_p_[0] = std::log(error);
  }
  template <typename Density>
  void inner(const Density&, std::size_t, std::size_t) {}
  template <typename Density>
  void pair(const Density& density, std::size_t first) {
    log_p_[first] = log_of(density.f_error());
    log_p_[first + 1] = log_of(density.g_error());
  }
  template <typename Density>
  void leaf(const Density& density, std::size_t i) {
    log_p_[i] = log_of(density.error());
  }
  // No leaf's doubt is above the node's times its length.
  void perfect(double doubt, std::size_t first, std::size_t length) {
    fill(first, length, log_of(doubt) + std::log(static_cast<double>(length)));
  }
  void useless(std::size_t first, std::size_t length) {
    fill(first, length, -0.69314718055994530942);
  }

 private:
  // The smallest double stands for what underflowed: it is above it.
  static double log_of(double error) {
    return std::log(std::max(error, std::numeric_limits<double>::min()));
  }
  void fill(std::size_t first, std::size_t length, double value) {
    const Span<double> node = log_p_.subspan(first, length);
    std::fill(node.begin(), node.end(), value);
  }

  Span<double> log_p_;
};

}  // namespace frostline
