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
    switch (paths.log2_list) {
      case 1:
        return ForkOf<1>(penalty, step, forked);
      case 2:
        return ForkOf<2>(penalty, step, forked);
      case 3:
        return ForkOf<3>(penalty, step, forked);
      case 4:
        return ForkOf<4>(penalty, step, forked);
      default:
        return ForkOf<5>(penalty, step, forked);
    }
  }

  const PathTables& paths;
  Row metric[kR];
  Row state[kR];  // of precoding
  Row shown[kR];  // public values of the byte of u at hand

 private:
  template <unsigned kLog2>
  HWY_INLINE bool ForkOf(const Row* penalty, Lineage<kR>& step, Row* forked) {
    Row alternative[kR];
    Row any = Zeros<512>();
    const auto greatest = [](const Row& a, const Row& b) { return Greatest(a, b); };
    for (unsigned g = 0; g < kR; ++g) {
      alternative[g] = SaturatedAdd(metric[g], penalty[g]);
      any = Or(any, Below(alternative[g], OverPaths<kLog2>(metric[g], paths, greatest)));
    }
    if (AllZero(any)) return false;
#if HWY_TARGET == HWY_AVX3_DL
    if constexpr (kLog2 <= 3) {
      ForkByRank<kLog2>(alternative, step, forked);
    } else {
      ForkByThreshold<kLog2>(alternative, step, forked);
    }
#else
    ForkSome(alternative, step, forked);
#endif
    return true;
  }

#if HWY_TARGET == HWY_AVX3_DL
  static HWY_INLINE __m512i Raw(const Row& row) { return row.part[0].raw; }
  static HWY_INLINE Row FromRaw(__m512i raw) {
    Row out;
    out.part[0] = hn::Vec512<std::uint64_t>{raw};
    return out;
  }

  // The i-th dropped slot of a block takes the i-th accepted fork; as many of either in each block.
  HWY_INLINE void Settle(unsigned g, __mmask64 dropped, __mmask64 accepted, const Row& alternative,
                         Lineage<kR>& step, Row* forked) {
    const __m512i iota = _mm512_load_si512(paths.iota);
    const __m512i at =
        _mm512_mask_expand_epi8(iota, dropped, _mm512_maskz_compress_epi8(accepted, iota));
    step.at[g] = FromRaw(at);
    forked[g] = FromRaw(_mm512_movm_epi8(dropped));
    metric[g] =
        FromRaw(_mm512_mask_permutexvar_epi8(Raw(metric[g]), dropped, at, Raw(alternative)));
    state[g] = FromRaw(_mm512_permutexvar_epi8(at, Raw(state[g])));
    shown[g] = FromRaw(_mm512_permutexvar_epi8(at, Raw(shown[g])));
  }

  // Bytes whose path p has bit k set: where p xor r is below p, k the highest bit of r.
  static constexpr std::uint64_t UpperOf(unsigned r) {
    return r >= 4 ? 0xF0F0F0F0F0F0F0F0U : r >= 2 ? 0xCCCCCCCCCCCCCCCCU : 0xAAAAAAAAAAAAAAAAU;
  }

  // Short lists: every alternative counts those that are better.
  template <unsigned kLog2>
  HWY_INLINE void ForkByRank(const Row* alternative, Lineage<kR>& step, Row* forked) {
    constexpr unsigned kList = 1U << kLog2;
    const __m512i one = _mm512_set1_epi8(1);
    const __m512i size = _mm512_set1_epi8(kList);
    const __m512i iota = _mm512_and_si512(_mm512_load_si512(paths.iota), _mm512_set1_epi8(15));
    __m512i better_forks[kR];
    __m512i better_kept[kR];
    for (unsigned g = 0; g < kR; ++g) {
      better_forks[g] = one;  // its own parent
      better_kept[g] = _mm512_setzero_si512();
    }
#pragma GCC unroll 8
    for (unsigned r = 1; r < kList; ++r) {
      const __m512i other = _mm512_xor_si512(iota, _mm512_set1_epi8(static_cast<char>(r)));
      const __mmask64 ties = UpperOf(r);
#pragma GCC unroll 4
      for (unsigned g = 0; g < kR; ++g) {
        const __m512i kept = Raw(metric[g]);
        const __m512i fork = Raw(alternative[g]);
        const __m512i kept_there = _mm512_shuffle_epi8(kept, other);
        const __m512i fork_there = _mm512_shuffle_epi8(fork, other);
        const auto count = [&](__m512i& counter, __mmask64 where) {
          counter = _mm512_mask_add_epi8(counter, where, counter, one);
        };
        count(better_forks[g], _mm512_cmple_epu8_mask(kept_there, fork));
        count(better_forks[g], _mm512_mask_cmple_epu8_mask(ties, fork_there, fork));
        count(better_forks[g], _mm512_mask_cmplt_epu8_mask(~ties, fork_there, fork));
        count(better_kept[g], _mm512_mask_cmple_epu8_mask(ties, kept_there, kept));
        count(better_kept[g], _mm512_mask_cmplt_epu8_mask(~ties, kept_there, kept));
      }
    }
    step.moved = true;
#pragma GCC unroll 4
    for (unsigned g = 0; g < kR; ++g) {
      const __mmask64 accepted = _mm512_cmplt_epu8_mask(better_forks[g], size);
      // As many of the worst kept paths go as forks come.
      const Row come = OverPaths<kLog2>(FromRaw(_mm512_maskz_mov_epi8(accepted, one)), paths,
                                        [](const Row& a, const Row& b) { return Add(a, b); });
      const __mmask64 dropped =
          _mm512_cmpge_epu8_mask(_mm512_add_epi8(better_kept[g], Raw(come)), size);
      Settle(g, dropped, accepted, alternative[g], step, forked);
    }
  }

  // Long lists: the L-th smallest of the 2L alternatives, the largest value with fewer than L below
  // it, is found bit by bit.
  template <unsigned kLog2>
  HWY_INLINE void ForkByThreshold(const Row* alternative, Lineage<kR>& step, Row* forked) {
    constexpr unsigned kList = 1U << kLog2;
    constexpr std::uint64_t kBlock = (std::uint64_t{1} << kList) - 1;
    const __m512i one = _mm512_set1_epi8(1);
    const __m512i size = _mm512_set1_epi64(kList);
    __m512i last[kR];
    __m512i any = _mm512_setzero_si512();
    for (unsigned g = 0; g < kR; ++g) {
      last[g] = _mm512_setzero_si512();
      any = _mm512_or_si512(any, Raw(metric[g]));
    }
    // It is one of the kept metrics or below: no bit of it is above all of theirs.
    unsigned top = 0x80;
    while (top > 1 && _mm512_test_epi8_mask(any, _mm512_set1_epi8(static_cast<char>(top))) == 0) {
      top >>= 1;
    }
    for (unsigned bit = top; bit != 0; bit >>= 1) {
      const __m512i step_up = _mm512_set1_epi8(static_cast<char>(bit));
#pragma GCC unroll 4
      for (unsigned g = 0; g < kR; ++g) {
        const __m512i higher = _mm512_or_si512(last[g], step_up);
        __m512i below = _mm512_maskz_mov_epi8(_mm512_cmplt_epu8_mask(Raw(metric[g]), higher), one);
        below = _mm512_mask_add_epi8(below, _mm512_cmplt_epu8_mask(Raw(alternative[g]), higher),
                                     below, one);
        __m512i count = _mm512_sad_epu8(below, _mm512_setzero_si512());
        count = _mm512_add_epi64(count, _mm512_permutex_epi64(count, 0xB1));
        if constexpr (kLog2 == 5) {
          count = _mm512_add_epi64(count, _mm512_permutex_epi64(count, 0x4E));
        }
        last[g] = _mm512_mask_mov_epi64(last[g], _mm512_cmplt_epu64_mask(count, size), higher);
      }
    }
    step.moved = true;
    for (unsigned g = 0; g < kR; ++g) {
      const __mmask64 kept_below = _mm512_cmplt_epu8_mask(Raw(metric[g]), last[g]);
      const __mmask64 kept_tied = _mm512_cmpeq_epu8_mask(Raw(metric[g]), last[g]);
      const __mmask64 forks_below = _mm512_cmplt_epu8_mask(Raw(alternative[g]), last[g]);
      const __mmask64 forks_tied = _mm512_cmpeq_epu8_mask(Raw(alternative[g]), last[g]);
      std::uint64_t kept = kept_below;
      std::uint64_t accepted = forks_below;
      for (unsigned first = 0; first < kRowBytes; first += kList) {
        const std::uint64_t block = kBlock << first;
        const auto settled =
            __builtin_popcountll(kept_below & block) + __builtin_popcountll(forks_below & block);
        const auto room = static_cast<unsigned>(static_cast<int>(kList) - settled);
        const std::uint64_t stay = FirstOnes(kept_tied & block, room);
        const auto left = room - static_cast<unsigned>(__builtin_popcountll(stay));
        kept |= stay;
        accepted |= FirstOnes(forks_tied & block, left);
      }
      Settle(g, ~kept, accepted, alternative[g], step, forked);
    }
  }

  // The lowest `count` ones of a word, count from 0 to 32.
  static HWY_INLINE std::uint64_t FirstOnes(std::uint64_t word, unsigned count) {
    return _pdep_u64((std::uint64_t{1} << count) - 1, word);
  }
#else
  HWY_NOINLINE void ForkSome(const Row* alternative, Lineage<kR>& step, Row* forked) {
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
    alignas(64) std::uint8_t at[kRowBytes];
    std::memcpy(at, paths.iota, kRowBytes);
    std::uint64_t sources = MaskBits(accepted);
    for (std::uint64_t slots = MaskBits(dropped); slots != 0;
         slots &= slots - 1, sources &= sources - 1) {
      at[__builtin_ctzll(slots)] = static_cast<std::uint8_t>(__builtin_ctzll(sources));
    }
    return LoadRow(at);
  }
#endif
};

}  // namespace HWY_NAMESPACE
}  // namespace frostline
HWY_AFTER_NAMESPACE();

#endif  // FROSTLINE_PATH_FORKS_INL_H
