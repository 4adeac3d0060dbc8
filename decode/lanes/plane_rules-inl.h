// f and g of planes:2 and planes:3 on rows of bits: the same formulas for vectors and for words.
//
// A node's messages have one of five shapes. On a BSC all channel messages are one positive half
// unit (constant: nothing is stored). The g below a constant node gives magnitude 0 or 1 without
// sign: the inverse of the left neighbour's bits, which need not be stored again (fresh); what f
// makes of it is stored (one). The g below that gives a sign and magnitudes up to 2 (two), and
// then up to 2^W - 1 (three). f keeps the shape otherwise.
//
// Included once a target, inside Highway's namespace; no include guard of the usual kind.
#if defined(FROSTLINE_PLANE_RULES_INL_H) == defined(HWY_TARGET_TOGGLE)
#ifdef FROSTLINE_PLANE_RULES_INL_H
#undef FROSTLINE_PLANE_RULES_INL_H
#else
#define FROSTLINE_PLANE_RULES_INL_H
#endif

#include <hwy/highway.h>

HWY_BEFORE_NAMESPACE();
namespace frostline {
namespace HWY_NAMESPACE {
namespace hn = hwy::HWY_NAMESPACE;

// Logic of three inputs. Table: bit 4a + 2b + c of it is the result, as in AVX-512.
constexpr int kXor3 = 0x96;
constexpr int kMajority = 0xE8;
constexpr int kSelect = 0xCA;             // a ? b : c
constexpr int kMajorityNotSecond = 0xB2;  // majority(a, ~b, c)
constexpr int kAndNotThird = 0x40;        // a & b & ~c
constexpr int kOrAndNot = 0xF4;           // a | (b & ~c)
constexpr int kAndXor = 0x60;             // a & (b ^ c)

template <int kTable, typename V>
HWY_INLINE V TernaryByTwos(V a, V b, V c) {
  switch (kTable) {
    case kXor3:
      return hn::Xor(hn::Xor(a, b), c);
    case kMajority: {
      return hn::Or(hn::And(a, b), hn::And(hn::Xor(a, b), c));
    }
    case kSelect:
      return hn::Or(hn::And(a, b), hn::AndNot(a, c));
    case kMajorityNotSecond:
      return hn::Or(hn::AndNot(b, hn::Or(a, c)), hn::And(a, c));
    case kAndNotThird:
      return hn::AndNot(c, hn::And(a, b));
    case kOrAndNot:
      return hn::Or(a, hn::AndNot(c, b));
    default:  // kAndXor
      return hn::And(a, hn::Xor(b, c));
  }
}

#if HWY_TARGET == HWY_AVX3 || HWY_TARGET == HWY_AVX3_DL
template <int kTable>
HWY_INLINE hn::Vec512<std::uint64_t> Ternary(hn::Vec512<std::uint64_t> a,
                                             hn::Vec512<std::uint64_t> b,
                                             hn::Vec512<std::uint64_t> c) {
  return hn::Vec512<std::uint64_t>{_mm512_ternarylogic_epi64(a.raw, b.raw, c.raw, kTable)};
}
template <int kTable>
HWY_INLINE hn::Vec256<std::uint64_t> Ternary(hn::Vec256<std::uint64_t> a,
                                             hn::Vec256<std::uint64_t> b,
                                             hn::Vec256<std::uint64_t> c) {
  return hn::Vec256<std::uint64_t>{_mm256_ternarylogic_epi64(a.raw, b.raw, c.raw, kTable)};
}
template <int kTable, std::size_t kLanes>
HWY_INLINE hn::Vec128<std::uint64_t, kLanes> Ternary(hn::Vec128<std::uint64_t, kLanes> a,
                                                     hn::Vec128<std::uint64_t, kLanes> b,
                                                     hn::Vec128<std::uint64_t, kLanes> c) {
  return hn::Vec128<std::uint64_t, kLanes>{_mm_ternarylogic_epi64(a.raw, b.raw, c.raw, kTable)};
}
#else
template <int kTable, typename V>
HWY_INLINE V Ternary(V a, V b, V c) {
  return TernaryByTwos<kTable>(a, b, c);
}
#endif

template <typename V>
HWY_INLINE V And(V a, V b) {
  return hn::And(a, b);
}
template <typename V>
HWY_INLINE V Xor(V a, V b) {
  return hn::Xor(a, b);
}
template <typename V>
HWY_INLINE V AndNot(V not_a, V b) {
  return hn::AndNot(not_a, b);
}

enum class Shape { constant, fresh, one, two, three };

// What a shape has: magnitude planes, and whether there is a sign.
constexpr int MagnitudePlanes(Shape shape) {
  return shape == Shape::constant ? 0 : shape == Shape::fresh ? 1 : static_cast<int>(shape) - 1;
}
constexpr bool HasSign(Shape shape) { return shape == Shape::two || shape == Shape::three; }
constexpr Shape AfterF(Shape shape) { return shape == Shape::fresh ? Shape::one : shape; }
// The shape that g makes of it when W magnitude bits are kept.
template <int kW>
constexpr Shape AfterG(Shape shape) {
  return shape == Shape::constant                       ? Shape::fresh
         : shape == Shape::fresh || shape == Shape::one ? Shape::two
         : kW == 2                                      ? Shape::two
                                                        : Shape::three;
}

// Messages of a node, or of half of it: sign and magnitude planes; those that the shape lacks are
// not used.
template <typename V>
struct Message {
  V s;
  V m[3];
};

// magnitude of a > magnitude of b.
template <Shape kShape, typename V>
HWY_INLINE V Greater(const Message<V>& a, const Message<V>& b) {
  V greater = AndNot(b.m[0], a.m[0]);
  for (int i = 1; i < MagnitudePlanes(kShape); ++i) {
    greater = Ternary<kMajorityNotSecond>(a.m[i], b.m[i], greater);
  }
  return greater;
}

// f: the signs' sum, the smaller magnitude.
template <Shape kShape, typename V>
HWY_INLINE Message<V> F(const Message<V>& a, const Message<V>& b) {
  Message<V> out;
  if constexpr (!HasSign(kShape)) {
    out.m[0] = And(a.m[0], b.m[0]);
  } else {
    out.s = Xor(a.s, b.s);
    const V greater = Greater<kShape>(a, b);
    for (int i = 0; i < MagnitudePlanes(kShape); ++i) {
      out.m[i] = Ternary<kSelect>(greater, b.m[i], a.m[i]);
    }
  }
  return out;
}

// The sign of f alone. REQUIRES: a shape with a sign.
template <typename V>
HWY_INLINE V SignOfF(const Message<V>& a, const Message<V>& b) {
  return Xor(a.s, b.s);
}

// The sign of g alone: b's, but a's where the two disagree and a is larger.
template <Shape kShape, typename V>
HWY_INLINE V SignOfG(const Message<V>& a, const Message<V>& b, V bit) {
  if constexpr (!HasSign(kShape)) {
    return Ternary<kAndNotThird>(bit, a.m[0], b.m[0]);
  } else {
    const V differ = Ternary<kXor3>(a.s, b.s, bit);
    return Xor(b.s, And(differ, Greater<kShape>(a, b)));
  }
}

// g: with t = sign_a xor sign_b xor bit the magnitudes are added (t = 0) or subtracted (t = 1).
// Sum and difference are a xor b xor carry alike; the carry of the sum and the borrow of larger
// minus smaller are the majority of the carry before and a and b, the larger one inverted in a
// difference. A difference ends without a borrow, so that only a sum saturates.
template <Shape kShape, int kW, typename V>
HWY_INLINE Message<V> G(const Message<V>& a, const Message<V>& b, V bit) {
  Message<V> out;
  if constexpr (!HasSign(kShape)) {
    out.s = Ternary<kAndNotThird>(bit, a.m[0], b.m[0]);
    out.m[0] = Xor(a.m[0], b.m[0]);
    out.m[1] = Ternary<kAndNotThird>(a.m[0], b.m[0], bit);
  } else {
    constexpr int kIn = MagnitudePlanes(kShape);
    constexpr int kLast = kIn - 1;
    const V t = Ternary<kXor3>(a.s, b.s, bit);
    const V a_inverted = And(t, Greater<kShape>(a, b));
    const V b_inverted = Xor(t, a_inverted);
    out.s = Xor(b.s, a_inverted);
    out.m[0] = Xor(a.m[0], b.m[0]);
    V carry = Ternary<kAndXor>(Xor(a.m[0], a_inverted), b.m[0], b_inverted);
    for (int i = 1; i < kLast; ++i) {
      out.m[i] = Ternary<kXor3>(a.m[i], b.m[i], carry);
      carry = Ternary<kMajority>(Xor(a.m[i], a_inverted), Xor(b.m[i], b_inverted), carry);
    }
    out.m[kLast] = Ternary<kXor3>(a.m[kLast], b.m[kLast], carry);
    // Of the sum alone: where t is 1 it means nothing.
    carry = Ternary<kMajority>(a.m[kLast], b.m[kLast], carry);
    if constexpr (kIn < kW) {
      out.m[kIn] = AndNot(t, carry);
    } else {
      for (int i = 0; i < kIn; ++i) out.m[i] = Ternary<kOrAndNot>(out.m[i], carry, t);
    }
  }
  return out;
}

}  // namespace HWY_NAMESPACE
}  // namespace frostline
HWY_AFTER_NAMESPACE();

#endif  // FROSTLINE_PLANE_RULES_INL_H
