#include "decode/lanes/lane_program.h"

namespace frostline {

LaneProgram compile_lane_program(const FrozenSet& frozen) {
  const std::size_t length = frozen.block_length().bits();
  LaneProgram program{frozen.block_length(), std::vector<NodeKind>(2 * length)};
  for (std::size_t i = 0; i < length; ++i) {
    program.kinds[length + i] = frozen.is_frozen(i) ? NodeKind::all_frozen : NodeKind::all_open;
  }
  for (std::size_t node = length - 1; node > 0; --node) {
    const NodeKind left = program.kinds[2 * node];
    program.kinds[node] = left == program.kinds[2 * node + 1] ? left : NodeKind::mixed;
  }
  return program;
}

}  // namespace frostline
