// The pruned node program of a frozen set: which nodes of the decoding tree hardware visits, in
// which order, when whole subtrees with an easy code are settled at once.
//
// All-frozen and all-open nodes: A. Alamdar-Yazdi, F. R. Kschischang, "A simplified
// successive-cancellation decoder for polar codes", IEEE Commun. Letters 15(12), 2011; repetition
// and parity nodes: G. Sarkis, P. Giard, A. Vardy, C. Thibeault, W. J. Gross, IEEE JSAC 32(5),
// 2014.
//
// Precoding changes no type: the state of "state8" moves after open indices only, so that all
// frozen values of such a node are known when it is entered.
#pragma once

#include <cstddef>
#include <map>
#include <string_view>
#include <vector>

#include "polar/frozen_set.h"

namespace frostline {

enum class NodeType {
  all_frozen,
  all_open,
  repetition,  // all frozen but the last index
  parity,      // all open but the first index
  mixed,       // anything else: its halves are visited
};
// "all-frozen", "all-open", "repetition", "parity", "mixed".
std::string_view node_type_name(NodeType type);

struct ScheduledNode {
  NodeType type;
  unsigned level;            // k of its 2^k indices: n at the root, 0 at single indices
  std::size_t offset;        // its first index, natural order
  bool left_frozen = false;  // of a mixed node: its halves are all-frozen
  bool right_frozen = false;

  std::size_t length() const { return std::size_t{1} << level; }
};

// All visited nodes, a node before its halves and the first half before the second. The nodes that
// are not mixed cover every index once.
struct NodeSchedule {
  BlockLength block_length;
  std::vector<ScheduledNode> nodes;
};

NodeSchedule node_schedule(const FrozenSet& frozen);

// How many visited nodes there are of each type and level.
std::map<NodeType, std::map<unsigned, std::size_t>> count_nodes(const NodeSchedule& schedule);

}  // namespace frostline
