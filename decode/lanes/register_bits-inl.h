// A run of bits in registers, split into halves and put together again: what the lower levels of
// the tree are made of.
//
// Bits<k> is k bits: several full vectors, one vector, a narrower vector, or the low end of one
// 64-bit lane. Bits of a lane beyond k mean nothing. The logic of plane_rules-inl.h works on it as
// on a vector.
//
// Included once a target, inside Highway's namespace; no include guard of the usual kind.
#if defined(FROSTLINE_REGISTER_BITS_INL_H) == defined(HWY_TARGET_TOGGLE)
#ifdef FROSTLINE_REGISTER_BITS_INL_H
#undef FROSTLINE_REGISTER_BITS_INL_H
#else
#define FROSTLINE_REGISTER_BITS_INL_H
#endif

#include <hwy/highway.h>

#include "decode/lanes/plane_rules-inl.h"

HWY_BEFORE_NAMESPACE();
namespace frostline {
namespace HWY_NAMESPACE {

// 64 on the scalar target, which has no vectors.
constexpr unsigned kVectorBits = HWY_MAX_BYTES > 64 ? 512 : HWY_MAX_BYTES * 8;

template <unsigned kBits>
constexpr unsigned kPartBits = kBits > kVectorBits ? kVectorBits
                               : kBits < 64        ? 64
                                                   : kBits;
template <unsigned kBits>
constexpr unsigned kParts = kBits > kVectorBits ? kBits / kVectorBits : 1;
template <unsigned kBits>
using PartTag = hn::FixedTag<std::uint64_t, kPartBits<kBits> / 64>;

template <unsigned kBits>
struct Bits {
  hn::Vec<PartTag<kBits>> part[kParts<kBits>];
};

// each(i) for every part.
template <unsigned k, typename Each>
HWY_INLINE Bits<k> OfParts(Each&& each) {
  Bits<k> out;
  for (unsigned i = 0; i < kParts<k>; ++i) out.part[i] = each(i);
  return out;
}

template <int kTable, unsigned k>
HWY_INLINE Bits<k> Ternary(Bits<k> a, Bits<k> b, Bits<k> c) {
  return OfParts<k>([&](unsigned i)
                        HWY_ATTR { return Ternary<kTable>(a.part[i], b.part[i], c.part[i]); });
}
template <unsigned k>
HWY_INLINE Bits<k> And(Bits<k> a, Bits<k> b) {
  return OfParts<k>([&](unsigned i) HWY_ATTR { return hn::And(a.part[i], b.part[i]); });
}
template <unsigned k>
HWY_INLINE Bits<k> Xor(Bits<k> a, Bits<k> b) {
  return OfParts<k>([&](unsigned i) HWY_ATTR { return hn::Xor(a.part[i], b.part[i]); });
}
template <unsigned k>
HWY_INLINE Bits<k> AndNot(Bits<k> not_a, Bits<k> b) {
  return OfParts<k>([&](unsigned i) HWY_ATTR { return hn::AndNot(not_a.part[i], b.part[i]); });
}
template <unsigned k>
HWY_INLINE Bits<k> Not(Bits<k> a) {
  return OfParts<k>([&](unsigned i) HWY_ATTR { return hn::Not(a.part[i]); });
}
template <unsigned k>
HWY_INLINE Bits<k> Zeros() {
  return OfParts<k>([](unsigned) HWY_ATTR { return hn::Zero(PartTag<k>()); });
}

// words: aligned like a vector where k is at least 64.
template <unsigned k>
HWY_INLINE Bits<k> LoadBits(const std::uint64_t* words) {
  Bits<k> out;
  const PartTag<k> d;
  for (unsigned i = 0; i < kParts<k>; ++i) {
    out.part[i] = hn::Load(d, words + std::size_t{i} * (kPartBits<k> / 64));
  }
  return out;
}
// Where k is below 64 the meaningless bits of the word are stored as 0.
template <unsigned k>
HWY_INLINE void StoreBits(Bits<k> bits, std::uint64_t* words) {
  const PartTag<k> d;
  if constexpr (k < 64) {
    bits.part[0] = hn::And(bits.part[0], hn::Set(d, (std::uint64_t{1} << k) - 1));
  }
  for (unsigned i = 0; i < kParts<k>; ++i) {
    hn::Store(bits.part[i], d, words + std::size_t{i} * (kPartBits<k> / 64));
  }
}

template <unsigned k>
HWY_INLINE Bits<k / 2> Lower(const Bits<k>& bits) {
  Bits<k / 2> out;
  if constexpr (k > kVectorBits) {
    for (unsigned i = 0; i < kParts<k / 2>; ++i) out.part[i] = bits.part[i];
#if HWY_TARGET != HWY_SCALAR
  } else if constexpr (k > 64) {
    out.part[0] = hn::LowerHalf(PartTag<k / 2>(), bits.part[0]);
#endif
  } else {
    out.part[0] = bits.part[0];
  }
  return out;
}
template <unsigned k>
HWY_INLINE Bits<k / 2> Upper(const Bits<k>& bits) {
  Bits<k / 2> out;
  if constexpr (k > kVectorBits) {
    for (unsigned i = 0; i < kParts<k / 2>; ++i) out.part[i] = bits.part[kParts<k / 2> + i];
#if HWY_TARGET != HWY_SCALAR
  } else if constexpr (k > 64) {
    out.part[0] = hn::UpperHalf(PartTag<k / 2>(), bits.part[0]);
#endif
  } else {
    out.part[0] = hn::ShiftRight<k / 2>(bits.part[0]);
  }
  return out;
}
// Lower and upper half side by side.
template <unsigned k>
HWY_INLINE Bits<2 * k> Join(const Bits<k>& lower, const Bits<k>& upper) {
  Bits<2 * k> out;
  if constexpr (2 * k > kVectorBits) {
    for (unsigned i = 0; i < kParts<k>; ++i) {
      out.part[i] = lower.part[i];
      out.part[kParts<k> + i] = upper.part[i];
    }
#if HWY_TARGET != HWY_SCALAR
  } else if constexpr (k >= 64) {
    out.part[0] = hn::Combine(PartTag<2 * k>(), upper.part[0], lower.part[0]);
#endif
  } else {
    const PartTag<2 * k> d;
    out.part[0] = Ternary<kSelect>(hn::Set(d, (std::uint64_t{1} << k) - 1), lower.part[0],
                                   hn::ShiftLeft<static_cast<int>(k)>(upper.part[0]));
  }
  return out;
}

template <Shape kShape, unsigned k>
HWY_INLINE Message<Bits<k / 2>> Lower(const Message<Bits<k>>& message) {
  Message<Bits<k / 2>> out;
  if constexpr (HasSign(kShape)) out.s = Lower(message.s);
  for (int i = 0; i < MagnitudePlanes(kShape); ++i) out.m[i] = Lower(message.m[i]);
  return out;
}
template <Shape kShape, unsigned k>
HWY_INLINE Message<Bits<k / 2>> Upper(const Message<Bits<k>>& message) {
  Message<Bits<k / 2>> out;
  if constexpr (HasSign(kShape)) out.s = Upper(message.s);
  for (int i = 0; i < MagnitudePlanes(kShape); ++i) out.m[i] = Upper(message.m[i]);
  return out;
}

}  // namespace HWY_NAMESPACE
}  // namespace frostline
HWY_AFTER_NAMESPACE();

#endif  // FROSTLINE_REGISTER_BITS_INL_H
