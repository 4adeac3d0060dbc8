// The metrics of all paths, and forks: which alternatives survive, without sorting.
//
// Included once a target, inside Highway's namespace; no include guard of the usual kind.
#if defined(FROSTLINE_PATH_FORKS_INL_H) == defined(HWY_TARGET_TOGGLE)
#ifdef FROSTLINE_PATH_FORKS_INL_H
#undef FROSTLINE_PATH_FORKS_INL_H
#else
#define FROSTLINE_PATH_FORKS_INL_H
#endif

#include <hwy/highway.h>

#include "decode/list/list_program.h"
#include "decode/list/path_rows-inl.h"

HWY_BEFORE_NAMESPACE();
namespace frostline {
namespace HWY_NAMESPACE {

// Where the paths of each slot stood before, for kR rows side by side. Nothing moved: at is unused.
template <unsigned kR>
struct Lineage {
  bool moved = false;
  Row at[kR];

  HWY_INLINE void Apply(Row* rows, const PathTables& paths) const {
    for (unsigned g = 0; g < kR; ++g) rows[g] = Permute(rows[g], at[g], paths);
  }
  // First this one happened, then the other.
  HWY_INLINE void Then(const Lineage& other, const PathTables& paths) {
    if (!other.moved) return;
    for (unsigned g = 0; g < kR; ++g) {
      at[g] = moved ? Permute(at[g], other.at[g], paths) : other.at[g];
    }
    moved = true;
  }
};

template <unsigned kR>
class Survivors {
 public:
  explicit Survivors(const PathTables& path_tables) : paths(path_tables) {
    // One path lives; the slots of the others wait for forks.
    alignas(64) std::uint8_t first[kRowBytes];
    for (unsigned i = 0; i < kRowBytes; ++i) first[i] = i % paths.list == 0 ? 0 : 255;
    for (unsigned g = 0; g < kR; ++g) {
      metric[g] = LoadRow(first);
      state[g] = Zeros<512>();
      shown[g] = Zeros<512>();
    }
  }

  bool lists() const { return paths.list > 1; }

  // Adds costs of at most 127 to the metrics of row g.
  HWY_INLINE void AddSmall(unsigned g, const Row& cost) {
    const Row dead = Equal(metric[g], SetBytes(255));
    const Row sum = SaturatedAdd(metric[g], cost);
    metric[g] = Or(Sub(sum, LeastOfBlock(sum, paths)), dead);
  }

  // Adds costs in pairs of bytes, of the even paths and of the odd ones.
  HWY_INLINE void AddLarge(unsigned g, const Row& even, const Row& odd) {
    const Row low = SetPairs(0x00FF);
    const Row old_even = And(metric[g], low);
    const Row old_odd = OddBytes(metric[g]);
    const Row dead_even = PairsEqual(old_even, low);
    const Row dead_odd = PairsEqual(old_odd, low);
    const Row sum_even = Or(SaturatedAddPairs(old_even, even), dead_even);
    const Row sum_odd = Or(SaturatedAddPairs(old_odd, odd), dead_odd);
    const auto least = [](const Row& a, const Row& b) {
      return MapPairs(a, b, [](auto x, auto y) { return hn::Min(x, y); });
    };
    const Row best = OverBlock(least(sum_even, sum_odd), 1, paths, least);
    const auto relative = [&](const Row& sum, const Row& dead) {
      const Row above = MapPairs(sum, best, [](auto x, auto y) { return hn::Sub(x, y); });
      return Or(least(above, low), And(dead, low));
    };
    const Row new_even = relative(sum_even, dead_even);
    const Row new_odd = relative(sum_odd, dead_odd);
    metric[g] = Or(new_even, EvenToOdd(new_odd));
  }

  // Every path may fork at its penalty: of the 2L alternatives of each block the L best stay, ties
  // kept before forked and lower parent first. Forks take the slots of the paths that are dropped,
  // in order. Returns whether any stays; then `step` says where the path of each slot comes from,
  // and forked is 0xFF at forks.
  HWY_NOINLINE bool Fork(const Row* penalty, Lineage<kR>& step, Row* forked) {
    Row alternative[kR];
    Row any = Zeros<512>();
    for (unsigned g = 0; g < kR; ++g) {
      alternative[g] = SaturatedAdd(metric[g], penalty[g]);
      any = Or(any, Below(alternative[g], GreatestOfBlock(metric[g], paths)));
    }
    if (AllZero(any)) return false;
    ForkSome(alternative, step, forked);
    return true;
  }

  const PathTables& paths;
  Row metric[kR];
  Row state[kR];  // of precoding
  Row shown[kR];  // public values of the byte of u at hand

 private:
  HWY_INLINE void ForkSome(const Row* alternative, Lineage<kR>& step, Row* forked) {
    const Row size = SetBytes(static_cast<std::uint8_t>(paths.list));
    // The L-th smallest of the 2L alternatives: the largest value with fewer than L below it.
    Row last[kR];
    for (unsigned g = 0; g < kR; ++g) last[g] = Zeros<512>();
    for (unsigned bit = 0x80; bit != 0; bit >>= 1) {
      const Row step_up = SetBytes(static_cast<std::uint8_t>(bit));
      for (unsigned g = 0; g < kR; ++g) {
        const Row higher = Or(last[g], step_up);
        const Row few = Below(CountBelow(alternative[g], metric[g], higher), size);
        last[g] = Or(last[g], And(few, step_up));
      }
    }
    step.moved = true;
    for (unsigned g = 0; g < kR; ++g) {
      const Row room = Sub(size, CountBelow(alternative[g], metric[g], last[g]));
      const Row tied_kept = Equal(metric[g], last[g]);
      const Row tied_forks = Equal(alternative[g], last[g]);
      const Row one = SetBytes(1);
      const Row kept_ties = And(tied_kept, one);
      const Row room_after = SaturatedSub(room, SumOfBlock(kept_ties, paths));
      const Row stays_tied = AndNot(Below(room, SumsUpTo(kept_ties, paths)), tied_kept);
      const Row forks_tied =
          AndNot(Below(room_after, SumsUpTo(And(tied_forks, one), paths)), tied_forks);
      const Row dropped = Not(Or(Below(metric[g], last[g]), stays_tied));
      const Row accepted = Or(Below(alternative[g], last[g]), forks_tied);
      step.at[g] = Match(dropped, accepted);
      forked[g] = dropped;
      metric[g] = Select(dropped, Permute(alternative[g], step.at[g], paths), metric[g]);
      state[g] = Permute(state[g], step.at[g], paths);
      shown[g] = Permute(shown[g], step.at[g], paths);
    }
  }

  HWY_INLINE Row CountBelow(const Row& a, const Row& b, const Row& limit) const {
    const Row below = Add(Below(a, limit), Below(b, limit));
    return SumOfBlock(Sub(Zeros<512>(), below), paths);
  }

  // The i-th dropped slot of a block takes the i-th accepted fork; as many of either in each block.
  HWY_INLINE Row Match(const Row& dropped, const Row& accepted) const {
    const std::uint64_t to = MaskBits(dropped);
    const std::uint64_t from = MaskBits(accepted);
#if HWY_TARGET == HWY_AVX3_DL
    const __m512i iota = _mm512_load_si512(paths.iota);
    Row out;
    out.part[0] = hn::Vec512<std::uint64_t>{
        _mm512_mask_expand_epi8(iota, to, _mm512_maskz_compress_epi8(from, iota))};
    return out;
#else
    alignas(64) std::uint8_t at[kRowBytes];
    std::memcpy(at, paths.iota, kRowBytes);
    std::uint64_t sources = from;
    for (std::uint64_t slots = to; slots != 0; slots &= slots - 1, sources &= sources - 1) {
      at[__builtin_ctzll(slots)] = static_cast<std::uint8_t>(__builtin_ctzll(sources));
    }
    return LoadRow(at);
#endif
  }
};

}  // namespace HWY_NAMESPACE
}  // namespace frostline
HWY_AFTER_NAMESPACE();

#endif  // FROSTLINE_PATH_FORKS_INL_H
