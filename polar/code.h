// What both ends of a link must share, and only that: block length, frozen set, precoding, check
// bits. Two designs with the same code can serve the two ends of one link.
#pragma once

#include "polar/digest.h"
#include "polar/frozen_set.h"
#include "polar/precoding.h"

namespace frostline {

struct Code {
  FrozenSet frozen;
  Precoding precoding = Precoding::none;
  unsigned check_bits = 0;  // c: 0, 6, 8, 11, 16 or 24

  BlockLength block_length() const { return frozen.block_length(); }
  // M + c: public bits of one block.
  std::size_t leakage_bits() const { return frozen.frozen_count() + check_bits; }
};

// SHA-256 over the text of designs/FORMATS.md, "code_sha256".
Sha256 code_sha256(const Code& code);

}  // namespace frostline
