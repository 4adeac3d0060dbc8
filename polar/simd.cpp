#include "polar/simd.h"

#include <hwy/highway.h>
#include <hwy/targets.h>

#include <algorithm>

#include "polar/error.h"

namespace frostline {
namespace {

struct NamedTarget {
  std::int64_t target;
  const char* name;
};

// Best first, as Highway numbers its targets.
constexpr NamedTarget kTargets[] = {
#if HWY_ARCH_X86
    {HWY_AVX3_DL, "avx512"}, {HWY_AVX3, "avx512"},   {HWY_AVX2, "avx2"},
    {HWY_SSE4, "sse4"},      {HWY_SSSE3, "ssse3"},
#elif HWY_ARCH_ARM
    {HWY_NEON, "neon"},
#endif
    {HWY_EMU128, "scalar"},  {HWY_SCALAR, "scalar"},
};

bool usable(std::int64_t target) { return (HWY_TARGETS & hwy::SupportedTargets() & target) != 0; }

}  // namespace

std::vector<std::string> simd_names() {
  std::vector<std::string> names;
  for (const NamedTarget& entry : kTargets) {
    if (usable(entry.target) && (names.empty() || names.back() != entry.name)) {
      names.emplace_back(entry.name);
    }
  }
  return names;
}

std::string simd_in_use() { return simd_names().front(); }

void force_simd(std::string_view name) {
  const std::vector<std::string> names = simd_names();
  if (std::find(names.begin(), names.end(), name) == names.end()) {
    std::string known;
    for (const std::string& each : names) known += (known.empty() ? "" : ", ") + each;
    throw InputError("vector instructions '" + std::string(name) +
                     "' are not to be had here; there is " + known);
  }
  std::int64_t allowed = 0;
  bool reached = false;
  for (const NamedTarget& entry : kTargets) {
    reached = reached || name == entry.name;
    if (reached && usable(entry.target)) allowed |= entry.target;
  }
  hwy::SetSupportedTargetsForTest(allowed);
}

}  // namespace frostline
