// Metric weights and the never-fork set of list decoding in planes:W, from exact density evolution.
//
// The exact path metric of list decoding is the sum of ln(1 + exp(-(1-2u) LLR)) over the indices
// (A. Balatsoukas-Stimming, M. Bastani Parizi, A. Burg, IEEE Trans. SP 63(19), 2015, Theorem 1).
// A list decoder of planes puts w m / 2 in the place of |LLR|, m the magnitude and w a node's
// weight in half nats.
//
// Which one w. The true LLR of a magnitude, ln(right(m) / wrong(m)), is 0 at m = 0 (the density of
// a zero is the same for both of its signs: below the chain it is, and f and g keep it so) and
// nearly, not quite, proportional to m. The weight is the whole number w for which the expected
// metric that the true path pays at one position of the node,
//   sum over m of right(m) ln(1 + e^(-w m / 2)) + wrong(m) ln(1 + e^(w m / 2)),
// is smallest; of equals the smaller. This is the maximum-likelihood slope of a logistic model of
// the true bit given m, the one nearest to the truth in relative entropy; its condition,
//   sum of m wrong(m) = sum of m (right(m) + wrong(m)) / (1 + e^(w m / 2)),
// makes the expected magnitude at disagreements right. So each magnitude counts by m^2 times the
// chance that a disagreement happens there, which is where a list is won or lost, and a saturated
// magnitude that is all but certain does not spoil the small ones.
//
// Where a node is perfect, nothing but the largest weight is right, and where it is useless,
// 0: a disagreement there is a coin toss, and a weight of 1 would charge half of all paths for it.
// A node of length messages counts as useless where the two densities of its bit differ by less
// than 1e-10 / length in total variation: then no weight beats 0 by more than 1e-10 nats times half
// of the largest LLR that it stands for.
#pragma once

#include "polar/arithmetic.h"
#include "polar/frozen_set.h"
#include "polar/metric_weights.h"

namespace frostline {

// A block whose right path must fork at an index of the never-fork set is lost; at most this
// share of the blocks.
constexpr double kDefaultNeverForkBound = 1e-3;

// never_forks: the open indices with the smallest error probabilities, as many as keep their sum
// at most never_fork_bound (near ties settled as for freezing: of equals the higher index first).
// Ranges: 0 < p < 0.5, 0 <= never_fork_bound <= 1 (InputError otherwise). REQUIRES: arithmetic is
// planes (std::invalid_argument otherwise). One pass over the tree, O(N 4^W) time and 10 N bytes
// besides the sorting of the indices; uses oneTBB, and the result does not depend on the number of
// threads.
MetricWeights metric_weights(const FrozenSet& frozen, double p, const Arithmetic& arithmetic,
                             double never_fork_bound = kDefaultNeverForkBound);

}  // namespace frostline
