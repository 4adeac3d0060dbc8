// SC with one rule broken, as hardware gets it wrong: what golden vectors must tell from the truth.
//
// Random errors alone hardly show some of these faults: where sums saturate, all messages mostly
// agree and only their sign counts. So golden vectors are searched for cases that do.
#pragma once

#include <string_view>
#include <vector>

#include "polar/arithmetic.h"
#include "polar/bits.h"
#include "polar/frozen_set.h"

namespace frostline {

enum class Fault {
  zero_is_positive,  // planes: a result of magnitude 0 loses its sign
  zero_decides_one,  // integer: an LLR of 0 decides 1
  wrapping_sum,      // g wraps around in place of saturating
};

// "zero-is-positive", "zero-decides-one", "wrapping-sum".
std::string_view fault_name(Fault fault);

// The faults that hardware of an arithmetic can have. Exact arithmetic has none.
std::vector<Fault> possible_faults(const Arithmetic& arithmetic);

// The error pattern that a decoder with this fault finds. difference: N bits, the value of u at
// each frozen index. Throws std::invalid_argument on a fault that the arithmetic cannot have. O(N
// log N).
BitString decode_with_fault(const FrozenSet& frozen, const Arithmetic& arithmetic, Fault fault,
                            const BitString& difference);

}  // namespace frostline
