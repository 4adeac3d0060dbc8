// All messages of a block that SC has decoded, level by level: what a pipeline is debugged with.
//
// Nothing is pruned: all-frozen and all-open subtrees have messages too. Level k holds N messages:
// those of the node of 2^k indices from first on stand at first .. first + 2^k - 1. Level 0 is what
// the indices are decided by, level n the channel.
#pragma once

#include <cstdint>
#include <string>
#include <vector>

#include "polar/arithmetic.h"
#include "polar/bits.h"
#include "polar/frozen_set.h"

namespace frostline {

// A message as hardware holds it: planes:W the sign as bit W above the magnitude; integer:Q:A two's
// complement in Q bits. In planes the nodes from index 0 on have one constant message (a positive
// channel LLR, half a unit), which is never stored:
constexpr std::uint16_t kConstantMessage = 0xFFFF;

// Bits of a stored message: W + 1 or Q. Throws std::invalid_argument for exact arithmetic, as the
// other functions do.
unsigned stored_message_bits(const Arithmetic& arithmetic);

struct MessageDump {
  std::vector<std::vector<std::uint16_t>> levels;  // [k][i], n + 1 of them
  std::uint64_t zero_messages = 0;                 // of magnitude 0, at all levels
  std::uint64_t zero_decisions = 0;                // open indices decided by one: ties
  std::uint64_t saturated_sums = 0;                // results of g that were clipped
};

// u: the N decisions of SC, as decode_sc gives them; they determine all partial sums.
MessageDump dump_messages(const FrozenSet& frozen, const Arithmetic& arithmetic,
                          const BitString& u);

// Where a message differs first, in the order in which a decoder makes them.
struct MessagePlace {
  unsigned level;
  std::size_t index;  // first + j: message j of the node that starts at first
};

// Visits the nodes of the whole tree in decoding order until visit(level, first) returns true.
// Returns whether one did.
template <typename Visit>
bool visit_nodes(BlockLength block_length, const Visit& visit) {
  struct Node {
    unsigned level;
    std::size_t first;
  };
  std::vector<Node> to_visit = {{block_length.log2(), 0}};  // the next one last
  while (!to_visit.empty()) {
    const Node node = to_visit.back();
    to_visit.pop_back();
    if (visit(node.level, node.first)) return true;
    if (node.level == 0) continue;
    to_visit.push_back({node.level - 1, node.first + (std::size_t{1} << (node.level - 1))});
    to_visit.push_back({node.level - 1, node.first});
  }
  return false;
}

}  // namespace frostline
