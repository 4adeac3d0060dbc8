// Binary-input symmetric channels with finitely many outputs, their polar steps, and the merging of
// outputs that keeps them few.
//
// Outputs come in mirrored pairs: y with probabilities (a, b) given 0 and 1, its mirror with (b,
// a). Only the one with a >= b is stored, as a Letter, so that a + b summed over all letters is 1.
// A letter is a BSC with crossover b / (a + b) that is used with probability a + b. Merging: I. Tal
// and A. Vardy, "How to construct polar codes", IEEE Trans. IT 59(10), 2013.
#pragma once

#include <cstddef>
#include <vector>

namespace frostline {

struct Letter {
  double given0;  // a
  double given1;  // b <= a
  // b / a, from 0 (certain) to 1 (an erasure).
  double ratio;
};

// Letters sorted by falling ratio.
using SymmetricChannel = std::vector<Letter>;

SymmetricChannel bsc_channel(double p);

// All letters of the two channels that one polar step makes of two uses of w, sorted, letters of
// equal ratio joined. E. Arikan, IEEE Trans. IT 55(7), 2009, eqs. (19) and (20).
void minus_step(const SymmetricChannel& w, SymmetricChannel& result);
void plus_step(const SymmetricChannel& w, SymmetricChannel& result);

// Reduces a channel to at most max_letters letters (>= 2) by joining neighbours, each time those
// that lose the least mutual information: the result is degraded with respect to w (Tal and Vardy's
// degrading merge).
void degrade(SymmetricChannel& w, std::size_t max_letters);
// Several times faster on long lists: neighbours that hardly differ are joined beforehand in one
// pass from left to right, and only what is left of them is degraded as above.
void degrade_quickly(SymmetricChannel& w, std::size_t max_letters);
// The same upwards: a letter is split into its two neighbours, each time the one that gains the
// least: the result is upgraded with respect to w (their upgrading merge of three letters).
void upgrade(SymmetricChannel& w, std::size_t max_letters);

// What maximum likelihood gets wrong, ties counted half: the sum of b.
double error_probability(const SymmetricChannel& w);
// Of the leaves of one more step, without forming it.
double minus_error_probability(const SymmetricChannel& w);
double plus_error_probability(const SymmetricChannel& w);
// H(input | output) in nats for a uniform input, and ln 2 minus it, each without cancellation.
double conditional_entropy_nats(const SymmetricChannel& w);
double mutual_information_nats(const SymmetricChannel& w);
// Z, the sum of 2 sqrt(a b), and 1 - Z, without cancellation.
double bhattacharyya_parameter(const SymmetricChannel& w);
double bhattacharyya_complement(const SymmetricChannel& w);

}  // namespace frostline
