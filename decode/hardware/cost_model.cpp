#include "decode/hardware/cost_model.h"

#include <algorithm>
#include <stdexcept>

namespace frostline {
namespace {

std::uint64_t divided_up(std::uint64_t value, std::uint64_t by) { return (value + by - 1) / by; }

void require_processing_elements(unsigned processing_elements) {
  if (processing_elements == 0) throw std::invalid_argument("no processing elements");
}

void require_list(unsigned list) {
  if (list == 0) throw std::invalid_argument("list size 0");
}

// Decisions of a node at which paths fork, one after the other.
std::uint64_t forking_decisions(const ScheduledNode& node, std::uint64_t list) {
  if (list == 1) return 0;
  const std::uint64_t length = node.length();
  switch (node.type) {
    case NodeType::all_open:
      return std::min(list - 1, length);
    case NodeType::parity:
      return std::min(list, length);
    case NodeType::repetition:
      return 1;
    case NodeType::all_frozen:
    case NodeType::mixed:
      break;
  }
  return 0;
}

}  // namespace

const char* const kCostModelLimits =
    "The model counts f, g, decisions and sorting. It leaves out: loading the syndrome difference "
    "and unloading the result, check bits, forming the syndrome, pipeline stages that a high clock "
    "needs, conflicts between memory ports, control and program memory. Partial sums are taken to "
    "be ready in the cycle of the decision that completes them, as a combinational network gives "
    "them. It says nothing about area and power, nor which clock P, L and Q allow.";

std::uint64_t plain_sc_cycles(BlockLength block_length, unsigned processing_elements) {
  require_processing_elements(processing_elements);
  const std::uint64_t length = block_length.bits();
  std::uint64_t cycles = 0;
  // N / (2h) nodes have halves of h positions, and make the messages of both.
  for (std::uint64_t half = 1; half < length; half *= 2) {
    cycles += length / half * divided_up(half, processing_elements);
  }
  return cycles;
}

std::uint64_t plain_list_cycles(const FrozenSet& frozen, unsigned processing_elements,
                                Sorter sorter) {
  const BlockLength block_length = frozen.block_length();
  const std::uint64_t open = block_length.bits() - frozen.frozen_count();
  const std::uint64_t sorting = sorter == Sorter::pruned ? frozen.runs().size() : 0;
  return plain_sc_cycles(block_length, processing_elements) + open + sorting;
}

std::uint64_t sorter_comparators(unsigned list, Sorter sorter) {
  require_list(list);
  if (list == 1) return 0;
  const std::uint64_t l = list;
  return sorter == Sorter::full ? l * (2 * l - 1) : (l - 1) * (l - 1);
}

std::uint64_t node_cycles(const ScheduledNode& node, unsigned processing_elements, unsigned list) {
  require_processing_elements(processing_elements);
  require_list(list);
  const std::uint64_t forks = forking_decisions(node, list);
  // A list of one path needs no fork; any other charges it even for a single open index.
  if (node.level == 0) return node.type == NodeType::all_open && list > 1 ? 1 : 0;
  const std::uint64_t pass = divided_up(node.length(), 2 * std::uint64_t{processing_elements});
  switch (node.type) {
    case NodeType::all_frozen:
    case NodeType::all_open:
      return pass + forks;
    case NodeType::repetition:
      return 2 * pass + forks;
    case NodeType::parity:
      return pass + 1 + forks;
    case NodeType::mixed:
      break;
  }
  const bool needs_f = list > 1 || !node.left_frozen;
  const bool needs_g = list > 1 || !node.right_frozen;
  return (needs_f ? pass : 0) + (needs_g ? pass : 0);
}

std::uint64_t pruned_cycles(const NodeSchedule& schedule, const FrozenSet& frozen,
                            const HardwareSetup& setup) {
  const bool sorts_runs = setup.list > 1 && setup.sorter == Sorter::pruned;
  std::uint64_t cycles = sorts_runs ? frozen.runs().size() : 0;
  for (const ScheduledNode& node : schedule.nodes) {
    cycles += node_cycles(node, setup.processing_elements, setup.list);
  }
  return cycles;
}

HardwareMemory hardware_memory(BlockLength block_length, const HardwareSetup& setup) {
  require_list(setup.list);
  if (setup.llr_bits == 0 || setup.channel_llr_bits == 0) {
    throw std::invalid_argument("LLRs without bits");
  }
  const std::uint64_t length = block_length.bits();
  const std::uint64_t list = setup.list;
  const std::uint64_t metric_bits =
      setup.metric_bits.value_or(block_length.log2() + setup.llr_bits - 1);
  return {length * setup.channel_llr_bits, list * (length - 1) * setup.llr_bits, list * length,
          list > 1 ? list * metric_bits : 0};
}

HardwareFigures hardware_figures(const FrozenSet& frozen, const HardwareSetup& setup) {
  const unsigned elements = setup.processing_elements;
  const std::uint64_t plain = setup.list > 1 ? plain_list_cycles(frozen, elements, setup.sorter)
                                             : plain_sc_cycles(frozen.block_length(), elements);
  return {plain, pruned_cycles(node_schedule(frozen), frozen, setup),
          sorter_comparators(setup.list, setup.sorter),
          hardware_memory(frozen.block_length(), setup)};
}

double latency_us(std::uint64_t cycles, double clock_mhz) {
  return static_cast<double>(cycles) / clock_mhz;
}

double throughput_mbit_s(BlockLength block_length, std::uint64_t cycles, double clock_mhz) {
  return clock_mhz * static_cast<double>(block_length.bits()) / static_cast<double>(cycles);
}

}  // namespace frostline
