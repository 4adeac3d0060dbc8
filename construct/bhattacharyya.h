// Bhattacharyya parameters: Z- = 2Z - Z^2 (an upper bound on a BSC), Z+ = Z^2.
//
// E. Arikan, "Channel polarization", IEEE Trans. IT 55(7), 2009, prop. 5: sums of Z over the open
// indices bound the FER of SC from above; exact on a BEC. Kept as ln Z, so that nothing underflows
// at N = 2^24, and ln(1 - Z) where Z is near 1.
#pragma once

#include "polar/block_length.h"
#include "polar/reliability.h"

namespace frostline {

// From the Bhattacharyya parameter of the channel, 0 < z < 1 (InputError otherwise): ln Z of every
// index. For a BEC z is the erasure probability.
std::vector<double> log_bhattacharyya(BlockLength block_length, double z);

// For a BSC(p): z = 2 sqrt(p (1-p)), kind upper_bound.
Reliability bhattacharyya_bound(BlockLength block_length, double p);

}  // namespace frostline
