#include "decode/hardware/message_dump.h"

#include <cstdlib>
#include <stdexcept>
#include <type_traits>

#include "decode/reference/arithmetic_rules.h"

namespace frostline {
namespace {

// How the messages of an arithmetic are stored.
class PlanesStore {
 public:
  explicit PlanesStore(const Arithmetic& arithmetic) : planes_(arithmetic.planes) {}
  std::uint16_t code(SignMagnitude message) const {
    return static_cast<std::uint16_t>((message.negative ? 1U << planes_ : 0U) | message.magnitude);
  }
  std::uint16_t chain_code(PlanesRules::Chain) const { return kConstantMessage; }
  bool is_zero(SignMagnitude message) const { return message.magnitude == 0; }
  bool chain_is_zero(PlanesRules::Chain) const { return false; }
  bool clips(SignMagnitude a, SignMagnitude b, bool bit) const {
    return a.negative == (b.negative != bit) && a.magnitude + b.magnitude >= 1 << planes_;
  }
  bool chain_clips(PlanesRules::Chain, bool) const { return false; }

 private:
  unsigned planes_;
};

class IntegerStore {
 public:
  explicit IntegerStore(const Arithmetic& arithmetic) : bits_(arithmetic.llr_bits) {}
  std::uint16_t code(int message) const {
    return static_cast<std::uint16_t>(static_cast<unsigned>(message) & ((1U << bits_) - 1));
  }
  std::uint16_t chain_code(int message) const { return code(message); }
  bool is_zero(int message) const { return message == 0; }
  bool chain_is_zero(int message) const { return message == 0; }
  bool clips(int a, int b, bool bit) const {
    return std::abs(bit ? b - a : b + a) >= 1 << (bits_ - 1);
  }
  bool chain_clips(int c, bool bit) const { return clips(c, c, bit); }

 private:
  unsigned bits_;
};

template <typename Rules, typename Store>
class Dumper {
 public:
  using Message = typename Rules::Message;
  using Chain = typename Rules::Chain;

  Dumper(const Rules& rules, const Store& store, const FrozenSet& frozen, const BitString& u)
      : rules_(rules), store_(store), frozen_(frozen), u_(u), sums_(u.size()) {
    dump_.levels.assign(frozen.block_length().log2() + 1, std::vector<std::uint16_t>(u.size()));
    for (std::size_t half = 1; half < u.size(); half *= 2) messages_.emplace_back(half);
  }

  MessageDump run() {
    chain_node(frozen_.block_length().log2(), rules_.channel());
    return std::move(dump_);
  }

 private:
  void chain_node(unsigned level, Chain chain) {
    const std::size_t length = std::size_t{1} << level;
    for (std::size_t j = 0; j < length; ++j) dump_.levels[level][j] = store_.chain_code(chain);
    if (store_.chain_is_zero(chain)) count_zeros(level, 0, length);
    if (level == 0) {
      sums_[0] = u_[0];
      return;
    }
    const std::size_t half = length / 2;
    chain_node(level - 1, rules_.chain_f(chain));
    std::vector<Message>& right = messages_[level - 1];
    for (std::size_t j = 0; j < half; ++j) {
      right[j] = rules_.chain_g(chain, sums_[j] != 0);
      if (store_.chain_clips(chain, sums_[j] != 0)) ++dump_.saturated_sums;
    }
    node(level - 1, half, right);
    combine(0, half);
  }

  void node(unsigned level, std::size_t first, const std::vector<Message>& messages) {
    for (std::size_t j = 0; j < messages.size(); ++j) {
      dump_.levels[level][first + j] = store_.code(messages[j]);
      if (store_.is_zero(messages[j])) count_zeros(level, first + j, 1);
    }
    if (level == 0) {
      sums_[first] = u_[first];
      return;
    }
    const std::size_t half = messages.size() / 2;
    std::vector<Message>& child = messages_[level - 1];
    for (std::size_t j = 0; j < half; ++j) child[j] = rules_.f(messages[j], messages[half + j]);
    node(level - 1, first, child);
    for (std::size_t j = 0; j < half; ++j) {
      const bool bit = sums_[first + j] != 0;
      child[j] = rules_.g(messages[j], messages[half + j], bit);
      if (store_.clips(messages[j], messages[half + j], bit)) ++dump_.saturated_sums;
    }
    node(level - 1, first + half, child);
    combine(first, half);
  }

  void count_zeros(unsigned level, std::size_t index, std::uint64_t count) {
    dump_.zero_messages += count;
    if (level == 0 && !frozen_.is_frozen(index)) dump_.zero_decisions += count;
  }

  void combine(std::size_t first, std::size_t half) {
    for (std::size_t j = first; j < first + half; ++j) sums_[j] ^= sums_[half + j];
  }

  Rules rules_;
  Store store_;
  const FrozenSet& frozen_;
  const BitString& u_;
  KeyBytes sums_;
  std::vector<std::vector<Message>> messages_;  // of the node with 2^k indices at hand
  MessageDump dump_;
};

}  // namespace

unsigned stored_message_bits(const Arithmetic& arithmetic) {
  switch (arithmetic.kind) {
    case Arithmetic::Kind::planes:
      return arithmetic.planes + 1;
    case Arithmetic::Kind::integer:
      return arithmetic.llr_bits;
    case Arithmetic::Kind::exact:
      break;
  }
  throw std::invalid_argument("messages of exact arithmetic are not stored");
}

MessageDump dump_messages(const FrozenSet& frozen, const Arithmetic& arithmetic,
                          const BitString& u) {
  if (u.size() != frozen.block_length().bits()) {
    throw std::invalid_argument("decisions of another length than the frozen set");
  }
  switch (arithmetic.kind) {
    case Arithmetic::Kind::planes: {
      const PlanesRules rules(arithmetic.planes);
      return Dumper<PlanesRules, PlanesStore>(rules, PlanesStore(arithmetic), frozen, u).run();
    }
    case Arithmetic::Kind::integer: {
      const IntegerRules rules(arithmetic.llr_bits, arithmetic.channel_level);
      return Dumper<IntegerRules, IntegerStore>(rules, IntegerStore(arithmetic), frozen, u).run();
    }
    case Arithmetic::Kind::exact:
      break;
  }
  throw std::invalid_argument("messages of exact arithmetic are not stored");
}

}  // namespace frostline
