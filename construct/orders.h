// Orders of the indices that hold for any channel: no error probabilities, only who comes first.
//
// kind: order_only. What stands for ln P is a rank from -1/N (to freeze first) down to -1, so that
// selection works alike; its sums mean nothing.
#pragma once

#include <array>
#include <cstdint>

#include "polar/block_length.h"
#include "polar/reliability.h"

namespace frostline {

// 3GPP TS 38.212, Table 5.3.1.2-1: from the least to the most reliable index.
extern const std::array<std::uint16_t, 1024> kNrSequence;
constexpr unsigned kNrSequenceMaxLog2 = 10;

// The NR polar sequence. For N < 1024 the entries below N in their order (clause 5.3.1.2 there).
// Throws InputError when N is above 1024.
Reliability nr_sequence_order(BlockLength block_length);

// Polarization weight, the sum of b_j 2^(j/4) over the bits b_j of the index: G. He et al.,
// "Beta-expansion: a theoretical framework for fast and recursive construction of polar codes",
// GLOBECOM 2017. Larger is more reliable.
Reliability polarization_weight_order(BlockLength block_length);

}  // namespace frostline
