// Strings of bits in memory, and their two forms outside: packed bytes and text.
//
// In memory bit i is bit i % 64 of word i / 64; bits of the last word beyond the size are zero. In
// packed bytes bit i is bit 7 - i % 8 of byte i / 8 (most significant first). In text a bit is '0'
// or '1'. Strings of this program are mostly key material, so the memory of every BitString is
// wiped before it is released.
#pragma once

#include <cstddef>
#include <cstdint>
#include <string>
#include <string_view>
#include <vector>

#include "polar/span.h"

namespace frostline {

namespace internal {
void* allocate_aligned(std::size_t bytes);  // 64-byte aligned, throws std::bad_alloc
void wipe_and_free(void* memory, std::size_t bytes) noexcept;
}  // namespace internal

// Allocates on cache lines and wipes memory (libsodium's sodium_memzero) before releasing it.
template <typename T>
struct WipingAllocator {
  using value_type = T;
  WipingAllocator() = default;
  template <typename U>
  WipingAllocator(const WipingAllocator<U>&) {}  // NOLINT: allocators convert
  T* allocate(std::size_t count) {
    return static_cast<T*>(internal::allocate_aligned(count * sizeof(T)));
  }
  void deallocate(T* memory, std::size_t count) noexcept {
    internal::wipe_and_free(memory, count * sizeof(T));
  }
  friend bool operator==(const WipingAllocator&, const WipingAllocator&) { return true; }
  friend bool operator!=(const WipingAllocator&, const WipingAllocator&) { return false; }
};

// Words and bytes that may hold key material.
using KeyWords = std::vector<std::uint64_t, WipingAllocator<std::uint64_t>>;
using KeyBytes = std::vector<std::uint8_t, WipingAllocator<std::uint8_t>>;

// Number of 64-bit words, and of packed bytes, that hold the given number of bits.
constexpr std::size_t words_for(std::size_t bits) { return (bits + 63) / 64; }
constexpr std::size_t bytes_for(std::size_t bits) { return (bits + 7) / 8; }

class BitString {
 public:
  BitString() = default;
  // All zeros.
  explicit BitString(std::size_t bits) : size_(bits), words_(words_for(bits)) {}

  std::size_t size() const { return size_; }
  bool empty() const { return size_ == 0; }
  Span<const std::uint64_t> words() const { return {words_.data(), words_.size()}; }
  // Whoever writes words keeps the bits beyond size() zero.
  Span<std::uint64_t> words() { return {words_.data(), words_.size()}; }

  // REQUIRES: i < size().
  bool operator[](std::size_t i) const { return (words_[i / 64] >> (i % 64)) & 1U; }
  void set(std::size_t i, bool value) {
    const std::uint64_t bit = std::uint64_t{1} << (i % 64);
    words_[i / 64] = value ? words_[i / 64] | bit : words_[i / 64] & ~bit;
  }
  void flip(std::size_t i) { words_[i / 64] ^= std::uint64_t{1} << (i % 64); }

  // Number of ones.
  std::size_t count() const;
  // REQUIRES: equal sizes (std::invalid_argument otherwise).
  BitString& operator^=(const BitString& other);
  // Appends at the end.
  void append(const BitString& other);
  void append(bool bit);
  // Bits first .. first + count - 1. REQUIRES: first + count <= size().
  BitString slice(std::size_t first, std::size_t count) const;

  friend bool operator==(const BitString& a, const BitString& b) {
    return a.size_ == b.size_ && a.words_ == b.words_;
  }
  friend bool operator!=(const BitString& a, const BitString& b) { return !(a == b); }

 private:
  std::size_t size_ = 0;
  KeyWords words_;
};

// Copies count bits from bit from_first of from to bit to_first of to; other bits of to stay.
// REQUIRES: both ranges lie inside their views and do not overlap in memory.
void copy_bits(Span<const std::uint64_t> from, std::size_t from_first, Span<std::uint64_t> to,
               std::size_t to_first, std::size_t count);

// Number of ones in all words.
std::size_t count_ones(Span<const std::uint64_t> words);

// Packed bytes, most significant bit first. unpack: REQUIRES packed.size() >= bytes_for(bits) and
// words.size() >= words_for(bits); bits beyond the last are zeroed. pack: pad bits are zero.
void unpack_bits(Span<const std::uint8_t> packed, std::size_t bits, Span<std::uint64_t> words);
void pack_bits(Span<const std::uint64_t> words, std::size_t bits, Span<std::uint8_t> packed);
BitString bits_from_packed(Span<const std::uint8_t> packed, std::size_t bits);
KeyBytes bits_to_packed(const BitString& bits);

// Text: '0', '1', white space skipped. Throws InputError "NAME: line L, column C: ..." on anything
// else; name is what the message calls the text.
BitString bits_from_text(std::string_view text, std::string_view name);
// One line of '0' and '1', without a line feed.
std::string bits_to_text(const BitString& bits);

// Hexadecimal: digit k covers bits 4k..4k+3, bit 4k its most significant bit; lower case. A size
// that is no multiple of 4 is padded with zeros. Throws InputError on a digit that is none or a
// wrong number of digits.
std::string bits_to_hex(const BitString& bits);
BitString bits_from_hex(std::string_view hex, std::size_t bits, std::string_view name);

}  // namespace frostline
