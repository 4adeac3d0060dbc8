// What a list decoder of planes:W must know besides the code: what a unit of magnitude is worth,
// and where it need not fork.
//
// A magnitude of planes is no LLR: where the channel is noisy a unit stands for far less than the
// two channel LLRs that it is at the root, and a path metric of plain magnitudes ruins the list.
// The metric weight of a node is the true LLR of one unit of magnitude there. It is the receiver's
// own business, no part of the code: two ends need not agree on it. construct/metric_weights.h
// computes it; decoders only use it.
#pragma once

#include <cstddef>
#include <cstdint>
#include <vector>

#include "polar/bits.h"
#include "polar/block_length.h"

namespace frostline {

// The unit of weights and path metrics is half a nat: a path that is worse by x units is less
// probable by a factor of e^(x/2).
constexpr double kMetricUnitNats = 0.5;
// Weights saturate here: one unit of magnitude against a path is 15.5 nats then, a chance of 2 in
// 10 million, after which it is as good as dead.
constexpr unsigned kLargestMetricWeight = 31;

struct MetricWeights {
  BlockLength block_length;
  // 2N entries, each 0 to kLargestMetricWeight; entry (N + first) / 2^k is the weight of the node
  // of the 2^k indices from first on. So entry 1 is the root, N + i leaf i; entry 0 is not used.
  //
  // A bit that disagrees with the sign of a message of magnitude m at that node costs its path m
  // times the weight. Magnitude 0 costs nothing: its sign says nothing about the bit. On the nodes
  // that start at index 0, where nothing is stored and all messages are one positive channel LLR,
  // a bit of 1 costs the weight itself.
  std::vector<std::uint8_t> nodes;
  // N bits: 1 at the open indices where every path may follow the sign without forking.
  BitString never_forks;

  // REQUIRES: k <= n, first < N a multiple of 2^k.
  unsigned of_node(unsigned log2_length, std::size_t first) const {
    return nodes[(block_length.bits() + first) >> log2_length];
  }
  unsigned of_leaf(std::size_t i) const { return of_node(0, i); }
};

}  // namespace frostline
