#include "decode/reference/successive_cancellation.h"

#include <algorithm>
#include <cstdint>
#include <stdexcept>
#include <string>
#include <type_traits>
#include <utility>
#include <vector>

#include "decode/reference/arithmetic_rules.h"
#include "decode/reference/precoded_path.h"

namespace frostline {
namespace {

// x = u G of one node, one bit a byte, in place.
void transform_bytes(Span<std::uint8_t> bits) {
  for (std::size_t distance = 1; distance < bits.size(); distance *= 2) {
    for (std::size_t start = 0; start < bits.size(); start += 2 * distance) {
      for (std::size_t j = start; j < start + distance; ++j) bits[j] ^= bits[j + distance];
    }
  }
}

BitString bits_of_bytes(Span<const std::uint8_t> bytes) {
  BitString bits(bytes.size());
  for (std::size_t i = 0; i < bytes.size(); ++i) bits.set(i, bytes[i] != 0);
  return bits;
}

// One recursion for all arithmetics. A node is the range first .. first + length - 1 of indices of
// u; when it returns, its sums are its partial sums (u of the range times G). What is decided at
// the leaves, and which nodes need not be gone through, Leaves tells. It has
//   chain_node(message, sums)   whether the node that starts at index 0 is settled, and its sums
//   node(first, messages, sums)   the same for any other node
//   descend(first, half)  a node that is not settled goes on to its children
// and settles every node of one index.
template <typename Rules, typename Leaves>
class ScRecursion {
 public:
  using Message = typename Rules::Message;
  using Chain = typename Rules::Chain;

  ScRecursion(const Rules& rules, Leaves& leaves, std::size_t length)
      : rules_(rules), leaves_(leaves), sums_(length) {
    for (std::size_t half = 1; half < length; half *= 2) messages_.emplace_back(half);
  }

  // The partial sums of the root: the error pattern.
  const KeyBytes& run() {
    decode_chain(static_cast<unsigned>(messages_.size()), rules_.channel());
    return sums_;
  }

 private:
  Span<std::uint8_t> sums(std::size_t first, std::size_t length) {
    return Span<std::uint8_t>(sums_).subspan(first, length);
  }

  // The node of 2^log2 indices that starts at index 0.
  void decode_chain(unsigned log2, Chain message) {
    if (leaves_.chain_node(message, sums(0, std::size_t{1} << log2))) return;
    const std::size_t half = std::size_t{1} << (log2 - 1);
    leaves_.descend(0, half);
    decode_chain(log2 - 1, rules_.chain_f(message));
    std::vector<Message>& right = messages_[log2 - 1];
    for (std::size_t j = 0; j < half; ++j) right[j] = rules_.chain_g(message, sums_[j] != 0);
    decode_node(half, right, log2 - 1);
    combine(0, half);
  }

  // A node of 2^log2 indices. Both children's messages use the same memory, one after the other.
  void decode_node(std::size_t first, Span<const Message> messages, unsigned log2) {
    if (leaves_.node(first, messages, sums(first, messages.size()))) return;
    const std::size_t half = messages.size() / 2;
    leaves_.descend(first, half);
    std::vector<Message>& child = messages_[log2 - 1];
    for (std::size_t j = 0; j < half; ++j) child[j] = rules_.f(messages[j], messages[half + j]);
    decode_node(first, child, log2 - 1);
    for (std::size_t j = 0; j < half; ++j) {
      child[j] = rules_.g(messages[j], messages[half + j], sums_[first + j] != 0);
    }
    decode_node(first + half, child, log2 - 1);
    combine(first, half);
  }

  // From the partial sums of two children to their parent's.
  void combine(std::size_t first, std::size_t half) {
    for (std::size_t j = first; j < first + half; ++j) sums_[j] ^= sums_[half + j];
  }

  Rules rules_;
  Leaves& leaves_;
  KeyBytes sums_;
  std::vector<std::vector<Message>> messages_;  // of the open node with 2^k indices
};

// The decoder: a frozen index takes its value from d and the path, an open one is decided.
template <typename Rules>
class DecidedLeaves {
 public:
  DecidedLeaves(const Rules& rules, const Code& code, const BitString& difference)
      : rules_(rules),
        schedule_(code.frozen, code.precoding),
        difference_(difference),
        u_(difference.size()),
        frozen_before_(difference.size() + 1) {
    for (std::size_t i = 0; i < difference.size(); ++i) {
      frozen_before_[i + 1] = frozen_before_[i] + (code.frozen.is_frozen(i) ? 1 : 0);
    }
  }

  // The decision at each index.
  const KeyBytes& u() const { return u_; }

  bool chain_node(typename Rules::Chain message, Span<std::uint8_t> sums) {
    if (frozen_in(0, sums.size()) == sums.size()) return settle_all_frozen(0, sums);
    return sums.size() == 1 && settle_open_index(0, rules_.chain_decide(message), sums);
  }

  bool node(std::size_t first, Span<const typename Rules::Message> messages,
            Span<std::uint8_t> sums) {
    const std::size_t frozen = frozen_in(first, sums.size());
    if (frozen == sums.size()) return settle_all_frozen(first, sums);
    return frozen == 0 && rules_.decisions_stand(messages) &&
           settle_all_open(first, messages, sums);
  }

  void descend(std::size_t, std::size_t) {}

 private:
  std::size_t frozen_in(std::size_t first, std::size_t length) const {
    return frozen_before_[first + length] - frozen_before_[first];
  }

  // No message can change a frozen value.
  bool settle_all_frozen(std::size_t first, Span<std::uint8_t> sums) {
    for (std::size_t j = 0; j < sums.size(); ++j) {
      u_[first + j] = sums[j] = path_.frozen_bit(schedule_, first + j, difference_[first + j]);
    }
    path_.decided(schedule_, first, sums.size(), u_);
    transform_bytes(sums);
    return true;
  }

  bool settle_all_open(std::size_t first, Span<const typename Rules::Message> messages,
                       Span<std::uint8_t> sums) {
    for (std::size_t j = 0; j < sums.size(); ++j) {
      u_[first + j] = sums[j] = rules_.decide(messages[j]);
    }
    transform_bytes(Span<std::uint8_t>(u_).subspan(first, sums.size()));
    path_.decided(schedule_, first, sums.size(), u_);
    return true;
  }

  bool settle_open_index(std::size_t i, bool bit, Span<std::uint8_t> sums) {
    u_[i] = sums[0] = bit;
    path_.decided(schedule_, i, 1, u_);
    return true;
  }

  Rules rules_;
  PrecodingSchedule schedule_;
  const BitString& difference_;
  PrecodedPath path_;
  KeyBytes u_;
  std::vector<std::size_t> frozen_before_;  // frozen indices below i
};

// The genie: every index takes its true value, whatever would have been decided there.
template <typename Rules>
class GenieLeaves {
 public:
  GenieLeaves(const Rules& rules, const BitString& errors)
      : rules_(rules), truth_(errors.size()), wrong_(errors.size()) {
    for (std::size_t i = 0; i < errors.size(); ++i) truth_[i] = errors[i];
  }

  BitString take_wrong() { return std::move(wrong_); }

  bool chain_node(typename Rules::Chain message, Span<std::uint8_t> sums) {
    if (sums.size() > 1) return false;
    return settle_index(0, rules_.chain_decide(message), sums);
  }

  bool node(std::size_t first, Span<const typename Rules::Message> messages,
            Span<std::uint8_t> sums) {
    if (sums.size() == 1) return settle_index(first, rules_.decide(messages[0]), sums);
    // Where the decisions on the node's messages are right and stand, so are all below it.
    for (std::size_t j = 0; j < sums.size(); ++j) {
      if (rules_.decide(messages[j]) != (truth_[first + j] != 0)) return false;
    }
    if (!rules_.decisions_stand(messages)) return false;
    std::copy_n(truth_.begin() + static_cast<std::ptrdiff_t>(first), sums.size(), sums.begin());
    return true;
  }

  // The true sums of the children.
  void descend(std::size_t first, std::size_t half) {
    for (std::size_t j = first; j < first + half; ++j) truth_[j] ^= truth_[half + j];
  }

 private:
  bool settle_index(std::size_t i, bool decision, Span<std::uint8_t> sums) {
    sums[0] = truth_[i];
    if (decision != (truth_[i] != 0)) wrong_.set(i, true);
    return true;
  }

  Rules rules_;
  KeyBytes truth_;  // partial sums of the nodes that the recursion stands at, or has passed
  BitString wrong_;
};

}  // namespace

ScDecision decode_sc(const Code& code, const Arithmetic& arithmetic, double qber,
                     const BitString& difference) {
  if (difference.size() != code.block_length().bits()) {
    throw std::invalid_argument("difference of " + std::to_string(difference.size()) +
                                " bits for a block of " +
                                std::to_string(code.block_length().bits()));
  }
  return with_rules(arithmetic, qber, [&](const auto& rules) {
    using Rules = std::decay_t<decltype(rules)>;
    DecidedLeaves<Rules> leaves(rules, code, difference);
    ScRecursion<Rules, DecidedLeaves<Rules>> recursion(rules, leaves, difference.size());
    const BitString errors = bits_of_bytes(recursion.run());
    return ScDecision{errors, bits_of_bytes(leaves.u())};
  });
}

BitString wrong_decisions_with_genie(const BitString& errors, const Arithmetic& arithmetic,
                                     double qber) {
  const BlockLength block_length(errors.size());
  return with_rules(arithmetic, qber, [&](const auto& rules) {
    using Rules = std::decay_t<decltype(rules)>;
    GenieLeaves<Rules> leaves(rules, errors);
    ScRecursion<Rules, GenieLeaves<Rules>>(rules, leaves, block_length.bits()).run();
    return leaves.take_wrong();
  });
}

}  // namespace frostline
