// List decoding in planes:2 and planes:3, paths and blocks side by side in the bytes of a vector.
//
// A byte is a path of a block, and its bits are 8 consecutive positions. A row of 64 bytes holds L
// paths of 64/L blocks; a node has one row for each of its bytes of positions and each plane
// (sign and magnitudes), so f and g are the logic of the SC decoder (decode/lanes). All blocks
// share the tree, so there is no divergence. A fork permutes the paths of every block by one
// shuffle of a row, and nothing is copied: a node returns its composed permutation, which its
// parent applies when it next loads its own messages, and to the result of its first half.
//
// I. Tal, A. Vardy, "List Decoding of Polar Codes", IEEE Trans. IT 61(5), 2015; path metric: A.
// Balatsoukas-Stimming, M. Bastani Parizi, A. Burg, IEEE Trans. SP 63(19), 2015, with the weights
// of polar/metric_weights.h. Forks of all-open and parity nodes in the code domain, least reliable
// position first: S. A. Hashemi, C. Condo, W. J. Gross, "Fast and Flexible Successive-Cancellation
// List Decoders for Polar Codes", IEEE Trans. SP 65(21), 2017.
//
// What differs from the reference (decode/reference/list_decoder.h), and why the words chosen may
// differ where metrics are close: metrics are bytes of 1/8 nat, relative to the best path of the
// block, and stop at 255; repetition, parity and all-open nodes cost and fork by the weight of the
// node rather than of its leaves; an all-open node whose indices never fork costs nothing. With L =
// 1 nothing differs: it equals decode/reference/successive_cancellation.h bit for bit, with
// precoding too. The result is the same on every target of Google Highway and for every number of
// lanes.
#pragma once

#include <tbb/enumerable_thread_specific.h>

#include <memory>

#include "decode/batch_decoder.h"
#include "decode/list/list_program.h"
#include "polar/arithmetic.h"

namespace frostline {

constexpr unsigned kLargestFastList = 32;

class ListDecoder : public BatchDecoder {
 public:
  // Whether there is such a decoder: planes:2 or planes:3, L a power of two from 1 to 32.
  static bool serves(const Arithmetic& arithmetic, unsigned list);

  // weights: of this N; may be null where list is 1. REQUIRES: serves(arithmetic, list), and the
  // weights (std::invalid_argument otherwise).
  ListDecoder(const Code& code, const Arithmetic& arithmetic, unsigned list,
              const MetricWeights* weights);

  // Memory: 96 N bytes a thread, or 48 N with fewer than 4 rows of lanes, and N/8 for each block
  // that is decoded in step, and N lanes bits; kept for the next batch.
  void decode(const BatchDifference& difference, Span<std::uint64_t> error_rows) const override;

 private:
  struct Scratch {
    KeyBytes group;   // messages and sums of the blocks that are decoded in step
    KeyWords blocks;  // the batch, block after block
    KeyBytes checks;
  };

  ListProgram program_;
  mutable tbb::enumerable_thread_specific<Scratch> scratch_;
};

}  // namespace frostline
