// The rules f, g and decision of each arithmetic, one message at a time: what "planes:3" means.
//
// A set of rules has
//   Message        what a node holds for each of its positions
//   Chain          what a node that starts at index 0 holds: all its positions hold the same, as
//                  all channel LLRs are equal and f treats them alike. channel() is the root's.
//   f(a, b), g(a, b, bit), decide(message)      the rules of C. Leroux et al., IEEE Trans. SP
//                  61(2), 2013, eq. (3), (4), and of DEVELOPERS.md, "Arithmetics"; a is of the
//                  first half
//   chain_f(c), chain_g(c, bit), chain_decide(c)  the same on a node of the chain
//   decisions_stand(messages)  whether successive cancellation of an all-open node with these
//                  messages surely returns their decisions, so that it need not be carried out
#pragma once

#include <algorithm>
#include <cmath>
#include <cstdint>
#include <cstdlib>
#include <stdexcept>

#include "polar/arithmetic.h"
#include "polar/span.h"

namespace frostline {

// Double LLRs. An LLR of exactly 0 decides 0.
class ExactRules {
 public:
  using Message = double;
  using Chain = double;

  // Throws std::invalid_argument unless 0 < qber < 0.5.
  explicit ExactRules(double qber) : channel_(std::log((1 - qber) / qber)) {
    if (!(qber > 0 && qber < 0.5)) throw std::invalid_argument("QBER outside 0 .. 0.5");
  }

  // 2 atanh(tanh(a/2) tanh(b/2)) to full relative precision: the product of tanh keeps small
  // values apart, where the logarithms would cancel; the logarithms keep large values apart, where
  // tanh rounds to 1.
  Message f(Message a, Message b) const {
    const double least = std::min(std::abs(a), std::abs(b));
    if (least < 1) return 2 * std::atanh(std::tanh(a / 2) * std::tanh(b / 2));
    const double correction =
        std::log1p(std::exp(-std::abs(a + b))) - std::log1p(std::exp(-std::abs(a - b)));
    return std::copysign(least, a) * std::copysign(1.0, b) + correction;
  }
  Message g(Message a, Message b, bool bit) const { return bit ? b - a : b + a; }
  bool decide(Message message) const { return message < 0; }

  Chain channel() const { return channel_; }
  Chain chain_f(Chain c) const { return f(c, c); }
  Message chain_g(Chain c, bool bit) const { return g(c, c, bit); }
  bool chain_decide(Chain c) const { return decide(c); }

  // Without zeros the decisions of the halves agree at every g, which then only adds magnitudes,
  // and tanh |f(a,b)/2| is the product of the two tanh: nothing falls below the least tanh to the
  // power of the node's length. So no message becomes 0, but by underflow, which the bound e^-600
  // keeps away.
  bool decisions_stand(Span<const Message> messages) const {
    if (messages.size() == 1) return true;
    double least = std::abs(messages[0]);
    for (const double message : messages) least = std::min(least, std::abs(message));
    return least > 0 &&
           -std::log(std::tanh(least / 2)) * static_cast<double>(messages.size()) < 600;
  }

 private:
  double channel_;
};

// Sign and magnitude of "planes"; the unit is two channel LLRs. A magnitude of 0 has a sign too.
struct SignMagnitude {
  bool negative = false;
  std::uint8_t magnitude = 0;

  friend bool operator==(SignMagnitude a, SignMagnitude b) {
    return a.negative == b.negative && a.magnitude == b.magnitude;
  }
};

// planes:W. A result of magnitude 0 keeps the sign of b; an open index decides its sign.
class PlanesRules {
 public:
  using Message = SignMagnitude;
  // Half a unit, positive, whatever the level: nothing to store.
  struct Chain {};

  // REQUIRES: 2 <= planes <= 7 (std::invalid_argument otherwise).
  explicit PlanesRules(unsigned planes) : largest_((1U << (planes & 7U)) - 1) {
    if (planes < 2 || planes > 7) throw std::invalid_argument("planes outside 2 .. 7");
  }

  Message f(Message a, Message b) const {
    return {a.negative != b.negative, std::min(a.magnitude, b.magnitude)};
  }
  Message g(Message a, Message b, bool bit) const {
    const bool opposed = a.negative != (b.negative != bit);
    if (!opposed) return {b.negative, magnitude(unsigned{a.magnitude} + b.magnitude)};
    if (a.magnitude > b.magnitude) {
      return {!b.negative, magnitude(unsigned{a.magnitude} - b.magnitude)};
    }
    return {b.negative, magnitude(unsigned{b.magnitude} - a.magnitude)};
  }
  bool decide(Message message) const { return message.negative; }

  Chain channel() const { return {}; }
  Chain chain_f(Chain) const { return {}; }
  // Half a unit and half a unit: their sum is 1, their difference 0 with the sign of b.
  Message chain_g(Chain, bool bit) const { return {false, static_cast<std::uint8_t>(!bit)}; }
  bool chain_decide(Chain) const { return false; }

  // Always: the sign of f is the sum of the signs, and the g that follows keeps the sign of b.
  bool decisions_stand(Span<const Message>) const { return true; }

 private:
  std::uint8_t magnitude(unsigned value) const {
    return static_cast<std::uint8_t>(std::min(value, largest_));
  }

  unsigned largest_;
};

// integer:Q:A. Symmetric two's complement, min-sum, saturating. 0 decides 0.
class IntegerRules {
 public:
  using Message = int;
  using Chain = int;

  // REQUIRES: 3 <= llr_bits <= 15, 1 <= channel_level <= 2^(llr_bits-1)-1 (std::invalid_argument
  // otherwise).
  IntegerRules(unsigned llr_bits, unsigned channel_level)
      : largest_((1 << ((llr_bits - 1) & 15U)) - 1), channel_(static_cast<int>(channel_level)) {
    if (llr_bits < 3 || llr_bits > 15) throw std::invalid_argument("LLR bits outside 3 .. 15");
    if (channel_ < 1 || channel_ > largest_) {
      throw std::invalid_argument("channel level outside the range of an LLR");
    }
  }

  Message f(Message a, Message b) const {
    const int least = std::min(std::abs(a), std::abs(b));
    return (a < 0) != (b < 0) ? -least : least;
  }
  Message g(Message a, Message b, bool bit) const {
    return std::clamp(bit ? b - a : b + a, -largest_, largest_);
  }
  bool decide(Message message) const { return message < 0; }

  Chain channel() const { return channel_; }
  Chain chain_f(Chain c) const { return f(c, c); }
  Message chain_g(Chain c, bool bit) const { return g(c, c, bit); }
  bool chain_decide(Chain c) const { return decide(c); }

  // Without zeros f makes none, and g only adds magnitudes.
  bool decisions_stand(Span<const Message> messages) const {
    return messages.size() == 1 || std::find(messages.begin(), messages.end(), 0) == messages.end();
  }

 private:
  int largest_;
  int channel_;
};

// Runs function on the rules of an arithmetic. qber: of exact arithmetic.
template <typename Function>
auto with_rules(const Arithmetic& arithmetic, double qber, Function function) {
  switch (arithmetic.kind) {
    case Arithmetic::Kind::exact:
      return function(ExactRules(qber));
    case Arithmetic::Kind::planes:
      return function(PlanesRules(arithmetic.planes));
    case Arithmetic::Kind::integer:
      return function(IntegerRules(arithmetic.llr_bits, arithmetic.channel_level));
  }
  throw std::invalid_argument("unknown kind of arithmetic");
}

}  // namespace frostline
