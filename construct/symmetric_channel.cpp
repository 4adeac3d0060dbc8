#include "construct/symmetric_channel.h"

#include <algorithm>
#include <cmath>
#include <cstdint>
#include <cstring>
#include <limits>

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

// 2 atanh(s) for |s| <= 0.172, to 1e-12.
double log_series(double s) {
  const double y = s * s;
  return 2 * s *
         (1 +
          y * (1.0 / 3 + y * (1.0 / 5 + y * (1.0 / 7 + y * (1.0 / 9 + y * (1.0 / 11 + y / 13))))));
}

// unit_entropy to about 1e-12: it only decides which letters are merged, never what they hold, and
// takes most of the time of a construction.
double quick_unit_entropy(double ratio) {
  constexpr double kLog2 = 0.69314718055994530942;
  constexpr double kRootHalf = 0.70710678118654752440;
  if (ratio < std::numeric_limits<double>::min()) return 0;
  const bool low = ratio < 0.4142;
  const double log1p =
      low ? log_series(ratio / (2 + ratio)) : kLog2 + log_series((ratio - 1) / (3 + ratio));
  std::uint64_t bits;
  std::memcpy(&bits, &ratio, sizeof bits);
  int exponent = static_cast<int>(bits >> 52U) - 1022;
  bits = (bits & 0xFFFFFFFFFFFFFU) | 0x3FE0000000000000U;
  double mantissa;  // in [1/2, 1)
  std::memcpy(&mantissa, &bits, sizeof mantissa);
  const bool small = mantissa < kRootHalf;
  mantissa = small ? 2 * mantissa : mantissa;
  exponent -= small ? 1 : 0;
  const double log = exponent * kLog2 + log_series((mantissa - 1) / (mantissa + 1));
  return (1 + ratio) * log1p - ratio * log;
}

double entropy(const Letter& letter) { return letter.given0 * unit_entropy(letter.ratio); }
double quick_entropy(const Letter& letter) {
  return letter.given0 * quick_unit_entropy(letter.ratio);
}

Letter joined(const Letter& x, const Letter& y) {
  return letter_of(x.given0 + y.given0, x.given1 + y.given1);
}

// The letters as a doubly linked list, with the cost of taking each one out in a tournament tree
// whose root is the cheapest.
class Removal {
 public:
  explicit Removal(std::size_t count) : count_(count), links_(count) {
    while (leaves_ < count) leaves_ *= 2;
    costs_.assign(leaves_, std::numeric_limits<double>::infinity());
    winners_.resize(2 * leaves_);
    for (std::size_t i = 0; i < count; ++i) {
      links_[i] = {static_cast<std::uint32_t>(i == 0 ? count : i - 1),
                   static_cast<std::uint32_t>(i + 1)};
    }
    for (std::size_t i = 0; i < leaves_; ++i) {
      winners_[leaves_ + i] = static_cast<std::uint32_t>(i);
    }
  }

  std::size_t end() const { return count_; }
  std::size_t previous(std::size_t i) const { return links_[i].previous; }
  std::size_t next(std::size_t i) const { return links_[i].next; }

  // First costs of all letters; then hold_contest once.
  void set_first_cost(std::size_t i, double cost) { costs_[i] = cost; }
  void hold_contest() {
    for (std::size_t node = leaves_ - 1; node > 0; --node) decide(node);
  }
  void set_cost(std::size_t i, double cost) {
    costs_[i] = cost;
    for (std::size_t node = (leaves_ + i) / 2; node > 0; node /= 2) decide(node);
  }
  std::size_t cheapest() const { return winners_[1]; }
  double cheapest_cost() const { return costs_[winners_[1]]; }
  void remove(std::size_t i) {
    const Link link = links_[i];
    if (link.previous != count_) links_[link.previous].next = link.next;
    if (link.next != count_) links_[link.next].previous = link.previous;
    set_cost(i, std::numeric_limits<double>::infinity());
  }
  // The letters left, in their order.
  void keep_rest(SymmetricChannel& w) const {
    std::size_t kept = 0;
    for (std::size_t i = 0; i != count_; i = links_[i].next) w[kept++] = w[i];
    w.resize(kept);
  }

 private:
  struct Link {
    std::uint32_t previous;
    std::uint32_t next;
  };
  void decide(std::size_t node) {
    const std::uint32_t left = winners_[2 * node];
    const std::uint32_t right = winners_[2 * node + 1];
    winners_[node] = costs_[right] < costs_[left] ? right : left;
  }

  std::size_t count_;
  std::size_t leaves_ = 1;
  std::vector<Link> links_;
  std::vector<double> costs_;
  std::vector<std::uint32_t> winners_;
};

std::vector<double> quick_entropies(const SymmetricChannel& w) {
  std::vector<double> entropies(w.size());
  for (std::size_t i = 0; i < w.size(); ++i) entropies[i] = quick_entropy(w[i]);
  return entropies;
}

// What a joined run may lose, as a share of the entropy that one letter of the final list holds on
// average. It leaves a few times max_letters letters.
constexpr double kCheapShare = 1e-5;

void join_cheap_runs(SymmetricChannel& w, std::size_t max_letters) {
  double total = 0;
  for (const Letter& letter : w) total += quick_entropy(letter);
  const double allowed = kCheapShare * total / static_cast<double>(max_letters);
  std::size_t kept = 0;
  double sum = quick_entropy(w[0]);
  for (std::size_t i = 1; i < w.size(); ++i) {
    const Letter both = joined(w[kept], w[i]);
    const double after = sum + quick_entropy(w[i]);
    if (quick_entropy(both) - after <= allowed) {
      w[kept] = both;
      sum = after;
    } else {
      w[++kept] = w[i];
      sum = quick_entropy(w[i]);
    }
  }
  w.resize(kept + 1);
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
  Removal removal(w.size());
  std::vector<double> entropies = quick_entropies(w);
  // The cost of a letter is that of joining it into the one before.
  const auto cost = [&](std::size_t i) {
    const std::size_t previous = removal.previous(i);
    return quick_entropy(joined(w[previous], w[i])) - entropies[previous] - entropies[i];
  };
  for (std::size_t i = 1; i < w.size(); ++i) removal.set_first_cost(i, cost(i));
  removal.hold_contest();
  for (std::size_t left = w.size(); left > max_letters; --left) {
    const std::size_t i = removal.cheapest();
    const std::size_t previous = removal.previous(i);
    const std::size_t next = removal.next(i);
    w[previous] = joined(w[previous], w[i]);
    entropies[previous] += entropies[i] + removal.cheapest_cost();
    removal.remove(i);
    if (removal.previous(previous) != removal.end()) removal.set_cost(previous, cost(previous));
    if (next != removal.end()) removal.set_cost(next, cost(next));
  }
  removal.keep_rest(w);
}

void degrade_quickly(SymmetricChannel& w, std::size_t max_letters) {
  if (w.size() > 4 * max_letters) join_cheap_runs(w, max_letters);
  degrade(w, max_letters);
}

void upgrade(SymmetricChannel& w, std::size_t max_letters) {
  if (w.size() <= max_letters) return;
  Removal removal(w.size());
  // (a, b) = (x, x r1) + (y, y r3) with the neighbours' ratios r1 > r > r3.
  const auto share_of_previous = [&](std::size_t i) {
    const double r1 = w[removal.previous(i)].ratio;
    const double r3 = w[removal.next(i)].ratio;
    return w[i].given0 * ((w[i].ratio - r3) / (r1 - r3));
  };
  // Entropy a unit of a: the ratio of a letter never changes here.
  std::vector<double> unit(w.size());
  for (std::size_t i = 0; i < w.size(); ++i) unit[i] = quick_unit_entropy(w[i].ratio);
  const auto cost = [&](std::size_t i) {
    const double x = share_of_previous(i);
    const double y = w[i].given0 - x;
    return w[i].given0 * unit[i] - x * unit[removal.previous(i)] - y * unit[removal.next(i)];
  };
  const auto is_inner = [&](std::size_t i) {
    return removal.previous(i) != removal.end() && removal.next(i) != removal.end();
  };
  for (std::size_t i = 1; i + 1 < w.size(); ++i) removal.set_first_cost(i, cost(i));
  removal.hold_contest();
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
    if (is_inner(previous)) removal.set_cost(previous, cost(previous));
    if (is_inner(next)) removal.set_cost(next, cost(next));
  }
  removal.keep_rest(w);
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
