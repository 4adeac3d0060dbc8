#include "construct/integer_density.h"

#include <algorithm>
#include <cmath>
#include <stdexcept>

namespace frostline {

IntegerValues::IntegerValues(unsigned llr_bits, unsigned channel_level) {
  if (llr_bits < 3 || llr_bits > 15) throw std::invalid_argument("LLR bits outside 3..15");
  largest_ = (1U << (llr_bits - 1)) - 1;
  if (channel_level < 1 || channel_level > largest_) {
    throw std::invalid_argument("channel level outside the range of an LLR");
  }
  constexpr std::uint32_t kUnreached = 0xFFFFFFFFU;
  place_.assign(largest_ + 1, kUnreached);
  // Breadth first: each new magnitude meets itself and all that were found before.
  std::vector<std::uint32_t> found{0};
  const auto find = [&](std::uint32_t magnitude) {
    if (place_[magnitude] != kUnreached) return;
    place_[magnitude] = 0;
    found.push_back(magnitude);
  };
  place_[0] = 0;
  find(channel_level);
  for (std::size_t i = 0; i < found.size() && found.size() <= largest_; ++i) {
    for (std::size_t j = 0; j <= i; ++j) {
      const std::uint32_t x = std::max(found[i], found[j]);
      const std::uint32_t y = std::min(found[i], found[j]);
      find(std::min(x + y, largest_));
      find(x - y);
    }
  }
  std::sort(found.begin(), found.end());
  magnitudes_ = std::move(found);
  for (std::size_t i = 0; i < magnitudes_.size(); ++i) {
    place_[magnitudes_[i]] = static_cast<std::uint32_t>(i);
  }
  channel_ = place_[channel_level];
}

IntegerDensity IntegerDensity::below_chain(const IntegerValues& values, double error) {
  IntegerDensity density(values);
  // b + (1 - 2 bit) a with a = b = A: 2A where the true bits agree, 0 where they do not.
  const std::size_t twice = values.sum(values.channel(), values.channel());
  density.at(false, false, twice) = (1 - error) * (1 - error);
  density.at(true, false, twice) = error * error;
  density.at(false, false, 0) = density.at(true, false, 0) = error * (1 - error);
  return density;
}

// Either magnitude is 0: so is the result.
void IntegerDensity::add_zero(const IntegerDensity& parent) {
  double zero[2];
  double rest[2];
  for (const bool bit : {false, true}) {
    zero[bit] = parent.at(bit, false, 0);
    rest[bit] = 0;
    for (const bool negative : {false, true}) {
      for (std::size_t m = 1; m < values_->count(); ++m) rest[bit] += parent.at(bit, negative, m);
    }
  }
  at(false, false, 0) =
      zero[0] * zero[0] + zero[1] * zero[1] + 2 * (zero[0] * rest[0] + zero[1] * rest[1]);
  at(true, false, 0) = 2 * (zero[0] * zero[1] + zero[0] * rest[1] + zero[1] * rest[0]);
}

IntegerDensity IntegerDensity::f() const {
  IntegerDensity child(*values_);
  child.add_zero(*this);
  // Class k = 2 bit + negative; classes of the two messages add up modulo 2 in both parts.
  double tails[4] = {0, 0, 0, 0};  // of magnitudes above m
  for (std::size_t m = values_->count() - 1; m > 0; --m) {
    double here[4];
    for (unsigned k = 0; k < 4; ++k) here[k] = at((k & 2U) != 0, (k & 1U) != 0, m);
    for (unsigned k = 0; k < 4; ++k) {
      double sum = 0;
      for (unsigned a = 0; a < 4; ++a) sum += here[a] * (here[a ^ k] + 2 * tails[a ^ k]);
      child.at((k & 2U) != 0, (k & 1U) != 0, m) = sum;
    }
    for (unsigned k = 0; k < 4; ++k) tails[k] += here[k];
  }
  return child;
}

IntegerDensity IntegerDensity::g() const {
  IntegerDensity child(*values_);
  const std::size_t count = values_->count();
  std::vector<double> first[2];  // the first message with its sign turned where the bits differ
  for (const bool bit : {false, true}) {
    for (const bool negative : {false, true}) {
      first[negative].assign(count, 0);
      for (std::size_t m = 0; m < count; ++m) {
        // A zero is stored as positive in both.
        const bool turned = m == 0 ? negative : !negative;
        first[negative][m] = at(bit, negative, m) + at(!bit, turned, m);
      }
    }
    for (const bool negative : {false, true}) {
      for (std::size_t y = 0; y < count; ++y) {
        const double second = at(bit, negative, y);
        if (second == 0) continue;
        for (std::size_t x = 0; x < count; ++x) {
          child.at(bit, negative, values_->sum(x, y)) += second * first[negative][x];
          // Opposite signs: the larger magnitude wins; zero is stored as positive.
          const bool sign = x > y ? !negative : (x < y && negative);
          child.at(bit, sign, values_->difference(x, y)) += second * first[!negative][x];
        }
      }
    }
  }
  // -0 is 0.
  for (const bool bit : {false, true}) {
    child.at(bit, false, 0) += child.at(bit, true, 0);
    child.at(bit, true, 0) = 0;
  }
  return child;
}

double IntegerDensity::error() const {
  double sum = 0;
  for (std::size_t m = 0; m < values_->count(); ++m) sum += at(true, false, m) + at(false, true, m);
  return sum;
}

double IntegerDensity::doubt() const { return error() + at(false, false, 0); }

double IntegerDensity::bias() const {
  double sum = 0;
  for (const bool negative : {false, true}) {
    for (std::size_t m = 0; m < values_->count(); ++m) {
      sum += std::abs(at(false, negative, m) - at(true, negative, m));
    }
  }
  return sum;
}

}  // namespace frostline
