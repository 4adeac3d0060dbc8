// Which vector instructions the library uses, and how to force a lesser set.
#pragma once

#include <string>
#include <string_view>
#include <vector>

namespace frostline {

// The sets that this build has code for and this machine runs, best first: names among avx512,
// avx2, sse4, neon, scalar.
std::vector<std::string> simd_names();
// The set in use.
std::string simd_in_use();
// From now on use this set and nothing above it. Throws InputError when it is not one of
// simd_names(). Call it while no other thread computes.
void force_simd(std::string_view name);
// Use the best set again. The same holds.
void reset_simd();

}  // namespace frostline
