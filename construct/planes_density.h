// The density of a message of planes:W relative to its true bit, and its polar steps.
//
// Call a message relative when its sign is replaced by sign xor true bit: 0 right, 1 wrong. f and g
// act on relative messages as they do on messages, with bit 0 in g:
//   f: sign_a xor sign_b, against the bit bit_a xor bit_b, is wrong_a xor wrong_b; min of
//   magnitudes. g: the true left partial sum is bit_a xor bit_b, so t = sign_a xor sign_b xor bit
//   is
//      wrong_a xor wrong_b, and every result is stated as sign_b or its opposite, against bit_b.
// This holds at magnitude 0 too, where a result keeps the sign of b. So the density of relative
// messages is all that is needed, whatever the true bits are, and although in the error domain
// they are far from uniform: no symmetry of the channel is assumed.
#pragma once

#include <array>
#include <cmath>
#include <cstddef>

namespace frostline {

template <unsigned kPlanes>
class PlanesDensity {
 public:
  static constexpr std::size_t kLevels = std::size_t{1} << kPlanes;
  static constexpr std::size_t kLargest = kLevels - 1;

  // The g below a node whose messages are all one positive channel LLR (half a unit) and whose bits
  // are 1 with probability error: 0 or a whole unit, with the sign of b.
  static PlanesDensity below_chain(double error) {
    PlanesDensity density;
    density.right_[1] = (1 - error) * (1 - error);
    density.wrong_[1] = error * error;
    density.right_[0] = density.wrong_[0] = error * (1 - error);
    return density;
  }

  PlanesDensity f() const {
    PlanesDensity child;
    double right_tail = 0;  // of magnitudes above m
    double wrong_tail = 0;
    for (std::size_t m = kLevels; m-- > 0;) {
      // Differences of products of tails, without cancellation.
      child.right_[m] =
          right_[m] * (right_[m] + 2 * right_tail) + wrong_[m] * (wrong_[m] + 2 * wrong_tail);
      child.wrong_[m] = 2 * (right_[m] * (wrong_[m] + wrong_tail) + wrong_[m] * right_tail);
      right_tail += right_[m];
      wrong_tail += wrong_[m];
    }
    return child;
  }

  PlanesDensity g() const {
    PlanesDensity child;
    add_agreeing(right_, child.right_);
    add_agreeing(wrong_, child.wrong_);
    for (std::size_t i = 0; i < kLevels; ++i) {
      // One right at i, one wrong at j: the larger magnitude wins, b where they are equal.
      for (std::size_t j = 0; j < i; ++j) child.right_[i - j] += 2 * right_[i] * wrong_[j];
      for (std::size_t j = i + 1; j < kLevels; ++j) {
        child.wrong_[j - i] += 2 * right_[i] * wrong_[j];
      }
      child.right_[0] += right_[i] * wrong_[i];
      child.wrong_[0] += right_[i] * wrong_[i];
    }
    return child;
  }

  // Probability of a right, or wrong, message of each magnitude.
  const std::array<double, kLevels>& right() const { return right_; }
  const std::array<double, kLevels>& wrong() const { return wrong_; }

  double error() const { return sum(wrong_); }
  double f_error() const { return 2 * sum(right_) * sum(wrong_); }
  double g_error() const {
    const double wrong = sum(wrong_);
    double total = wrong * wrong;
    double right_below = 0;  // of magnitudes below j
    for (std::size_t j = 0; j < kLevels; ++j) {
      total += wrong_[j] * (2 * right_below + right_[j]);
      right_below += right_[j];
    }
    return total;
  }
  double doubt() const { return error(); }
  double bias() const {
    double total = 0;
    for (std::size_t m = 0; m < kLevels; ++m) total += std::abs(right_[m] - wrong_[m]);
    return total;
  }

 private:
  using Table = std::array<double, kLevels>;

  static double sum(const Table& table) {
    double total = 0;
    for (const double value : table) total += value;
    return total;
  }

  // Two messages of the same sign: magnitudes add up, saturating.
  static void add_agreeing(const Table& table, Table& result) {
    double saturated = 0;
    double tail = 0;  // of magnitudes above kLargest - i
    for (std::size_t i = 0; i < kLevels; ++i) {
      for (std::size_t j = 0; i + j < kLargest; ++j) result[i + j] += table[i] * table[j];
      tail += table[kLargest - i];
      saturated += table[i] * tail;
    }
    result[kLargest] += saturated;
  }

  Table right_{};
  Table wrong_{};
};

}  // namespace frostline
