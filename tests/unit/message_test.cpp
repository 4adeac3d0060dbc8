// The message: every bit where designs/FORMATS.md puts it, and nothing but a whole one accepted.
#include "decode/exchange/message.h"

#include <gtest/gtest.h>

#include <functional>
#include <numeric>
#include <vector>

#include "decode/batch_decoder.h"
#include "decode/exchange/receiver.h"
#include "decode/exchange/sender.h"
#include "polar/check_bits.h"
#include "polar/error.h"
#include "polar/syndrome.h"
#include "tests/support/random_bits.h"

namespace frostline {
namespace {

using testing::Generator;
using testing::random_bits;

using Bytes = std::vector<std::uint8_t>;

std::string error_of(const std::function<void()>& act) {
  try {
    act();
  } catch (const InputError& error) {
    return error.what();
  }
  return "no error";
}

// CRC-32C bit by bit, from the polynomial of RFC 3720 in its reflected form 82F63B78.
std::uint32_t crc_by_definition(const Bytes& bytes) {
  std::uint32_t crc = 0xFFFFFFFFU;
  for (const std::uint8_t byte : bytes) {
    crc ^= byte;
    for (int bit = 0; bit < 8; ++bit) crc = (crc >> 1) ^ ((crc & 1U) != 0 ? 0x82F63B78U : 0U);
  }
  return ~crc;
}

void put(Bytes& bytes, std::uint64_t value, std::size_t count) {
  for (std::size_t i = 0; i < count; ++i) {
    bytes.push_back(static_cast<std::uint8_t>(value >> (8 * i)));
  }
}

// What a message may say, for writing it by hand: the true values, to be spoiled one by one.
struct HandWritten {
  std::string magic = "frostsyn";
  std::uint32_t version = 1;
  std::uint32_t flags = 0;
  SessionNumber session{};
  Sha256 code{};
  std::uint32_t block_length = 16;
  std::uint32_t lanes = 2;
  std::uint64_t key_bits = 16 * 3 + 5;
  std::uint32_t check_bits = 6;
  std::vector<std::uint32_t> record_lanes = {2, 1};
  std::vector<BitString> payloads;
  bool dirty_pad = false;
  std::uint32_t end_mark = 0;
  std::uint64_t batches = 2;

  Bytes bytes() const {
    Bytes message;
    Bytes covered;  // by the total
    Bytes part(magic.begin(), magic.end());
    put(part, version, 4);
    put(part, flags, 4);
    part.insert(part.end(), session.begin(), session.end());
    part.insert(part.end(), code.begin(), code.end());
    put(part, block_length, 4);
    put(part, lanes, 4);
    put(part, key_bits, 8);
    put(part, check_bits, 4);
    covered = part;
    put(part, crc_by_definition(part), 4);
    message = part;
    for (std::size_t r = 0; r < payloads.size(); ++r) {
      part.clear();
      put(part, record_lanes[r], 4);
      part.resize(4 + (payloads[r].size() + 7) / 8);
      for (std::size_t i = 0; i < payloads[r].size(); ++i) {
        if (payloads[r][i])
          part[4 + i / 8] = static_cast<std::uint8_t>(part[4 + i / 8] | (0x80U >> i % 8));
      }
      if (dirty_pad) part.back() = static_cast<std::uint8_t>(part.back() | 1U);
      covered.insert(covered.end(), part.begin(), part.end());
      put(part, crc_by_definition(part), 4);
      message.insert(message.end(), part.begin(), part.end());
    }
    part.clear();
    put(part, end_mark, 4);
    put(part, batches, 8);
    covered.insert(covered.end(), part.begin(), part.end());
    put(part, crc_by_definition(covered), 4);
    message.insert(message.end(), part.begin(), part.end());
    return message;
  }
};

// A code of N = 16, M = 7, c = 6, a key of three blocks and five bits more, two lanes: a batch of
// two blocks, then one of one.
class MessageFile : public ::testing::Test {
 protected:
  MessageFile()
      : code_{testing::weight_frozen_set(BlockLength(16), 7), Precoding::state8, 6},
        key_(random_bits(generator_, 16 * 3 + 5), "key") {
    MemorySink sink;
    MessageOptions options;
    options.lanes = 2;
    summary_ = make_message(code_, key_, options, sink);
    message_.assign(sink.bytes().begin(), sink.bytes().end());

    const SyndromeFormer former(code_.frozen, code_.precoding);
    const auto bit = [&](std::size_t i) {
      std::uint64_t word = 0;
      key_.read(i / 8 * 8, std::min<std::size_t>(8, key_.bits() - i / 8 * 8),
                Span<std::uint64_t>(&word, 1));
      return ((word >> (i % 8)) & 1U) != 0;
    };
    // Block l of a batch holds bits l, l + B, ... of it.
    const auto block = [&](std::size_t first, std::size_t lane, std::size_t lanes) {
      BitString bits(16);
      for (std::size_t i = 0; i < 16; ++i) bits.set(i, bit(first + lane + i * lanes));
      return bits;
    };
    hand_.session = summary_.header.session;
    hand_.code = code_sha256(code_);
    for (const auto& [first, lanes] : {std::pair<std::size_t, std::size_t>{0, 2}, {32, 1}}) {
      BitString payload;
      for (std::size_t row = 0; row < 7; ++row) {
        for (std::size_t lane = 0; lane < lanes; ++lane) {
          payload.append(former.syndrome(block(first, lane, lanes))[row]);
        }
      }
      for (unsigned t = 0; t < 6; ++t) {
        for (std::size_t lane = 0; lane < lanes; ++lane) {
          payload.append(((check_bits(block(first, lane, lanes), 6) >> (5 - t)) & 1U) != 0);
        }
      }
      hand_.payloads.push_back(payload);
    }
  }

  // Reads a message to its end.
  void read(const Bytes& bytes) const {
    MemorySource source(bytes, "m");
    MessageReader reader(source, code_);
    for (std::uint64_t i = 0; i < reader.cut().batch_count(); ++i) reader.next();
    reader.finish();
  }
  std::string error(const Bytes& bytes) const {
    return error_of([&] { read(bytes); });
  }

  Generator generator_{5};
  Code code_;
  MemoryKey key_;
  MessageSummary summary_;
  Bytes message_;
  HandWritten hand_;
};

TEST_F(MessageFile, HoldsEveryBitWhereTheFormatPutsIt) {
  EXPECT_EQ(message_, hand_.bytes());
  EXPECT_EQ(summary_.message_bytes, message_.size());
  EXPECT_EQ(summary_.message, sha256(Span<const std::uint8_t>(message_)));
  EXPECT_EQ(summary_.blocks, 3U);
  EXPECT_EQ(summary_.rest_bits, 5U);
  EXPECT_EQ(summary_.disclosed.total(), 3U * (7 + 6));
}

TEST_F(MessageFile, IsReadBackAsItWasWritten) {
  MemorySource source(message_, "m");
  MessageReader reader(source, code_);
  EXPECT_EQ(reader.header().session, summary_.header.session);
  EXPECT_EQ(reader.header().key_bits, 53U);
  EXPECT_EQ(reader.header().lanes, 2U);
  EXPECT_FALSE(reader.header().test_only);
  for (std::size_t r = 0; r < 2; ++r) {
    const MessageRecord record = reader.next();
    BitString both = record.syndrome;
    both.append(record.checks);
    EXPECT_EQ(both, hand_.payloads[r]);
  }
  EXPECT_EQ(reader.finish(), summary_.message);
}

TEST_F(MessageFile, IsReadAndWrittenAsAStream) {
  // The header is there before the first record is asked for, each record before the next.
  class Watched : public ByteSource {
   public:
    explicit Watched(const Bytes& bytes) : inner_(bytes, "m") {}
    std::size_t read(Span<std::uint8_t> bytes) override {
      taken += bytes.size();
      return inner_.read(bytes);
    }
    const std::string& name() const override { return inner_.name(); }
    std::size_t taken = 0;

   private:
    MemorySource inner_;
  };
  Watched source(message_);
  MessageReader reader(source, code_);
  EXPECT_EQ(source.taken, 88U);
  reader.next();
  EXPECT_EQ(source.taken, 88U + 8 + 4);  // 26 bits
  reader.next();
  EXPECT_EQ(source.taken, 88U + 12 + 8 + 2);  // 13 bits
}

TEST_F(MessageFile, EveryLengthButItsOwnIsRefused) {
  for (std::size_t size = 0; size < message_.size(); ++size) {
    EXPECT_EQ(error(Bytes(message_.begin(), message_.begin() + static_cast<std::ptrdiff_t>(size))),
              "message 'm': truncated")
        << size;
  }
  for (const std::size_t more : {1, 4, 100}) {
    Bytes longer = message_;
    longer.resize(message_.size() + more);
    EXPECT_EQ(error(longer), "message 'm': bytes after the end mark");
  }
  EXPECT_EQ(error(message_), "no error");
}

TEST_F(MessageFile, EveryChangedByteIsSeen) {
  for (std::size_t at = 0; at < message_.size(); ++at) {
    for (const unsigned change : {0x01U, 0x80U, 0xFFU}) {
      Bytes changed = message_;
      changed[at] = static_cast<std::uint8_t>(changed[at] ^ change);
      EXPECT_EQ(error(changed).rfind("message 'm': ", 0), 0U) << "byte " << at;
    }
  }
}

TEST_F(MessageFile, RecordsCannotTradePlaces) {
  hand_.lanes = 1;
  hand_.record_lanes = {1, 1, 1};
  hand_.batches = 3;
  hand_.payloads.assign(3, hand_.payloads[1]);
  hand_.payloads[2].flip(0);
  const Bytes whole = hand_.bytes();
  EXPECT_EQ(error(whole), "no error");
  // Both records are whole; the total CRC-32C knows their order.
  Bytes traded = whole;
  std::swap_ranges(traded.begin() + 98, traded.begin() + 108, traded.begin() + 108);
  EXPECT_EQ(error(traded), "message 'm': damaged (total CRC-32C)");
}

TEST_F(MessageFile, WhatAWholeMessageMustNotSayIsRefused) {
  const auto spoiled = [&](const std::function<void(HandWritten&)>& spoil) {
    HandWritten message = hand_;
    spoil(message);
    return error(message.bytes()).substr(13);
  };
  EXPECT_EQ(spoiled([](HandWritten& m) { m.magic = "frostsyM"; }), "not a frostline message");
  EXPECT_EQ(spoiled([](HandWritten& m) { m.version = 2; }),
            "message version 2; this program reads version 1");
  EXPECT_EQ(spoiled([](HandWritten& m) { m.flags = 2; }), "unknown flags");
  EXPECT_EQ(spoiled([](HandWritten& m) { m.code[31] ^= 1; }),
            "made for another design (code_sha256 differs)");
  EXPECT_EQ(spoiled([](HandWritten& m) { m.block_length = 32; }),
            "the header contradicts the design");
  EXPECT_EQ(spoiled([](HandWritten& m) { m.check_bits = 8; }), "the header contradicts the design");
  for (const std::uint32_t lanes : {0U, 3U, 1024U}) {
    EXPECT_EQ(spoiled([&](HandWritten& m) { m.lanes = lanes; }),
              "lanes " + std::to_string(lanes) + " is not a power of two from 1 to 512");
  }
  EXPECT_EQ(spoiled([](HandWritten& m) { m.record_lanes[0] = 1; }), "record 1: wrong lanes");
  EXPECT_EQ(spoiled([](HandWritten& m) { m.record_lanes[1] = 2; }), "record 2: wrong lanes");
  EXPECT_EQ(spoiled([](HandWritten& m) { m.dirty_pad = true; }), "record 1: pad bits are not zero");
  EXPECT_EQ(spoiled([](HandWritten& m) { m.end_mark = 1; }), "the end mark is missing");
  EXPECT_EQ(spoiled([](HandWritten& m) { m.batches = 3; }), "the end mark counts other batches");
}

TEST_F(MessageFile, OfAnotherCodeIsRefused) {
  for (const Code& other :
       {Code{testing::weight_frozen_set(BlockLength(16), 8), Precoding::state8, 6},
        Code{code_.frozen, Precoding::none, 6}, Code{code_.frozen, Precoding::state8, 8},
        Code{testing::weight_frozen_set(BlockLength(32), 7), Precoding::state8, 6}}) {
    MemorySource source(message_, "m");
    EXPECT_EQ(error_of([&] { MessageReader(source, other); }),
              "message 'm': made for another design (code_sha256 differs)");
  }
}

TEST_F(MessageFile, OfTheSameKeyDiffersInTheSessionAlone) {
  MemorySink sink;
  MessageOptions options;
  options.lanes = 2;
  const MessageSummary again = make_message(code_, key_, options, sink);
  EXPECT_NE(again.header.session, summary_.header.session);
  hand_.session = again.header.session;
  EXPECT_EQ(Bytes(sink.bytes().begin(), sink.bytes().end()), hand_.bytes());
}

TEST_F(MessageFile, OfATestIsMarked) {
  for (const std::uint64_t seed : {std::uint64_t{1}, std::uint64_t{2}}) {
    MemorySink sink;
    MessageOptions options;
    options.lanes = 2;
    options.test_seed = seed;
    hand_.session = make_message(code_, key_, options, sink).header.session;
    hand_.flags = 1;
    EXPECT_EQ(Bytes(sink.bytes().begin(), sink.bytes().end()), hand_.bytes());
  }
}

// No length and no changed byte gets past the receiver, whatever it does with the records
// meanwhile.
TEST_F(MessageFile, TheReceiverTakesAWholeMessageOnly) {
  Design design{code_, 0.02, {"user-mask", {}}, 1, Arithmetic::planes_of(3), {}, {}, {}, {}};
  const auto decoder = make_batch_decoder(design);
  const auto error_of_receiver = [&](const Bytes& bytes) {
    return error_of([&] {
      MemorySource source(bytes, "m");
      reconcile(design, *decoder, key_, source, {}, {});
    });
  };
  EXPECT_EQ(error_of_receiver(message_), "no error");
  for (std::size_t at = 0; at < message_.size(); ++at) {
    Bytes changed = message_;
    changed[at] = static_cast<std::uint8_t>(changed[at] ^ 0x20U);
    EXPECT_EQ(error_of_receiver(changed).rfind("message 'm': ", 0), 0U) << "byte " << at;
    changed = Bytes(message_.begin(), message_.begin() + static_cast<std::ptrdiff_t>(at));
    EXPECT_EQ(error_of_receiver(changed), "message 'm': truncated") << "length " << at;
  }
}

}  // namespace
}  // namespace frostline
