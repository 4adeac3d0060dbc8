#include "polar/digest.h"

#include <boost/crc.hpp>

#include "polar/crc_folding.h"

namespace frostline {

Sha256 sha256(Span<const std::uint8_t> bytes) {
  Sha256 digest;
  crypto_hash_sha256(digest.data(), bytes.data(), bytes.size());
  return digest;
}

Sha256 sha256(std::string_view text) { return sha256(bytes_of(text)); }

Sha256Hasher::Sha256Hasher() { crypto_hash_sha256_init(&state_); }

void Sha256Hasher::update(Span<const std::uint8_t> bytes) {
  crypto_hash_sha256_update(&state_, bytes.data(), bytes.size());
}

Sha256 Sha256Hasher::finish() {
  Sha256 digest;
  crypto_hash_sha256_final(&state_, digest.data());
  return digest;
}

namespace {

constexpr std::uint32_t kCastagnoli = 0x1EDC6F41;

// A reflected register goes in and comes out, without the final complement.
std::uint32_t advance_castagnoli(std::uint32_t state, const std::uint8_t* bytes,
                                 std::size_t count) {
  // Boost takes the remainder unreflected.
  std::uint32_t unreflected = 0;
  for (unsigned b = 0; b < 32; ++b) unreflected |= ((state >> b) & 1U) << (31 - b);
  boost::crc_optimal<32, kCastagnoli, 0, 0, true, true> crc(0);
  crc.reset(unreflected);
  crc.process_bytes(bytes, count);
  return crc.checksum();
}

}  // namespace

void Crc32c::update(Span<const std::uint8_t> bytes) {
  static constexpr CrcFolding kFolding = make_crc_folding(kCastagnoli, 32);
  std::uint8_t folded[16];
  // The register is added to the first four bytes, as the table would do.
  const std::size_t done = fold_crc(kFolding, bytes.data(), bytes.size(), register_, folded);
  if (done > 0) register_ = advance_castagnoli(0, folded, sizeof folded);
  register_ = advance_castagnoli(register_, bytes.data() + done, bytes.size() - done);
}

std::uint32_t crc32c(Span<const std::uint8_t> bytes) {
  Crc32c crc;
  crc.update(bytes);
  return crc.value();
}

std::string to_hex(Span<const std::uint8_t> bytes) {
  static const char kDigits[] = "0123456789abcdef";
  std::string hex;
  hex.reserve(2 * bytes.size());
  for (const std::uint8_t byte : bytes) {
    hex += kDigits[byte >> 4];
    hex += kDigits[byte & 15U];
  }
  return hex;
}

bool from_hex(std::string_view hex, Span<std::uint8_t> bytes) {
  const auto value = [](char c) {
    if (c >= '0' && c <= '9') return c - '0';
    if (c >= 'a' && c <= 'f') return c - 'a' + 10;
    return -1;
  };
  if (hex.size() != 2 * bytes.size()) return false;
  for (std::size_t i = 0; i < bytes.size(); ++i) {
    const int high = value(hex[2 * i]);
    const int low = value(hex[2 * i + 1]);
    if (high < 0 || low < 0) return false;
    bytes[i] = static_cast<std::uint8_t>(16 * high + low);
  }
  return true;
}

}  // namespace frostline
