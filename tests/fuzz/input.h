// Bytes of a fuzzer, taken as numbers one after the other; zeros when they are used up.
#pragma once

#include <cstddef>
#include <cstdint>

namespace frostline::fuzz {

class Input {
 public:
  Input(const std::uint8_t* data, std::size_t size) : data_(data), size_(size) {}

  std::uint8_t byte() {
    if (size_ == 0) return 0;
    --size_;
    return *data_++;
  }
  // 0 .. bound-1.
  unsigned below(unsigned bound) { return (byte() | unsigned{byte()} << 8) % bound; }
  std::uint64_t word() {
    std::uint64_t value = 0;
    for (unsigned i = 0; i < 8; ++i) value |= std::uint64_t{byte()} << (8 * i);
    return value;
  }
  std::size_t left() const { return size_; }
  const std::uint8_t* rest() const { return data_; }

 private:
  const std::uint8_t* data_;
  std::size_t size_;
};

}  // namespace frostline::fuzz
