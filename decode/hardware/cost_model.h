// What a hardware decoder costs, by published formulas: cycles, memory, comparators of
// semi-parallel SC and list decoders that visit every index, and cycles of decoders that prune the
// tree.
//
// [1] C. Leroux, A. J. Raymond, G. Sarkis, W. J. Gross, "A semi-parallel successive-cancellation
//     decoder for polar codes", IEEE Trans. SP 61(2), 2013.
// [2] A. Balatsoukas-Stimming, M. Bastani Parizi, A. Burg, "LLR-based successive cancellation list
//     decoding of polar codes", IEEE Trans. SP 63(19), 2015.
// [3] G. Sarkis, P. Giard, A. Vardy, C. Thibeault, W. J. Gross, "Fast polar decoders: algorithm and
//     implementation", IEEE JSAC 32(5), 2014.
// [4] S. A. Hashemi, C. Condo, W. J. Gross, "Fast and flexible successive-cancellation list
// decoders
//     for polar codes", IEEE Trans. SP 65(21), 2017.
//
// Everything goes in and comes out as plain values. What the model leaves out: kCostModelLimits.
#pragma once

#include <cstdint>
#include <optional>

#include "decode/hardware/node_schedule.h"
#include "polar/frozen_set.h"

namespace frostline {

// How the L best of 2L path metrics are found [2]: a full radix-2L sorter takes them in any order;
// a pruned one wants the list sorted, for which it spends a cycle after every run of frozen
// indices.
enum class Sorter { full, pruned };

struct HardwareSetup {
  unsigned processing_elements = 64;  // P, of each path: f or g of P positions a cycle; 1 or more
  unsigned list = 1;                  // L, 1 or more; 1 is SC
  Sorter sorter = Sorter::full;       // of no account for SC
  unsigned llr_bits = 6;              // Q, sign included: of messages below the root; 1 or more
  // Q_c. On a BSC the channel LLR has one magnitude, so that its sign says all.
  unsigned channel_llr_bits = 1;
  // M of [2]; by default the worst case log2 N + Q - 1.
  std::optional<unsigned> metric_bits;
};

struct HardwareMemory {
  std::uint64_t channel_llr_bits;   // N Q_c
  std::uint64_t internal_llr_bits;  // L (N-1) Q
  std::uint64_t path_bits;          // L N
  std::uint64_t metric_bits;        // L M; 0 for SC

  std::uint64_t total_bits() const {
    return channel_llr_bits + internal_llr_bits + path_bits + metric_bits;
  }
};

struct HardwareFigures {
  std::uint64_t plain_cycles;   // every index visited
  std::uint64_t pruned_cycles;  // by the pruned node program
  std::uint64_t comparators;    // of the sorter; 0 for SC
  HardwareMemory memory;
};

// All functions throw std::invalid_argument on a setup out of range.

// 2N + (N/P) log2(N/(4P)) where P is a power of two up to N/2 [1, eq. (7)]; any P: the sum over all
// f and g of their positions over P, rounded up.
std::uint64_t plain_sc_cycles(BlockLength block_length, unsigned processing_elements);

// SC + K, K the number of open indices, and with a pruned sorter a cycle for every run of frozen
// indices [2, section V].
std::uint64_t plain_list_cycles(const FrozenSet& frozen, unsigned processing_elements,
                                Sorter sorter);

// L (2L-1) for a full sorter, (L-1)^2 for a pruned one [2].
std::uint64_t sorter_comparators(unsigned list, Sorter sorter);

// Cycles of one visited node, those of its halves not counted. N_v positions take N_v/(2P) cycles
// (rounded up) to read or write [3]:
//   all-frozen  N_v/(2P), to write its partial sums (SC) or charge the paths (list)
//   all-open    N_v/(2P)
//   repetition  N_v/(2P) to add and as much to write [3]
//   parity      N_v/(2P) + 1, the last to mend the least reliable position [3]
//   mixed       f and g, N_v/(2P) each; SC needs neither for an all-frozen half
// A single index takes none by itself: it is decided as its message is made. With a list each
// decision that forks takes a cycle more: L-1 at an all-open node at most, L at a parity node
// (never more than N_v) [4], one at a repetition node.
std::uint64_t node_cycles(const ScheduledNode& node, unsigned processing_elements, unsigned list);

// The sum over all visited nodes; with a list and a pruned sorter a cycle more for every run of
// frozen indices, which is more than a run inside a node that is settled at once would need.
std::uint64_t pruned_cycles(const NodeSchedule& schedule, const FrozenSet& frozen,
                            const HardwareSetup& setup);

HardwareMemory hardware_memory(BlockLength block_length, const HardwareSetup& setup);

HardwareFigures hardware_figures(const FrozenSet& frozen, const HardwareSetup& setup);

// Time of one block, and key bits a second of decoders that take one block after the other.
// REQUIRES: clock_mhz > 0.
double latency_us(std::uint64_t cycles, double clock_mhz);
double throughput_mbit_s(BlockLength block_length, std::uint64_t cycles, double clock_mhz);

// What stands in no figure, in sentences.
extern const char* const kCostModelLimits;

}  // namespace frostline
