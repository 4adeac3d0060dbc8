// Receipt and verdict: read back as written, and nothing that contradicts itself accepted.
#include "decode/exchange/receipt.h"

#include <gtest/gtest.h>

#include <functional>

#include "polar/design_json.h"
#include "polar/error.h"

namespace frostline {
namespace {

std::string error_of(const std::function<void()>& act) {
  try {
    act();
  } catch (const InputError& error) {
    return error.what();
  }
  return "no error";
}

template <typename Bytes>
Bytes counted_up(std::uint8_t first) {
  Bytes bytes;
  for (std::uint8_t& byte : bytes) byte = first++;
  return bytes;
}

// 10 blocks: 0-3 in a group, 3 of them accepted; 4-7 failed; 8 and 9 in a group.
Receipt example() {
  Receipt receipt;
  receipt.session = counted_up<SessionNumber>(1);
  receipt.message = counted_up<Sha256>(50);
  receipt.code = counted_up<Sha256>(100);
  receipt.block_length = 1024;
  receipt.accepted = bits_from_text("1011000011", "example");
  receipt.groups.push_back({0, 4, 3, counted_up<HashKey>(3), counted_up<Tag>(77)});
  receipt.groups.push_back({8, 2, 2, counted_up<HashKey>(9), counted_up<Tag>(200)});
  return receipt;
}

void expect_equal(const Receipt& a, const Receipt& b) {
  EXPECT_EQ(a.session, b.session);
  EXPECT_EQ(a.test_only, b.test_only);
  EXPECT_EQ(a.message, b.message);
  EXPECT_EQ(a.code, b.code);
  EXPECT_EQ(a.block_length, b.block_length);
  EXPECT_EQ(a.accepted, b.accepted);
  ASSERT_EQ(a.groups.size(), b.groups.size());
  for (std::size_t g = 0; g < a.groups.size(); ++g) {
    EXPECT_EQ(a.groups[g].first_block, b.groups[g].first_block);
    EXPECT_EQ(a.groups[g].block_count, b.groups[g].block_count);
    EXPECT_EQ(a.groups[g].accepted, b.groups[g].accepted);
    EXPECT_EQ(a.groups[g].hash_key, b.groups[g].hash_key);
    EXPECT_EQ(a.groups[g].tag, b.groups[g].tag);
  }
}

TEST(Receipt, IsReadBackAsItWasWritten) {
  Receipt receipt = example();
  expect_equal(receipt_from_json(receipt_to_json(receipt), "r"), receipt);
  receipt.test_only = true;
  expect_equal(receipt_from_json(receipt_to_json(receipt), "r"), receipt);
}

TEST(Receipt, OfNoAcceptedBlockHasNoGroup) {
  Receipt receipt = example();
  receipt.accepted = BitString(10);
  receipt.groups.clear();
  expect_equal(receipt_from_json(receipt_to_json(receipt), "r"), receipt);
}

TEST(Receipt, HoldsTheKeysOfTheFormatInItsOrder) {
  const Json root = Json::parse(receipt_to_json(example()));
  std::vector<std::string> keys;
  for (const auto& [key, value] : root.items()) keys.push_back(key);
  EXPECT_EQ(keys,
            (std::vector<std::string>{"format", "version", "test_only", "session", "message_sha256",
                                      "code_sha256", "block_length", "frozen_count", "check_bits",
                                      "blocks", "accepted", "accept_hex", "groups"}));
  EXPECT_EQ(root.at("session"), "0102030405060708090a0b0c0d0e0f10");
  // Blocks 0, 2, 3 and 8, 9: 1011 0000 11(00).
  EXPECT_EQ(root.at("accept_hex"), "b0c");
}

TEST(Receipt, ThatContradictsItselfIsRefused) {
  const auto spoiled = [](const std::function<void(Json&)>& spoil) {
    Json root = Json::parse(receipt_to_json(example()));
    spoil(root);
    return error_of([&] { receipt_from_json(root.dump(), "r"); });
  };
  EXPECT_EQ(spoiled([](Json&) {}), "no error");
  EXPECT_EQ(spoiled([](Json& r) { r["accepted"] = 6; }),
            "r: 'accepted' does not fit the accept bits");
  EXPECT_EQ(spoiled([](Json& r) { r["accept_hex"] = "b08"; }),
            "r: 'accepted' does not fit the accept bits");
  EXPECT_EQ(spoiled([](Json& r) { r["accept_hex"] = "d0c"; }), "no error");
  EXPECT_EQ(spoiled([](Json& r) { r["accept_hex"] = "b4c", r["accepted"] = 6; }),
            "r: an accepted block is in no group");
  EXPECT_EQ(spoiled([](Json& r) { r["accept_hex"] = "b0d"; }),
            "r: accept_hex: the last digit has bits beyond the end");
  EXPECT_EQ(spoiled([](Json& r) { r["blocks"] = 1000000; }), "r: too few accept bits");
  EXPECT_EQ(spoiled([](Json& r) { r["blocks"] = ~std::uint64_t{0}; }), "r: too few accept bits");
  EXPECT_EQ(spoiled([](Json& r) { r["blocks"] = -10; }),
            "r: 'blocks' is not a whole number from 0 up");
  EXPECT_EQ(spoiled([](Json& r) { r["groups"] = 3; }), "r: 'groups' is not an array");
  EXPECT_EQ(spoiled([](Json& r) { r["groups"][0] = 3; }), "r: group 0: not a JSON object");
  EXPECT_EQ(spoiled([](Json& r) { r["groups"][1]["accepted"] = 1; }),
            "r: group 1: 1 accepted blocks, but the accept bits tell 2");
  const std::string overlap = "its blocks overlap another group's or do not exist";
  EXPECT_EQ(spoiled([](Json& r) { r["groups"][1]["first_block"] = 3; }), "r: group 1: " + overlap);
  EXPECT_EQ(spoiled([](Json& r) { r["groups"][1]["blocks"] = 3; }), "r: group 1: " + overlap);
  EXPECT_EQ(spoiled([](Json& r) { r["groups"][1]["blocks"] = ~std::uint64_t{0} - 6; }),
            "r: group 1: " + overlap);
  EXPECT_EQ(spoiled([](Json& r) { r["groups"][0]["blocks"] = 0; }), "r: group 0: " + overlap);
  EXPECT_EQ(spoiled([](Json& r) { std::swap(r["groups"][0], r["groups"][1]); }),
            "r: group 1: " + overlap);
  EXPECT_EQ(spoiled([](Json& r) {
              r["groups"][1]["first_block"] = 5, r["groups"][1]["blocks"] = 3,
              r["groups"][1]["accepted"] = 0;
            }),
            "r: group 1: none of its blocks is accepted");
  EXPECT_EQ(spoiled([](Json& r) { r["groups"][0]["tag"] = "00"; }),
            "r: group 0: 'tag' is not 16 bytes in hexadecimal");
  EXPECT_EQ(spoiled([](Json& r) { r["groups"][0]["hash_key"] = std::string(64, 'g'); }),
            "r: group 0: 'hash_key' is not 32 bytes in hexadecimal");
  // Poly1305 with r = 0 gives every string the same tag, whatever s is; so do the bits that
  // clamping takes away (RFC 8439, 2.5.1).
  for (const std::string r0 :
       {"00000000000000000000000000000000", "000000f0030000f0030000f0030000f0"}) {
    EXPECT_EQ(spoiled([&](Json& r) { r["groups"][0]["hash_key"] = r0 + std::string(32, '7'); }),
              "r: group 0: its hash key hashes nothing");
  }
  EXPECT_EQ(spoiled([](Json& r) {
              r["groups"][0]["hash_key"] =
                  "00000000000000000400000000000000" + std::string(32, '7');
            }),
            "no error");
  EXPECT_EQ(spoiled([](Json& r) { r["groups"][0].erase("tag"); }),
            "r: group 0: key 'tag' is missing");
  EXPECT_EQ(spoiled([](Json& r) { r["groups"][0]["note"] = 1; }), "r: group 0: unknown key 'note'");
  EXPECT_EQ(spoiled([](Json& r) { r["session"] = 5; }), "r: 'session' is not a text");
  EXPECT_EQ(spoiled([](Json& r) { r["session"] = "0102"; }),
            "r: 'session' is not 16 bytes in hexadecimal");
  EXPECT_EQ(spoiled([](Json& r) { r["test_only"] = "no"; }), "r: 'test_only' is not true or false");
  EXPECT_EQ(spoiled([](Json& r) { r["version"] = 2; }),
            "r: another version of frostline-receipt; this program reads version 1");
  EXPECT_EQ(spoiled([](Json& r) { r["format"] = "frostline-verdict"; }),
            "r: not a frostline-receipt file");
  EXPECT_EQ(spoiled([](Json& r) { r.erase("code_sha256"); }), "r: key 'code_sha256' is missing");
  EXPECT_EQ(error_of([] { receipt_from_json("", "r"); }).rfind("r: not JSON", 0), 0U);
  EXPECT_EQ(error_of([] { receipt_from_json("7", "r"); }), "r: not a frostline-receipt file");
}

TEST(Receipt, SaysNoKeyTwice) {
  std::string text = receipt_to_json(example());
  text.insert(text.find("\"first_block\""), "\"accepted\": 3,\n");
  EXPECT_EQ(error_of([&] { receipt_from_json(text, "r"); }), "r: key 'accepted' stands twice");
}

TEST(Verdict, IsReadBackAsItWasWritten) {
  for (const std::string bits : {"", "1", "0110", "1111111111"}) {
    Verdict verdict;
    verdict.session = counted_up<SessionNumber>(1);
    verdict.receipt = counted_up<Sha256>(9);
    verdict.test_only = bits.size() == 4;
    verdict.group_kept = bits_from_text(bits, "bits");
    const Verdict again = verdict_from_json(verdict_to_json(verdict), "v");
    EXPECT_EQ(again.session, verdict.session);
    EXPECT_EQ(again.receipt, verdict.receipt);
    EXPECT_EQ(again.test_only, verdict.test_only);
    EXPECT_EQ(again.group_kept, verdict.group_kept);
  }
}

TEST(Verdict, ThatContradictsItselfIsRefused) {
  Verdict verdict;
  verdict.group_kept = bits_from_text("101", "bits");
  const auto spoiled = [&](const std::function<void(Json&)>& spoil) {
    Json root = Json::parse(verdict_to_json(verdict));
    spoil(root);
    return error_of([&] { verdict_from_json(root.dump(), "v"); });
  };
  EXPECT_EQ(spoiled([](Json&) {}), "no error");
  EXPECT_EQ(spoiled([](Json& v) { v["groups"] = 4; }),
            "v: 'groups' does not fit the number of kept bits");
  EXPECT_EQ(spoiled([](Json& v) { v["kept_bits"] = "1x1"; }),
            "v: kept_bits: line 1, column 2: 'x' is neither 0 nor 1");
  EXPECT_EQ(spoiled([](Json& v) { v["kept_bits"] = 101; }), "v: 'kept_bits' is not a text");
  EXPECT_EQ(spoiled([](Json& v) { v["receipt_sha256"] = "ab"; }),
            "v: 'receipt_sha256' is not 32 bytes in hexadecimal");
  EXPECT_EQ(spoiled([](Json& v) { v["format"] = "frostline-receipt"; }),
            "v: not a frostline-verdict file");
  EXPECT_EQ(spoiled([](Json& v) { v["version"] = "1"; }),
            "v: another version of frostline-verdict; this program reads version 1");
  EXPECT_EQ(spoiled([](Json& v) { v["kept"] = 1; }), "v: unknown key 'kept'");
}

}  // namespace
}  // namespace frostline
