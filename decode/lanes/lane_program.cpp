#include "decode/lanes/lane_program.h"

#include <algorithm>

namespace frostline {
namespace {

// Kinds of all nodes of 8 indices and more, in heap order: the root is node 1, the halves of node v
// are 2v and 2v + 1, and nodes leaves + j are those of 8 indices.
class Kinds {
 public:
  explicit Kinds(Span<const std::uint8_t> masks) : leaves_(masks.size()), kinds_(2 * leaves_) {
    for (std::size_t j = 0; j < leaves_; ++j) {
      kinds_[leaves_ + j] = masks[j] == 0xFF ? NodeKind::all_frozen
                            : masks[j] == 0  ? NodeKind::all_open
                                             : NodeKind::mixed;
    }
    for (std::size_t node = leaves_ - 1; node > 0; --node) {
      const NodeKind left = kinds_[2 * node];
      kinds_[node] = left == kinds_[2 * node + 1] ? left : NodeKind::mixed;
    }
  }
  NodeKind operator[](std::size_t node) const { return kinds_[node]; }
  bool is_leaf(std::size_t node) const { return node >= leaves_; }

 private:
  std::size_t leaves_;
  std::vector<NodeKind> kinds_;
};

void append_leaf(std::uint8_t mask, std::vector<std::uint8_t>& codes) {
  const auto* const found = std::find(std::begin(kLeafPatterns), std::end(kLeafPatterns), mask);
  codes.push_back(static_cast<std::uint8_t>(found - std::begin(kLeafPatterns)));
  if (codes.back() == kAnyLeaf) codes.push_back(mask);
}

}  // namespace

LaneProgram compile_lane_program(const FrozenSet& frozen) {
  const std::size_t leaves = frozen.block_length().bits() >> kLeafLog2;
  std::vector<std::uint8_t> masks(leaves);
  for (std::size_t i = 0; i < frozen.block_length().bits(); ++i) {
    if (frozen.is_frozen(i)) masks[i / 8] |= static_cast<std::uint8_t>(1U << (i % 8));
  }
  const Kinds kinds(masks);
  LaneProgram program{frozen.block_length(), kinds[1], {}};
  std::vector<std::size_t> open_nodes = {1};  // still to be visited, the next one last
  while (!open_nodes.empty()) {
    const std::size_t node = open_nodes.back();
    open_nodes.pop_back();
    if (kinds[node] != NodeKind::mixed) continue;
    if (kinds.is_leaf(node)) {
      append_leaf(masks[node - leaves], program.codes);
      continue;
    }
    program.codes.push_back(node_code(kinds[2 * node], kinds[2 * node + 1]));
    open_nodes.push_back(2 * node + 1);
    open_nodes.push_back(2 * node);
  }
  return program;
}

}  // namespace frostline
