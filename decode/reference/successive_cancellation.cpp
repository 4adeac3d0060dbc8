#include "decode/reference/successive_cancellation.h"

#include <cstdint>
#include <stdexcept>
#include <string>
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
// u; when it returns, sums_ holds its partial sums there (u of the range times G) and u_ its
// decisions.
template <typename Rules>
class ScDecoder {
 public:
  using Message = typename Rules::Message;
  using Chain = typename Rules::Chain;

  ScDecoder(const Rules& rules, const Code& code, const BitString& difference)
      : rules_(rules),
        schedule_(code.frozen, code.precoding),
        difference_(difference),
        sums_(difference.size()),
        u_(difference.size()),
        frozen_before_(difference.size() + 1) {
    for (std::size_t i = 0; i < difference.size(); ++i) {
      frozen_before_[i + 1] = frozen_before_[i] + (code.frozen.is_frozen(i) ? 1 : 0);
    }
    for (std::size_t half = 1; half < difference.size(); half *= 2) messages_.emplace_back(half);
  }

  ScDecision decode() {
    decode_chain(static_cast<unsigned>(messages_.size()), rules_.channel());
    return {bits_of_bytes(sums_), bits_of_bytes(u_)};
  }

 private:
  std::size_t frozen_in(std::size_t first, std::size_t length) const {
    return frozen_before_[first + length] - frozen_before_[first];
  }

  // The node of 2^log2 indices that starts at index 0.
  void decode_chain(unsigned log2, Chain message) {
    const std::size_t length = std::size_t{1} << log2;
    if (frozen_in(0, length) == length) return decode_all_frozen(0, length);
    if (length == 1) return settle_open_index(0, rules_.chain_decide(message));
    const std::size_t half = length / 2;
    decode_chain(log2 - 1, rules_.chain_f(message));
    std::vector<Message>& right = messages_[log2 - 1];
    for (std::size_t j = 0; j < half; ++j) right[j] = rules_.chain_g(message, sums_[j] != 0);
    decode_node(half, right, log2 - 1);
    combine(0, half);
  }

  // A node of 2^log2 indices. Both children's messages use the same memory, one after the other.
  void decode_node(std::size_t first, Span<const Message> messages, unsigned log2) {
    const std::size_t length = messages.size();
    const std::size_t frozen = frozen_in(first, length);
    if (frozen == length) return decode_all_frozen(first, length);
    if (frozen == 0 && rules_.decisions_stand(messages)) return decode_all_open(first, messages);
    const std::size_t half = length / 2;
    std::vector<Message>& child = messages_[log2 - 1];
    for (std::size_t j = 0; j < half; ++j) child[j] = rules_.f(messages[j], messages[half + j]);
    decode_node(first, child, log2 - 1);
    for (std::size_t j = 0; j < half; ++j) {
      child[j] = rules_.g(messages[j], messages[half + j], sums_[first + j] != 0);
    }
    decode_node(first + half, child, log2 - 1);
    combine(first, half);
  }

  // No message can change a frozen value.
  void decode_all_frozen(std::size_t first, std::size_t length) {
    for (std::size_t i = first; i < first + length; ++i) {
      u_[i] = sums_[i] = path_.frozen_bit(schedule_, i, difference_[i]);
    }
    path_.decided(schedule_, first, length, u_);
    transform_bytes(Span<std::uint8_t>(sums_).subspan(first, length));
  }

  void decode_all_open(std::size_t first, Span<const Message> messages) {
    for (std::size_t j = 0; j < messages.size(); ++j) {
      u_[first + j] = sums_[first + j] = rules_.decide(messages[j]);
    }
    transform_bytes(Span<std::uint8_t>(u_).subspan(first, messages.size()));
    path_.decided(schedule_, first, messages.size(), u_);
  }

  void settle_open_index(std::size_t i, bool bit) {
    u_[i] = sums_[i] = bit;
    path_.decided(schedule_, i, 1, u_);
  }

  // From the partial sums of two children to their parent's.
  void combine(std::size_t first, std::size_t half) {
    for (std::size_t j = first; j < first + half; ++j) sums_[j] ^= sums_[half + j];
  }

  Rules rules_;
  PrecodingSchedule schedule_;
  const BitString& difference_;
  PrecodedPath path_;
  KeyBytes sums_;
  KeyBytes u_;
  std::vector<std::size_t> frozen_before_;      // frozen indices below i
  std::vector<std::vector<Message>> messages_;  // of the open node with 2^k indices
};

template <typename Rules>
ScDecision decode_by(const Rules& rules, const Code& code, const BitString& difference) {
  return ScDecoder<Rules>(rules, code, difference).decode();
}

}  // namespace

ScDecision decode_sc(const Code& code, const Arithmetic& arithmetic, double qber,
                     const BitString& difference) {
  if (difference.size() != code.block_length().bits()) {
    throw std::invalid_argument("difference of " + std::to_string(difference.size()) +
                                " bits for a block of " +
                                std::to_string(code.block_length().bits()));
  }
  switch (arithmetic.kind) {
    case Arithmetic::Kind::exact:
      return decode_by(ExactRules(qber), code, difference);
    case Arithmetic::Kind::planes:
      return decode_by(PlanesRules(arithmetic.planes), code, difference);
    case Arithmetic::Kind::integer:
      return decode_by(IntegerRules(arithmetic.llr_bits, arithmetic.channel_level), code,
                       difference);
  }
  throw std::invalid_argument("unknown kind of arithmetic");
}

}  // namespace frostline
