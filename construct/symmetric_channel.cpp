#include "construct/symmetric_channel.h"

#include <algorithm>
#include <cmath>
#include <cstdint>
#include <limits>
#include <queue>

namespace frostline {
namespace {

// Letters whose ratios differ by less than rounding makes of one value.
constexpr double kSameRatio = 1e-14;

Letter letter_of(double a, double b) {
  // An underflow to zero only happens to letters that no sum over a channel can see.
  return {a, b, a > 0 ? b / a : 1};
}

void sort_and_join(SymmetricChannel& w) {
  std::sort(w.begin(), w.end(), [](const Letter& x, const Letter& y) { return x.ratio > y.ratio; });
  std::size_t kept = 0;
  for (std::size_t i = 1; i < w.size(); ++i) {
    if (w[kept].ratio - w[i].ratio <= kSameRatio * w[i].ratio) {
      w[kept].given0 += w[i].given0;
      w[kept].given1 += w[i].given1;
    } else {
      w[++kept] = w[i];
    }
  }
  w.resize(kept + 1);
}

// Conditional entropy, in nats, of a letter with a = 1 and b = ratio.
double unit_entropy(double ratio) {
  return ratio > 0 ? (1 + ratio) * std::log1p(ratio) - ratio * std::log(ratio) : 0;
}

double entropy(const Letter& letter) { return letter.given0 * unit_entropy(letter.ratio); }

Letter joined(const Letter& x, const Letter& y) {
  return letter_of(x.given0 + y.given0, x.given1 + y.given1);
}

// A doubly linked list over the letters with the cost of taking each one out, cheapest first.
// Costs that have changed leave stale entries in the queue, told by their version.
class Removal {
 public:
  explicit Removal(std::size_t count)
      : previous_(count), next_(count), version_(count, 0), gone_(count, false) {
    for (std::size_t i = 0; i < count; ++i) {
      previous_[i] = static_cast<std::uint32_t>(i == 0 ? count : i - 1);
      next_[i] = static_cast<std::uint32_t>(i + 1);
    }
  }

  std::size_t end() const { return next_.size(); }
  std::size_t previous(std::size_t i) const { return previous_[i]; }
  std::size_t next(std::size_t i) const { return next_[i]; }
  bool is_gone(std::size_t i) const { return gone_[i]; }

  void set_cost(std::size_t i, double cost) {
    queue_.push({cost, static_cast<std::uint32_t>(i), ++version_[i]});
  }
  void void_cost(std::size_t i) { ++version_[i]; }
  std::size_t cheapest() {
    while (queue_.top().version != version_[queue_.top().index]) queue_.pop();
    const std::size_t index = queue_.top().index;
    queue_.pop();
    return index;
  }
  void remove(std::size_t i) {
    gone_[i] = true;
    ++version_[i];
    if (previous_[i] != end()) next_[previous_[i]] = next_[i];
    if (next_[i] != end()) previous_[next_[i]] = previous_[i];
  }

 private:
  struct Entry {
    double cost;
    std::uint32_t index;
    std::uint32_t version;
    bool operator<(const Entry& other) const {
      return cost != other.cost ? cost > other.cost : index > other.index;
    }
  };
  std::vector<std::uint32_t> previous_;
  std::vector<std::uint32_t> next_;
  std::vector<std::uint32_t> version_;
  std::vector<bool> gone_;
  std::priority_queue<Entry> queue_;
};

void keep_rest(SymmetricChannel& w, const Removal& removal) {
  std::size_t kept = 0;
  for (std::size_t i = 0; i < w.size(); ++i) {
    if (!removal.is_gone(i)) w[kept++] = w[i];
  }
  w.resize(kept);
}

}  // namespace

SymmetricChannel bsc_channel(double p) { return {letter_of(1 - p, p)}; }

void minus_step(const SymmetricChannel& w, SymmetricChannel& result) {
  result.clear();
  for (std::size_t i = 0; i < w.size(); ++i) {
    for (std::size_t j = 0; j <= i; ++j) {
      const double twice = j < i ? 2 : 1;
      const double a = w[i].given0 * w[j].given0 + w[i].given1 * w[j].given1;
      const double b = w[i].given0 * w[j].given1 + w[i].given1 * w[j].given0;
      result.push_back(letter_of(twice * a, twice * b));
    }
  }
  sort_and_join(result);
}

void plus_step(const SymmetricChannel& w, SymmetricChannel& result) {
  result.clear();
  for (std::size_t i = 0; i < w.size(); ++i) {
    for (std::size_t j = 0; j <= i; ++j) {
      const double twice = j < i ? 2 : 1;
      result.push_back(
          letter_of(twice * w[i].given0 * w[j].given0, twice * w[i].given1 * w[j].given1));
      const double a = twice * w[j].given0 * w[i].given1;
      const double b = twice * w[j].given1 * w[i].given0;
      result.push_back(a < b ? letter_of(b, a) : letter_of(a, b));
    }
  }
  sort_and_join(result);
}

void degrade(SymmetricChannel& w, std::size_t max_letters) {
  if (w.size() <= max_letters) return;
  // The cost of a letter is that of joining it with the next one.
  Removal removal(w.size());
  const auto price = [&](std::size_t i) {
    const std::size_t next = removal.next(i);
    if (next == removal.end()) return removal.void_cost(i);
    const double loss = entropy(joined(w[i], w[next])) - entropy(w[i]) - entropy(w[next]);
    removal.set_cost(i, loss);
  };
  for (std::size_t i = 0; i < w.size(); ++i) price(i);
  for (std::size_t left = w.size(); left > max_letters; --left) {
    const std::size_t i = removal.cheapest();
    const std::size_t next = removal.next(i);
    w[i] = joined(w[i], w[next]);
    removal.remove(next);
    price(i);
    if (removal.previous(i) != removal.end()) price(removal.previous(i));
  }
  keep_rest(w, removal);
}

void upgrade(SymmetricChannel& w, std::size_t max_letters) {
  if (w.size() <= max_letters) return;
  // (a, b) = (x, x r1) + (y, y r3) with the neighbours' ratios r1 > r > r3.
  Removal removal(w.size());
  const auto share_of_previous = [&](std::size_t i) {
    const double r1 = w[removal.previous(i)].ratio;
    const double r3 = w[removal.next(i)].ratio;
    return w[i].given0 * ((w[i].ratio - r3) / (r1 - r3));
  };
  const auto price = [&](std::size_t i) {
    if (removal.previous(i) == removal.end() || removal.next(i) == removal.end()) return;
    const double x = share_of_previous(i);
    const double y = w[i].given0 - x;
    removal.set_cost(i, entropy(w[i]) - x * unit_entropy(w[removal.previous(i)].ratio) -
                            y * unit_entropy(w[removal.next(i)].ratio));
  };
  for (std::size_t i = 0; i < w.size(); ++i) price(i);
  for (std::size_t left = w.size(); left > max_letters; --left) {
    const std::size_t i = removal.cheapest();
    const std::size_t previous = removal.previous(i);
    const std::size_t next = removal.next(i);
    const double x = share_of_previous(i);
    const double y = w[i].given0 - x;
    w[previous].given0 += x;
    w[previous].given1 += x * w[previous].ratio;
    w[next].given0 += y;
    w[next].given1 += y * w[next].ratio;
    removal.remove(i);
    price(previous);
    price(next);
  }
  keep_rest(w, removal);
}

double error_probability(const SymmetricChannel& w) {
  double sum = 0;
  for (const Letter& letter : w) sum += letter.given1;
  return sum;
}

double minus_error_probability(const SymmetricChannel& w) {
  const double error = error_probability(w);
  return 2 * error * (1 - error);
}

double plus_error_probability(const SymmetricChannel& w) {
  double sum = 0;
  for (std::size_t i = 0; i < w.size(); ++i) {
    double row = 0;  // letters j < i have the larger ratio, so (a_j b_i) is the less likely one
    for (std::size_t j = 0; j < i; ++j) {
      row += w[i].given1 * w[j].given1 + w[j].given0 * w[i].given1;
    }
    sum += 2 * row + w[i].given1 * w[i].given1 + w[i].given0 * w[i].given1;
  }
  return sum;
}

double conditional_entropy_nats(const SymmetricChannel& w) {
  double sum = 0;
  for (const Letter& letter : w) sum += entropy(letter);
  return sum;
}

double mutual_information_nats(const SymmetricChannel& w) {
  double sum = 0;
  for (const Letter& letter : w) {
    // In t = tanh(LLR / 2) = 1 - 2 crossover: (1+t)/2 ln(1+t) + (1-t)/2 ln(1-t).
    const double t = (1 - letter.ratio) / (1 + letter.ratio);
    const double series = t * t / 2 * (1 + t * t / 6 * (1 + t * t * 0.4));
    const double information =
        t < 1e-3 ? series
                 : (1 + t) / 2 * std::log1p(t) + (t < 1 ? (1 - t) / 2 * std::log1p(-t) : 0);
    sum += (letter.given0 + letter.given1) * information;
  }
  return sum;
}

double bhattacharyya_parameter(const SymmetricChannel& w) {
  double sum = 0;
  for (const Letter& letter : w) sum += 2 * letter.given0 * std::sqrt(letter.ratio);
  return sum;
}

double bhattacharyya_complement(const SymmetricChannel& w) {
  double sum = 0;
  for (const Letter& letter : w) {
    const double root = std::sqrt(letter.ratio);
    const double difference = (1 - letter.ratio) / (1 + root);
    sum += letter.given0 * difference * difference;
  }
  return sum;
}

}  // namespace frostline
