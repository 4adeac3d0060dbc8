// The hardware model against the worked values that the papers print.
#include <gtest/gtest.h>

#include <filesystem>

#include "decode/exchange/streams.h"
#include "decode/hardware/cost_model.h"
#include "polar/design.h"
#include "tests/support/polarized_frozen_set.h"

namespace frostline {
namespace {

// Half of 1024 indices frozen, in as many runs as asked.
FrozenSet half_frozen_in_runs(std::size_t runs) {
  BitString mask(1024);
  for (std::size_t run = 0; run + 1 < runs; ++run) mask.set(2 * run, true);
  for (std::size_t i = 0; i < 512 - (runs - 1); ++i) mask.set(2 * runs + i, true);
  return FrozenSet(BlockLength(1024), mask);
}

// A. Balatsoukas-Stimming, M. Bastani Parizi, A. Burg, IEEE Trans. SP 63(19), 2015: (1024,512), 64
// processing elements: SC 2080 cycles (formula of Leroux et al., IEEE Trans. SP 61(2), 2013); list
// decoding 2592 with a full sorter, 2649 with a pruned one and 57 runs of frozen indices.
TEST(HardwareCost, CyclesAreThoseThatThePapersPrint) {
  EXPECT_EQ(plain_sc_cycles(BlockLength(1024), 64), 2080U);
  EXPECT_EQ(plain_sc_cycles(BlockLength(2048), 64), 4192U);
  EXPECT_EQ(plain_sc_cycles(BlockLength(4096), 64), 8448U);
  const FrozenSet frozen = half_frozen_in_runs(57);
  ASSERT_EQ(frozen.frozen_count(), 512U);
  ASSERT_EQ(frozen.runs().size(), 57U);
  EXPECT_EQ(plain_list_cycles(frozen, 64, Sorter::full), 2592U);
  EXPECT_EQ(plain_list_cycles(frozen, 64, Sorter::pruned), 2649U);
}

// The same paper: 847 MHz and 2592 cycles give 335 Mb/s of coded bits.
TEST(HardwareCost, ThroughputIsWhatThePaperPrints) {
  EXPECT_NEAR(throughput_mbit_s(BlockLength(1024), 2592, 847), 335, 0.5);
  EXPECT_DOUBLE_EQ(latency_us(2592, 864), 3);
}

// The same paper: N = 1024, L = 4, Q = 6, M = 8.
TEST(HardwareCost, MemoryIsWhatThePaperPrints) {
  HardwareSetup setup;
  setup.list = 4;
  setup.llr_bits = 6;
  setup.channel_llr_bits = 6;
  setup.metric_bits = 8;
  const HardwareMemory memory = hardware_memory(BlockLength(1024), setup);
  EXPECT_EQ(memory.internal_llr_bits, 24552U);
  EXPECT_EQ(memory.path_bits, 4096U);
  EXPECT_EQ(memory.metric_bits, 32U);
  EXPECT_EQ(memory.channel_llr_bits, 6144U);
  EXPECT_EQ(memory.total_bits(), 24552U + 4096 + 32 + 6144);
  setup.metric_bits.reset();  // worst case log2 N + Q - 1 = 15
  EXPECT_EQ(hardware_memory(BlockLength(1024), setup).metric_bits, 60U);
  EXPECT_EQ(sorter_comparators(4, Sorter::full), 28U);
  EXPECT_EQ(sorter_comparators(4, Sorter::pruned), 9U);
}

// Leroux et al. 2013, eq. (7), for every power of two up to N/2; 2N - 2 cycles at N/2 are what the
// fully parallel decoder takes.
TEST(HardwareCost, CyclesFollowTheFormulaForEveryPowerOfTwo) {
  for (const unsigned n : {3U, 7U, 12U, 20U}) {
    const BlockLength length = BlockLength::from_log2(n);
    for (unsigned p = 0; p < n; ++p) {
      const auto levels = static_cast<std::int64_t>(n) - 2 - p;
      const auto expected = 2 * static_cast<std::int64_t>(length.bits()) +
                            static_cast<std::int64_t>(length.bits() >> p) * levels;
      EXPECT_EQ(static_cast<std::int64_t>(plain_sc_cycles(length, 1U << p)), expected);
    }
    EXPECT_EQ(plain_sc_cycles(length, 1U << (n - 1)), 2 * length.bits() - 2);
  }
}

// G. Sarkis et al., IEEE JSAC 32(5), 2014: repetition N_v/(2P) to add and as much to write, parity
// N_v/(2P) + c; S. A. Hashemi et al., IEEE Trans. SP 65(21), 2017: min(L-1, N_v) forks at an
// all-open node, min(L, N_v) at a parity node (value from memory).
TEST(HardwareCost, NodesTakeThePublishedCycles) {
  const auto cycles = [](NodeType type, unsigned level, unsigned list) {
    return node_cycles({type, level, 0}, 16, list);
  };
  EXPECT_EQ(cycles(NodeType::repetition, 8, 1), 16U);
  EXPECT_EQ(cycles(NodeType::parity, 8, 1), 9U);
  EXPECT_EQ(cycles(NodeType::all_open, 8, 1), 8U);
  EXPECT_EQ(cycles(NodeType::all_open, 8, 8), 8U + 7);
  EXPECT_EQ(cycles(NodeType::all_open, 2, 8), 1U + 4);
  EXPECT_EQ(cycles(NodeType::parity, 8, 8), 9U + 8);
  EXPECT_EQ(cycles(NodeType::parity, 2, 8), 2U + 4);
  EXPECT_EQ(cycles(NodeType::repetition, 8, 8), 16U + 1);
  EXPECT_EQ(cycles(NodeType::all_open, 0, 1), 0U);
  EXPECT_EQ(cycles(NodeType::all_open, 0, 2), 1U);
}

TEST(HardwareCost, PruningNeverCostsCyclesOnShippedDesigns) {
  std::size_t designs = 0;
  for (const auto& entry : std::filesystem::recursive_directory_iterator(
           std::string(FROSTLINE_SOURCE_DIR) + "/designs")) {
    const std::string path = entry.path().string();
    if (path.find(".design.json") == std::string::npos) continue;
    ++designs;
    const FrozenSet frozen = design_from_json(read_file(path), path).code.frozen;
    const NodeSchedule schedule = node_schedule(frozen);
    for (const unsigned list : {1U, 2U, 8U, 32U}) {
      for (const unsigned elements : {1U, 16U, 64U, 100U}) {
        for (const Sorter sorter : {Sorter::full, Sorter::pruned}) {
          HardwareSetup setup;
          setup.processing_elements = elements;
          setup.list = list;
          setup.sorter = sorter;
          const std::uint64_t plain = list > 1 ? plain_list_cycles(frozen, elements, sorter)
                                               : plain_sc_cycles(frozen.block_length(), elements);
          EXPECT_LE(pruned_cycles(schedule, frozen, setup), plain) << path << ' ' << list;
        }
      }
    }
  }
  EXPECT_GT(designs, 100U);
}

TEST(HardwareCost, WrongSetupsAreRefused) {
  EXPECT_THROW(plain_sc_cycles(BlockLength(8), 0), std::invalid_argument);
  EXPECT_THROW(sorter_comparators(0, Sorter::full), std::invalid_argument);
  HardwareSetup setup;
  setup.llr_bits = 0;
  EXPECT_THROW(hardware_memory(BlockLength(8), setup), std::invalid_argument);
}

TEST(NodeSchedule, CoversEveryIndexOnceWithTheTypeOfItsMask) {
  const FrozenSet frozen = testing::polarized_frozen_set(BlockLength(1024), 0.3, 500);
  const NodeSchedule schedule = node_schedule(frozen);
  std::size_t next = 0;
  for (const ScheduledNode& node : schedule.nodes) {
    ASSERT_EQ(node.offset % node.length(), 0U);
    if (node.type == NodeType::mixed) continue;
    ASSERT_EQ(node.offset, next);
    next += node.length();
    const std::string mask = bits_to_text(frozen.mask().slice(node.offset, node.length()));
    std::string expected(node.length(), node.type == NodeType::all_open ? '0' : '1');
    if (node.type == NodeType::repetition) expected.back() = '0';
    if (node.type == NodeType::parity) expected = "1" + std::string(node.length() - 1, '0');
    ASSERT_EQ(mask, expected);
  }
  EXPECT_EQ(next, 1024U);
  std::size_t counted = 0;
  for (const auto& [type, levels] : count_nodes(schedule)) {
    for (const auto& [level, count] : levels) counted += count;
  }
  EXPECT_EQ(counted, schedule.nodes.size());
}

// A mask small enough to prune by hand.
TEST(NodeSchedule, PrunesAsAPersonWould) {
  const FrozenSet frozen(BlockLength(16), bits_from_text("1111 1110 1110 1000", "mask"));
  std::string text;
  for (const ScheduledNode& node : node_schedule(frozen).nodes) {
    text += std::string(node_type_name(node.type)) + '@' + std::to_string(node.offset) + '+' +
            std::to_string(node.length()) + ' ';
  }
  EXPECT_EQ(text, "mixed@0+16 repetition@0+8 mixed@8+8 repetition@8+4 parity@12+4 ");
}

}  // namespace
}  // namespace frostline
