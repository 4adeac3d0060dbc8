// Nodes of up to 8 positions, all of them inside one byte of every path.
//
// A node of 2^k positions has its messages in the 2^k lowest bits of each byte; what stands above
// means nothing. Costs are those of decode/list/list_program.h.
//
// Included once a target, inside Highway's namespace; no include guard of the usual kind.
#if defined(FROSTLINE_SMALL_NODES_INL_H) == defined(HWY_TARGET_TOGGLE)
#ifdef FROSTLINE_SMALL_NODES_INL_H
#undef FROSTLINE_SMALL_NODES_INL_H
#else
#define FROSTLINE_SMALL_NODES_INL_H
#endif

#include <hwy/highway.h>

#include "decode/list/path_forks-inl.h"

HWY_BEFORE_NAMESPACE();
namespace frostline {
namespace HWY_NAMESPACE {

template <int kW>
constexpr Shape kWidest = kW == 2 ? Shape::two : Shape::three;

// How often each magnitude plane is set where a mask is, and each threshold of the correction.
struct CostCounts {
  Row disagreement[3];
  Row correction[3];
};

// The planes of magnitudes below 1, 2 and 4.
template <int kW>
HWY_INLINE void SmallMagnitudes(const Message<Row>& message, Row* small) {
  const Row upper = kW == 3 ? Or(message.m[1], message.m[kW - 1]) : message.m[1];
  small[0] = Not(Or(message.m[0], upper));
  small[1] = Not(upper);
  if constexpr (kW == 3) small[2] = Not(message.m[2]);
}

// Adds what the counts cost to the metrics of row g, those of the disagreements in all their
// possible sizes.
template <int kW, unsigned kR>
HWY_NOINLINE void AddCounts(Survivors<kR>& survivors, unsigned g, const CostCounts& counts,
                            const WeightCosts& costs) {
  Row total[2];
  for (unsigned odd = 0; odd < 2; ++odd) {
    const auto pairs = [&](const Row& bytes, std::uint16_t factor) {
      const Row wide = odd != 0 ? OddBytes(bytes) : And(bytes, SetPairs(0x00FF));
      return MapPairs(wide, SetPairs(factor), [](auto x, auto y) { return hn::Mul(x, y); });
    };
    Row fine = pairs(counts.correction[0], costs.correction[0]);
    for (unsigned k = 1; k < kW; ++k) {
      fine = SaturatedAddPairs(fine, pairs(counts.correction[k], costs.correction[k]));
    }
    fine = SaturatedAddPairs(fine, SetPairs(kCorrectionSteps / 2));
    Row sum = MapLanes<PairTag>(fine, [](auto x) { return hn::ShiftRight<3>(x); });
    for (unsigned k = 0; k < kW; ++k) {
      sum = SaturatedAddPairs(sum, pairs(counts.disagreement[k], costs.disagreement[k]));
    }
    total[odd] = sum;
  }
  survivors.AddLarge(g, total[0], total[1]);
}

template <int kW, unsigned kR>
class SmallNodes {
 public:
  using Paths = Survivors<kR>;
  using Origin = Lineage<kR>;
  using Messages = Message<Row>[kR];

  SmallNodes(const ListProgram& program, Paths& survivors)
      : program_(program), survivors_(survivors), tables_(survivors.paths) {}

  // The node of the byte of u at `byte`, mixed. x receives its partial sums. kChain: the messages
  // are those of the chain, one positive half unit, with magnitude 1 set.
  template <bool kChain>
  void Byte(std::size_t byte, Message<Row>* messages, Row* x, Origin& origin) {
    byte_ = byte;
    frozen_ = program_.schedule.frozen_places(byte);
    never_ = program_.never_forks[byte];
    Node<3, kChain>(0, messages, x, origin);
  }

  // 8 positions of an all-open node, or those of valid: decided by sign, with forks in order of
  // reliability as long as one is accepted.
  HWY_NOINLINE void OpenRow(const Message<Row>* messages, std::uint8_t valid,
                            const WeightCosts& costs, Row* x, Origin& origin) {
    Row available[kR];
    Row m[kR][3];
    for (unsigned g = 0; g < kR; ++g) {
      x[g] = messages[g].s;
      available[g] = SetBytes(valid);
      for (unsigned k = 0; k < kW; ++k) m[g][k] = messages[g].m[k];
    }
    if (!survivors_.lists()) return;
    AddZeros(messages, valid, costs);
    Rounds(available, m, costs, x, origin, nullptr, nullptr, nullptr);
  }

 private:
  // The messages of a half: the upper one moved down to the lowest bits.
  template <unsigned kLevel>
  static HWY_INLINE Message<Row> UpperHalf(const Message<Row>& message) {
    constexpr int kShift = 1 << (kLevel - 1);
    Message<Row> out;
    out.s = ShiftWordsRight<kShift>(message.s);
    for (unsigned k = 0; k < kW; ++k) out.m[k] = ShiftWordsRight<kShift>(message.m[k]);
    return out;
  }

  template <unsigned kLevel, bool kChain>
  HWY_NOINLINE void Node(unsigned first, const Message<Row>* messages, Row* x, Origin& origin) {
    constexpr unsigned kSize = 1U << kLevel;
    constexpr unsigned kAll = (1U << kSize) - 1;
    const unsigned frozen = (frozen_ >> first) & kAll;
    const bool forks = ((~(never_ | frozen_) >> first) & kAll) != 0;
    const WeightCosts& costs = program_.costs_of(kLevel, 8 * byte_ + first);
    if (frozen == kAll) return Frozen<kLevel>(first, messages, costs, x);
    if constexpr (kLevel == 0) {
      return Single(messages, forks, costs, x, origin);
    } else {
      if (frozen == 0) return Open(kAll, forks, messages, costs, x, origin);
      if (survivors_.lists()) {
        if (frozen == kAll >> 1) {
          return Repetition<kLevel>(first, messages, forks, costs, x, origin);
        }
        if (frozen == 1) return Parity<kLevel>(first, forks, messages, costs, x, origin);
      }
      Halves<kLevel, kChain>(first, messages, x, origin);
    }
  }

  template <unsigned kLevel, bool kChain>
  HWY_INLINE void Halves(unsigned first, const Message<Row>* messages, Row* x, Origin& origin) {
    constexpr unsigned kHalf = 1U << (kLevel - 1);
    constexpr Shape kShape = kWidest<kW>;
    Messages child;
    Message<Row> upper[kR];
    for (unsigned g = 0; g < kR; ++g) {
      upper[g] = UpperHalf<kLevel>(messages[g]);
      child[g] = F<kShape>(messages[g], upper[g]);
    }
    Row left[kR];
    Origin left_origin;
    Node<kLevel - 1, kChain>(first, child, left, left_origin);
    for (unsigned g = 0; g < kR; ++g) {
      if constexpr (kChain) {
        child[g].s = Zeros<512>();
        child[g].m[0] = Not(left[g]);
        for (unsigned k = 1; k < kW; ++k) child[g].m[k] = Zeros<512>();
      } else {
        Message<Row> lower = messages[g];
        if (left_origin.moved) {
          lower = Moved(lower, left_origin.at[g]);
          upper[g] = UpperHalf<kLevel>(lower);
        }
        child[g] = G<kShape, kW>(lower, upper[g], left[g]);
      }
    }
    Row right[kR];
    Origin right_origin;
    Node<kLevel - 1, false>(first + kHalf, child, right, right_origin);
    if (right_origin.moved) right_origin.Apply(left, tables_);
    const Row low = SetBytes((1U << kHalf) - 1);
    for (unsigned g = 0; g < kR; ++g) {
      const Row above = And(right[g], low);
      x[g] = Or(And(Xor(left[g], right[g]), low), ShiftWordsLeft<kHalf>(above));
    }
    origin = left_origin;
    origin.Then(right_origin, tables_);
  }

  HWY_INLINE Message<Row> Moved(const Message<Row>& message, const Row& at) const {
    Message<Row> out;
    out.s = Permute(message.s, at, tables_);
    for (unsigned k = 0; k < kW; ++k) out.m[k] = Permute(message.m[k], at, tables_);
    return out;
  }

  // Public values of the node's indices, transformed; those of open indices count as 0.
  template <unsigned kLevel>
  HWY_INLINE Row ShownSums(unsigned g, unsigned first) const {
    const std::uint8_t all = static_cast<std::uint8_t>((1U << (1U << kLevel)) - 1);
    Row u = survivors_.shown[g];
    for (unsigned i = 0; i < kRowParts; ++i) {
      u.part[i] = hn::ShiftRightSame(u.part[i], static_cast<int>(first));
    }
    u = And(u, SetBytes(all));
    return kLevel == 0 ? u : TransformBytes(u);
  }

  template <unsigned kLevel>
  HWY_INLINE void Frozen(unsigned first, const Message<Row>* messages, const WeightCosts& costs,
                         Row* x) {
    for (unsigned g = 0; g < kR; ++g) x[g] = ShownSums<kLevel>(g, first);
    if (!survivors_.lists() || costs.flip[1] == 0) return;
    if constexpr (kLevel == 0) {
      for (unsigned g = 0; g < kR; ++g) {
        const Row disagrees = And(Xor(messages[g].s, x[g]), SetBytes(1));
        survivors_.AddSmall(g, LookUp(costs.single.data(),
                                      Or(Magnitude(messages[g]), ShiftWordsLeft<3>(disagrees))));
      }
    } else {
      const std::uint8_t all = static_cast<std::uint8_t>((1U << (1U << kLevel)) - 1);
      for (unsigned g = 0; g < kR; ++g) {
        CostCounts counts;
        Count(messages[g], Xor(messages[g].s, x[g]), SetBytes(all), counts);
        AddCounts<kW>(survivors_, g, counts, costs);
      }
    }
  }

  static HWY_INLINE void Count(const Message<Row>& message, const Row& disagrees, const Row& valid,
                               CostCounts& counts) {
    Row small[3];
    SmallMagnitudes<kW>(message, small);
    const Row counted = And(disagrees, valid);
    for (unsigned k = 0; k < kW; ++k) {
      counts.disagreement[k] = CountBits(And(counted, message.m[k]));
      counts.correction[k] = CountBits(And(small[k], valid));
    }
  }

  // The magnitude of the lowest position, as a number.
  static HWY_INLINE Row Magnitude(const Message<Row>& message) {
    const Row one = SetBytes(1);
    Row value = And(message.m[0], one);
    value = Or(value, ShiftWordsLeft<1>(And(message.m[1], one)));
    if constexpr (kW == 3) value = Or(value, ShiftWordsLeft<2>(And(message.m[2], one)));
    return value;
  }

  // One open index.
  HWY_INLINE void Single(const Message<Row>* messages, bool forks, const WeightCosts& costs, Row* x,
                         Origin& origin) {
    for (unsigned g = 0; g < kR; ++g) x[g] = And(messages[g].s, SetBytes(1));
    if (!survivors_.lists()) return;
    Row penalty[kR];
    Row forked[kR];
    for (unsigned g = 0; g < kR; ++g) {
      const Row magnitude = Magnitude(messages[g]);
      penalty[g] = LookUp(costs.flip.data(), magnitude);
      survivors_.AddSmall(g, LookUp(costs.single.data(), magnitude));
    }
    if (!forks || !survivors_.Fork(penalty, origin, forked)) return;
    for (unsigned g = 0; g < kR; ++g) {
      x[g] = Xor(Permute(x[g], origin.at[g], tables_), And(forked[g], SetBytes(1)));
    }
  }

  HWY_INLINE void Open(unsigned valid, bool forks, const Message<Row>* messages,
                       const WeightCosts& costs, Row* x, Origin& origin) {
    if (forks) {
      OpenRow(messages, static_cast<std::uint8_t>(valid), costs, x, origin);
    } else {
      for (unsigned g = 0; g < kR; ++g) x[g] = messages[g].s;
    }
  }

  // ln(1 + e^-x) of the open positions, where any magnitude is small.
  HWY_NOINLINE void AddZeros(const Message<Row>* messages, std::uint8_t valid,
                             const WeightCosts& costs) {
    for (unsigned g = 0; g < kR; ++g) {
      CostCounts counts;
      Row small[3];
      SmallMagnitudes<kW>(messages[g], small);
      // From weight 9 on only zeros count; a node without any costs all its paths the same.
      Row any = small[0];
      for (unsigned k = 1; k < kW; ++k) {
        if (costs.correction[k] != 0) any = small[k];
      }
      if (costs.flip[1] == 0 || AllZero(And(any, SetBytes(valid)))) continue;
      for (unsigned k = 0; k < kW; ++k) {
        counts.disagreement[k] = Zeros<512>();
        counts.correction[k] = CountBits(And(small[k], SetBytes(valid)));
      }
      AddCounts<kW>(survivors_, g, counts, costs);
    }
  }

  // The available positions with the smallest magnitude, and that magnitude.
  static HWY_INLINE Row LeastReliable(const Row& available, const Row* m, Row& magnitude) {
    Row candidates = available;
    magnitude = Zeros<512>();
    for (unsigned k = kW; k-- > 0;) {
      const Row lower = AndNot(m[k], candidates);
      const Row none = IsZero(lower);
      candidates = Select(none, candidates, lower);
      magnitude = Or(magnitude, And(none, SetBytes(static_cast<std::uint8_t>(1U << k))));
    }
    return And(candidates, Sub(Zeros<512>(), candidates));
  }

  // Forks at one position of every path after the other. For a parity node: magnitude of the least
  // reliable position, its place, and 0xFF where it has been flipped; each fork toggles it.
  HWY_NOINLINE void Rounds(Row* available, Row (*m)[3], const WeightCosts& costs, Row* x,
                           Origin& origin, Row* least, Row* least_place, Row* flipped) {
    Row penalty[kR];
    Row place[kR];
    Row forked[kR];
    for (unsigned round = 1; round < tables_.list; ++round) {
      for (unsigned g = 0; g < kR; ++g) {
        Row magnitude;
        place[g] = LeastReliable(available[g], m[g], magnitude);
        if (least != nullptr) {
          const Row sum = Add(magnitude, least[g]);
          magnitude = Select(flipped[g], Sub(magnitude, least[g]), sum);
        }
        penalty[g] = LookUp(costs.flip.data(), And(magnitude, SetBytes(15)));
        penalty[g] = Or(penalty[g], IsZero(available[g]));
        available[g] = AndNot(place[g], available[g]);
      }
      Origin step;
      if (!survivors_.Fork(penalty, step, forked)) return;
      step.Apply(x, tables_);
      step.Apply(available, tables_);
      step.Apply(place, tables_);
      for (unsigned g = 0; g < kR; ++g) {
        for (unsigned k = 0; k < kW; ++k) m[g][k] = Permute(m[g][k], step.at[g], tables_);
        x[g] = Xor(x[g], And(place[g], forked[g]));
      }
      if (least != nullptr) {
        step.Apply(least, tables_);
        step.Apply(least_place, tables_);
        step.Apply(flipped, tables_);
        for (unsigned g = 0; g < kR; ++g) {
          x[g] = Xor(x[g], And(least_place[g], forked[g]));
          flipped[g] = Xor(flipped[g], forked[g]);
        }
      }
      origin.Then(step, tables_);
    }
  }

  // All frozen but the last index: all sums are those shown, or all their opposites.
  template <unsigned kLevel>
  HWY_NOINLINE void Repetition(unsigned first, const Message<Row>* messages, bool forks,
                               const WeightCosts& costs, Row* x, Origin& origin) {
    const Row all = SetBytes(static_cast<std::uint8_t>((1U << (1U << kLevel)) - 1));
    Row penalty[kR];
    Row forked[kR];
    for (unsigned g = 0; g < kR; ++g) {
      const Row sums = ShownSums<kLevel>(g, first);
      CostCounts counts;
      Count(messages[g], Xor(messages[g].s, sums), all, counts);
      Row against = Zeros<512>();
      Row total = Zeros<512>();
      for (unsigned k = kW; k-- > 0;) {
        against = Add(Add(against, against), counts.disagreement[k]);
        total = Add(Add(total, total), CountBits(And(messages[g].m[k], all)));
      }
      const Row with = Sub(total, against);
      // Of equals the bit that agrees with the sign of the last index, which is the last sum's.
      const Row tie = And(Equal(against, with), LastDisagrees<kLevel>(messages[g].s, sums));
      const Row inverted = Or(Below(with, against), tie);
      x[g] = Xor(sums, And(inverted, all));
      const Row fewer = Least(against, with);
      penalty[g] = TimesSaturated(Sub(Greatest(against, with), fewer), costs.flip[1]);
      // Disagreements as one count of single magnitudes.
      counts.disagreement[0] = fewer;
      for (unsigned k = 1; k < kW; ++k) counts.disagreement[k] = Zeros<512>();
      if (costs.flip[1] != 0) AddCounts<kW>(survivors_, g, counts, costs);
    }
    if (!forks || !survivors_.Fork(penalty, origin, forked)) return;
    for (unsigned g = 0; g < kR; ++g) {
      x[g] = Xor(Permute(x[g], origin.at[g], tables_), And(forked[g], all));
    }
  }

  // 0xFF where the sign of the last position disagrees with its sum.
  template <unsigned kLevel>
  static HWY_INLINE Row LastDisagrees(const Row& signs, const Row& sums) {
    const Row last = SetBytes(static_cast<std::uint8_t>(1U << ((1U << kLevel) - 1)));
    return Not(IsZero(And(Xor(signs, sums), last)));
  }

  // All open but the first index: the sums' parity is the one shown.
  template <unsigned kLevel>
  HWY_NOINLINE void Parity(unsigned first, bool forks, const Message<Row>* messages,
                           const WeightCosts& costs, Row* x, Origin& origin) {
    const std::uint8_t valid = static_cast<std::uint8_t>((1U << (1U << kLevel)) - 1);
    Row available[kR];
    Row m[kR][3];
    Row least[kR];
    Row least_place[kR];
    Row flipped[kR];
    AddZeros(messages, valid, costs);
    for (unsigned g = 0; g < kR; ++g) {
      for (unsigned k = 0; k < kW; ++k) m[g][k] = messages[g].m[k];
      least_place[g] = LeastReliable(SetBytes(valid), m[g], least[g]);
      available[g] = AndNot(least_place[g], SetBytes(valid));
      Row parity = CountBits(And(messages[g].s, SetBytes(valid)));
      Row shown = survivors_.shown[g];
      for (unsigned i = 0; i < kRowParts; ++i) {
        shown.part[i] = hn::ShiftRightSame(shown.part[i], static_cast<int>(first));
      }
      parity = And(Xor(parity, shown), SetBytes(1));
      flipped[g] = Sub(Zeros<512>(), parity);
      x[g] = Xor(messages[g].s, And(flipped[g], least_place[g]));
      survivors_.AddSmall(
          g, And(flipped[g], Least(LookUp(costs.flip.data(), least[g]), SetBytes(127))));
    }
    if (forks) Rounds(available, m, costs, x, origin, least, least_place, flipped);
  }

  const ListProgram& program_;
  Paths& survivors_;
  const PathTables& tables_;
  std::size_t byte_ = 0;
  unsigned frozen_ = 0;
  unsigned never_ = 0;
};

}  // namespace HWY_NAMESPACE
}  // namespace frostline
HWY_AFTER_NAMESPACE();

#endif  // FROSTLINE_SMALL_NODES_INL_H
