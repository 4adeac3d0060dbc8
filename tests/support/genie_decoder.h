// A successive cancellation decoder that is told the truth about all earlier indices, written from
// the rules of the arithmetics and from nothing else: the judge of density evolution.
//
// Both arithmetics work on plain numbers here. In planes a magnitude is counted in channel LLRs, so
// that the channel's is 1, all others are even, and saturation is at 2 (2^W - 1); a sign stands
// beside it.
#pragma once

#include <algorithm>
#include <cstddef>
#include <cstdlib>
#include <vector>

#include "polar/arithmetic.h"

namespace frostline::testing {

struct SignedMessage {
  bool negative;
  int magnitude;
};

inline SignedMessage f_rule(SignedMessage a, SignedMessage b) {
  return {a.negative != b.negative, std::min(a.magnitude, b.magnitude)};
}

inline SignedMessage planes_g_rule(SignedMessage a, SignedMessage b, bool bit, int largest) {
  const bool a_sign = a.negative != bit;
  if (a_sign == b.negative) return {b.negative, std::min(a.magnitude + b.magnitude, largest)};
  if (a.magnitude > b.magnitude) return {a_sign, a.magnitude - b.magnitude};
  return {b.negative, b.magnitude - a.magnitude};
}

inline SignedMessage integer_g_rule(SignedMessage a, SignedMessage b, bool bit, int largest) {
  const int x = a.negative != bit ? -a.magnitude : a.magnitude;
  const int y = b.negative ? -b.magnitude : b.magnitude;
  const int sum = std::clamp(x + y, -largest, largest);
  return {sum < 0, std::abs(sum)};
}

class GenieDecoder {
 public:
  explicit GenieDecoder(const Arithmetic& arithmetic)
      : planes_(arithmetic.kind == Arithmetic::Kind::planes),
        channel_(planes_ ? 1 : static_cast<int>(arithmetic.channel_level)),
        largest_(planes_ ? 2 * ((1 << arithmetic.planes) - 1)
                         : (1 << (arithmetic.llr_bits - 1)) - 1) {}

  // The decision at each index when the error pattern is x and all earlier u are known.
  std::vector<bool> decisions(const std::vector<bool>& x) const {
    std::vector<bool> found;
    std::vector<SignedMessage> messages(x.size(), SignedMessage{false, channel_});
    descend(messages, x, found);
    return found;
  }

 private:
  // x: the true bits of this node.
  void descend(const std::vector<SignedMessage>& messages, const std::vector<bool>& x,
               std::vector<bool>& found) const {
    if (x.size() == 1) {
      found.push_back(messages[0].negative && (planes_ || messages[0].magnitude > 0));
      return;
    }
    const std::size_t half = x.size() / 2;
    std::vector<SignedMessage> child(half);
    std::vector<bool> bits(half);
    for (std::size_t j = 0; j < half; ++j) {
      child[j] = f_rule(messages[j], messages[j + half]);
      bits[j] = x[j] != x[j + half];
    }
    descend(child, bits, found);
    for (std::size_t j = 0; j < half; ++j) {
      const auto rule = planes_ ? planes_g_rule : integer_g_rule;
      child[j] = rule(messages[j], messages[j + half], bits[j], largest_);
      bits[j] = x[j + half];
    }
    descend(child, bits, found);
  }

  bool planes_;
  int channel_;
  int largest_;
};

}  // namespace frostline::testing
