#include "decode/exchange/receipt.h"

#include "polar/check_bits.h"
#include "polar/design_json.h"
#include "polar/error.h"

namespace frostline {
namespace {

constexpr std::uint64_t kVersion = 1;

// Parses the object and checks what all public JSON messages share.
Json parse_message(std::string_view text, const std::string& name, const std::string& format) {
  Json root = parse_json(text, name);
  if (!root.is_object() || !root.contains("format") || root.at("format") != format) {
    throw InputError(name + ": not a " + format + " file");
  }
  if (!root.contains("version") || root.at("version") != kVersion) {
    throw InputError(name + ": another version of " + format + "; this program reads version " +
                     std::to_string(kVersion));
  }
  return root;
}

template <typename Bytes>
Bytes get_bytes(const Json& object, const char* key, const std::string& where) {
  Bytes bytes;
  if (!from_hex(get_string(object, key, where), Span<std::uint8_t>(bytes))) {
    throw InputError(where + ": '" + key + "' is not " + std::to_string(bytes.size()) +
                     " bytes in hexadecimal");
  }
  return bytes;
}

bool get_bool(const Json& object, const char* key, const std::string& where) {
  if (!object.at(key).is_boolean())
    throw InputError(where + ": '" + key + "' is not true or false");
  return object.at(key).get<bool>();
}

// Under a hash key whose r is zero after clamping (RFC 8439, 2.5.1) every string has the same tag:
// one that comes up with probability 2^-106, or from somebody who does not know the key bits.
bool hashes_nothing(const HashKey& key) {
  static const std::uint8_t kClamp[16] = {255, 255, 255, 15, 252, 255, 255, 15,
                                          252, 255, 255, 15, 252, 255, 255, 15};
  for (std::size_t i = 0; i < 16; ++i) {
    if ((key[i] & kClamp[i]) != 0) return false;
  }
  return true;
}

Json group_to_json(const Group& group) {
  Json object;
  object["first_block"] = group.first_block;
  object["blocks"] = group.block_count;
  object["accepted"] = group.accepted;
  object["hash_key"] = to_hex(group.hash_key);
  object["tag"] = to_hex(group.tag);
  return object;
}

Group group_from_json(const Json& object, const std::string& where) {
  require_keys(object, {"first_block", "blocks", "accepted", "hash_key", "tag"}, {}, where);
  Group group;
  group.first_block = get_unsigned(object, "first_block", where);
  group.block_count = get_unsigned(object, "blocks", where);
  group.accepted = get_unsigned(object, "accepted", where);
  group.hash_key = get_bytes<HashKey>(object, "hash_key", where);
  if (hashes_nothing(group.hash_key)) throw InputError(where + ": its hash key hashes nothing");
  group.tag = get_bytes<Tag>(object, "tag", where);
  return group;
}

void require_consistent_groups(const Receipt& receipt, const std::string& name) {
  std::uint64_t next_block = 0;
  std::uint64_t covered = 0;
  for (std::size_t g = 0; g < receipt.groups.size(); ++g) {
    const Group& group = receipt.groups[g];
    const std::string where = name + ": group " + std::to_string(g);
    const std::uint64_t blocks = receipt.accepted.size();
    if (group.first_block < next_block || group.first_block > blocks || group.block_count == 0 ||
        group.block_count > blocks - group.first_block) {
      throw InputError(where + ": its blocks overlap another group's or do not exist");
    }
    next_block = group.first_block + group.block_count;
    const std::size_t accepted =
        receipt.accepted.slice(group.first_block, group.block_count).count();
    if (accepted == 0) throw InputError(where + ": none of its blocks is accepted");
    if (accepted != group.accepted) {
      throw InputError(where + ": " + std::to_string(group.accepted) +
                       " accepted blocks, but the accept bits tell " + std::to_string(accepted));
    }
    covered += accepted;
  }
  if (covered != receipt.accepted.count()) {
    throw InputError(name + ": an accepted block is in no group");
  }
}

}  // namespace

std::string receipt_to_json(const Receipt& receipt) {
  Json root;
  root["format"] = "frostline-receipt";
  root["version"] = kVersion;
  root["test_only"] = receipt.test_only;
  root["session"] = to_hex(receipt.session);
  root["message_sha256"] = to_hex(receipt.message);
  root["code_sha256"] = to_hex(receipt.code);
  root["block_length"] = receipt.block_length;
  root["frozen_count"] = receipt.frozen_count;
  root["check_bits"] = receipt.check_bits;
  root["blocks"] = receipt.accepted.size();
  root["accepted"] = receipt.accepted.count();
  root["accept_hex"] = receipt.accepted.empty() ? "" : bits_to_hex(receipt.accepted);
  root["groups"] = Json::array();
  for (const Group& group : receipt.groups) root["groups"].push_back(group_to_json(group));
  return root.dump(2) + "\n";
}

Receipt receipt_from_json(std::string_view text, std::string_view name_view) {
  const std::string name(name_view);
  const Json root = parse_message(text, name, "frostline-receipt");
  require_keys(
      root,
      {"format", "version", "test_only", "session", "message_sha256", "code_sha256", "block_length",
       "frozen_count", "check_bits", "blocks", "accepted", "accept_hex", "groups"},
      {}, name);
  Receipt receipt;
  receipt.test_only = get_bool(root, "test_only", name);
  receipt.session = get_bytes<SessionNumber>(root, "session", name);
  receipt.message = get_bytes<Sha256>(root, "message_sha256", name);
  receipt.code = get_bytes<Sha256>(root, "code_sha256", name);
  const std::uint64_t length = get_unsigned(root, "block_length", name);
  receipt.block_length = static_cast<std::uint32_t>(BlockLength(length).bits());
  receipt.frozen_count = get_unsigned(root, "frozen_count", name);
  const std::uint64_t width = get_unsigned(root, "check_bits", name);
  if (receipt.frozen_count > length || width > 32 ||
      !is_check_width(static_cast<unsigned>(width))) {
    throw InputError(name + ": frozen_count or check_bits that no design has");
  }
  receipt.check_bits = static_cast<std::uint32_t>(width);
  const std::string hex = get_string(root, "accept_hex", name);
  const std::uint64_t blocks = get_unsigned(root, "blocks", name);
  if (blocks / 4 > hex.size()) throw InputError(name + ": too few accept bits");
  receipt.accepted = bits_from_hex(hex, blocks, name + ": accept_hex");
  if (receipt.accepted.count() != get_unsigned(root, "accepted", name)) {
    throw InputError(name + ": 'accepted' does not fit the accept bits");
  }
  const Json& groups = root.at("groups");
  if (!groups.is_array()) throw InputError(name + ": 'groups' is not an array");
  for (std::size_t g = 0; g < groups.size(); ++g) {
    receipt.groups.push_back(group_from_json(groups[g], name + ": group " + std::to_string(g)));
  }
  require_consistent_groups(receipt, name);
  return receipt;
}

std::string verdict_to_json(const Verdict& verdict) {
  Json root;
  root["format"] = "frostline-verdict";
  root["version"] = kVersion;
  root["test_only"] = verdict.test_only;
  root["session"] = to_hex(verdict.session);
  root["receipt_sha256"] = to_hex(verdict.receipt);
  root["groups"] = verdict.group_kept.size();
  root["kept_bits"] = bits_to_text(verdict.group_kept);
  return root.dump(2) + "\n";
}

Verdict verdict_from_json(std::string_view text, std::string_view name_view) {
  const std::string name(name_view);
  const Json root = parse_message(text, name, "frostline-verdict");
  require_keys(
      root, {"format", "version", "test_only", "session", "receipt_sha256", "groups", "kept_bits"},
      {}, name);
  Verdict verdict;
  verdict.test_only = get_bool(root, "test_only", name);
  verdict.session = get_bytes<SessionNumber>(root, "session", name);
  verdict.receipt = get_bytes<Sha256>(root, "receipt_sha256", name);
  verdict.group_kept = bits_from_text(get_string(root, "kept_bits", name), name + ": kept_bits");
  if (verdict.group_kept.size() != get_unsigned(root, "groups", name)) {
    throw InputError(name + ": 'groups' does not fit the number of kept bits");
  }
  return verdict;
}

}  // namespace frostline
