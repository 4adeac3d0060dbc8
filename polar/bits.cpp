#include "polar/bits.h"

#include <sodium.h>

#include <algorithm>
#include <cstdlib>
#include <cstring>
#include <limits>
#include <new>
#include <stdexcept>

#if __has_include(<sys/mman.h>)
#include <sys/mman.h>
#endif

#include "polar/error.h"

namespace frostline {
namespace internal {

void* allocate_aligned(std::size_t bytes) {
  if (bytes > std::numeric_limits<std::size_t>::max() / 4) throw std::bad_alloc();
  // Decoders walk megabytes in strides; huge pages spare them the misses of the address
  // translation.
  constexpr std::size_t kHugePage = std::size_t{1} << 21;
  const bool huge = bytes >= kHugePage;
  const std::size_t alignment = huge ? kHugePage : 64;
  const std::size_t rounded = (bytes + alignment - 1) / alignment * alignment;
  void* memory = std::aligned_alloc(alignment, rounded == 0 ? 64 : rounded);
  if (memory == nullptr) throw std::bad_alloc();
#ifdef MADV_HUGEPAGE
  // A hint: where the system has none to give, small pages serve.
  if (huge) static_cast<void>(madvise(memory, rounded, MADV_HUGEPAGE));
#endif
  return memory;
}

void wipe_and_free(void* memory, std::size_t bytes) noexcept {
  if (memory == nullptr) return;
  sodium_memzero(memory, bytes);
  std::free(memory);
}

}  // namespace internal

namespace {

constexpr std::uint64_t low_mask(std::size_t bits) {
  return bits >= 64 ? ~std::uint64_t{0} : (std::uint64_t{1} << bits) - 1;
}

// Reverses the bits of every byte of a word: packed bytes are most significant bit first, words
// least significant bit first.
std::uint64_t reverse_bits_of_bytes(std::uint64_t w) {
  w = ((w >> 1) & 0x5555555555555555U) | ((w & 0x5555555555555555U) << 1);
  w = ((w >> 2) & 0x3333333333333333U) | ((w & 0x3333333333333333U) << 2);
  return ((w >> 4) & 0x0F0F0F0F0F0F0F0FU) | ((w & 0x0F0F0F0F0F0F0F0FU) << 4);
}

// Bits first .. first + count - 1 as the low bits of a word. REQUIRES: 1 <= count <= 64.
std::uint64_t read_word(Span<const std::uint64_t> words, std::size_t first, std::size_t count) {
  const std::size_t shift = first % 64;
  std::uint64_t value = words[first / 64] >> shift;
  if (shift + count > 64) value |= words[first / 64 + 1] << (64 - shift);
  return value & low_mask(count);
}

bool is_space(char c) {
  return c == ' ' || c == '\n' || c == '\t' || c == '\r' || c == '\v' || c == '\f';
}

int hex_value(char c) {
  if (c >= '0' && c <= '9') return c - '0';
  if (c >= 'a' && c <= 'f') return c - 'a' + 10;
  if (c >= 'A' && c <= 'F') return c - 'A' + 10;
  return -1;
}

// How a message shows a character that should not be there.
std::string shown(char c) {
  static const char kDigits[] = "0123456789abcdef";
  if (c >= 0x20 && c < 0x7f) return std::string("'") + c + "'";
  const auto byte = static_cast<unsigned char>(c);
  return std::string("byte 0x") + kDigits[byte >> 4] + kDigits[byte & 15];
}

}  // namespace

std::size_t BitString::count() const { return count_ones(words()); }

BitString& BitString::operator^=(const BitString& other) {
  if (size_ != other.size_) throw std::invalid_argument("sum of bit strings of unequal length");
  for (std::size_t i = 0; i < words_.size(); ++i) words_[i] ^= other.words_[i];
  return *this;
}

void BitString::append(const BitString& other) {
  // Read before anything changes: other may be this string itself.
  const std::size_t first = size_;
  const std::size_t added = other.size_;
  words_.resize(words_for(first + added));
  size_ = first + added;
  copy_bits(Span<const std::uint64_t>(other.words_), 0, words(), first, added);
}

void BitString::append(bool bit) {
  ++size_;
  words_.resize(words_for(size_));
  set(size_ - 1, bit);
}

BitString BitString::slice(std::size_t first, std::size_t count) const {
  BitString part(count);
  copy_bits(words(), first, part.words(), 0, count);
  return part;
}

void copy_bits(Span<const std::uint64_t> from, std::size_t from_first, Span<std::uint64_t> to,
               std::size_t to_first, std::size_t count) {
  if (count == 0) return;
  if (from_first % 64 == 0 && to_first % 64 == 0 && count >= 64) {
    std::memcpy(to.data() + to_first / 64, from.data() + from_first / 64, count / 64 * 8);
    const std::size_t done = count / 64 * 64;
    from_first += done;
    to_first += done;
    count -= done;
  }
  while (count > 0) {
    // Up to the next word boundary of the target, so that each target word is written once.
    const std::size_t shift = to_first % 64;
    const std::size_t part = std::min(count, 64 - shift);
    const std::uint64_t value = read_word(from, from_first, part);
    std::uint64_t& word = to[to_first / 64];
    word = (word & ~(low_mask(part) << shift)) | (value << shift);
    from_first += part;
    to_first += part;
    count -= part;
  }
}

void unpack_bits(Span<const std::uint8_t> packed, std::size_t bits, Span<std::uint64_t> words) {
  const std::size_t bytes = bytes_for(bits);
  if (bytes == 0) return;
  words[words_for(bits) - 1] = 0;
  std::memcpy(words.data(), packed.data(), bytes);
  for (std::size_t i = 0; i < words_for(bits); ++i) words[i] = reverse_bits_of_bytes(words[i]);
  if (bits % 64 != 0) words[bits / 64] &= low_mask(bits % 64);
}

void pack_bits(Span<const std::uint64_t> words, std::size_t bits, Span<std::uint8_t> packed) {
  const std::size_t whole = bits / 64;
  for (std::size_t i = 0; i < whole; ++i) {
    const std::uint64_t word = reverse_bits_of_bytes(words[i]);
    std::memcpy(packed.data() + 8 * i, &word, 8);
  }
  if (bits % 64 != 0) {
    const std::uint64_t word = reverse_bits_of_bytes(words[whole] & low_mask(bits % 64));
    std::memcpy(packed.data() + 8 * whole, &word, bytes_for(bits % 64));
  }
}

BitString bits_from_packed(Span<const std::uint8_t> packed, std::size_t bits) {
  if (packed.size() < bytes_for(bits)) throw std::invalid_argument("too few packed bytes");
  BitString result(bits);
  unpack_bits(packed, bits, result.words());
  return result;
}

KeyBytes bits_to_packed(const BitString& bits) {
  KeyBytes packed(bytes_for(bits.size()));
  pack_bits(bits.words(), bits.size(), packed);
  return packed;
}

BitString bits_from_text(std::string_view text, std::string_view name) {
  const auto is_bit = [](char c) { return c == '0' || c == '1'; };
  BitString bits(static_cast<std::size_t>(std::count_if(text.begin(), text.end(), is_bit)));
  std::size_t line = 1;
  std::size_t column = 1;
  std::size_t next = 0;
  for (const char c : text) {
    if (is_bit(c)) {
      if (c == '1') bits.flip(next);
      ++next;
    } else if (!is_space(c)) {
      throw InputError(std::string(name) + ": line " + std::to_string(line) + ", column " +
                       std::to_string(column) + ": " + shown(c) + " is neither 0 nor 1");
    }
    if (c == '\n') {
      ++line;
      column = 1;
    } else {
      ++column;
    }
  }
  return bits;
}

std::string bits_to_text(const BitString& bits) {
  std::string text(bits.size(), '0');
  for (std::size_t i = 0; i < bits.size(); ++i) {
    if (bits[i]) text[i] = '1';
  }
  return text;
}

std::string bits_to_hex(const BitString& bits) {
  static const char kDigits[] = "0123456789abcdef";
  const KeyBytes packed = bits_to_packed(bits);
  std::string hex((bits.size() + 3) / 4, '0');
  for (std::size_t k = 0; k < hex.size(); ++k) {
    const unsigned byte = packed[k / 2];
    hex[k] = kDigits[k % 2 == 0 ? byte >> 4 : byte & 15U];
  }
  return hex;
}

BitString bits_from_hex(std::string_view hex, std::size_t bits, std::string_view name) {
  if (hex.size() != (bits + 3) / 4) {
    throw InputError(std::string(name) + ": " + std::to_string(hex.size()) +
                     " hexadecimal digits where " + std::to_string((bits + 3) / 4) + " are needed");
  }
  BitString result(bits);
  for (std::size_t k = 0; k < hex.size(); ++k) {
    const int value = hex_value(hex[k]);
    if (value < 0) {
      throw InputError(std::string(name) + ": digit " + std::to_string(k + 1) + ": " +
                       shown(hex[k]) + " is no hexadecimal digit");
    }
    for (unsigned b = 0; b < 4; ++b) {
      if (((value >> (3 - b)) & 1) == 0) continue;
      if (4 * k + b >= bits) {
        throw InputError(std::string(name) + ": the last digit has bits beyond the end");
      }
      result.flip(4 * k + b);
    }
  }
  return result;
}

}  // namespace frostline
