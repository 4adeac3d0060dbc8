// Receipt and verdict: the two short public messages after the decoding (JSON, designs/FORMATS.md).
//
// The receipt tells the sender which blocks the receiver accepted, and proves them group by group
// with tags. The verdict tells the receiver which groups' tags agree. Neither holds a bit of a key,
// nor a digest of one.
#pragma once

#include <cstdint>
#include <string>
#include <string_view>
#include <vector>

#include "decode/exchange/message.h"
#include "polar/bits.h"
#include "polar/digest.h"
#include "polar/tag.h"

namespace frostline {

// Blocks first_block .. first_block + block_count - 1, and the tag of the accepted ones among them
// in ascending order, each contiguous, its bit 0 first, packed.
struct Group {
  std::uint64_t first_block = 0;
  std::uint64_t block_count = 0;
  std::uint64_t accepted = 0;
  HashKey hash_key{};
  Tag tag{};
};

struct Receipt {
  SessionNumber session{};
  bool test_only = false;
  Sha256 message{};
  Sha256 code{};
  std::uint32_t block_length = 0;
  std::uint64_t frozen_count = 0;  // M and c of the design, so that the ledger can be closed
  std::uint32_t check_bits = 0;    // without it
  BitString accepted;              // one bit a block
  std::vector<Group> groups;       // ascending; only groups with an accepted block
};

std::string receipt_to_json(const Receipt& receipt);
// Throws InputError "NAME: ..." when the text is no receipt or contradicts itself: counts that do
// not fit, groups that overlap, an accepted block in no group, a hash key under which all tags are
// alike.
Receipt receipt_from_json(std::string_view text, std::string_view name);

struct Verdict {
  SessionNumber session{};
  bool test_only = false;
  Sha256 receipt{};      // of the receipt's file
  BitString group_kept;  // one bit a group of the receipt
};

std::string verdict_to_json(const Verdict& verdict);
Verdict verdict_from_json(std::string_view text, std::string_view name);

}  // namespace frostline
