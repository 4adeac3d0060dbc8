#include "polar/crc_folding.h"

// One source for all targets of Google Highway: the file includes itself once for each.
#undef HWY_TARGET_INCLUDE
#define HWY_TARGET_INCLUDE "polar/crc_folding.cpp"  // NOLINT
#include <hwy/foreach_target.h>                     // IWYU pragma: keep
// After foreach_target.
#include <hwy/highway.h>

HWY_BEFORE_NAMESPACE();
namespace frostline {
namespace HWY_NAMESPACE {
#if HWY_TARGET == HWY_SCALAR || HWY_TARGET == HWY_EMU128 || \
    __BYTE_ORDER__ != __ORDER_LITTLE_ENDIAN__

// Emulated multiplications are slower than tables.
std::size_t Fold(const CrcFolding&, const std::uint8_t*, std::size_t, std::uint64_t,
                 std::uint8_t*) {
  return 0;
}

#else
namespace hn = hwy::HWY_NAMESPACE;

using Block = hn::FixedTag<std::uint64_t, 2>;
using BlockBytes = hn::FixedTag<std::uint8_t, 16>;
using Vector = hn::Vec<Block>;

HWY_INLINE Vector LoadBlock(const std::uint8_t* bytes) {
  return hn::BitCast(Block(), hn::LoadU(BlockBytes(), bytes));
}

HWY_INLINE Vector FoldBlock(Vector block, Vector powers, Vector later) {
  return hn::Xor(hn::Xor(hn::CLMulLower(block, powers), hn::CLMulUpper(block, powers)), later);
}

std::size_t Fold(const CrcFolding& folding, const std::uint8_t* bytes, std::size_t count,
                 std::uint64_t start, std::uint8_t* folded) {
  if (count < kShortestFold) return 0;
  const Block d;
  const Vector over_128 = hn::LoadU(d, folding.over_128);
  const Vector over_512 = hn::LoadU(d, folding.over_512);
  const std::uint64_t first[2] = {start, 0};
  // Four blocks side by side hide the latency of the multiplications.
  Vector sum0 = hn::Xor(LoadBlock(bytes), hn::LoadU(d, first));
  Vector sum1 = LoadBlock(bytes + 16);
  Vector sum2 = LoadBlock(bytes + 32);
  Vector sum3 = LoadBlock(bytes + 48);
  std::size_t done = 64;
  for (; done + 64 <= count; done += 64) {
    sum0 = FoldBlock(sum0, over_512, LoadBlock(bytes + done));
    sum1 = FoldBlock(sum1, over_512, LoadBlock(bytes + done + 16));
    sum2 = FoldBlock(sum2, over_512, LoadBlock(bytes + done + 32));
    sum3 = FoldBlock(sum3, over_512, LoadBlock(bytes + done + 48));
  }
  Vector sum = FoldBlock(sum0, over_128, sum1);
  sum = FoldBlock(sum, over_128, sum2);
  sum = FoldBlock(sum, over_128, sum3);
  for (; done + 16 <= count; done += 16) sum = FoldBlock(sum, over_128, LoadBlock(bytes + done));
  hn::StoreU(hn::BitCast(BlockBytes(), sum), BlockBytes(), folded);
  return done;
}

#endif
}  // namespace HWY_NAMESPACE
}  // namespace frostline
HWY_AFTER_NAMESPACE();

#if HWY_ONCE
namespace frostline {

HWY_EXPORT(Fold);

std::size_t fold_crc(const CrcFolding& folding, const std::uint8_t* bytes, std::size_t count,
                     std::uint64_t start, std::uint8_t folded[16]) {
  return HWY_DYNAMIC_DISPATCH(Fold)(folding, bytes, count, start, folded);
}

}  // namespace frostline
#endif  // HWY_ONCE
