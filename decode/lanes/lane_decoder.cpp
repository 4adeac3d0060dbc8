// One source for all targets of Google Highway: the file includes itself once for each.
#undef HWY_TARGET_INCLUDE
#define HWY_TARGET_INCLUDE "decode/lanes/lane_decoder.cpp"  // NOLINT
#include <hwy/foreach_target.h>                             // IWYU pragma: keep
// After foreach_target.
#include <hwy/highway.h>

#include <algorithm>

#include "decode/lanes/lane_decoder.h"
#include "decode/lanes/plane_rules-inl.h"
#include "polar/transform.h"

HWY_BEFORE_NAMESPACE();
namespace frostline {
namespace HWY_NAMESPACE {

constexpr std::uint64_t kLowerBits[6] = {0x5555555555555555U, 0x3333333333333333U,
                                         0x0F0F0F0F0F0F0F0FU, 0x00FF00FF00FF00FFU,
                                         0x0000FFFF0000FFFFU, 0x00000000FFFFFFFFU};

// Words between planes. Their lengths are powers of two, and without it all of them would fall into
// the same few sets of the first-level cache.
constexpr std::size_t kPlanePadding = 40;

HWY_INLINE std::uint64_t LowMask(std::size_t bits) {
  return bits >= 64 ? ~std::uint64_t{0} : (std::uint64_t{1} << bits) - 1;
}

// Planes of the node at hand on one level; the next node on that level takes their place.
struct LevelPlanes {
  std::uint64_t* s = nullptr;
  std::uint64_t* m[3] = {nullptr, nullptr, nullptr};
};

// Calls each(tag, first word) until all words are done, with the widest vectors that fit.
// REQUIRES: words a power of two.
template <typename Each>
HWY_INLINE void OverWords(std::size_t words, Each&& each) {
  const hn::ScalableTag<std::uint64_t> full;
  const std::size_t lanes = hn::Lanes(full);
  if (words >= lanes) {
    for (std::size_t i = 0; i < words; i += lanes) each(full, i);
    return;
  }
#if HWY_MAX_BYTES >= 64
  if (words == 4) {
    each(hn::FixedTag<std::uint64_t, 4>(), std::size_t{0});
    return;
  }
#endif
#if HWY_MAX_BYTES >= 32
  if (words == 2) {
    each(hn::FixedTag<std::uint64_t, 2>(), std::size_t{0});
    return;
  }
#endif
  for (std::size_t i = 0; i < words; ++i) each(hn::FixedTag<std::uint64_t, 1>(), i);
}

template <Shape kShape, typename D>
HWY_INLINE Message<hn::Vec<D>> LoadMessage(D d, const LevelPlanes& planes, std::size_t i) {
  Message<hn::Vec<D>> message;
  if constexpr (HasSign(kShape)) message.s = hn::Load(d, planes.s + i);
  for (int k = 0; k < MagnitudePlanes(kShape); ++k) {
    message.m[k] = hn::Load(d, planes.m[k] + i);
  }
  return message;
}

template <Shape kShape, typename D>
HWY_INLINE void StoreMessage(D d, const Message<hn::Vec<D>>& message, const LevelPlanes& planes,
                             std::size_t i) {
  if constexpr (HasSign(kShape)) hn::Store(message.s, d, planes.s + i);
  for (int k = 0; k < MagnitudePlanes(kShape); ++k) hn::Store(message.m[k], d, planes.m[k] + i);
}

// One batch on its way through the tree.
template <int kW>
class Walk {
 public:
  // x: the difference rows, which become the error rows. scratch: aligned like a vector, at least
  // 4 planes of every level below the root.
  Walk(const LaneProgram& program, unsigned log2_lanes, std::uint64_t* scratch, std::uint64_t* x)
      : kinds_(program.kinds.data()), log2_lanes_(log2_lanes), x_(x) {
    // Planes of the longer levels first, so that each lies at a multiple of its own size.
    const unsigned n = program.block_length.log2();
    for (unsigned level = n; level-- > 0;) {
      const std::size_t words = WordsAt(level);
      const auto take = [&scratch, words] {
        std::uint64_t* const plane = scratch;
        scratch += words >= kPlanePadding ? words + kPlanePadding : words;
        return plane;
      };
      levels_[level].m[0] = take();
      // The first level below the root holds shape one only.
      if (level + 1 == n) continue;
      levels_[level].s = take();
      levels_[level].m[1] = take();
      levels_[level].m[2] = take();
    }
  }

  void Root(unsigned n) {
    if (kinds_[1] == NodeKind::all_frozen) {
      TransformAt(0, n);
    } else if (kinds_[1] == NodeKind::all_open) {
      std::fill_n(x_, WordsAt(n), 0);
    } else if (BitsAt(n) <= 64) {
      x_[0] = DecodeWord<Shape::constant>({}, 1, n, x_[0] & LowMask(BitsAt(n))).bits;
    } else {
      Decode<Shape::constant>(1, n, 0);
    }
  }

 private:
  std::size_t BitsAt(unsigned level) const { return std::size_t{1} << (level + log2_lanes_); }
  std::size_t WordsAt(unsigned level) const { return words_for(BitsAt(level)); }

  // In place: from frozen values to partial sums of an all-frozen node of at least 64 bits.
  void TransformAt(std::size_t first, unsigned level) const {
    const std::size_t words = WordsAt(level);
    std::uint64_t* x = x_ + first;
    if (level >= BlockLength::kMinLog2 && words >= 8) {
      polar_transform({x, words}, BlockLength::from_log2(level), 1U << log2_lanes_);
      return;
    }
    for (unsigned k = log2_lanes_; k < log2_lanes_ + level; ++k) {
      if (k < 6) {
        for (std::size_t i = 0; i < words; ++i) x[i] ^= (x[i] >> (1U << k)) & kLowerBits[k];
        continue;
      }
      const std::size_t distance = std::size_t{1} << (k - 6);
      for (std::size_t i = 0; i < words; ++i) {
        if ((i & distance) == 0) x[i] ^= x[i + distance];
      }
    }
  }

  // A mixed node of more than 64 bits whose messages lie in levels_[level], and whose result goes
  // to x_ from word first on.
  template <Shape kShape>
  void Decode(std::size_t node, unsigned level, std::size_t first) {
    const std::size_t half = WordsAt(level - 1);
    DecodeLeft<kShape>(node, level, first, half);
    DecodeRight<kShape>(node, level, first, half);
  }

  // x_left += x_right.
  void Combine(std::size_t first, std::size_t half) const {
    std::uint64_t* x = x_ + first;
    OverWords(half, [x, half](auto d, std::size_t i) HWY_ATTR {
      hn::Store(hn::Xor(hn::Load(d, x + i), hn::Load(d, x + half + i)), d, x + i);
    });
  }

  template <Shape kShape>
  void DecodeLeft(std::size_t node, unsigned level, std::size_t first, std::size_t half) {
    const NodeKind kind = kinds_[2 * node];
    if (kind == NodeKind::all_frozen) {
      TransformAt(first, level - 1);
      return;
    }
    const LevelPlanes from = levels_[level];
    if (kind == NodeKind::all_open) {
      std::uint64_t* x = x_ + first;
      if constexpr (HasSign(kShape)) {
        OverWords(half, [&](auto d, std::size_t i) HWY_ATTR {
          hn::Store(hn::Xor(hn::Load(d, from.s + i), hn::Load(d, from.s + half + i)), d, x + i);
        });
      } else {
        std::fill_n(x, half, 0);
      }
      return;
    }
    if constexpr (kShape != Shape::constant) {
      const LevelPlanes to = levels_[level - 1];
      OverWords(half, [&](auto d, std::size_t i) HWY_ATTR {
        StoreMessage<kShape>(
            d, F<kShape>(LoadMessage<kShape>(d, from, i), LoadMessage<kShape>(d, from, half + i)),
            to, i);
      });
    }
    Descend<kShape>(2 * node, level - 1, first);
  }

  // Decodes the right child and adds its result to the left one's.
  template <Shape kShape>
  void DecodeRight(std::size_t node, unsigned level, std::size_t first, std::size_t half) {
    const NodeKind kind = kinds_[2 * node + 1];
    if (kind == NodeKind::all_frozen) {
      TransformAt(first + half, level - 1);
      Combine(first, half);
      return;
    }
    const LevelPlanes from = levels_[level];
    std::uint64_t* const bits = x_ + first;
    if (kind == NodeKind::all_open) {
      std::uint64_t* const right = bits + half;
      if constexpr (kShape == Shape::constant) {
        std::fill_n(right, half, 0);
      } else {
        OverWords(half, [&](auto d, std::size_t i) HWY_ATTR {
          const auto left = hn::Load(d, bits + i);
          const auto sign = SignOfG<kShape>(LoadMessage<kShape>(d, from, i),
                                            LoadMessage<kShape>(d, from, half + i), left);
          hn::Store(sign, d, right + i);
          hn::Store(hn::Xor(left, sign), d, bits + i);
        });
      }
      return;
    }
    const LevelPlanes to = levels_[level - 1];
    constexpr Shape kNext = AfterG<kW>(kShape);
    OverWords(half, [&](auto d, std::size_t i) HWY_ATTR {
      if constexpr (kShape == Shape::constant) {
        // Two half units: 1 where the bit agrees, 0 where it does not.
        hn::Store(hn::Not(hn::Load(d, bits + i)), d, to.m[0] + i);
      } else {
        StoreMessage<kNext>(
            d,
            G<kShape, kW>(LoadMessage<kShape>(d, from, i), LoadMessage<kShape>(d, from, half + i),
                          hn::Load(d, bits + i)),
            to, i);
      }
    });
    Descend<kNext>(2 * node + 1, level - 1, first + half);
    Combine(first, half);
  }

  // On to a mixed child, which may fit one word.
  template <Shape kShape>
  void Descend(std::size_t node, unsigned level, std::size_t first) {
    if (BitsAt(level) > 64) {
      Decode<kShape>(node, level, first);
      return;
    }
    Message<Word> message{};
    const LevelPlanes& planes = levels_[level];
    if constexpr (HasSign(kShape)) message.s = {planes.s[0]};
    for (int k = 0; k < MagnitudePlanes(kShape); ++k) message.m[k] = {planes.m[k][0]};
    x_[first] = DecodeWord<kShape>(message, node, level, x_[first]).bits;
  }

  // A node of at most 64 bits, in registers. Message bits beyond the node's mean nothing;
  // difference and result have zeros there.
  template <Shape kShape>
  Word DecodeWord(const Message<Word>& message, std::size_t node, unsigned level,
                  std::uint64_t difference) const {
    const NodeKind kind = kinds_[node];
    if (kind == NodeKind::all_frozen) {
      for (unsigned k = log2_lanes_; k < log2_lanes_ + level; ++k) {
        difference ^= (difference >> (1U << k)) & kLowerBits[k];
      }
      return {difference};
    }
    if (kind == NodeKind::all_open) {
      if constexpr (HasSign(kShape)) return {message.s.bits & LowMask(BitsAt(level))};
      return {0};
    }
    const auto half = static_cast<unsigned>(BitsAt(level - 1));
    const Message<Word>& a = message;
    Message<Word> b = message;
    b.s.bits >>= half;
    for (Word& plane : b.m) plane.bits >>= half;
    Message<Word> child{};
    if constexpr (kShape != Shape::constant) child = F<kShape>(a, b);
    const Word left = DecodeWord<kShape>(child, 2 * node, level - 1, difference & LowMask(half));
    if constexpr (kShape == Shape::constant) {
      child.m[0] = {~left.bits};
    } else {
      child = G<kShape, kW>(a, b, left);
    }
    const Word right =
        DecodeWord<AfterG<kW>(kShape)>(child, 2 * node + 1, level - 1, difference >> half);
    return {(left.bits ^ right.bits) | (right.bits << half)};
  }

  const NodeKind* kinds_;
  unsigned log2_lanes_;
  std::uint64_t* x_;
  LevelPlanes levels_[BlockLength::kMaxLog2 + 1];
};

void DecodeBatch(const LaneProgram& program, unsigned planes, unsigned log2_lanes,
                 std::uint64_t* scratch, std::uint64_t* x) {
  const unsigned n = program.block_length.log2();
  if (planes == 2) {
    Walk<2>(program, log2_lanes, scratch, x).Root(n);
  } else {
    Walk<3>(program, log2_lanes, scratch, x).Root(n);
  }
}

}  // namespace HWY_NAMESPACE
}  // namespace frostline
HWY_AFTER_NAMESPACE();

#if HWY_ONCE
#include <stdexcept>

namespace frostline {

HWY_EXPORT(DecodeBatch);

bool LaneDecoder::serves(const Code& code, const Arithmetic& arithmetic) {
  return code.precoding == Precoding::none && arithmetic.kind == Arithmetic::Kind::planes &&
         (arithmetic.planes == 2 || arithmetic.planes == 3);
}

LaneDecoder::LaneDecoder(const Code& code, const Arithmetic& arithmetic)
    : program_(compile_lane_program(code.frozen)), planes_(arithmetic.planes) {
  if (!serves(code, arithmetic)) {
    throw std::invalid_argument("the lane decoder is for planes:2 and planes:3 without precoding");
  }
}

void LaneDecoder::decode(const BatchDifference& difference, Span<std::uint64_t> error_rows) const {
  const unsigned lanes = difference.lanes;
  unsigned log2_lanes = 0;
  while ((1U << log2_lanes) < lanes && log2_lanes < 10) ++log2_lanes;
  if (lanes == 0 || lanes > kMaxLanes || (1U << log2_lanes) != lanes) {
    throw std::invalid_argument("lanes must be a power of two from 1 to 512");
  }
  const std::size_t words = words_for(program_.block_length.bits() * lanes);
  if (difference.rows.size() != words || error_rows.size() != words) {
    throw std::invalid_argument("a batch of another size");
  }
  // Every level below the root: at most 4 planes of half, a quarter, ... of the batch, and room for
  // a vector and the padding each.
  KeyWords& scratch = scratch_.local();
  constexpr std::size_t kRoomWords = 48;
  scratch.resize(4 * (words + kRoomWords * (program_.block_length.log2() + 1)));
  // Vector loads want alignment, which KeyWords give; other memory goes through a copy.
  KeyWords aligned;
  std::uint64_t* x = error_rows.data();
  if (reinterpret_cast<std::uintptr_t>(x) % 64 != 0) {
    aligned.resize(words);
    x = aligned.data();
  }
  std::copy(difference.rows.begin(), difference.rows.end(), x);
  HWY_DYNAMIC_DISPATCH(DecodeBatch)(program_, planes_, log2_lanes, scratch.data(), x);
  if (x != error_rows.data()) std::copy_n(x, words, error_rows.data());
}

}  // namespace frostline
#endif  // HWY_ONCE
