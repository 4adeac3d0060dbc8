// One source for all targets of Google Highway: the file includes itself once for each.
#undef HWY_TARGET_INCLUDE
#define HWY_TARGET_INCLUDE "decode/lanes/lane_decoder.cpp"  // NOLINT
#include <hwy/foreach_target.h>                             // IWYU pragma: keep
// After foreach_target.
#include <hwy/highway.h>

#include <algorithm>

#include "decode/lanes/lane_decoder.h"

#include "decode/lanes/register_tree-inl.h"
#include "polar/transform.h"

// Memory of a level: each starts 512 bytes before the one above it, modulo the 4096 bytes within
// which processors tell loads from earlier stores. So what a loop over a node stores never looks
// like what it is about to load.
#ifndef FROSTLINE_ALIGNED_PLANES
#define FROSTLINE_ALIGNED_PLANES
namespace frostline {
constexpr std::size_t AlignedPlanes(std::size_t words) { return (words + 511) / 512 * 512 + 448; }
}  // namespace frostline
#endif

HWY_BEFORE_NAMESPACE();
namespace frostline {
namespace HWY_NAMESPACE {

constexpr std::uint64_t kLowerBits[6] = {0x5555555555555555U, 0x3333333333333333U,
                                         0x0F0F0F0F0F0F0F0FU, 0x00FF00FF00FF00FFU,
                                         0x0000FFFF0000FFFFU, 0x00000000FFFFFFFFU};

using FullTag = hn::FixedTag<std::uint64_t, kVectorBits / 64>;
using FullVector = hn::Vec<FullTag>;
constexpr std::size_t kStep = kVectorBits / 64;

// Planes that a shape stores.
constexpr std::size_t StoredPlanes(Shape shape) {
  return static_cast<std::size_t>(MagnitudePlanes(shape)) + (HasSign(shape) ? 1 : 0);
}

// The messages of a node lie vector after vector, the planes of a vector next to each other: a node
// is one stream of memory, whatever the number of its planes. Those of shape fresh are not stored
// at all: they are the inverse of the partial sums of the left neighbour.
template <Shape kShape>
HWY_INLINE Message<FullVector> LoadMessage(const std::uint64_t* messages, std::size_t vector) {
  const FullTag d;
  Message<FullVector> message;
  if constexpr (kShape == Shape::fresh) {
    message.m[0] = hn::Not(hn::Load(d, messages + vector * kStep));
    return message;
  }
  const std::uint64_t* at = messages + vector * (StoredPlanes(kShape) * kStep);
  for (int k = 0; k < MagnitudePlanes(kShape); ++k, at += kStep) message.m[k] = hn::Load(d, at);
  if constexpr (HasSign(kShape)) message.s = hn::Load(d, at);
  return message;
}

template <Shape kShape>
HWY_INLINE void StoreMessage(const Message<FullVector>& message, std::uint64_t* messages,
                             std::size_t vector) {
  const FullTag d;
  std::uint64_t* at = messages + vector * (StoredPlanes(kShape) * kStep);
  for (int k = 0; k < MagnitudePlanes(kShape); ++k, at += kStep) hn::Store(message.m[k], d, at);
  if constexpr (HasSign(kShape)) hn::Store(message.s, d, at);
}

// The same for all vectors of a node that goes on in registers.
template <Shape kShape, unsigned k>
HWY_INLINE Message<Bits<k>> LoadNode(const std::uint64_t* messages) {
  Message<Bits<k>> out;
  for (unsigned i = 0; i < kParts<k>; ++i) {
    const Message<FullVector> part = LoadMessage<kShape>(messages, i);
    if constexpr (HasSign(kShape)) out.s.part[i] = part.s;
    for (int plane = 0; plane < MagnitudePlanes(kShape); ++plane) {
      out.m[plane].part[i] = part.m[plane];
    }
  }
  return out;
}

// Decodes a node in registers: its messages, its difference bits, which become its result, and
// where the next code of the program is read.
using RegisterNode = void (*)(const std::uint64_t* messages, std::uint64_t* x,
                              const std::uint8_t** next);

template <int kW, unsigned kLog2Lanes, Shape kShape, unsigned kLevel>
void DecodeInRegisters(const std::uint64_t* messages, std::uint64_t* x, const std::uint8_t** next) {
  using Tree = RegisterTree<kW, kLog2Lanes>;
  constexpr unsigned kBits = 1U << (kLevel + kLog2Lanes);
  Message<Bits<kBits>> message;
  if constexpr (kShape != Shape::constant) message = LoadNode<kShape, kBits>(messages);
  StoreBits(Tree::template Call<kShape, kLevel>(message, LoadBits<kBits>(x), next), x);
}

// What the walk needs to know of a number of lanes.
struct RegisterNodes {
  // Nodes of this level are decoded in registers.
  unsigned level;
  // By shape.
  RegisterNode decode[5];
  // Roots of smaller codes, by level.
  RegisterNode root[kRegisterLog2Bits + 1];
};

template <int kW, unsigned kLog2Lanes, unsigned kLevel>
void FillRoots(RegisterNodes& nodes) {
  if constexpr (kLevel >= kLeafLog2) {
    nodes.root[kLevel] = DecodeInRegisters<kW, kLog2Lanes, Shape::constant, kLevel>;
    FillRoots<kW, kLog2Lanes, kLevel - 1>(nodes);
  }
}

template <int kW, unsigned kLog2Lanes = 0>
RegisterNodes NodesOfLanes(unsigned log2_lanes) {
  if constexpr (kLog2Lanes < 9) {
    if (log2_lanes > kLog2Lanes) return NodesOfLanes<kW, kLog2Lanes + 1>(log2_lanes);
  }
  constexpr unsigned kLevel =
      kLog2Lanes + kLeafLog2 < kRegisterLog2Bits ? kRegisterLog2Bits - kLog2Lanes : kLeafLog2;
  RegisterNodes nodes{kLevel,
                      {DecodeInRegisters<kW, kLog2Lanes, Shape::constant, kLevel>,
                       DecodeInRegisters<kW, kLog2Lanes, Shape::fresh, kLevel>,
                       DecodeInRegisters<kW, kLog2Lanes, Shape::one, kLevel>,
                       DecodeInRegisters<kW, kLog2Lanes, Shape::two, kLevel>,
                       DecodeInRegisters<kW, kLog2Lanes, kFullShape<kW>, kLevel>},
                      {}};
  FillRoots<kW, kLog2Lanes, kLevel>(nodes);
  return nodes;
}

// One batch on its way through the tree.
//
// Memory, not logic, limits the loops, so that each does as much as it can with what it has loaded:
// what makes a node's messages (f or g of its parent) makes those of its left child too, where that
// one needs them; and a node leaves its last step, left half += right half, to whoever reads its
// result next. All loops go over pairs, an element of the first half and the same one of the
// second.
template <int kW>
class Walk {
 public:
  // x: the difference rows, which become the error rows. scratch: room for LaneDecoder's
  // scratch_words.
  Walk(const LaneProgram& program, unsigned log2_lanes, std::uint64_t* scratch, std::uint64_t* x)
      : nodes_(NodesOfLanes<kW>(log2_lanes)),
        n_(program.block_length.log2()),
        log2_lanes_(log2_lanes),
        root_(program.root),
        next_(program.codes.data()),
        x_(x) {
    // The first level below the root holds nothing that is stored, the second none with more than
    // three planes.
    for (unsigned level = n_ - 1; level-- > nodes_.level;) {
      levels_[level] = scratch;
      scratch += AlignedPlanes((level + 2 == n_ ? 3 : 4) * WordsAt(level));
    }
  }

  void Root() {
    if (root_ == NodeKind::all_open) {
      std::fill_n(x_, WordsAt(n_), 0);
    } else if (root_ == NodeKind::all_frozen) {
      TransformAt(0, n_);
    } else if (n_ <= nodes_.level) {
      nodes_.root[n_](nullptr, x_, &next_);
    } else if (Node<Shape::constant>(n_, 0, nullptr, false)) {
      const std::size_t half = VectorsAt(n_ - 1);
      for (std::size_t i = 0; i < half; ++i) AddRight(x_, i, half);
    }
  }

 private:
  std::size_t WordsAt(unsigned level) const {
    return words_for(std::size_t{1} << (level + log2_lanes_));
  }
  std::size_t VectorsAt(unsigned level) const { return WordsAt(level) / kStep; }

  static HWY_INLINE FullVector LoadX(const std::uint64_t* x, std::size_t vector) {
    return hn::Load(FullTag(), x + vector * kStep);
  }
  static HWY_INLINE void StoreX(FullVector bits, std::uint64_t* x, std::size_t vector) {
    hn::Store(bits, FullTag(), x + vector * kStep);
  }
  // x[i] += x[i + half].
  static HWY_INLINE void AddRight(std::uint64_t* x, std::size_t i, std::size_t half) {
    StoreX(hn::Xor(LoadX(x, i), LoadX(x, half + i)), x, i);
  }

  // In place: from frozen values to partial sums of an all-frozen node.
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

  // Whether the mixed node of this level that comes next needs the messages of its left child, to
  // be stored by whoever makes its own.
  bool next_wants_left(unsigned level) const {
    return level > nodes_.level && left_kind(*next_) == NodeKind::mixed;
  }

  // A mixed node above the levels in registers, with its messages at `from`, and with those of its
  // left child in levels_[level - 1] where left_ready. Its result goes to x_ from word first on.
  // Returns whether the left half still lacks the right one.
  template <Shape kShape>
  bool Node(unsigned level, std::size_t first, const std::uint64_t* from, bool left_ready) {
    const std::uint8_t code = *next_++;
    const bool left_pending = Left<kShape>(left_kind(code), level, first, from, left_ready);
    std::uint64_t* const x = x_ + first;
    const std::size_t half = VectorsAt(level - 1);
    switch (right_kind(code)) {
      case NodeKind::all_open:
        if (left_pending) {
          OpenRight<kShape, true>(from, x, half / 2);
        } else {
          OpenRight<kShape, false>(from, x, half / 2);
        }
        return false;
      case NodeKind::all_frozen:
        if (left_pending) {
          for (std::size_t i = 0; i < half / 2; ++i) AddRight(x, i, half / 2);
        }
        TransformAt(first + half * kStep, level - 1);
        return true;
      default:
        return MixedRight<kShape>(level, first, from, left_pending);
    }
  }

  // On to a mixed child.
  template <Shape kShape>
  bool Descend(unsigned level, std::size_t first, const std::uint64_t* from, bool left_ready) {
    if (level > nodes_.level) return Node<kShape>(level, first, from, left_ready);
    nodes_.decode[static_cast<int>(kShape)](from, x_ + first, &next_);
    return false;
  }

  // Decodes the left child. Returns whether its left half still lacks its right one.
  template <Shape kShape>
  bool Left(NodeKind kind, unsigned level, std::size_t first, const std::uint64_t* from,
            bool left_ready) {
    const std::size_t half = VectorsAt(level - 1);
    if (kind == NodeKind::mixed) {
      constexpr Shape kNext = AfterF(kShape);
      const bool next_ready =
          kShape != Shape::constant && !left_ready && next_wants_left(level - 1);
      if constexpr (kShape != Shape::constant) {
        if (next_ready) {
          MakeLeft<kShape, true>(level, from, half / 2);
        } else if (!left_ready) {
          MakeLeft<kShape, false>(level, from, half / 2);
        }
      }
      return Descend<kNext>(level - 1, first, levels_[level - 1], next_ready);
    }
    if (kind == NodeKind::all_frozen) {
      TransformAt(first, level - 1);
      return false;
    }
    std::uint64_t* const x = x_ + first;
    if constexpr (HasSign(kShape)) {
      for (std::size_t i = 0; i < half; ++i) {
        StoreX(SignOfF(LoadMessage<kShape>(from, i), LoadMessage<kShape>(from, half + i)), x, i);
      }
    } else {
      std::fill_n(x, half * kStep, 0);
    }
    return false;
  }

  // f into levels_[level - 1], and f of that into levels_[level - 2].
  template <Shape kShape, bool kTwice>
  void MakeLeft(unsigned level, const std::uint64_t* from, std::size_t quarter) {
    constexpr Shape kNext = AfterF(kShape);
    std::uint64_t* const to = levels_[level - 1];
    std::uint64_t* const then_to = kTwice ? levels_[level - 2] : nullptr;
    for (std::size_t i = 0; i < quarter; ++i) {
      const auto low =
          F<kShape>(LoadMessage<kShape>(from, i), LoadMessage<kShape>(from, 2 * quarter + i));
      const auto high = F<kShape>(LoadMessage<kShape>(from, quarter + i),
                                  LoadMessage<kShape>(from, 3 * quarter + i));
      StoreMessage<kNext>(low, to, i);
      StoreMessage<kNext>(high, to, quarter + i);
      if constexpr (kTwice) StoreMessage<kNext>(F<kNext>(low, high), then_to, i);
    }
  }

  // g into levels_[level - 1], and f of that into levels_[level - 2]. x: the node's result, of
  // which the left half is known; kPending: it still lacks its own last step.
  template <Shape kShape, bool kPending, bool kTwice>
  void MakeRight(unsigned level, const std::uint64_t* from, std::uint64_t* x, std::size_t quarter) {
    constexpr Shape kNext = AfterG<kW>(kShape);
    std::uint64_t* const to = levels_[level - 1];
    std::uint64_t* const then_to = kTwice ? levels_[level - 2] : nullptr;
    for (std::size_t i = 0; i < quarter; ++i) {
      const auto x_high = LoadX(x, quarter + i);
      auto x_low = LoadX(x, i);
      if constexpr (kPending) {
        x_low = hn::Xor(x_low, x_high);
        StoreX(x_low, x, i);
      }
      if constexpr (kShape == Shape::constant) {
        // The right child's messages are fresh, and only its left child's are stored.
        if constexpr (kTwice) {
          StoreX(hn::Not(hn::Or(x_low, x_high)), then_to, i);
        }
      } else {
        const auto low = G<kShape, kW>(LoadMessage<kShape>(from, i),
                                       LoadMessage<kShape>(from, 2 * quarter + i), x_low);
        const auto high = G<kShape, kW>(LoadMessage<kShape>(from, quarter + i),
                                        LoadMessage<kShape>(from, 3 * quarter + i), x_high);
        StoreMessage<kNext>(low, to, i);
        StoreMessage<kNext>(high, to, quarter + i);
        if constexpr (kTwice) StoreMessage<kNext>(F<kNext>(low, high), then_to, i);
      }
    }
  }

  // An all-open right child: its decisions, and the node's last step.
  template <Shape kShape, bool kPending>
  void OpenRight(const std::uint64_t* from, std::uint64_t* x, std::size_t quarter) {
    const std::size_t half = 2 * quarter;
    for (std::size_t i = 0; i < quarter; ++i) {
      const auto x_high = LoadX(x, quarter + i);
      auto x_low = LoadX(x, i);
      if constexpr (kPending) x_low = hn::Xor(x_low, x_high);
      auto low = hn::Zero(FullTag());
      auto high = low;
      if constexpr (kShape != Shape::constant) {
        low = SignOfG<kShape>(LoadMessage<kShape>(from, i), LoadMessage<kShape>(from, half + i),
                              x_low);
        high = SignOfG<kShape>(LoadMessage<kShape>(from, quarter + i),
                               LoadMessage<kShape>(from, half + quarter + i), x_high);
      }
      StoreX(low, x, half + i);
      StoreX(high, x, half + quarter + i);
      StoreX(hn::Xor(x_low, low), x, i);
      StoreX(hn::Xor(x_high, high), x, quarter + i);
    }
  }

  template <Shape kShape>
  bool MixedRight(unsigned level, std::size_t first, const std::uint64_t* from, bool left_pending) {
    constexpr Shape kNext = AfterG<kW>(kShape);
    std::uint64_t* const x = x_ + first;
    const std::size_t half = VectorsAt(level - 1);
    const std::size_t quarter = half / 2;
    const bool next_ready = next_wants_left(level - 1);
    if (left_pending) {
      if (next_ready) {
        MakeRight<kShape, true, true>(level, from, x, quarter);
      } else {
        MakeRight<kShape, true, false>(level, from, x, quarter);
      }
    } else if (next_ready) {
      MakeRight<kShape, false, true>(level, from, x, quarter);
    } else if (kShape != Shape::constant) {
      MakeRight<kShape, false, false>(level, from, x, quarter);
    }
    const std::uint64_t* const messages = kNext == Shape::fresh ? x : levels_[level - 1];
    if (!Descend<kNext>(level - 1, first + half * kStep, messages, next_ready)) return true;
    for (std::size_t i = 0; i < quarter; ++i) {
      const auto high = LoadX(x, half + quarter + i);
      const auto low = hn::Xor(LoadX(x, half + i), high);
      StoreX(low, x, half + i);
      StoreX(hn::Xor(LoadX(x, i), low), x, i);
      StoreX(hn::Xor(LoadX(x, quarter + i), high), x, quarter + i);
    }
    return false;
  }

  RegisterNodes nodes_;
  unsigned n_;
  unsigned log2_lanes_;
  NodeKind root_;
  const std::uint8_t* next_;
  std::uint64_t* x_;
  std::uint64_t* levels_[BlockLength::kMaxLog2 + 1] = {};
};

void DecodeBatch(const LaneProgram& program, unsigned planes, unsigned log2_lanes,
                 std::uint64_t* scratch, std::uint64_t* x) {
  if (planes == 2) {
    Walk<2>(program, log2_lanes, scratch, x).Root();
  } else {
    Walk<3>(program, log2_lanes, scratch, x).Root();
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
  // Every level below the root: at most 4 planes of half, a quarter, ... of the batch.
  KeyWords& scratch = scratch_.local();
  scratch.resize(4 * words + AlignedPlanes(1) * (program_.block_length.log2() + 1));
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
