// What the fast list decoder has to know of a code besides the tree itself: the kind of every node
// of whole bytes of u, and what penalties cost at each weight.
#pragma once

#include <array>
#include <cstdint>
#include <vector>

#include "polar/code.h"
#include "polar/metric_weights.h"

namespace frostline {

// Path metrics are counted in eighths of a nat, a quarter of the half nat of the weights, in bytes:
// the best path of a block has 0, and 255 is a path that is as good as dead.
constexpr unsigned kUnitsPerHalfNat = 4;
// Corrections of a node are added up in 64ths of a nat.
constexpr unsigned kCorrectionSteps = 8;

// The costs of one metric weight.
struct WeightCosts {
  // Of a fork that flips a bit of magnitude v, v from 0 to 14: two magnitudes may add up.
  alignas(16) std::array<std::uint8_t, 16> flip;
  // Of a single frozen or decided bit; index magnitude + 8 where it disagrees with the sign. At
  // most 127, so that the best path survives any.
  alignas(16) std::array<std::uint8_t, 16> single;
  // Of a disagreement with each magnitude plane set, in metric units.
  std::array<std::uint16_t, 3> disagreement;
  // ln(1 + e^-x) by thresholds, in correction steps: what a magnitude of 0 costs more than 1, one
  // of at most 1 more than 2 and 3 on average, one of at most 3 more than the larger ones.
  std::array<std::uint16_t, 3> correction;
};

enum class ListNode : std::uint8_t {
  frozen,
  open,        // all-open, no index of it forks
  open_forks,  // all-open, with forks
  mixed
};

struct ListProgram {
  // weights: null with one path alone. planes: 2 or 3.
  ListProgram(const Code& code, const MetricWeights* weights, unsigned planes, unsigned list);

  ListNode node(unsigned log2_bytes, std::size_t first_byte) const {
    return nodes[(bytes + first_byte) >> log2_bytes];
  }
  const WeightCosts& costs_of(unsigned log2_node, std::size_t first) const {
    return costs[weights[(8 * bytes + first) >> log2_node]];
  }

  unsigned log2_length;
  std::size_t bytes;  // N / 8
  unsigned planes;
  unsigned list;
  unsigned check_bits;
  PrecodingSchedule schedule;
  bool precoded;
  std::vector<ListNode> nodes;            // in heap order; leaves are bytes of u
  std::vector<std::uint8_t> never_forks;  // a byte of flags for a byte of u
  std::vector<std::uint8_t> weights;      // MetricWeights::nodes, or zeros
  std::vector<WeightCosts> costs;         // by weight
};

}  // namespace frostline
