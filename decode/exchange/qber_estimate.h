// The QBER of blocks from their public bits alone, whether or not any of them decodes.
//
// What it is for: when nearly all blocks fail, reconcile says what it looks like: a QBER far above
// the design's, with the estimate, or strings that do not belong together (a slip by some bits,
// another key). And blocks with many errors fail more often, so that the errors of accepted blocks
// alone give too low a QBER; this estimate has no such bias.
//
// How: an all-frozen node of the decoding tree, at prefix a of m bits, whose indices all show plain
// u, tells its 2^(n-m) partial sums. Each of them sums w = 2^(m - popcount(a)) positions of the
// error pattern, no two of them the same ones, and is 1 with probability q = (1 - (1-2p)^w) / 2 (R.
// Gallager, "Low-Density Parity-Check Codes", 1963, lemma 4.1). So the numbers of bits and of ones
// for each w give a likelihood of p. It is a composite one: it treats bits of different nodes as
// independent, though they share positions. The maximum is consistent all the same, and the
// interval is widened by what the shared positions do, which the tree tells exactly (C. Varin, N.
// Reid, D. Firth, Statistica Sinica 21, 2011, section 2).
#pragma once

#include <array>
#include <cstdint>
#include <vector>

#include "polar/block_length.h"
#include "polar/frozen_set.h"
#include "polar/precoding.h"
#include "polar/span.h"

namespace frostline {

// Public difference bits that sum 2^k positions each. Sums only: any order of adding gives the
// same counts.
struct DifferenceCounts {
  std::array<std::uint64_t, BlockLength::kMaxLog2 + 1> bits{};
  std::array<std::uint64_t, BlockLength::kMaxLog2 + 1> ones{};
  std::uint64_t blocks = 0;

  DifferenceCounts& operator+=(const DifferenceCounts& other);
};

// Counts the differences of one code. Immutable after construction, so any number of threads may
// share it.
class DifferenceCounter {
 public:
  DifferenceCounter(const FrozenSet& frozen, Precoding precoding);

  // difference_rows: words_for(N lanes) words, bit i lanes + l is d_i of block l; open indices are
  // ignored. counted: how many of the lanes count; the bits of the others must be 0.
  // REQUIRES: lanes a power of two from 1 to 512, counted <= lanes (std::invalid_argument
  // otherwise).
  DifferenceCounts count(Span<const std::uint64_t> difference_rows, unsigned lanes,
                         unsigned counted) const;
  DifferenceCounts count(Span<const std::uint64_t> difference_rows, unsigned lanes) const {
    return count(difference_rows, lanes, lanes);
  }

  // The variance of the derivative of the log likelihood of p over what it would be if no two
  // bits shared a position, at least 1. REQUIRES: 0 < p < 0.5.
  double variance_ratio(const DifferenceCounts& counts, double p) const;

 private:
  // A largest all-frozen node of plain indices.
  struct Node {
    std::uint32_t prefix;
    std::uint32_t prefix_bits;  // m
    std::uint32_t log2_weight;  // m - popcount(prefix)
  };
  // How many ordered pairs of bits of one block sum 2^first and 2^second positions, of which they
  // share 2^shared; a bit with itself is one of them. Pairs that share none do not matter.
  struct SharedPositions {
    unsigned first;
    unsigned second;
    unsigned shared;
    double pairs;
  };

  std::vector<SharedPositions> shared_positions() const;

  BlockLength block_length_;
  std::vector<Node> nodes_;
};

struct QberEstimate {
  // Maximum of the likelihood, 0 to 0.5; 0.5 where there is nothing to go by.
  double qber = 0.5;
  // 95 %, approximately.
  double low = 0;
  double high = 0.5;
  // Nothing tells the QBER from 0.5: unrelated strings, or so many errors that the sums are as good
  // as random; low says from which QBER on, and high is 0.5. About one in a million unrelated pairs
  // is missed.
  bool looks_unrelated = true;
};

// counts: the sum of counter's over all batches. Looks at every pair of up to 8192 nodes: a
// fraction of a second.
QberEstimate estimate_qber(const DifferenceCounter& counter, const DifferenceCounts& counts);

}  // namespace frostline
