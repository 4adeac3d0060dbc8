// Successive cancellation as textbooks have it, to measure the others by: recursive, one block,
// float LLRs, min-sum, no pruning. E. Arikan, IEEE Trans. IT 55(7), 2009, section VIII; LLR form of
// C. Leroux et al., IEEE Trans. SP 61(2), 2013, eq. (3), (4).
#pragma once

#include <algorithm>
#include <cmath>
#include <cstdint>
#include <vector>

#include "polar/bits.h"
#include "polar/frozen_set.h"

namespace frostline::bench {

class TextbookSc {
 public:
  explicit TextbookSc(const FrozenSet& frozen)
      : length_(frozen.block_length().bits()), frozen_(length_), llr_(2 * length_), x_(length_) {
    for (std::size_t i = 0; i < length_; ++i) frozen_[i] = frozen.is_frozen(i);
  }

  // difference: N public bits; open ones are ignored. Returns the error pattern, one bit a byte.
  const std::vector<std::uint8_t>& decode(const BitString& difference, float channel_llr) {
    for (std::size_t i = 0; i < length_; ++i) x_[i] = difference[i];
    std::fill_n(llr_.begin(), length_, channel_llr);
    node(llr_.data(), x_.data(), frozen_.data(), length_);
    return x_;
  }

 private:
  // llr: the node's messages, and behind them room for those below. x: public bits become partial
  // sums.
  static void node(float* llr, std::uint8_t* x, const std::uint8_t* frozen, std::size_t length) {
    if (length == 1) {
      if (!*frozen) *x = *llr < 0;
      return;
    }
    const std::size_t half = length / 2;
    float* const child = llr + length;
    for (std::size_t i = 0; i < half; ++i) {
      const float a = llr[i];
      const float b = llr[half + i];
      child[i] =
          std::copysign(1.0F, a) * std::copysign(1.0F, b) * std::min(std::abs(a), std::abs(b));
    }
    node(child, x, frozen, half);
    for (std::size_t i = 0; i < half; ++i) child[i] = llr[half + i] + (x[i] ? -llr[i] : llr[i]);
    node(child, x + half, frozen + half, half);
    for (std::size_t i = 0; i < half; ++i) x[i] ^= x[half + i];
  }

  std::size_t length_;
  std::vector<std::uint8_t> frozen_;
  std::vector<float> llr_;
  std::vector<std::uint8_t> x_;
};

}  // namespace frostline::bench
