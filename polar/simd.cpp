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
    {HWY_AVX3_DL, "avx512"}, {HWY_AVX3, "avx512"},   {HWY_AVX2, "avx2"}, {HWY_SSE4, "sse4"},
#elif HWY_ARCH_ARM
    {HWY_NEON, "neon"},
#endif
    {HWY_EMU128, "scalar"},  {HWY_SCALAR, "scalar"},
};

// Targets that this build has code for and this machine runs, asked before any are excluded.
std::int64_t machine_targets() {
  static const std::int64_t targets = HWY_TARGETS & hwy::SupportedTargets();
  return targets;
}

std::vector<std::string> names_among(std::int64_t targets) {
  std::vector<std::string> names;
  for (const NamedTarget& entry : kTargets) {
    if ((targets & entry.target) != 0 && (names.empty() || names.back() != entry.name)) {
      names.emplace_back(entry.name);
    }
  }
  return names;
}

}  // namespace

std::vector<std::string> simd_names() { return names_among(machine_targets()); }

std::string simd_in_use() {
  return names_among(machine_targets() & hwy::SupportedTargets()).front();
}

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
    if (reached) allowed |= machine_targets() & entry.target;
  }
  hwy::SetSupportedTargetsForTest(allowed);
}

void reset_simd() {
  machine_targets();
  hwy::SetSupportedTargetsForTest(0);
}

}  // namespace frostline
