// The message: what the sender makes public, one record a batch (`*.syn`, designs/FORMATS.md).
//
// Little-endian. Header: magic "frostsyn", version, flags, session number, code_sha256, N, lanes,
// key bits, check bits, CRC-32C. Record: lanes of this batch, then M lanes syndrome bits (rows in
// increasing index, within a row bit l for lane l) and c lanes check bits (first-sent bit of the
// register first) as one packed string, pad bits zero, CRC-32C. End mark: 0, number of batches,
// CRC-32C over everything before it but the CRC-32C fields; nothing after it. Written and read as a
// stream.
//
// The total leaves those fields out because a part that is followed by its own CRC brings any
// register to the same value: a total over them would not know the records, nor their order.
#pragma once

#include <array>
#include <cstdint>
#include <optional>

#include "decode/exchange/cut.h"
#include "decode/exchange/streams.h"
#include "polar/bits.h"
#include "polar/code.h"
#include "polar/digest.h"

namespace frostline {

using SessionNumber = std::array<std::uint8_t, 16>;

struct MessageHeader {
  SessionNumber session{};
  bool test_only = false;  // made with reproducible session number and hash keys: never for keys
  Sha256 code{};
  std::uint32_t block_length = 0;
  std::uint32_t lanes = 0;
  std::uint64_t key_bits = 0;
  std::uint32_t check_bits = 0;
};

// The public bits of one batch.
struct MessageRecord {
  BitString syndrome;  // M lanes bits
  BitString checks;    // c lanes bits
};

class MessageWriter {
 public:
  // Writes the header.
  MessageWriter(ByteSink& sink, const MessageHeader& header);
  void write(unsigned lanes, const MessageRecord& record);
  // Writes the end mark. Returns the SHA-256 of the whole message.
  Sha256 finish();
  // Bytes written so far.
  std::uint64_t bytes() const { return bytes_; }

 private:
  void put(Span<const std::uint8_t> bytes);
  // A part that ends with its own CRC-32C.
  void put_checked(Span<const std::uint8_t> bytes);

  ByteSink* sink_;
  Crc32c total_;
  Sha256Hasher digest_;
  std::uint64_t batches_ = 0;
  std::uint64_t bytes_ = 0;
};

class MessageReader {
 public:
  // Reads and checks the header. Throws InputError, as all members do, with the source's name in
  // front, when the message is not whole and unaltered, or was made for another code.
  MessageReader(ByteSource& source, const Code& code);

  const MessageHeader& header() const { return header_; }
  // How the sender cut the key.
  const Cut& cut() const { return *cut_; }
  // The next batch's public bits. REQUIRES: called cut().batch_count() times at most.
  MessageRecord next();
  // Reads the end mark and makes sure that nothing follows. Returns the SHA-256 of the message.
  Sha256 finish();

 private:
  void get(Span<std::uint8_t> bytes);
  [[noreturn]] void fail(const std::string& what) const;

  ByteSource* source_;
  std::size_t frozen_count_;
  MessageHeader header_;
  std::optional<Cut> cut_;
  Crc32c total_;
  Sha256Hasher digest_;
  std::uint64_t batches_ = 0;
};

}  // namespace frostline
