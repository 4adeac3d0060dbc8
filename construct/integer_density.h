// The joint density of an integer LLR and its true bit in integer:Q:A, and its polar steps.
//
// Here an LLR of 0 has no sign and decides 0, which is right or wrong with the true bit; and in the
// error domain true bits are not uniform. So the bit is part of the table: there is no symmetry to
// save it.
#pragma once

#include <cstddef>
#include <cstdint>
#include <vector>

namespace frostline {

// The magnitudes that messages of integer:Q:A can take, ascending, 0 first: from the channel level
// A all that sums, differences and saturation at 2^(Q-1)-1 reach.
class IntegerValues {
 public:
  // REQUIRES: Q from 3 to 15, A from 1 to 2^(Q-1)-1 (std::invalid_argument otherwise).
  IntegerValues(unsigned llr_bits, unsigned channel_level);

  std::size_t count() const { return magnitudes_.size(); }
  // Places in the list of A, of min(x + y, largest) and of |x - y|, given those of x and y.
  std::size_t channel() const { return channel_; }
  std::size_t sum(std::size_t x, std::size_t y) const {
    const std::uint32_t value = magnitudes_[x] + magnitudes_[y];
    return place_[value < largest_ ? value : largest_];
  }
  std::size_t difference(std::size_t x, std::size_t y) const {
    return place_[x > y ? magnitudes_[x] - magnitudes_[y] : magnitudes_[y] - magnitudes_[x]];
  }

 private:
  std::uint32_t largest_;
  std::size_t channel_ = 0;
  std::vector<std::uint32_t> magnitudes_;
  std::vector<std::uint32_t> place_;
};

class IntegerDensity {
 public:
  // The g below a node whose messages are all +A and whose bits are 1 with probability error.
  static IntegerDensity below_chain(const IntegerValues& values, double error);

  IntegerDensity f() const;
  IntegerDensity g() const;
  double error() const;
  double f_error() const { return f().error(); }
  double g_error() const { return g().error(); }
  double doubt() const;
  double bias() const;

 private:
  explicit IntegerDensity(const IntegerValues& values)
      : values_(&values), table_(4 * values.count(), 0.0) {}

  // Probability of a bit together with the LLR (negative ? -1 : 1) times the magnitude at a place.
  // At magnitude 0 only negative == false is used.
  double& at(bool bit, bool negative, std::size_t place) {
    return table_[(std::size_t{bit} * 2 + std::size_t{negative}) * values_->count() + place];
  }
  double at(bool bit, bool negative, std::size_t place) const {
    return table_[(std::size_t{bit} * 2 + std::size_t{negative}) * values_->count() + place];
  }
  void add_zero(const IntegerDensity& parent);

  const IntegerValues* values_;
  std::vector<double> table_;
};

}  // namespace frostline
