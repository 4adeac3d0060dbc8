// Tags: a universal hash over a group of accepted blocks, which proves that the two ends are equal.
//
// Poly1305 (D. J. Bernstein, FSE 2005) by libsodium, with a fresh one-time hash key for each group.
// The chance that two different strings of the same length have the same tag is at most
// 8 ceil(bytes / 16) / 2^106 (theorem 3.3 there).
#pragma once

#include <sodium.h>

#include <array>
#include <cstdint>

#include "polar/span.h"

namespace frostline {

constexpr unsigned kTagBits = 128;
using HashKey = std::array<std::uint8_t, crypto_onetimeauth_KEYBYTES>;
using Tag = std::array<std::uint8_t, crypto_onetimeauth_BYTES>;

// A hash key from the operating system's generator.
HashKey fresh_hash_key();

// Hashes a group piece by piece.
class TagHasher {
 public:
  explicit TagHasher(const HashKey& key);
  ~TagHasher();
  TagHasher(const TagHasher&) = delete;
  TagHasher& operator=(const TagHasher&) = delete;
  void update(Span<const std::uint8_t> bytes);
  // REQUIRES: called once, last.
  Tag finish();

 private:
  crypto_onetimeauth_state state_;
};

// Compares without a data-dependent time.
bool tags_equal(const Tag& a, const Tag& b);
// 8 ceil(bytes / 16) / 2^106.
double tag_collision_bound(std::uint64_t bytes);

}  // namespace frostline
