#include "decode/reference/list_decoder.h"

#include <algorithm>
#include <array>
#include <numeric>
#include <stdexcept>
#include <string>
#include <type_traits>
#include <utility>

#include "decode/reference/arithmetic_rules.h"
#include "decode/reference/path_costs.h"
#include "decode/reference/precoded_path.h"
#include "polar/check_bits.h"

namespace frostline {
namespace {

// What a path is besides the partial sums and messages of the nodes that the recursion stands at.
struct PathState {
  double metric = 0;
  PrecodedPath precoded;
  unsigned byte = 0;  // the decisions in the byte of u at hand
};

// The paths after a node: origin[p] is the slot, before the node, of the path that p descends from.
// So nothing is copied when paths fork: whoever holds something a path looks it up by origin.
struct Lineage {
  unsigned paths;
  std::array<std::uint8_t, kLargestReferenceList> origin;
};

// The paths at one leaf: what each would decide, and what that and the opposite cost.
struct LeafDecision {
  bool decision;
  double keeps;
  double forks;
};

// Slots, states and forks of the paths.
template <typename Costs>
class Paths {
 public:
  Paths(const Code& code, const BitString& difference, const Costs& costs, unsigned list)
      : code_(code),
        schedule_(code.frozen, code.precoding),
        difference_(difference),
        costs_(costs),
        list_(list),
        states_(1) {}

  unsigned count() const { return static_cast<unsigned>(states_.size()); }
  double metric(unsigned slot) const { return states_[slot].metric; }

  // Settles index i. decide(p): the decision of path p; cost(p, bit): what a bit costs it.
  // sums[p]: receives the bit of the path that stands in slot p afterwards.
  template <typename Decide, typename Cost>
  Lineage settle(std::size_t i, const Decide& decide, const Cost& cost, Span<std::uint8_t> sums) {
    if (code_.frozen.is_frozen(i)) return settle_frozen(i, cost, sums);
    std::vector<LeafDecision> decisions;
    for (unsigned p = 0; p < count(); ++p) {
      const bool decision = decide(p);
      const double metric = states_[p].metric;
      decisions.push_back({decision, metric + cost(p, decision), metric + cost(p, !decision)});
    }
    return costs_.never_forks(i) ? keep_all(i, decisions, sums) : fork(i, decisions, sums);
  }

 private:
  template <typename Cost>
  Lineage settle_frozen(std::size_t i, const Cost& cost, Span<std::uint8_t> sums) {
    for (unsigned p = 0; p < count(); ++p) {
      const bool bit = states_[p].precoded.frozen_bit(schedule_, i, difference_[i]);
      take(i, p, bit, states_[p].metric + cost(p, bit), sums);
    }
    return unmoved();
  }

  Lineage keep_all(std::size_t i, const std::vector<LeafDecision>& decisions,
                   Span<std::uint8_t> sums) {
    for (unsigned p = 0; p < count(); ++p) {
      take(i, p, decisions[p].decision, decisions[p].keeps, sums);
    }
    return unmoved();
  }

  // Alternative a below P = count() keeps path a, alternative P + p forks path p: with a stable
  // sort, ties go to the kept path, then to the lower parent.
  Lineage fork(std::size_t i, const std::vector<LeafDecision>& decisions, Span<std::uint8_t> sums) {
    const unsigned before = count();
    const unsigned after = std::min(2 * before, list_);
    const auto metric = [&](unsigned a) {
      return a < before ? decisions[a].keeps : decisions[a - before].forks;
    };
    std::vector<unsigned> alternatives(2 * before);
    std::iota(alternatives.begin(), alternatives.end(), 0U);
    std::stable_sort(alternatives.begin(), alternatives.end(),
                     [&](unsigned a, unsigned b) { return metric(a) < metric(b); });
    std::vector<bool> stays(2 * before, false);
    for (unsigned rank = 0; rank < after; ++rank) stays[alternatives[rank]] = true;

    const std::vector<PathState> parents = states_;
    states_.resize(after);
    Lineage lineage{after, {}};
    const auto place = [&](unsigned slot, unsigned parent, bool bit, double new_metric) {
      states_[slot] = parents[parent];
      lineage.origin[slot] = static_cast<std::uint8_t>(parent);
      take(i, slot, bit, new_metric, sums);
    };
    unsigned free = 0;
    for (unsigned p = 0; p < before; ++p) {
      if (stays[p]) place(p, p, decisions[p].decision, decisions[p].keeps);
      if (!stays[before + p]) continue;
      while (free < before && stays[free]) ++free;
      place(free++, p, !decisions[p].decision, decisions[p].forks);
    }
    return lineage;
  }

  void take(std::size_t i, unsigned slot, bool bit, double metric, Span<std::uint8_t> sums) {
    PathState& state = states_[slot];
    state.metric = metric;
    state.byte |= unsigned{bit} << (i % 8);
    if (i % 8 == 7) {
      state.precoded.byte_decided(schedule_, i / 8, state.byte);
      state.byte = 0;
    }
    sums[slot] = bit;
  }

  Lineage unmoved() const {
    Lineage lineage{count(), {}};
    std::iota(lineage.origin.begin(), lineage.origin.end(), std::uint8_t{0});
    return lineage;
  }

  const Code& code_;
  PrecodingSchedule schedule_;
  const BitString& difference_;
  const Costs& costs_;
  unsigned list_;
  std::vector<PathState> states_;
};

// The recursion of successive cancellation for all paths at once. A node of 2^k indices has 2^k
// messages a path, and leaves 2^k partial sums a path (u of its range times G), path after path.
template <typename Rules, typename Costs>
class ListRecursion {
 public:
  using Message = typename Rules::Message;
  using Chain = typename Rules::Chain;

  ListRecursion(const Rules& rules, const Costs& costs, Paths<Costs>& paths, BlockLength length,
                unsigned list)
      : rules_(rules), costs_(costs), paths_(paths), log2_(length.log2()) {
    for (std::size_t half = 1; half < length.bits(); half *= 2) levels_.emplace_back(half * list);
  }

  // N partial sums of the root for each path, path after path: the error patterns.
  KeyBytes run(unsigned list) {
    KeyBytes sums((std::size_t{1} << log2_) * list);
    decode_chain(log2_, rules_.channel(), sums);
    return sums;
  }

 private:
  // Of the children of a node with twice as many indices.
  struct Level {
    explicit Level(std::size_t size) : messages(size), left(size), right(size) {}
    std::vector<Message> messages;
    KeyBytes left;
    KeyBytes right;
  };

  // The node of 2^log2 indices that starts at index 0: all paths hold the same.
  Lineage decode_chain(unsigned log2, Chain chain, Span<std::uint8_t> sums) {
    if (log2 == 0) {
      return paths_.settle(
          0, [&](unsigned) { return rules_.chain_decide(chain); },
          [&](unsigned, bool bit) { return costs_.chain(chain, bit); }, sums);
    }
    const std::size_t half = std::size_t{1} << (log2 - 1);
    Level& level = levels_[log2 - 1];
    const Lineage left = decode_chain(log2 - 1, rules_.chain_f(chain), level.left);
    for (std::size_t j = 0; j < half * left.paths; ++j) {
      level.messages[j] = rules_.chain_g(chain, level.left[j] != 0);
    }
    const Lineage right = decode_node(log2 - 1, half, level.messages, level.right);
    return combine(log2, left, right, sums);
  }

  // The node of 2^log2 indices from first on.
  Lineage decode_node(unsigned log2, std::size_t first, Span<const Message> messages,
                      Span<std::uint8_t> sums) {
    if (log2 == 0) {
      return paths_.settle(
          first, [&](unsigned p) { return rules_.decide(messages[p]); },
          [&](unsigned p, bool bit) { return costs_.of(first, messages[p], bit); }, sums);
    }
    const std::size_t half = std::size_t{1} << (log2 - 1);
    Level& level = levels_[log2 - 1];
    for (unsigned p = 0; p < paths_.count(); ++p) {
      const Message* const a = &messages[2 * half * p];
      Message* const child = &level.messages[half * p];
      for (std::size_t j = 0; j < half; ++j) child[j] = rules_.f(a[j], a[half + j]);
    }
    const Lineage left = decode_node(log2 - 1, first, level.messages, level.left);
    for (unsigned p = 0; p < left.paths; ++p) {
      const Message* const a = &messages[2 * half * left.origin[p]];
      const std::uint8_t* const bits = &level.left[half * p];
      Message* const child = &level.messages[half * p];
      for (std::size_t j = 0; j < half; ++j) child[j] = rules_.g(a[j], a[half + j], bits[j] != 0);
    }
    const Lineage right = decode_node(log2 - 1, first + half, level.messages, level.right);
    return combine(log2, left, right, sums);
  }

  // From the partial sums and lineages of the two children to their parent's.
  Lineage combine(unsigned log2, const Lineage& left, const Lineage& right,
                  Span<std::uint8_t> sums) {
    const std::size_t half = std::size_t{1} << (log2 - 1);
    const Level& level = levels_[log2 - 1];
    Lineage lineage{right.paths, {}};
    for (unsigned p = 0; p < right.paths; ++p) {
      lineage.origin[p] = left.origin[right.origin[p]];
      const std::uint8_t* const of_left = &level.left[half * right.origin[p]];
      const std::uint8_t* const of_right = &level.right[half * p];
      std::uint8_t* const out = &sums[2 * half * p];
      for (std::size_t j = 0; j < half; ++j) {
        out[j] = of_left[j] ^ of_right[j];
        out[half + j] = of_right[j];
      }
    }
    return lineage;
  }

  Rules rules_;
  const Costs& costs_;
  Paths<Costs>& paths_;
  unsigned log2_;
  std::vector<Level> levels_;  // of the nodes with 2^k indices
};

ListPath make_path(Span<const std::uint8_t> sums, double metric, unsigned width,
                   std::uint32_t check_difference) {
  ListPath path{BitString(sums.size()), metric, false};
  for (std::size_t i = 0; i < sums.size(); ++i) path.errors.set(i, sums[i] != 0);
  path.check_agrees = width == 0 || check_bits(path.errors, width) == check_difference;
  return path;
}

template <typename Rules, typename Costs>
ListDecision decode_with(const Rules& rules, const Costs& costs, const Code& code, unsigned list,
                         const BitString& difference, std::uint32_t check_difference) {
  Paths<Costs> paths(code, difference, costs, list);
  const KeyBytes sums =
      ListRecursion<Rules, Costs>(rules, costs, paths, code.block_length(), list).run(list);
  ListDecision decision{{}, 0};
  const std::size_t bits = difference.size();
  for (unsigned p = 0; p < paths.count(); ++p) {
    decision.paths.push_back(make_path(Span<const std::uint8_t>(sums).subspan(bits * p, bits),
                                       paths.metric(p), code.check_bits, check_difference));
  }
  std::stable_sort(decision.paths.begin(), decision.paths.end(),
                   [](const ListPath& a, const ListPath& b) { return a.metric < b.metric; });
  const auto agrees = std::find_if(decision.paths.begin(), decision.paths.end(),
                                   [](const ListPath& path) { return path.check_agrees; });
  if (agrees != decision.paths.end()) {
    decision.chosen = static_cast<std::size_t>(agrees - decision.paths.begin());
  }
  return decision;
}

}  // namespace

void require_list_arguments(const Code& code, const Arithmetic& arithmetic, unsigned list,
                            const MetricWeights* weights) {
  if (list == 0 || list > kLargestReferenceList || (list & (list - 1)) != 0) {
    throw std::invalid_argument("list size " + std::to_string(list) +
                                " is not a power of two from 1 to 128");
  }
  if (arithmetic.kind == Arithmetic::Kind::planes &&
      (weights == nullptr || weights->block_length != code.block_length())) {
    throw std::invalid_argument("list decoding in planes without metric weights of its length");
  }
}

ListDecision decode_list(const Code& code, const Arithmetic& arithmetic, double qber, unsigned list,
                         const MetricWeights* weights, const BitString& difference,
                         std::uint32_t check_difference) {
  require_list_arguments(code, arithmetic, list, weights);
  if (difference.size() != code.block_length().bits()) {
    throw std::invalid_argument("difference of " + std::to_string(difference.size()) +
                                " bits for a block of " +
                                std::to_string(code.block_length().bits()));
  }
  return with_rules(arithmetic, qber, [&](const auto& rules) {
    using Rules = std::decay_t<decltype(rules)>;
    const auto decode = [&](const auto& costs) {
      return decode_with(rules, costs, code, list, difference, check_difference);
    };
    if constexpr (std::is_same_v<Rules, PlanesRules>) {
      return decode(PlanesCosts(*weights));
    } else if constexpr (std::is_same_v<Rules, ExactRules>) {
      return decode(ExactCosts());
    } else {
      return decode(IntegerCosts());
    }
  });
}

}  // namespace frostline
