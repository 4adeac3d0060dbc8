// Rigorous bounds on every index's error probability on a BSC, by merging channel outputs.
//
// I. Tal and A. Vardy, "How to construct polar codes", IEEE Trans. IT 59(10), 2013. After each
// polar step the channel is reduced to mu output letters, downwards (degrading: upper bounds) or
// upwards (upgrading: lower bounds). Channels are shared by all indices with the same prefix, so
// that one pass over the tree of 2N nodes gives all N bounds.
#pragma once

#include "polar/block_length.h"
#include "polar/reliability.h"

namespace frostline {

constexpr unsigned kDefaultMergeLetters = 32;

// How letters are chosen on the degraded side. Both bounds are rigorous; quick is two to ten times
// faster, and its sums differ from those of greedy by about 1 % either way.
enum class Merging {
  greedy,  // as published: always the pair that loses the least
  quick,   // long lists are thinned by a pass that joins neighbours that hardly differ
};

// kind: upper_bound of what exact SC gets wrong, which is maximum likelihood given the earlier
// bits. Ranges: 0 < p < 0.5; letters (mu) even from 4 to 1024 (InputError otherwise). Uses oneTBB;
// the result does not depend on the number of threads.
Reliability degrading_merge(BlockLength block_length, double p,
                            unsigned letters = kDefaultMergeLetters,
                            Merging merging = Merging::quick);

// kind: lower_bound. The same ranges.
Reliability upgrading_merge(BlockLength block_length, double p,
                            unsigned letters = kDefaultMergeLetters);

}  // namespace frostline
