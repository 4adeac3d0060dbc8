// The arithmetic of a decoder: exact, planes:W or integer:Q:A (see DEVELOPERS.md, "Arithmetics").
#pragma once

#include <string>
#include <string_view>

namespace frostline {

struct Arithmetic {
  enum class Kind { exact, planes, integer };

  Kind kind = Kind::exact;
  unsigned planes = 0;         // W, 2 to 7: magnitude bits of planes
  unsigned llr_bits = 0;       // Q, 3 to 15: bits of an integer LLR, sign included
  unsigned channel_level = 0;  // A, 1 to 2^(Q-1)-1: the channel LLR of integer arithmetic

  static Arithmetic exact() { return {}; }
  static Arithmetic planes_of(unsigned w) { return {Kind::planes, w, 0, 0}; }
  static Arithmetic integer_of(unsigned q, unsigned a) { return {Kind::integer, 0, q, a}; }

  friend bool operator==(const Arithmetic& a, const Arithmetic& b) {
    return a.kind == b.kind && a.planes == b.planes && a.llr_bits == b.llr_bits &&
           a.channel_level == b.channel_level;
  }
};

// "exact", "planes:3", "integer:6:8". parse throws InputError on any other word or range.
std::string to_string(const Arithmetic& arithmetic);
Arithmetic parse_arithmetic(std::string_view word);

}  // namespace frostline
