// Reproducible random streams for trials, samples and vectors, and nothing else.
//
// Stream s of a seed and a purpose is the ChaCha20 key stream (libsodium) with the key
// SHA-256("frostline stream " purpose, 0, seed as 8 bytes little-endian) and s as nonce. One stream
// a block, so that no result depends on how blocks are spread over threads. Hash keys and session
// numbers never come from here: they come from the operating system's generator.
#pragma once

#include <array>
#include <cstdint>
#include <string_view>

#include "polar/span.h"

namespace frostline {

class RandomStream {
 public:
  RandomStream(std::uint64_t seed, std::string_view purpose, std::uint64_t stream);

  // 64 fresh bits: 8 bytes of the key stream, little-endian.
  std::uint64_t next() {
    if (used_ == buffer_.size()) refill();
    return buffer_[used_++];
  }
  // Uniform in 0 .. bound-1, without bias. REQUIRES: bound > 0.
  std::uint64_t below(std::uint64_t bound);
  // Uniform in [0, 1), a multiple of 2^-53.
  double uniform();
  // Sets each of the first bits of words to 1 with probability p, and the rest of the last word to
  // 0. From 1/8 on exact to 2^-64; below, where gaps between ones are drawn, to 2^-50 a bit. No
  // floating-point function is involved: the same bits on every machine.
  // REQUIRES: 0 <= p <= 1.
  void bernoulli(double p, std::size_t bits, Span<std::uint64_t> words);

 private:
  void refill();
  void draw_gaps(double p, std::size_t bits, Span<std::uint64_t> words);
  void draw_bits(double p, std::size_t bits, Span<std::uint64_t> words);

  std::array<std::uint8_t, 32> key_;
  std::array<std::uint8_t, 8> nonce_;
  std::uint64_t block_ = 0;  // ChaCha20 block counter of the next refill
  std::array<std::uint64_t, 128> buffer_;
  std::size_t used_ = 128;
};

}  // namespace frostline
