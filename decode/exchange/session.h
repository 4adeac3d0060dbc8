// Numbers that belong to one session, and the checks that tie key, message and session together.
#pragma once

#include <cstdint>
#include <optional>
#include <string>

#include "decode/exchange/key_files.h"
#include "decode/exchange/message.h"
#include "polar/tag.h"

namespace frostline {

// From the operating system's generator; from the seed for tests only.
SessionNumber make_session_number(std::optional<std::uint64_t> test_seed);
HashKey make_hash_key(std::optional<std::uint64_t> test_seed, std::uint64_t group);

// Throws InputError "key 'a.bin' holds 1000 bits, less than one block of 4096".
void require_a_block(const KeySource& key, BlockLength block_length);
// Throws InputError when the key is not as long as the one that the message was made of.
void require_same_length(const KeySource& key, const MessageHeader& header,
                         const std::string& message_name);

}  // namespace frostline
