// Takes an input of the fuzzer apart into the values that a test case is made of.
#pragma once

#include <cstddef>
#include <cstdint>
#include <cstdio>
#include <cstdlib>

#include "polar/bits.h"

namespace frostline::fuzz {

class FuzzInput {
 public:
  FuzzInput(const std::uint8_t* data, std::size_t size) : data_(data), left_(size) {}

  // 0 once the input is used up.
  std::uint8_t byte() {
    if (left_ == 0) return 0;
    --left_;
    return *data_++;
  }
  // From 0 to count - 1. REQUIRES: 1 <= count <= 256.
  unsigned below(unsigned count) { return byte() % count; }
  std::uint64_t word() {
    std::uint64_t word = 0;
    for (unsigned k = 0; k < 8; ++k) word |= std::uint64_t{byte()} << (8 * k);
    return word;
  }
  BitString bits(std::size_t count) {
    BitString bits(count);
    for (std::size_t first = 0; first < count; first += 8) {
      const std::uint8_t eight = byte();
      for (std::size_t i = first; i < count && i < first + 8; ++i) {
        bits.set(i, (eight >> (i - first)) & 1U);
      }
    }
    return bits;
  }

  // What has not been taken yet.
  std::size_t left() const { return left_; }
  const std::uint8_t* rest() const { return data_; }

 private:
  const std::uint8_t* data_;
  std::size_t left_;
};

// Ends the run with a message: the fuzzer keeps the input.
inline void require(bool holds, const char* what) {
  if (holds) return;
  std::fprintf(stderr, "broken promise: %s\n", what);
  std::abort();
}

}  // namespace frostline::fuzz
