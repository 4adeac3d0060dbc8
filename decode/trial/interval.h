// Confidence intervals of a frame error rate.
#pragma once

#include <cstdint>

namespace frostline {

struct RateInterval {
  double low;
  double high;
};

// C. J. Clopper, E. S. Pearson, Biometrika 26(4), 1934: at least the given confidence whatever the
// rate. failures out of a number of blocks that was fixed beforehand. Beta quantiles by Boost.Math.
// REQUIRES: blocks > 0, failures <= blocks, 0 < confidence < 1 (std::invalid_argument otherwise).
RateInterval fixed_blocks_interval(std::uint64_t failures, std::uint64_t blocks,
                                   double confidence = 0.95);

// The same where the trial stopped at the failures-th failure, which was the blocks-th block
// (inverse sampling: J. B. S. Haldane, Biometrika 33(3), 1945): Beta(failures, blocks - failures +
// 1) below, Beta(failures, blocks - failures) above. REQUIRES: failures > 0 too.
RateInterval stopped_at_failure_interval(std::uint64_t failures, std::uint64_t blocks,
                                         double confidence = 0.95);

}  // namespace frostline
