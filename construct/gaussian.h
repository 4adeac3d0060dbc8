// Gaussian approximation of density evolution on a BSC, with a start that fits the BSC.
//
// S.-Y. Chung, T. Richardson, R. Urbanke, IEEE Trans. IT 47(2), 2001; for polar codes P. Trifonov,
// IEEE Trans. Comm. 60(11), 2012. phi is evaluated exactly, in the log domain. The LLR of a BSC has
// two values, nothing like a Gaussian: the first exact_levels levels are tracked as the discrete
// densities that they are, then each becomes the Gaussian of equal conditional entropy.
#pragma once

#include "polar/block_length.h"
#include "polar/reliability.h"

namespace frostline {

constexpr unsigned kDefaultExactLevels = 6;

// ln phi(mean), phi(x) = 1 - E[tanh(u/2)], u ~ N(x, 2x). Relative error below 1e-6 for means from
// 1e-8 to 1e6. REQUIRES: mean >= 0. log_phi(0) = 0.
double log_phi(double mean);
// The mean whose ln phi is given. REQUIRES: value <= 0.
double mean_from_log_phi(double value);

// kind: estimate. Ranges: 0 < p < 0.5, exact_levels 0 to 12 (InputError otherwise; more than log2 N
// means log2 N). O(N) time.
Reliability gaussian_approximation(BlockLength block_length, double p,
                                   unsigned exact_levels = kDefaultExactLevels);

}  // namespace frostline
