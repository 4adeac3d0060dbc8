// The cut of a key into batches of blocks that lie side by side.
//
// With B lanes a batch takes N B consecutive bits, and its block l holds the bits l, l + B, l + 2B,
// ... of the batch. While the rest of the key holds at least N bits, the next batch uses the
// largest power of two B' <= B with N B' <= rest. Fewer than N bits stay out: the rest. Blocks are
// numbered in this order. Both ends must cut alike, so the message carries B.
#pragma once

#include <cstdint>

#include "polar/block_length.h"

namespace frostline {

// The default B: a table of N, never of the machine, chosen so that a batch stays in the
// second-level cache: 256 up to N = 2^12, 128 up to 2^14, 64 up to 2^16, 32 up to 2^18, 16 up to
// 2^21, 8 above.
unsigned default_lanes(BlockLength block_length);

// Throws InputError unless lanes is a power of two from 1 to 512.
void require_lanes(std::uint64_t lanes);

struct Batch {
  std::uint64_t first_bit;    // of the key
  std::uint64_t first_block;  // number of the block in lane 0
  unsigned lanes;             // B'
};

class Cut {
 public:
  // Throws InputError on a bad number of lanes.
  Cut(BlockLength block_length, std::uint64_t key_bits, unsigned lanes);

  BlockLength block_length() const { return block_length_; }
  unsigned lanes() const { return lanes_; }
  std::uint64_t key_bits() const { return key_bits_; }
  // floor(key_bits / N).
  std::uint64_t block_count() const { return key_bits_ >> block_length_.log2(); }
  std::uint64_t batch_count() const;
  // REQUIRES: i < batch_count().
  Batch batch(std::uint64_t i) const;
  // Bits that are in no block: the last key_bits mod N.
  std::uint64_t rest_bits() const { return key_bits_ - (block_count() << block_length_.log2()); }

 private:
  BlockLength block_length_;
  std::uint64_t key_bits_;
  unsigned lanes_;
};

}  // namespace frostline
