// What the tree walk of the lane decoder has to know of a frozen set: the kind of every node.
#pragma once

#include <cstdint>
#include <vector>

#include "polar/frozen_set.h"

namespace frostline {

enum class NodeKind : std::uint8_t { all_frozen, all_open, mixed };

struct LaneProgram {
  BlockLength block_length;
  // Heap order: the root is node 1, the children of node v are 2v (first half) and 2v + 1.
  std::vector<NodeKind> kinds;
};

LaneProgram compile_lane_program(const FrozenSet& frozen);

}  // namespace frostline
