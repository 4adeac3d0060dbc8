#include "decode/hardware/faults.h"

#include <algorithm>
#include <stdexcept>

#include "decode/reference/arithmetic_rules.h"

namespace frostline {
namespace {

// The rules of planes with a fault. Channel messages are constant, as in PlanesRules.
class FaultyPlanes {
 public:
  using Message = SignMagnitude;
  FaultyPlanes(unsigned planes, Fault fault) : rules_(planes), planes_(planes), fault_(fault) {}

  Message f(Message a, Message b) const { return rules_.f(a, b); }
  Message g(Message a, Message b, bool bit) const {
    Message result = rules_.g(a, b, bit);
    if (fault_ == Fault::zero_is_positive && result.magnitude == 0) result.negative = false;
    if (fault_ == Fault::wrapping_sum && a.negative == (b.negative != bit)) {
      result.magnitude =
          static_cast<std::uint8_t>((a.magnitude + b.magnitude) & ((1 << planes_) - 1));
    }
    return result;
  }
  bool decide(Message message) const { return message.negative; }
  bool chain_decide() const { return false; }
  Message chain_g(bool bit) const { return rules_.chain_g({}, bit); }

 private:
  PlanesRules rules_;
  unsigned planes_;
  Fault fault_;
};

// The rules of integers with a fault.
class FaultyIntegers {
 public:
  using Message = int;
  FaultyIntegers(const Arithmetic& arithmetic, Fault fault)
      : rules_(arithmetic.llr_bits, arithmetic.channel_level),
        range_(1 << arithmetic.llr_bits),
        fault_(fault) {}

  Message f(Message a, Message b) const { return rules_.f(a, b); }
  Message g(Message a, Message b, bool bit) const {
    if (fault_ != Fault::wrapping_sum) return rules_.g(a, b, bit);
    // Two's complement: -2^(Q-1) .. 2^(Q-1)-1.
    const int sum = bit ? b - a : b + a;
    const int wrapped = ((sum % range_) + range_) % range_;
    return wrapped >= range_ / 2 ? wrapped - range_ : wrapped;
  }
  bool decide(Message message) const {
    return fault_ == Fault::zero_decides_one ? message <= 0 : message < 0;
  }
  bool chain_decide() const { return false; }
  Message chain_g(bool bit) const { return g(rules_.channel(), rules_.channel(), bit); }

 private:
  IntegerRules rules_;
  int range_;
  Fault fault_;
};

// Index by index, nothing left out.
template <typename Rules>
class FaultyDecoder {
 public:
  FaultyDecoder(const Rules& rules, const FrozenSet& frozen, const BitString& difference)
      : rules_(rules),
        frozen_(frozen),
        difference_(difference),
        sums_(difference.size()),
        messages_(frozen.block_length().log2()) {
    for (unsigned k = 0; k < messages_.size(); ++k) messages_[k].resize(std::size_t{1} << k);
  }

  BitString run() {
    chain_node(frozen_.block_length().log2());
    BitString errors(sums_.size());
    for (std::size_t i = 0; i < sums_.size(); ++i) errors.set(i, sums_[i] != 0);
    return errors;
  }

 private:
  using Message = typename Rules::Message;

  void chain_node(unsigned level) {
    if (level == 0) return settle(0, rules_.chain_decide());
    chain_node(level - 1);
    const std::size_t half = std::size_t{1} << (level - 1);
    for (std::size_t j = 0; j < half; ++j) {
      messages_[level - 1][j] = rules_.chain_g(sums_[j] != 0);
    }
    node(level - 1, half);
    combine(0, half);
  }

  // Its messages stand in messages_[level].
  void node(unsigned level, std::size_t first) {
    const std::vector<Message>& parent = messages_[level];
    if (level == 0) return settle(first, rules_.decide(parent[0]));
    const std::size_t half = parent.size() / 2;
    std::vector<Message>& child = messages_[level - 1];
    for (std::size_t j = 0; j < half; ++j) child[j] = rules_.f(parent[j], parent[half + j]);
    node(level - 1, first);
    for (std::size_t j = 0; j < half; ++j) {
      child[j] = rules_.g(parent[j], parent[half + j], sums_[first + j] != 0);
    }
    node(level - 1, first + half);
    combine(first, half);
  }

  void settle(std::size_t i, bool decision) {
    sums_[i] = frozen_.is_frozen(i) ? difference_[i] : decision;
  }

  void combine(std::size_t first, std::size_t half) {
    for (std::size_t j = first; j < first + half; ++j) sums_[j] ^= sums_[half + j];
  }

  Rules rules_;
  const FrozenSet& frozen_;
  const BitString& difference_;
  KeyBytes sums_;
  std::vector<std::vector<Message>> messages_;
};

}  // namespace

std::string_view fault_name(Fault fault) {
  switch (fault) {
    case Fault::zero_is_positive:
      return "zero-is-positive";
    case Fault::zero_decides_one:
      return "zero-decides-one";
    case Fault::wrapping_sum:
      return "wrapping-sum";
  }
  throw std::invalid_argument("unknown fault");
}

std::vector<Fault> possible_faults(const Arithmetic& arithmetic) {
  switch (arithmetic.kind) {
    case Arithmetic::Kind::planes:
      return {Fault::zero_is_positive, Fault::wrapping_sum};
    case Arithmetic::Kind::integer:
      return {Fault::zero_decides_one, Fault::wrapping_sum};
    case Arithmetic::Kind::exact:
      break;
  }
  return {};
}

BitString decode_with_fault(const FrozenSet& frozen, const Arithmetic& arithmetic, Fault fault,
                            const BitString& difference) {
  const std::vector<Fault> possible = possible_faults(arithmetic);
  if (std::find(possible.begin(), possible.end(), fault) == possible.end()) {
    throw std::invalid_argument("a fault that this arithmetic cannot have");
  }
  if (difference.size() != frozen.block_length().bits()) {
    throw std::invalid_argument("difference of another length than the frozen set");
  }
  if (arithmetic.kind == Arithmetic::Kind::planes) {
    const FaultyPlanes rules(arithmetic.planes, fault);
    return FaultyDecoder<FaultyPlanes>(rules, frozen, difference).run();
  }
  const FaultyIntegers rules(arithmetic, fault);
  return FaultyDecoder<FaultyIntegers>(rules, frozen, difference).run();
}

}  // namespace frostline
