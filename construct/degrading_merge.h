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

constexpr unsigned kDefaultMergeLetters = 16;

// kind: upper_bound, with respect to maximum likelihood with ties counted half, which exact SC
// never exceeds where the bits of an open index are uniform. Ranges: 0 < p < 0.5; letters (mu) even
// from 4 to 1024 (InputError otherwise). Uses oneTBB; the result does not depend on the number of
// threads.
Reliability degrading_merge(BlockLength block_length, double p,
                            unsigned letters = kDefaultMergeLetters);

// kind: lower_bound. The same ranges.
Reliability upgrading_merge(BlockLength block_length, double p,
                            unsigned letters = kDefaultMergeLetters);

}  // namespace frostline
