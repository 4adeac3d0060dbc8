// List decoding by its definition, path by path and index by index: the judge of the reference list
// decoder. Written from the rules of the arithmetics in genie_decoder.h; every message is computed
// from the channel anew.
#pragma once

#include <algorithm>
#include <cmath>
#include <cstddef>
#include <tuple>
#include <vector>

#include "polar/arithmetic.h"
#include "polar/code.h"
#include "polar/metric_weights.h"
#include "tests/support/genie_decoder.h"

namespace frostline::testing {

// The message at leaf u.size() of a path with these decisions, in planes and integer arithmetic;
// magnitudes as in genie_decoder.h.
class LeafMessages {
 public:
  LeafMessages(const Arithmetic& arithmetic, std::size_t length)
      : planes_(arithmetic.kind == Arithmetic::Kind::planes),
        channel_(planes_ ? 1 : static_cast<int>(arithmetic.channel_level)),
        largest_(planes_ ? 2 * ((1 << arithmetic.planes) - 1)
                         : (1 << (arithmetic.llr_bits - 1)) - 1),
        length_(length) {}

  SignedMessage at_end_of(const std::vector<bool>& u) const {
    return descend(std::vector<SignedMessage>(length_, SignedMessage{false, channel_}), u, 0);
  }

 private:
  SignedMessage descend(const std::vector<SignedMessage>& messages, const std::vector<bool>& u,
                        std::size_t first) const {
    const std::size_t half = messages.size() / 2;
    if (half == 0) return messages[0];
    std::vector<SignedMessage> child(half);
    if (u.size() < first + half) {
      for (std::size_t j = 0; j < half; ++j) child[j] = f_rule(messages[j], messages[j + half]);
      return descend(child, u, first);
    }
    const auto g_rule = planes_ ? planes_g_rule : integer_g_rule;
    for (std::size_t j = 0; j < half; ++j) {
      bool sum = false;  // u of the left half times G: u_i counts where i contains j
      for (std::size_t i = j; i < half; ++i) sum ^= (i & j) == j && u[first + i];
      child[j] = g_rule(messages[j], messages[j + half], sum, largest_);
    }
    return descend(child, u, first + half);
  }

  bool planes_;
  int channel_;
  int largest_;
  std::size_t length_;
};

struct DefinedPath {
  std::vector<bool> u;
  double metric = 0;
};

class ListDefinition {
 public:
  ListDefinition(const Code& code, const Arithmetic& arithmetic, unsigned list,
                 const MetricWeights* weights)
      : code_(code),
        planes_(arithmetic.kind == Arithmetic::Kind::planes),
        list_(list),
        weights_(weights),
        messages_(arithmetic, code.block_length().bits()),
        schedule_(code.frozen, code.precoding) {}

  // The decision at index i = u.size() of a path with decisions u.
  bool decision(const std::vector<bool>& u) const {
    const SignedMessage message = messages_.at_end_of(u);
    return message.negative && (planes_ || message.magnitude > 0);
  }

  // What a bit at index u.size() costs a path with decisions u.
  double cost(const std::vector<bool>& u, bool bit) const {
    const std::size_t i = u.size();
    const SignedMessage message = messages_.at_end_of(u);
    const bool agrees = bit == decision(u);
    if (!planes_) return agrees ? 0 : message.magnitude;
    const int units = i == 0 ? 1 : message.magnitude / 2;
    const double x = static_cast<double>(weights_->of_leaf(i)) * units;
    const double correction = std::round(16 * 2 * std::log(1 + std::exp(-x / 2))) / 16;
    return (agrees ? 0 : x) + correction;
  }

  double metric(const std::vector<bool>& u) const {
    double sum = 0;
    std::vector<bool> past;
    for (const bool bit : u) {
      sum += cost(past, bit);
      past.push_back(bit);
    }
    return sum;
  }

  // The survivors in their slots.
  std::vector<DefinedPath> decode(const BitString& difference) const {
    std::vector<DefinedPath> slots{DefinedPath{}};
    for (std::size_t i = 0; i < difference.size(); ++i) {
      if (code_.frozen.is_frozen(i)) {
        for (DefinedPath& path : slots) extend(path, difference[i] != offset(path.u));
      } else if (weights_ != nullptr && planes_ && weights_->never_forks[i]) {
        for (DefinedPath& path : slots) extend(path, decision(path.u));
      } else {
        slots = forked(slots);
      }
    }
    return slots;
  }

 private:
  void extend(DefinedPath& path, bool bit) const {
    path.metric += cost(path.u, bit);
    path.u.push_back(bit);
  }

  // What precoding adds at index u.size(): earlier decisions and nothing else, made public.
  bool offset(const std::vector<bool>& u) const {
    BitString rows(code_.block_length().bits());
    for (std::size_t i = 0; i < u.size(); ++i) rows.set(i, u[i]);
    apply_precoding(schedule_, 1, rows.words());
    return rows[u.size()];
  }

  struct Alternative {
    DefinedPath path;
    bool forked;
    std::size_t parent;
  };

  std::vector<DefinedPath> forked(const std::vector<DefinedPath>& slots) const {
    std::vector<Alternative> alternatives;
    for (std::size_t p = 0; p < slots.size(); ++p) {
      for (const bool fork : {false, true}) {
        alternatives.push_back({slots[p], fork, p});
        extend(alternatives.back().path, decision(slots[p].u) != fork);
      }
    }
    std::sort(alternatives.begin(), alternatives.end(),
              [](const Alternative& a, const Alternative& b) {
                return std::tie(a.path.metric, a.forked, a.parent) <
                       std::tie(b.path.metric, b.forked, b.parent);
              });
    alternatives.resize(std::min<std::size_t>(alternatives.size(), list_));
    std::vector<DefinedPath> next(alternatives.size());
    std::vector<bool> taken(alternatives.size(), false);
    std::sort(alternatives.begin(), alternatives.end(),
              [](const Alternative& a, const Alternative& b) {
                return std::tie(a.forked, a.parent) < std::tie(b.forked, b.parent);
              });
    for (const Alternative& alternative : alternatives) {
      std::size_t slot = alternative.parent;
      if (alternative.forked) {
        slot =
            static_cast<std::size_t>(std::find(taken.begin(), taken.end(), false) - taken.begin());
      }
      taken[slot] = true;
      next[slot] = alternative.path;
    }
    return next;
  }

  Code code_;
  bool planes_;
  unsigned list_;
  const MetricWeights* weights_;
  LeafMessages messages_;
  PrecodingSchedule schedule_;
};

}  // namespace frostline::testing
