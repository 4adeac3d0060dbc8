// One source for all targets of Google Highway: the file includes itself once for each.
#undef HWY_TARGET_INCLUDE
#define HWY_TARGET_INCLUDE "polar/transform.cpp"  // NOLINT
#include <hwy/foreach_target.h>                   // IWYU pragma: keep
// After foreach_target.
#include <hwy/highway.h>

#include "polar/transform.h"

HWY_BEFORE_NAMESPACE();
namespace frostline {
namespace HWY_NAMESPACE {
namespace hn = hwy::HWY_NAMESPACE;

using Words = hn::ScalableTag<std::uint64_t>;
using Vector = hn::Vec<Words>;

// Blocks of this many words (32 KB) are transformed inside the first-level cache.
constexpr std::size_t kCachedWords = 4096;
// Bits of a word whose index has bit k clear.
constexpr std::uint64_t kLowerBits[6] = {0x5555555555555555U, 0x3333333333333333U,
                                         0x0F0F0F0F0F0F0F0FU, 0x00FF00FF00FF00FFU,
                                         0x0000FFFF0000FFFFU, 0x00000000FFFFFFFFU};

// Which stages a batch needs: all whose distance in bits is at least the number of lanes.
struct Stages {
  unsigned first_bit_stage;  // distances 2^k inside a word, k from here to 5
  std::size_t min_distance;  // in words: 1 up to 64 lanes, else lanes / 64
};

template <int kShift>
HWY_INLINE Vector BitStage(Vector x) {
  const Words d;
  return hn::Xor(x, hn::And(hn::ShiftRight<(1 << kShift)>(x), hn::Set(d, kLowerBits[kShift])));
}

HWY_INLINE Vector BitStages(Vector x, unsigned first) {
  if (first <= 0) x = BitStage<0>(x);
  if (first <= 1) x = BitStage<1>(x);
  if (first <= 2) x = BitStage<2>(x);
  if (first <= 3) x = BitStage<3>(x);
  if (first <= 4) x = BitStage<4>(x);
  if (first <= 5) x = BitStage<5>(x);
  return x;
}

// Stages between 2^kStages vectors that lie `distance` words apart.
template <int kStages>
HWY_INLINE void Butterflies(std::uint64_t* HWY_RESTRICT x, std::size_t distance) {
  const Words d;
  constexpr int kCount = 1 << kStages;
  Vector v[kCount];
  for (int k = 0; k < kCount; ++k) v[k] = hn::Load(d, x + static_cast<std::size_t>(k) * distance);
  for (int step = 1; step < kCount; step *= 2) {
    for (int k = 0; k < kCount; ++k) {
      if ((k & step) == 0) v[k] = hn::Xor(v[k], v[k + step]);
    }
  }
  for (int k = 0; k < kCount; ++k) hn::Store(v[k], d, x + static_cast<std::size_t>(k) * distance);
}

// kStages stages with distances `distance`, 2 distance, ... over the whole array.
// REQUIRES: distance a multiple of the vector's length.
template <int kStages>
void Pass(std::uint64_t* x, std::size_t words, std::size_t distance) {
  const Words d;
  for (std::size_t block = 0; block < words; block += distance << kStages) {
    for (std::size_t j = 0; j < distance; j += hn::Lanes(d)) {
      Butterflies<kStages>(x + block + j, distance);
    }
  }
}

void PassOf(unsigned stages, std::uint64_t* x, std::size_t words, std::size_t distance) {
  if (stages == 1) Pass<1>(x, words, distance);
  if (stages == 2) Pass<2>(x, words, distance);
  if (stages == 3) Pass<3>(x, words, distance);
}

// Stages inside words and inside vectors, in one pass.
void InnerStages(std::uint64_t* x, std::size_t words, const Stages& stages) {
  const Words d;
  const std::size_t lanes = hn::Lanes(d);
  // For each distance inside a vector: where the upper partner sits, and which lanes take it.
  HWY_ALIGN std::uint64_t partner[hn::MaxLanes(d)];
  HWY_ALIGN std::uint64_t takes[hn::MaxLanes(d)];
  constexpr unsigned kMaxInner = 8;
  decltype(hn::SetTableIndices(d, partner)) indices[kMaxInner];
  Vector masks[kMaxInner];
  unsigned inner = 0;
  for (std::size_t distance = stages.min_distance; distance < lanes; distance *= 2) {
    for (std::size_t i = 0; i < lanes; ++i) {
      partner[i] = i | distance;
      takes[i] = (i & distance) == 0 ? ~std::uint64_t{0} : 0;
    }
    indices[inner] = hn::SetTableIndices(d, partner);
    masks[inner] = hn::Load(d, takes);
    ++inner;
  }
  for (std::size_t i = 0; i < words; i += lanes) {
    Vector v = BitStages(hn::Load(d, x + i), stages.first_bit_stage);
    for (unsigned k = 0; k < inner; ++k) {
      v = hn::Xor(v, hn::And(hn::TableLookupLanes(v, indices[k]), masks[k]));
    }
    hn::Store(v, d, x + i);
  }
}

// REQUIRES: words a power of two, at least the vector's length.
void TransformCached(std::uint64_t* x, std::size_t words, const Stages& stages) {
  const Words d;
  if (stages.first_bit_stage < 6 || stages.min_distance < hn::Lanes(d)) {
    InnerStages(x, words, stages);
  }
  std::size_t distance = HWY_MAX(stages.min_distance, hn::Lanes(d));
  while (distance < words) {
    unsigned count = 1;
    while (count < 3 && (distance << count) < words) ++count;
    PassOf(count, x, words, distance);
    distance <<= count;
  }
}

// Long blocks: the longest distances first, then each part by itself while it is in the cache.
void TransformLong(std::uint64_t* x, std::size_t words, const Stages& stages) {
  if (words <= kCachedWords) {
    TransformCached(x, words, stages);
    return;
  }
  unsigned count = 1;
  while (count < 3 && (words >> count) > kCachedWords) ++count;
  const std::size_t part = words >> count;
  PassOf(count, x, words, part);
  for (std::size_t first = 0; first < words; first += part) TransformLong(x + first, part, stages);
}

// Fewer words than a vector holds.
void TransformShort(std::uint64_t* x, std::size_t words, unsigned bit_stages,
                    const Stages& stages) {
  for (unsigned k = stages.first_bit_stage; k < bit_stages; ++k) {
    for (std::size_t i = 0; i < words; ++i) x[i] ^= (x[i] >> (1U << k)) & kLowerBits[k];
  }
  for (std::size_t distance = stages.min_distance; distance < words; distance *= 2) {
    for (std::size_t i = 0; i < words; ++i) {
      if ((i & distance) == 0) x[i] ^= x[i + distance];
    }
  }
}

void Transform(std::uint64_t* x, unsigned log2_bits, unsigned log2_lanes) {
  const Words d;
  const std::size_t words = log2_bits > 6 ? std::size_t{1} << (log2_bits - 6) : 1;
  const Stages stages{HWY_MIN(log2_lanes, 6U),
                      log2_lanes > 6 ? std::size_t{1} << (log2_lanes - 6) : 1};
  if (words < hn::Lanes(d)) {
    TransformShort(x, words, HWY_MIN(log2_bits, 6U), stages);
  } else {
    TransformLong(x, words, stages);
  }
}

}  // namespace HWY_NAMESPACE
}  // namespace frostline
HWY_AFTER_NAMESPACE();

#if HWY_ONCE
#include <algorithm>
#include <stdexcept>

namespace frostline {

HWY_EXPORT(Transform);

void polar_transform(Span<std::uint64_t> rows, BlockLength block_length, unsigned lanes) {
  unsigned log2_lanes = 0;
  while ((1U << log2_lanes) < lanes && log2_lanes < 10) ++log2_lanes;
  if (lanes == 0 || lanes > kMaxLanes || (1U << log2_lanes) != lanes) {
    throw std::invalid_argument("lanes must be a power of two from 1 to 512");
  }
  if (rows.size() != words_for(block_length.bits() * lanes)) {
    throw std::invalid_argument("a batch of another size");
  }
  // Vector loads want alignment, which BitString gives; other memory goes through a copy.
  constexpr std::uintptr_t kAlignment = 64;
  if (reinterpret_cast<std::uintptr_t>(rows.data()) % kAlignment == 0) {
    HWY_DYNAMIC_DISPATCH(Transform)(rows.data(), block_length.log2() + log2_lanes, log2_lanes);
    return;
  }
  KeyWords aligned(rows.begin(), rows.end());
  HWY_DYNAMIC_DISPATCH(Transform)(aligned.data(), block_length.log2() + log2_lanes, log2_lanes);
  std::copy(aligned.begin(), aligned.end(), rows.begin());
}

BitString polar_transform(BitString bits) {
  const BlockLength block_length(bits.size());
  polar_transform(bits.words(), block_length, 1);
  return bits;
}

}  // namespace frostline
#endif  // HWY_ONCE
