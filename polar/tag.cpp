#include "polar/tag.h"

#include <cmath>

namespace frostline {

HashKey fresh_hash_key() {
  HashKey key;
  crypto_onetimeauth_keygen(key.data());
  return key;
}

TagHasher::TagHasher(const HashKey& key) { crypto_onetimeauth_init(&state_, key.data()); }

TagHasher::~TagHasher() { sodium_memzero(&state_, sizeof state_); }

void TagHasher::update(Span<const std::uint8_t> bytes) {
  crypto_onetimeauth_update(&state_, bytes.data(), bytes.size());
}

Tag TagHasher::finish() {
  Tag tag;
  crypto_onetimeauth_final(&state_, tag.data());
  return tag;
}

bool tags_equal(const Tag& a, const Tag& b) {
  return sodium_memcmp(a.data(), b.data(), a.size()) == 0;
}

double tag_collision_bound(std::uint64_t bytes) {
  return std::ldexp(8.0 * static_cast<double>((bytes + 15) / 16), -106);
}

}  // namespace frostline
