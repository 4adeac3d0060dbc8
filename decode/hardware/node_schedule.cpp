#include "decode/hardware/node_schedule.h"

#include <cstdint>
#include <stdexcept>

namespace frostline {
namespace {

// Types of any node of a frozen set, in constant time.
class NodeTypes {
 public:
  explicit NodeTypes(const FrozenSet& frozen)
      : frozen_(frozen), frozen_before_(frozen.block_length().bits() + 1) {
    for (std::size_t i = 0; i + 1 < frozen_before_.size(); ++i) {
      frozen_before_[i + 1] = frozen_before_[i] + (frozen.is_frozen(i) ? 1 : 0);
    }
  }

  NodeType of(std::size_t offset, std::size_t length) const {
    const std::size_t frozen = frozen_before_[offset + length] - frozen_before_[offset];
    if (frozen == length) return NodeType::all_frozen;
    if (frozen == 0) return NodeType::all_open;
    if (frozen == length - 1 && !frozen_.is_frozen(offset + length - 1)) {
      return NodeType::repetition;
    }
    if (frozen == 1 && frozen_.is_frozen(offset)) return NodeType::parity;
    return NodeType::mixed;
  }

 private:
  const FrozenSet& frozen_;
  std::vector<std::uint32_t> frozen_before_;  // frozen indices below i
};

}  // namespace

std::string_view node_type_name(NodeType type) {
  switch (type) {
    case NodeType::all_frozen:
      return "all-frozen";
    case NodeType::all_open:
      return "all-open";
    case NodeType::repetition:
      return "repetition";
    case NodeType::parity:
      return "parity";
    case NodeType::mixed:
      return "mixed";
  }
  throw std::invalid_argument("unknown type of node");
}

NodeSchedule node_schedule(const FrozenSet& frozen) {
  const NodeTypes types(frozen);
  NodeSchedule schedule{frozen.block_length(), {}};
  struct Place {
    unsigned level;
    std::size_t offset;
  };
  std::vector<Place> to_visit = {{frozen.block_length().log2(), 0}};  // the next one last
  while (!to_visit.empty()) {
    const Place place = to_visit.back();
    to_visit.pop_back();
    const std::size_t length = std::size_t{1} << place.level;
    ScheduledNode node{types.of(place.offset, length), place.level, place.offset};
    if (node.type == NodeType::mixed) {
      const std::size_t half = length / 2;
      node.left_frozen = types.of(place.offset, half) == NodeType::all_frozen;
      node.right_frozen = types.of(place.offset + half, half) == NodeType::all_frozen;
      to_visit.push_back({place.level - 1, place.offset + half});
      to_visit.push_back({place.level - 1, place.offset});
    }
    schedule.nodes.push_back(node);
  }
  return schedule;
}

std::map<NodeType, std::map<unsigned, std::size_t>> count_nodes(const NodeSchedule& schedule) {
  std::map<NodeType, std::map<unsigned, std::size_t>> counts;
  for (const ScheduledNode& node : schedule.nodes) ++counts[node.type][node.level];
  return counts;
}

}  // namespace frostline
