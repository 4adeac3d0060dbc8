// What the receiver's decoder is given for an error pattern.
#pragma once

#include "polar/code.h"
#include "polar/syndrome.h"

namespace frostline::testing {

// The public values of an error pattern at their places: what the two ends' messages differ by.
inline BitString difference_of(const Code& code, const BitString& errors) {
  const SyndromeFormer former(code.frozen, code.precoding);
  BitString rows = errors;
  former.to_public_rows(rows.words(), 1);
  for (std::size_t i = 0; i < rows.size(); ++i) {
    if (!code.frozen.is_frozen(i)) rows.set(i, false);
  }
  return rows;
}

}  // namespace frostline::testing
