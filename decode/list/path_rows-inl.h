// Rows of 64 bytes, one for each path of each block: arithmetic of bytes, permutations of paths,
// and sums, minima and maxima over the paths of a block.
//
// A row is one vector of 512 bits or several shorter ones.
//
// Included once a target, inside Highway's namespace; no include guard of the usual kind.
#if defined(FROSTLINE_PATH_ROWS_INL_H) == defined(HWY_TARGET_TOGGLE)
#ifdef FROSTLINE_PATH_ROWS_INL_H
#undef FROSTLINE_PATH_ROWS_INL_H
#else
#define FROSTLINE_PATH_ROWS_INL_H
#endif

#include <hwy/highway.h>

#include <algorithm>
#include <cstring>

#include "decode/lanes/register_bits-inl.h"

HWY_BEFORE_NAMESPACE();
namespace frostline {
namespace HWY_NAMESPACE {

using Row = Bits<512>;
constexpr unsigned kRowParts = kParts<512>;
using WordTag = PartTag<512>;
constexpr std::size_t kRowBytes = 64;
#if HWY_TARGET == HWY_SCALAR
constexpr std::size_t kPartBytes = 8;
using ByteTag = hn::FixedTag<std::uint8_t, 1>;
using PairTag = hn::FixedTag<std::uint16_t, 1>;
#else
constexpr std::size_t kPartBytes = kRowBytes / kRowParts;
using ByteTag = hn::Repartition<std::uint8_t, WordTag>;
using PairTag = hn::Repartition<std::uint16_t, WordTag>;
#endif

// On HWY_SCALAR whatever goes through memory is a call, or it would take minutes to compile.
#undef FROSTLINE_ROW_INLINE
#if HWY_TARGET == HWY_SCALAR
#define FROSTLINE_ROW_INLINE HWY_NOINLINE
#else
#define FROSTLINE_ROW_INLINE HWY_INLINE
#endif

// A row from words in memory and back. HWY_SCALAR has no vectors of bytes: there operations on
// bytes and pairs of bytes are done one by one, through memory.
HWY_INLINE Row LoadRow(const std::uint8_t* bytes) {
  Row out;
  for (unsigned i = 0; i < kRowParts; ++i) {
    out.part[i] =
        hn::Load(WordTag(), reinterpret_cast<const std::uint64_t*>(bytes + i * kPartBytes));
  }
  return out;
}
HWY_INLINE void StoreRow(const Row& row, std::uint8_t* bytes) {
  for (unsigned i = 0; i < kRowParts; ++i) {
    hn::Store(row.part[i], WordTag(), reinterpret_cast<std::uint64_t*>(bytes + i * kPartBytes));
  }
}

template <typename Tag, typename Operation>
HWY_INLINE Row MapLanes(const Row& a, Operation operation) {
#if HWY_TARGET == HWY_SCALAR
  using T = hn::TFromD<Tag>;
  alignas(64) T lanes[kRowBytes / sizeof(T)];
  StoreRow(a, reinterpret_cast<std::uint8_t*>(lanes));
  for (T& lane : lanes) lane = hn::GetLane(operation(hn::Set(Tag(), lane)));
  return LoadRow(reinterpret_cast<const std::uint8_t*>(lanes));
#else
  Row out;
  for (unsigned i = 0; i < kRowParts; ++i) {
    out.part[i] = hn::BitCast(WordTag(), operation(hn::BitCast(Tag(), a.part[i])));
  }
  return out;
#endif
}
template <typename Tag, typename Operation>
HWY_INLINE Row MapLanes(const Row& a, const Row& b, Operation operation) {
#if HWY_TARGET == HWY_SCALAR
  using T = hn::TFromD<Tag>;
  alignas(64) T lanes[kRowBytes / sizeof(T)];
  alignas(64) T others[kRowBytes / sizeof(T)];
  StoreRow(a, reinterpret_cast<std::uint8_t*>(lanes));
  StoreRow(b, reinterpret_cast<std::uint8_t*>(others));
  for (std::size_t i = 0; i < kRowBytes / sizeof(T); ++i) {
    lanes[i] = hn::GetLane(operation(hn::Set(Tag(), lanes[i]), hn::Set(Tag(), others[i])));
  }
  return LoadRow(reinterpret_cast<const std::uint8_t*>(lanes));
#else
  Row out;
  for (unsigned i = 0; i < kRowParts; ++i) {
    out.part[i] = hn::BitCast(
        WordTag(), operation(hn::BitCast(Tag(), a.part[i]), hn::BitCast(Tag(), b.part[i])));
  }
  return out;
#endif
}
template <typename Operation>
HWY_INLINE Row MapBytes(const Row& a, Operation operation) {
  return MapLanes<ByteTag>(a, operation);
}
template <typename Operation>
HWY_INLINE Row MapBytes(const Row& a, const Row& b, Operation operation) {
  return MapLanes<ByteTag>(a, b, operation);
}
template <typename Operation>
HWY_INLINE Row MapPairs(const Row& a, const Row& b, Operation operation) {
  return MapLanes<PairTag>(a, b, operation);
}

HWY_INLINE Row SetWords(std::uint64_t value) {
  Row out;
  for (unsigned i = 0; i < kRowParts; ++i) out.part[i] = hn::Set(WordTag(), value);
  return out;
}
HWY_INLINE Row SetBytes(std::uint8_t value) {
  return SetWords(0x0101010101010101U * std::uint64_t{value});
}
HWY_INLINE Row SetPairs(std::uint16_t value) {
  return SetWords(0x0001000100010001U * std::uint64_t{value});
}
HWY_INLINE Row Or(const Row& a, const Row& b) {
  Row out;
  for (unsigned i = 0; i < kRowParts; ++i) out.part[i] = hn::Or(a.part[i], b.part[i]);
  return out;
}
HWY_INLINE Row Select(const Row& mask, const Row& yes, const Row& no) {
  return Ternary<kSelect>(mask, yes, no);
}
template <int kBits>
HWY_INLINE Row ShiftWordsRight(const Row& a) {
  Row out;
  for (unsigned i = 0; i < kRowParts; ++i) out.part[i] = hn::ShiftRight<kBits>(a.part[i]);
  return out;
}
template <int kBits>
HWY_INLINE Row ShiftWordsLeft(const Row& a) {
  Row out;
  for (unsigned i = 0; i < kRowParts; ++i) out.part[i] = hn::ShiftLeft<kBits>(a.part[i]);
  return out;
}

FROSTLINE_ROW_INLINE Row Add(const Row& a, const Row& b) {
  return MapBytes(a, b, [](auto x, auto y) { return hn::Add(x, y); });
}
FROSTLINE_ROW_INLINE Row Sub(const Row& a, const Row& b) {
  return MapBytes(a, b, [](auto x, auto y) { return hn::Sub(x, y); });
}
FROSTLINE_ROW_INLINE Row SaturatedAdd(const Row& a, const Row& b) {
  return MapBytes(a, b, [](auto x, auto y) { return hn::SaturatedAdd(x, y); });
}
FROSTLINE_ROW_INLINE Row SaturatedSub(const Row& a, const Row& b) {
  return MapBytes(a, b, [](auto x, auto y) { return hn::SaturatedSub(x, y); });
}
FROSTLINE_ROW_INLINE Row Least(const Row& a, const Row& b) {
  return MapBytes(a, b, [](auto x, auto y) { return hn::Min(x, y); });
}
FROSTLINE_ROW_INLINE Row Greatest(const Row& a, const Row& b) {
  return MapBytes(a, b, [](auto x, auto y) { return hn::Max(x, y); });
}
FROSTLINE_ROW_INLINE Row CountBits(const Row& a) {
  return MapBytes(a, [](auto x) { return hn::PopulationCount(x); });
}
// Bytes of 0xFF where it holds, of 0 elsewhere.
FROSTLINE_ROW_INLINE Row Equal(const Row& a, const Row& b) {
  return MapBytes(a, b, [](auto x, auto y) { return hn::VecFromMask(ByteTag(), hn::Eq(x, y)); });
}
FROSTLINE_ROW_INLINE Row Below(const Row& a, const Row& b) {
  return MapBytes(a, b, [](auto x, auto y) { return hn::VecFromMask(ByteTag(), hn::Lt(x, y)); });
}
HWY_INLINE Row IsZero(const Row& a) { return Equal(a, Zeros<512>()); }
HWY_INLINE bool AllZero(const Row& a) {
  auto any = a.part[0];
  for (unsigned i = 1; i < kRowParts; ++i) any = hn::Or(any, a.part[i]);
  return hn::AllTrue(WordTag(), hn::Eq(any, hn::Zero(WordTag())));
}
// Bit i for byte i of a row of 0xFF and 0.
FROSTLINE_ROW_INLINE std::uint64_t MaskBits(const Row& mask) {
#if HWY_TARGET == HWY_SCALAR
  alignas(64) std::uint8_t lanes[kRowBytes];
  StoreRow(mask, lanes);
  std::uint64_t all = 0;
  for (unsigned i = 0; i < kRowBytes; ++i) all |= std::uint64_t{lanes[i] & 1U} << i;
  return all;
#else
  std::uint64_t all = 0;
  for (unsigned i = 0; i < kRowParts; ++i) {
    alignas(8) std::uint8_t bytes[8] = {};
    hn::StoreMaskBits(ByteTag(), hn::MaskFromVec(hn::BitCast(ByteTag(), mask.part[i])), bytes);
    std::uint64_t word;
    std::memcpy(&word, bytes, 8);
    all |= word << (i * kPartBytes % 64);
  }
  return all;
#endif
}

// Byte index[i] of the same sixteen bytes at byte i; 0 where it is 0x80. REQUIRES: index bytes
// below 16 or 0x80.
FROSTLINE_ROW_INLINE Row LookUpInSixteens(const Row& row, const Row& index) {
#if HWY_TARGET == HWY_SCALAR
  alignas(64) std::uint8_t bytes[kRowBytes];
  alignas(64) std::uint8_t at[kRowBytes];
  StoreRow(row, bytes);
  StoreRow(index, at);
  for (unsigned i = 0; i < kRowBytes; ++i) {
    at[i] = at[i] < 16 ? bytes[i / 16 * 16 + at[i]] : std::uint8_t{0};
  }
  return LoadRow(at);
#else
  return MapBytes(row, index, [](auto x, auto i) { return hn::TableLookupBytesOr0(x, i); });
#endif
}
// Sixteen bytes, looked up by the low half of each byte. REQUIRES: index bytes below 16; an aligned
// table.
FROSTLINE_ROW_INLINE Row LookUp(const std::uint8_t* table, const Row& index) {
#if HWY_TARGET == HWY_SCALAR
  alignas(64) std::uint8_t at[kRowBytes];
  StoreRow(index, at);
  for (std::uint8_t& byte : at) byte = table[byte & 15U];
  return LoadRow(at);
#else
  const auto entries = hn::LoadDup128(ByteTag(), table);
  return MapBytes(index, [&](auto i) { return hn::TableLookupBytes(entries, i); });
#endif
}

// Neighbouring groups of 16 bytes exchanged.
HWY_INLINE Row SwapSixteens(const Row& a) {
  Row out;
  if constexpr (kPartBytes <= 16) {
    for (unsigned i = 0; i < kRowParts; ++i) out.part[i] = a.part[i ^ (16 / kPartBytes)];
  } else {
#if HWY_TARGET == HWY_AVX3 || HWY_TARGET == HWY_AVX3_DL
    // The form with a mask: GCC 12 warns of the other one.
    out.part[0] = hn::Vec512<std::uint64_t>{
        _mm512_maskz_shuffle_i64x2(0xFF, a.part[0].raw, a.part[0].raw, 0xB1)};
#elif HWY_TARGET != HWY_SCALAR
    for (unsigned i = 0; i < kRowParts; ++i) {
      out.part[i] = hn::ConcatLowerUpper(WordTag(), a.part[i], a.part[i]);
    }
#endif
  }
  return out;
}

// Bytes 1, 3, 5, ... as pairs of bytes, and back.
FROSTLINE_ROW_INLINE Row OddBytes(const Row& a) {
  return MapLanes<PairTag>(a, [](auto x) { return hn::ShiftRight<8>(x); });
}
FROSTLINE_ROW_INLINE Row EvenToOdd(const Row& a) {
  return MapLanes<PairTag>(a, [](auto x) { return hn::ShiftLeft<8>(x); });
}
FROSTLINE_ROW_INLINE Row PairsEqual(const Row& a, const Row& b) {
  return MapPairs(a, b, [](auto x, auto y) { return hn::VecFromMask(PairTag(), hn::Eq(x, y)); });
}
FROSTLINE_ROW_INLINE Row SaturatedAddPairs(const Row& a, const Row& b) {
  return MapPairs(a, b, [](auto x, auto y) { return hn::SaturatedAdd(x, y); });
}

HWY_INLINE Row LowNibbles(const Row& a) { return And(a, SetBytes(0x0F)); }
HWY_INLINE Row HighNibbles(const Row& a) { return LowNibbles(ShiftWordsRight<4>(a)); }

// What depends on the list size alone.
struct PathTables {
  explicit PathTables(unsigned list_size) : list(list_size) {
    while ((1U << log2_list) < list) ++log2_list;
    for (unsigned i = 0; i < kRowBytes; ++i) {
      iota[i] = static_cast<std::uint8_t>(i);
      expand[i] = static_cast<std::uint8_t>(i / list);
      for (unsigned k = 0; k < 4; ++k) {
        exchange[k][i] = static_cast<std::uint8_t>((i ^ (1U << k)) % 16);
        before[k][i] = static_cast<std::uint8_t>(
            i % std::min(list, 16U) >= (1U << k) ? i % 16 - (1U << k) : 0x80U);
      }
      before[4][i] = (i & 16U) != 0 ? 15 : 0x80;
    }
  }

  unsigned list;
  unsigned log2_list = 0;
  alignas(64) std::uint8_t iota[kRowBytes];
  alignas(64) std::uint8_t expand[kRowBytes];       // the block of each byte
  alignas(64) std::uint8_t exchange[4][kRowBytes];  // path p to path p xor 2^k
  alignas(64) std::uint8_t before[5][kRowBytes];    // path p - 2^k of its sixteen, or none
};

// row[index[i]] at byte i. REQUIRES: index[i] is a byte of the same block, blocks of at most 32.
FROSTLINE_ROW_INLINE Row Permute(const Row& row, const Row& index,
                                 [[maybe_unused]] const PathTables& paths) {
#if HWY_TARGET == HWY_AVX3_DL
  Row out;
  out.part[0] =
      hn::Vec512<std::uint64_t>{_mm512_permutexvar_epi8(index.part[0].raw, row.part[0].raw)};
  return out;
#else
  const Row near = LowNibbles(index);
  const Row out = LookUpInSixteens(row, near);
  if (paths.list <= 16) return out;
  const Row moved = And(Xor(index, LoadRow(paths.iota)), SetBytes(16));
  return Select(IsZero(moved), out, LookUpInSixteens(SwapSixteens(row), near));
#endif
}

// The operation over all paths of each block, at every path.
template <typename Operation>
HWY_INLINE Row OverBlock(Row row, unsigned first, const PathTables& paths, Operation operation) {
  for (unsigned k = first; k < paths.log2_list; ++k) {
    Row other;
    if (k < 4) {
      other = LookUpInSixteens(row, LoadRow(paths.exchange[k]));
    } else {
      other = SwapSixteens(row);
    }
    row = operation(row, other);
  }
  return row;
}
// The same where L is known when compiled.
template <unsigned kLog2, typename Operation>
HWY_INLINE Row OverPaths(Row row, const PathTables& paths, Operation operation) {
  if constexpr (kLog2 > 4) {
    row = OverPaths<4>(row, paths, operation);
    return operation(row, SwapSixteens(row));
  } else if constexpr (kLog2 > 0) {
    row = OverPaths<kLog2 - 1>(row, paths, operation);
    return operation(row, LookUpInSixteens(row, LoadRow(paths.exchange[kLog2 - 1])));
  } else {
    return row;
  }
}
HWY_INLINE Row LeastOfBlock(const Row& row, const PathTables& paths) {
  return OverBlock(row, 0, paths, [](const Row& a, const Row& b) { return Least(a, b); });
}
HWY_INLINE Row SumOfBlock(const Row& row, const PathTables& paths) {
  return OverBlock(row, 0, paths, [](const Row& a, const Row& b) { return Add(a, b); });
}
// The sum over the paths of the block up to this one.
FROSTLINE_ROW_INLINE Row SumsUpTo(Row row, const PathTables& paths) {
  for (unsigned k = 0; k < paths.log2_list; ++k) {
    const Row from = k < 4 ? row : SwapSixteens(row);
    row = Add(row, LookUpInSixteens(from, LoadRow(paths.before[k])));
  }
  return row;
}

// Counts times a factor, at most 255. REQUIRES: the product is below 2^16.
FROSTLINE_ROW_INLINE Row TimesSaturated(const Row& counts, std::uint16_t factor) {
  const Row low = SetPairs(0x00FF);
  const auto product = [&](const Row& pairs) {
    const Row all = MapPairs(pairs, SetPairs(factor), [](auto x, auto y) { return hn::Mul(x, y); });
    return MapPairs(all, low, [](auto x, auto y) { return hn::Min(x, y); });
  };
  return Or(product(And(counts, low)), EvenToOdd(product(OddBytes(counts))));
}

// From u to partial sums of 8 positions, and back.
HWY_INLINE Row TransformBytes(Row x) {
  x = Xor(x, And(ShiftWordsRight<4>(x), SetBytes(0x0F)));
  x = Xor(x, And(ShiftWordsRight<2>(x), SetBytes(0x33)));
  return Xor(x, And(ShiftWordsRight<1>(x), SetBytes(0x55)));
}

// The bytes of the blocks of a row, one a block, to all their paths. compact: 16 readable bytes
// beyond the last.
FROSTLINE_ROW_INLINE Row Expand(const std::uint8_t* compact, const PathTables& paths) {
#if HWY_TARGET == HWY_AVX3_DL
  Row out;
  out.part[0] = hn::Vec512<std::uint64_t>{
      _mm512_permutexvar_epi8(LoadRow(paths.expand).part[0].raw, _mm512_loadu_si512(compact))};
  return out;
#else
  if (paths.list >= 4) {
    alignas(16) std::uint8_t sixteen[16];
    std::memcpy(sixteen, compact, sizeof(sixteen));
    return LookUp(sixteen, LoadRow(paths.expand));
  }
  alignas(64) std::uint8_t row[kRowBytes];
  for (unsigned i = 0; i < kRowBytes; ++i) row[i] = compact[i / paths.list];
  return LoadRow(row);
#endif
}

}  // namespace HWY_NAMESPACE
}  // namespace frostline
HWY_AFTER_NAMESPACE();

#endif  // FROSTLINE_PATH_ROWS_INL_H
