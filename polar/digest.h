// SHA-256 (libsodium) and CRC-32C (RFC 3720) of files and messages, and hexadecimal of bytes.
#pragma once

#include <sodium.h>

#include <array>
#include <cstdint>
#include <string>
#include <string_view>

#include "polar/span.h"

namespace frostline {

using Sha256 = std::array<std::uint8_t, crypto_hash_sha256_BYTES>;

Sha256 sha256(Span<const std::uint8_t> bytes);
Sha256 sha256(std::string_view text);

// Digests a stream piece by piece.
class Sha256Hasher {
 public:
  Sha256Hasher();
  void update(Span<const std::uint8_t> bytes);
  Sha256 finish();

 private:
  crypto_hash_sha256_state state_;
};

// CRC-32C of a stream piece by piece; the check value over "123456789" is E3069283.
class Crc32c {
 public:
  void update(Span<const std::uint8_t> bytes);
  std::uint32_t value() const { return ~register_; }

 private:
  std::uint32_t register_ = 0xFFFFFFFFU;
};
std::uint32_t crc32c(Span<const std::uint8_t> bytes);

// Lower-case hexadecimal of bytes, two digits a byte.
std::string to_hex(Span<const std::uint8_t> bytes);
// Fills bytes from exactly 2 bytes.size() digits; false when the text is anything else.
bool from_hex(std::string_view hex, Span<std::uint8_t> bytes);

// The bytes of a text, as they are.
inline Span<const std::uint8_t> bytes_of(std::string_view text) {
  return {reinterpret_cast<const std::uint8_t*>(text.data()), text.size()};
}

}  // namespace frostline
