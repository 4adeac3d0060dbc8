// Precoding of frozen bits ("dynamic frozen bits"): what is made public at some frozen indices is
// u_i plus a fixed linear function of earlier open bits.
//
// The message stays the syndrome of a linear code of the same size, so it leaks no more; a list
// decoder profits because a wrong decision soon contradicts the public bits. Idea: P. Trifonov and
// V. Miloslavskaya, "Polar subcodes", IEEE JSAC 34(2), 2016; convolutional precoding: E. Arikan,
// "From sequential decoding to channel polarization and back again", arXiv 1908.09594, 2019.
//
// "state8", version 1. Byte j of u holds u_8j .. u_8j+7 and is frozen, open or mixed. A state S of
// 8 bits starts at 0. For j = 0, 1, ...: if byte j is mixed, or frozen with a next byte that is not
// frozen, the public value of its frozen index 8j+k is u_8j+k plus row k of Y times S; every other
// frozen index shows plain u. Then, if byte j is mixed, or open with a next byte that is not open,
// S becomes A S plus byte j of u with its frozen places zeroed. Bit k of S, of a byte and of a row
// is the coefficient of x^k; u_8j+k is bit k. A is multiplication by x modulo
// x^8+x^4+x^3+x^2+1. The last byte has no next byte: it counts as followed by its own kind.
#pragma once

#include <cstdint>
#include <string_view>
#include <vector>

#include "polar/bits.h"
#include "polar/frozen_set.h"

namespace frostline {

enum class Precoding { none, state8 };
// "none", "state8".
std::string_view precoding_name(Precoding precoding);
// Throws InputError on another word.
Precoding parse_precoding(std::string_view word);

// Row k of Y as a mask over the bits of S.
extern const std::uint8_t kState8Rows[8];

// A S + open_byte.
std::uint8_t state8_advance(std::uint8_t state, std::uint8_t open_byte);
// Y S: bit k is row k of Y times S.
std::uint8_t state8_offsets(std::uint8_t state);

// What precoding does at each byte of u, fixed by the frozen set alone.
class PrecodingSchedule {
 public:
  PrecodingSchedule(const FrozenSet& frozen, Precoding precoding);

  // Whether the frozen indices of byte j show u plus Y S rather than plain u.
  bool adds_state(std::size_t j) const { return flags_[j] & 1U; }
  // Whether S moves on after byte j.
  bool moves_state(std::size_t j) const { return flags_[j] & 2U; }
  // The frozen places of byte j, bit k for index 8j + k.
  std::uint8_t frozen_places(std::size_t j) const { return frozen_places_[j]; }
  // Bytes at which either happens, ascending. Empty without precoding.
  const std::vector<std::uint32_t>& active_bytes() const { return active_; }

 private:
  std::vector<std::uint8_t> flags_;
  std::vector<std::uint8_t> frozen_places_;
  std::vector<std::uint32_t> active_;
};

// Turns u into public values at the frozen indices, in place, for all lanes; open indices keep u.
// It is its own inverse, because S depends on open bits alone. rows: words_for(N lanes) words.
void apply_precoding(const PrecodingSchedule& schedule, unsigned lanes, Span<std::uint64_t> rows);

}  // namespace frostline
