// The lower levels of the tree walk, in registers: nodes of up to a few vectors.
//
// Included once a target, inside Highway's namespace; no include guard of the usual kind.
#if defined(FROSTLINE_REGISTER_TREE_INL_H) == defined(HWY_TARGET_TOGGLE)
#ifdef FROSTLINE_REGISTER_TREE_INL_H
#undef FROSTLINE_REGISTER_TREE_INL_H
#else
#define FROSTLINE_REGISTER_TREE_INL_H
#endif

#include <hwy/highway.h>

#include "decode/lanes/lane_program.h"
#include "decode/lanes/register_bits-inl.h"

HWY_BEFORE_NAMESPACE();
namespace frostline {
namespace HWY_NAMESPACE {

// From frozen values to partial sums.
template <unsigned kLevel, unsigned k>
HWY_INLINE Bits<k> TransformBits(const Bits<k>& x) {
  if constexpr (kLevel == 0) {
    return x;
  } else {
    const Bits<k / 2> right = TransformBits<kLevel - 1>(Upper(x));
    return Join(Xor(TransformBits<kLevel - 1>(Lower(x)), right), right);
  }
}

// Decisions of an all-open node.
template <Shape kShape, unsigned k>
HWY_INLINE Bits<k> Decisions(const Message<Bits<k>>& message) {
  if constexpr (HasSign(kShape)) {
    return message.s;
  } else {
    return Zeros<k>();
  }
}

// The message of the first half and of the second, given the first half's result.
template <Shape kShape, unsigned k>
HWY_INLINE Message<Bits<k / 2>> FOfHalves(const Message<Bits<k>>& message) {
  if constexpr (kShape == Shape::constant) {
    return {};
  } else {
    return F<kShape>(Lower<kShape>(message), Upper<kShape>(message));
  }
}
template <Shape kShape, int kW, unsigned k>
HWY_INLINE Message<Bits<k / 2>> GOfHalves(const Message<Bits<k>>& message,
                                          const Bits<k / 2>& left) {
  if constexpr (kShape == Shape::constant) {
    // Two half units: 1 where the bit agrees, 0 where it does not.
    Message<Bits<k / 2>> out;
    out.m[0] = Not(left);
    return out;
  } else {
    return G<kShape, kW>(Lower<kShape>(message), Upper<kShape>(message), left);
  }
}
template <Shape kShape, unsigned k>
HWY_INLINE Bits<k / 2> RightDecisions(const Message<Bits<k>>& message, const Bits<k / 2>& left) {
  if constexpr (kShape == Shape::constant) {
    return Zeros<k / 2>();
  } else {
    return SignOfG<kShape>(Lower<kShape>(message), Upper<kShape>(message), left);
  }
}

// The same messages with all the planes that messages can have, but for the constant shape.
template <Shape kShape, Shape kFull, unsigned k>
HWY_INLINE Message<Bits<k>> Widen(Message<Bits<k>> message) {
  if constexpr (kShape != Shape::constant) {
    if constexpr (!HasSign(kShape)) message.s = Zeros<k>();
    for (int i = MagnitudePlanes(kShape); i < MagnitudePlanes(kFull); ++i) {
      message.m[i] = Zeros<k>();
    }
  }
  return message;
}
constexpr Shape WidenedShape(Shape shape, Shape full) {
  return shape == Shape::constant ? shape : full;
}

// A node of 2^kLevel indices, bit k of kMask for a frozen k-th index, fixed when compiled.
template <Shape kShape, int kW, unsigned kLevel, unsigned kMask, unsigned k>
HWY_INLINE Bits<k> FixedNode(const Message<Bits<k>>& message, const Bits<k>& x) {
  constexpr unsigned kAll = (1U << (1U << kLevel)) - 1;
  if constexpr (kMask == kAll) {
    return TransformBits<kLevel>(x);
  } else if constexpr (kMask == 0) {
    return Decisions<kShape>(message);
  } else {
    constexpr unsigned kHalfAll = (1U << (1U << (kLevel - 1))) - 1;
    constexpr unsigned kLeft = kMask & kHalfAll;
    constexpr unsigned kRight = kMask >> (1U << (kLevel - 1));
    Bits<k / 2> left;
    if constexpr (kLeft == kHalfAll) {
      left = TransformBits<kLevel - 1>(Lower(x));
    } else if constexpr (kLeft == 0 && HasSign(kShape)) {
      left = Xor(Lower(message.s), Upper(message.s));
    } else {
      left = FixedNode<AfterF(kShape), kW, kLevel - 1, kLeft>(FOfHalves<kShape>(message), Lower(x));
    }
    Bits<k / 2> right;
    if constexpr (kRight == 0) {
      right = RightDecisions<kShape>(message, left);
    } else if constexpr (kRight == kHalfAll) {
      right = TransformBits<kLevel - 1>(Upper(x));
    } else {
      right = FixedNode<AfterG<kW>(kShape), kW, kLevel - 1, kRight>(
          GOfHalves<kShape, kW>(message, left), Upper(x));
    }
    return Join(Xor(left, right), right);
  }
}

// A node of up to 8 indices of any frozen set.
template <Shape kShape, int kW, unsigned kLevel, unsigned k>
HWY_NOINLINE Bits<k> AnyNode(const Message<Bits<k>>& message, const Bits<k>& x, unsigned mask) {
  constexpr unsigned kAll = (1U << (1U << kLevel)) - 1;
  if (mask == 0) return Decisions<kShape>(message);
  if (mask == kAll) return TransformBits<kLevel>(x);
  if constexpr (kLevel > 0) {
    constexpr unsigned kHalf = 1U << (kLevel - 1);
    const Bits<k / 2> left = AnyNode<AfterF(kShape), kW, kLevel - 1>(
        FOfHalves<kShape>(message), Lower(x), mask & ((1U << kHalf) - 1));
    const Bits<k / 2> right = AnyNode<AfterG<kW>(kShape), kW, kLevel - 1>(
        GOfHalves<kShape, kW>(message, left), Upper(x), mask >> kHalf);
    return Join(Xor(left, right), right);
  } else {
    return x;  // not reached: a mask of one index is 0 or all
  }
}

// Instrumented for the address sanitizer the straight code below takes a quarter of an hour to
// compile, and it touches no memory.
#if defined(__SANITIZE_ADDRESS__)
constexpr bool kFixedLeaves = false;
#elif defined(__has_feature)
#if __has_feature(address_sanitizer)
constexpr bool kFixedLeaves = false;
#else
constexpr bool kFixedLeaves = true;
#endif
#else
constexpr bool kFixedLeaves = true;
#endif

// The shape that all messages have after three steps of g.
template <int kW>
constexpr Shape kFullShape = kW == 2 ? Shape::two : Shape::three;

// Nodes of up to this many bits are decoded in registers.
constexpr unsigned kRegisterLog2Bits = 10;

// Walks the nodes of 8 and more indices. program: where its next code is read.
template <int kW, unsigned kLog2Lanes>
class RegisterTree {
 public:
  static constexpr Shape kFull = kFullShape<kW>;
  template <unsigned kLevel>
  using NodeBits = Bits<(1U << (kLevel + kLog2Lanes))>;

  // A mixed node of 2^kLevel indices.
  template <Shape kShape, unsigned kLevel>
  static HWY_INLINE NodeBits<kLevel> Call(const Message<NodeBits<kLevel>>& message,
                                          const NodeBits<kLevel>& x, const std::uint8_t** program) {
    using NodeMessage = Message<NodeBits<kLevel>>;
    if constexpr (kShape == Shape::constant) {
      return OfMemory<kShape, kLevel>(message, x, program);
    } else {
      const NodeMessage wide = Widen<kShape, kFull>(message);
      if constexpr (kParts < (1U << (kLevel + kLog2Lanes)) >> 1) {
        return OfMemory<kFull, kLevel>(wide, x, program);
      } else {
        return OfVectors<kLevel>(wide.s, wide.m[0], wide.m[1],
                                 MagnitudePlanes(kFull) > 2 ? wide.m[2] : wide.m[1], x, program);
      }
    }
  }

 private:
  // Vectors that are arguments of their own travel in registers.
  template <unsigned kLevel>
  static HWY_NOINLINE NodeBits<kLevel> OfVectors(NodeBits<kLevel> s, NodeBits<kLevel> m0,
                                                 NodeBits<kLevel> m1, NodeBits<kLevel> m2,
                                                 NodeBits<kLevel> x, const std::uint8_t** program) {
    return Node<kFull, kLevel>({s, {m0, m1, m2}}, x, program);
  }
  template <Shape kShape, unsigned kLevel>
  static HWY_NOINLINE NodeBits<kLevel> OfMemory(const Message<NodeBits<kLevel>>& message,
                                                const NodeBits<kLevel>& x,
                                                const std::uint8_t** program) {
    return Node<kShape, kLevel>(message, x, program);
  }

  // kShape: constant or kFull.
  template <Shape kShape, unsigned kLevel>
  static HWY_INLINE NodeBits<kLevel> Node(const Message<NodeBits<kLevel>>& message,
                                          const NodeBits<kLevel>& x, const std::uint8_t** program) {
    const std::uint8_t code = *(*program)++;
    if constexpr (kLevel == kLeafLog2) {
      return Leaf<kShape>(message, x, code, program);
    } else {
      using Half = NodeBits<kLevel - 1>;
      Half left;
      switch (left_kind(code)) {
        case NodeKind::all_frozen:
          left = TransformBits<kLevel - 1>(Lower(x));
          break;
        case NodeKind::all_open:
          if constexpr (HasSign(kShape)) {
            left = Xor(Lower(message.s), Upper(message.s));
          } else {
            left = Decisions<kShape>(FOfHalves<kShape>(message));
          }
          break;
        default:
          left = Call<kShape, kLevel - 1>(FOfHalves<kShape>(message), Lower(x), program);
      }
      Half right;
      switch (right_kind(code)) {
        case NodeKind::all_open:
          right = RightDecisions<kShape>(message, left);
          break;
        case NodeKind::all_frozen:
          right = TransformBits<kLevel - 1>(Upper(x));
          break;
        default:
          right = Call<AfterG<kW>(kShape), kLevel - 1>(GOfHalves<kShape, kW>(message, left),
                                                       Upper(x), program);
      }
      return Join(Xor(left, right), right);
    }
  }

  template <Shape kShape>
  static HWY_INLINE NodeBits<kLeafLog2> Leaf(const Message<NodeBits<kLeafLog2>>& message,
                                             const NodeBits<kLeafLog2>& x, std::uint8_t code,
                                             const std::uint8_t** program) {
    // For planes:3 alone: other planes would double the time that this file compiles.
    if constexpr (kShape != Shape::constant && kW == 3 && kFixedLeaves) {
      switch (code) {
        case 0:
          return FixedNode<kShape, kW, kLeafLog2, kLeafPatterns[0]>(message, x);
        case 1:
          return FixedNode<kShape, kW, kLeafLog2, kLeafPatterns[1]>(message, x);
        case 2:
          return FixedNode<kShape, kW, kLeafLog2, kLeafPatterns[2]>(message, x);
        case 3:
          return FixedNode<kShape, kW, kLeafLog2, kLeafPatterns[3]>(message, x);
        case 4:
          return FixedNode<kShape, kW, kLeafLog2, kLeafPatterns[4]>(message, x);
        case 5:
          return FixedNode<kShape, kW, kLeafLog2, kLeafPatterns[5]>(message, x);
        case 6:
          return FixedNode<kShape, kW, kLeafLog2, kLeafPatterns[6]>(message, x);
        case 7:
          return FixedNode<kShape, kW, kLeafLog2, kLeafPatterns[7]>(message, x);
        default:
          break;
      }
    }
    const unsigned mask = code == kAnyLeaf ? *(*program)++ : kLeafPatterns[code];
    return AnyNode<kShape, kW, kLeafLog2>(message, x, mask);
  }
};

}  // namespace HWY_NAMESPACE
}  // namespace frostline
HWY_AFTER_NAMESPACE();

#endif  // FROSTLINE_REGISTER_TREE_INL_H
