// Exact density evolution of the very decoder that will run: planes:W or integer:Q:A.
//
// The messages of such a decoder take few values, so their joint distribution with the true bit is
// a short table that f and g turn into the next one without loss: T. Richardson and R. Urbanke,
// "The capacity of low-density parity-check codes under message-passing decoding", IEEE Trans. IT
// 47(2), 2001; for polar codes R. Mori and T. Tanaka, IEEE Commun. Lett. 13(7), 2009. All positions
// of a node come from disjoint channel positions, hence are independent and alike, and nodes are
// shared by all indices with the same prefix.
#pragma once

#include "polar/arithmetic.h"
#include "polar/block_length.h"
#include "polar/reliability.h"

namespace frostline {

// ln of the probability that index i is decided wrongly by that arithmetic given that all earlier
// indices are known; their sum over the open indices bounds the FER of SC. kind: exact, to
// rounding; values below 1e-190 are upper bounds, and values within 1e-10 of 1/2 count as 1/2.
// Ranges: 0 < p < 0.5 (InputError otherwise). REQUIRES: a kind of arithmetic other than exact,
// which has no finite table (std::invalid_argument; see construct/degrading_merge.h for it). O(N
// 4^W) time for planes, O(N V^2) for integer with V reachable values; uses oneTBB, and the result
// does not depend on the number of threads.
Reliability density_evolution(BlockLength block_length, double p, const Arithmetic& arithmetic);

}  // namespace frostline
