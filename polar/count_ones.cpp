// The number of ones in words, for all targets of Google Highway.
#undef HWY_TARGET_INCLUDE
#define HWY_TARGET_INCLUDE "polar/count_ones.cpp"  // NOLINT
#include <hwy/foreach_target.h>                    // IWYU pragma: keep
// After foreach_target.
#include <hwy/highway.h>

#include "polar/bits.h"

HWY_BEFORE_NAMESPACE();
namespace frostline {
namespace HWY_NAMESPACE {
namespace hn = hwy::HWY_NAMESPACE;

std::size_t CountOnes(const std::uint64_t* words, std::size_t count) {
  const hn::ScalableTag<std::uint64_t> d;
  const std::size_t step = hn::Lanes(d);
  auto sum = hn::Zero(d);
  std::size_t i = 0;
  for (; i + step <= count; i += step) {
    sum = hn::Add(sum, hn::PopulationCount(hn::LoadU(d, words + i)));
  }
  std::size_t ones = hn::GetLane(hn::SumOfLanes(d, sum));
  for (; i < count; ++i) ones += hwy::PopCount(words[i]);
  return ones;
}

}  // namespace HWY_NAMESPACE
}  // namespace frostline
HWY_AFTER_NAMESPACE();

#if HWY_ONCE
namespace frostline {

HWY_EXPORT(CountOnes);

std::size_t count_ones(Span<const std::uint64_t> words) {
  return HWY_DYNAMIC_DISPATCH(CountOnes)(words.data(), words.size());
}

}  // namespace frostline
#endif  // HWY_ONCE
