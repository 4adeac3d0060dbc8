// The frozen set: which of the N indices of u are made public.
#pragma once

#include <cstdint>
#include <string>
#include <string_view>
#include <vector>

#include "polar/bits.h"
#include "polar/block_length.h"

namespace frostline {

class FrozenSet {
 public:
  // mask: N bits, 1 means frozen. Throws InputError when its size is not N.
  FrozenSet(BlockLength block_length, BitString mask);

  BlockLength block_length() const { return block_length_; }
  const BitString& mask() const { return mask_; }
  bool is_frozen(std::size_t i) const { return mask_[i]; }
  // M, from 0 to N.
  std::size_t frozen_count() const { return frozen_count_; }

  // A run of neighbouring frozen indices: first .. first + count - 1.
  struct Run {
    std::uint32_t first;
    std::uint32_t count;
  };
  // All maximal runs, ascending. Gathering a syndrome copies run by run.
  const std::vector<Run>& runs() const { return runs_; }

  // The mask in hexadecimal: N / 4 digits, digit k covers 4k..4k+3, index 4k most significant.
  std::string to_hex() const { return bits_to_hex(mask_); }

  friend bool operator==(const FrozenSet& a, const FrozenSet& b) { return a.mask_ == b.mask_; }
  friend bool operator!=(const FrozenSet& a, const FrozenSet& b) { return !(a == b); }

 private:
  BlockLength block_length_;
  BitString mask_;
  std::size_t frozen_count_;
  std::vector<Run> runs_;
};

enum class MaskFormat { text, hex, packed };
// Throws InputError on another word than text, hex or packed.
MaskFormat parse_mask_format(std::string_view word);
// Reads a mask as a user's file holds it. Throws InputError, with the name in front, when it does
// not hold exactly N bits in that format (white space and a trailing line feed are allowed in text
// and hex).
FrozenSet parse_mask(std::string_view contents, MaskFormat format, BlockLength block_length,
                     std::string_view name);

}  // namespace frostline
