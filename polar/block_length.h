// The block length N = 2^n, n from 3 to 24: a power of two by construction.
#pragma once

#include <cstddef>
#include <cstdint>

namespace frostline {

class BlockLength {
 public:
  static constexpr unsigned kMinLog2 = 3;
  static constexpr unsigned kMaxLog2 = 24;

  // Throws InputError when bits is not a power of two from 2^3 to 2^24.
  explicit BlockLength(std::uint64_t bits);
  // Throws InputError when log2 is not from 3 to 24.
  static BlockLength from_log2(unsigned log2);

  // n.
  unsigned log2() const { return log2_; }
  // N.
  std::size_t bits() const { return std::size_t{1} << log2_; }
  // N / 8: the number of bytes of u that precoding walks over.
  std::size_t bytes() const { return bits() / 8; }

  friend bool operator==(BlockLength a, BlockLength b) { return a.log2_ == b.log2_; }
  friend bool operator!=(BlockLength a, BlockLength b) { return !(a == b); }

 private:
  unsigned log2_;
};

}  // namespace frostline
