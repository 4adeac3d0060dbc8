// Check bits of the blocks of a batch, in the layout of the message.
#pragma once

#include "polar/bits.h"
#include "polar/code.h"

namespace frostline {

// blocks: bit l N + i is position i of lane l. Returns c lanes bits: row t holds the t-th check bit
// of every lane, the top bit of the register (the first one sent) in row 0.
BitString lane_checks(const KeyWords& blocks, const Code& code, unsigned lanes);

}  // namespace frostline
