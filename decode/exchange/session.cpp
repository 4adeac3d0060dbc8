#include "decode/exchange/session.h"

#include "polar/error.h"
#include "polar/random.h"

namespace frostline {
namespace {

void fill(RandomStream& stream, Span<std::uint8_t> bytes) {
  for (std::uint8_t& byte : bytes) byte = static_cast<std::uint8_t>(stream.below(256));
}

}  // namespace

SessionNumber make_session_number(std::optional<std::uint64_t> test_seed) {
  SessionNumber session;
  if (test_seed) {
    RandomStream stream(*test_seed, "test-only session", 0);
    fill(stream, session);
  } else {
    randombytes_buf(session.data(), session.size());
  }
  return session;
}

HashKey make_hash_key(std::optional<std::uint64_t> test_seed, std::uint64_t group) {
  if (!test_seed) return fresh_hash_key();
  HashKey key;
  RandomStream stream(*test_seed, "test-only hash key", group);
  fill(stream, key);
  return key;
}

void require_a_block(const KeySource& key, BlockLength block_length) {
  if (key.bits() >= block_length.bits()) return;
  throw InputError("key '" + key.name() + "' holds " + std::to_string(key.bits()) +
                   " bits, less than one block of " + std::to_string(block_length.bits()));
}

void require_same_length(const KeySource& key, const MessageHeader& header,
                         const std::string& message_name) {
  if (key.bits() == header.key_bits) return;
  throw InputError("key '" + key.name() + "' holds " + std::to_string(key.bits()) +
                   " bits, but message '" + message_name + "' was made of a key of " +
                   std::to_string(header.key_bits));
}

}  // namespace frostline
