// What every construction yields: how likely each index of u is to be decided wrongly by SC.
//
// A plain value that construct produces and selection consumes; decoders never see it.
#pragma once

#include <string_view>
#include <vector>

namespace frostline {

enum class ReliabilityKind {
  upper_bound,  // rigorous: not below the leaf's error probability in exact arithmetic
  lower_bound,  // rigorous: not above it
  exact,        // the leaf's error probability in the arithmetic that it was made for
  estimate,     // near it, without a proof
  order_only,   // only the order of the values means anything
};

struct Reliability {
  // N entries: natural logarithm of the error probability of index i (at most 0, -infinity
  // allowed), given that all earlier indices are known.
  std::vector<double> log_error_probability;
  ReliabilityKind kind = ReliabilityKind::estimate;
};

// "upper-bound", "lower-bound", "exact-union", "estimate", "order-only": what a union over open
// indices is called when it predicts a FER.
std::string_view prediction_kind(ReliabilityKind kind);

}  // namespace frostline
