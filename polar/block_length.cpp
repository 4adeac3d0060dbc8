#include "polar/block_length.h"

#include <string>

#include "polar/error.h"

namespace frostline {

BlockLength::BlockLength(std::uint64_t bits) : log2_(0) {
  while (log2_ < 63 && (std::uint64_t{1} << log2_) < bits) ++log2_;
  if (bits != std::uint64_t{1} << log2_ || log2_ < kMinLog2 || log2_ > kMaxLog2) {
    throw InputError("block length " + std::to_string(bits) +
                     " is not a power of two from 8 to 16777216");
  }
}

BlockLength BlockLength::from_log2(unsigned log2) {
  if (log2 > kMaxLog2) {
    throw InputError("block length 2^" + std::to_string(log2) +
                     " is not a power of two from 8 to 16777216");
  }
  return BlockLength(std::uint64_t{1} << log2);
}

}  // namespace frostline
