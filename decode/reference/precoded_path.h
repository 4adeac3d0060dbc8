// The precoding state along one path of a decoder, in the error domain.
//
// The public bits of a block are linear in it, so d shows the error pattern's u in the same manner:
// d_i is u_i, or u_i plus a row of Y times the state of the decisions so far. A path is 8 bits.
#pragma once

#include <cstddef>
#include <cstdint>

#include "polar/precoding.h"
#include "polar/span.h"

namespace frostline {

class PrecodedPath {
 public:
  // The u_i that shows the public bit d_i. REQUIRES: i is frozen, all indices of earlier bytes have
  // been passed to decided.
  bool frozen_bit(const PrecodingSchedule& schedule, std::size_t i, bool public_bit) const {
    if (!schedule.adds_state(i / 8)) return public_bit;
    return public_bit != (((state8_offsets(state_) >> (i % 8)) & 1U) != 0);
  }

  // Indices first .. first + length - 1 have been decided; u holds all N decisions, one a byte.
  // REQUIRES: called in increasing order, for nodes of the tree, so that a range lies inside a
  // byte of u or consists of whole ones.
  void decided(const PrecodingSchedule& schedule, std::size_t first, std::size_t length,
               Span<const std::uint8_t> u) {
    const std::size_t end = first + length;
    if (end % 8 != 0) return;  // the state moves after a whole byte only
    for (std::size_t j = first / 8; j < end / 8; ++j) {
      if (!schedule.moves_state(j)) continue;
      unsigned byte = 0;
      for (std::size_t k = 0; k < 8; ++k) byte |= unsigned{u[8 * j + k]} << k;
      byte_decided(schedule, j, byte);
    }
  }

  // Byte j of u has been decided; bit k of byte is u_8j+k. REQUIRES: called for all bytes in
  // increasing order; those where the schedule does not move the state may be left out.
  void byte_decided(const PrecodingSchedule& schedule, std::size_t j, unsigned byte) {
    if (!schedule.moves_state(j)) return;
    const unsigned open_places = ~unsigned{schedule.frozen_places(j)};
    state_ = state8_advance(state_, static_cast<std::uint8_t>(byte & open_places));
  }

 private:
  std::uint8_t state_ = 0;
};

}  // namespace frostline
