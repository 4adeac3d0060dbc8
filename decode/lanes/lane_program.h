// What the tree walk of the lane decoder has to know of a frozen set: a byte for every node that it
// visits, in the order of its visits.
#pragma once

#include <cstdint>
#include <vector>

#include "polar/frozen_set.h"

namespace frostline {

enum class NodeKind : std::uint8_t { all_frozen, all_open, mixed };

// Nodes of 8 indices are the leaves of the walk. For these frozen sets (bit k for the k-th index)
// there are kernels made to measure; they are the ones that respect the order of reliabilities of
// every binary-input channel and that designs meet.
constexpr std::uint8_t kLeafPatterns[] = {0x01, 0x03, 0x07, 0x0F, 0x17, 0x1F, 0x3F, 0x7F};
constexpr unsigned kLeafPatternCount = sizeof(kLeafPatterns);
// Any other frozen set: its mask is the byte that follows.
constexpr std::uint8_t kAnyLeaf = kLeafPatternCount;
constexpr unsigned kLeafLog2 = 3;

// The kinds of a node's halves in one byte.
constexpr std::uint8_t node_code(NodeKind left, NodeKind right) {
  return static_cast<std::uint8_t>(static_cast<unsigned>(left) | static_cast<unsigned>(right) << 2);
}
constexpr NodeKind left_kind(std::uint8_t code) { return static_cast<NodeKind>(code & 3U); }
constexpr NodeKind right_kind(std::uint8_t code) { return static_cast<NodeKind>(code >> 2); }

struct LaneProgram {
  BlockLength block_length;
  NodeKind root;
  // Of every mixed node, parents before children and the first half before the second: node_code,
  // or for 8 indices the number of its pattern or kAnyLeaf and its mask.
  std::vector<std::uint8_t> codes;
};

LaneProgram compile_lane_program(const FrozenSet& frozen);

}  // namespace frostline
