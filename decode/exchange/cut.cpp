#include "decode/exchange/cut.h"

#include <stdexcept>
#include <string>

#include "polar/error.h"
#include "polar/transform.h"

namespace frostline {

unsigned default_lanes(BlockLength block_length) {
  // Measured: fewer lanes cost overhead a node of the decoder's tree, more cost cache.
  const unsigned n = block_length.log2();
  if (n <= 12) return 256;
  if (n <= 14) return 128;
  if (n <= 16) return 64;
  if (n <= 18) return 32;
  return n <= 21 ? 16 : 8;
}

void require_lanes(std::uint64_t lanes) {
  if (lanes == 0 || lanes > kMaxLanes || (lanes & (lanes - 1)) != 0) {
    throw InputError("lanes " + std::to_string(lanes) + " is not a power of two from 1 to 512");
  }
}

Cut::Cut(BlockLength block_length, std::uint64_t key_bits, unsigned lanes)
    : block_length_(block_length), key_bits_(key_bits), lanes_(lanes) {
  require_lanes(lanes);
}

// After the full batches fewer than B blocks are left, and "the largest power of two that fits"
// writes their number in binary: one batch for each of its ones, from the top.
std::uint64_t Cut::batch_count() const {
  return block_count() / lanes_ +
         static_cast<std::uint64_t>(__builtin_popcountll(block_count() % lanes_));
}

Batch Cut::batch(std::uint64_t i) const {
  if (i >= batch_count()) throw std::invalid_argument("no such batch");
  const std::uint64_t full = block_count() / lanes_;
  std::uint64_t block = i < full ? i * lanes_ : full * lanes_;
  unsigned batch_lanes = lanes_;
  if (i >= full) {
    std::uint64_t left = block_count() % lanes_;
    for (std::uint64_t skip = i - full;; --skip) {
      batch_lanes = 1;
      while (2 * batch_lanes <= left) batch_lanes *= 2;
      if (skip == 0) break;
      block += batch_lanes;
      left -= batch_lanes;
    }
  }
  return {block << block_length_.log2(), block, batch_lanes};
}

}  // namespace frostline
