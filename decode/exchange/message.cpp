#include "decode/exchange/message.h"

#include <cstring>
#include <string>

#include "polar/check_bits.h"
#include "polar/error.h"

namespace frostline {
namespace {

constexpr std::size_t kMagicBytes = 8;
constexpr char kMagic[kMagicBytes + 1] = "frostsyn";
constexpr std::uint32_t kVersion = 1;
constexpr std::uint32_t kTestOnlyFlag = 1;
constexpr std::size_t kCrcBytes = 4;
constexpr std::size_t kHeaderBytes = kMagicBytes + 4 + 4 + 16 + 32 + 4 + 4 + 8 + 4;

// Appends unsigned numbers, least significant byte first.
class Encoder {
 public:
  template <typename T>
  void number(T value) {
    for (std::size_t i = 0; i < sizeof(T); ++i) {
      bytes_.push_back(static_cast<std::uint8_t>(value >> (8 * i)));
    }
  }
  void raw(Span<const std::uint8_t> bytes) {
    bytes_.insert(bytes_.end(), bytes.begin(), bytes.end());
  }
  const std::vector<std::uint8_t>& bytes() const { return bytes_; }

 private:
  std::vector<std::uint8_t> bytes_;
};

class Decoder {
 public:
  explicit Decoder(Span<const std::uint8_t> bytes) : bytes_(bytes) {}
  template <typename T>
  T number() {
    std::uint64_t value = 0;
    for (std::size_t i = 0; i < sizeof(T); ++i) {
      value |= std::uint64_t{bytes_[next_ + i]} << (8 * i);
    }
    next_ += sizeof(T);
    return static_cast<T>(value);
  }
  void raw(Span<std::uint8_t> bytes) {
    std::memcpy(bytes.data(), bytes_.data() + next_, bytes.size());
    next_ += bytes.size();
  }

 private:
  Span<const std::uint8_t> bytes_;
  std::size_t next_ = 0;
};

std::vector<std::uint8_t> encode_header(const MessageHeader& header) {
  Encoder encoder;
  encoder.raw({reinterpret_cast<const std::uint8_t*>(kMagic), kMagicBytes});
  encoder.number(kVersion);
  encoder.number(header.test_only ? kTestOnlyFlag : std::uint32_t{0});
  encoder.raw(header.session);
  encoder.raw(header.code);
  encoder.number(header.block_length);
  encoder.number(header.lanes);
  encoder.number(header.key_bits);
  encoder.number(header.check_bits);
  encoder.number(crc32c(encoder.bytes()));
  return encoder.bytes();
}

// Syndrome and check bits as one string, so that only its end has pad bits.
BitString joined(const MessageRecord& record) {
  BitString bits(record.syndrome.size() + record.checks.size());
  copy_bits(record.syndrome.words(), 0, bits.words(), 0, record.syndrome.size());
  copy_bits(record.checks.words(), 0, bits.words(), record.syndrome.size(), record.checks.size());
  return bits;
}

}  // namespace

MessageWriter::MessageWriter(ByteSink& sink, const MessageHeader& header) : sink_(&sink) {
  put_checked(encode_header(header));
}

void MessageWriter::put_checked(Span<const std::uint8_t> bytes) {
  total_.update(bytes.subspan(0, bytes.size() - kCrcBytes));
  put(bytes);
}

void MessageWriter::put(Span<const std::uint8_t> bytes) {
  digest_.update(bytes);
  bytes_ += bytes.size();
  sink_->write(bytes);
}

void MessageWriter::write(unsigned lanes, const MessageRecord& record) {
  Encoder encoder;
  encoder.number(std::uint32_t{lanes});
  encoder.raw(bits_to_packed(joined(record)));
  encoder.number(crc32c(encoder.bytes()));
  put_checked(encoder.bytes());
  ++batches_;
}

Sha256 MessageWriter::finish() {
  Encoder mark;
  mark.number(std::uint32_t{0});
  mark.number(batches_);
  total_.update(mark.bytes());
  mark.number(total_.value());
  put(mark.bytes());
  return digest_.finish();
}

MessageReader::MessageReader(ByteSource& source, const Code& code)
    : source_(&source), frozen_count_(code.frozen.frozen_count()) {
  std::array<std::uint8_t, kHeaderBytes + 4> bytes{};
  get(bytes);
  Decoder decoder(bytes);
  std::array<std::uint8_t, kMagicBytes> magic{};
  decoder.raw(magic);
  if (std::memcmp(magic.data(), kMagic, kMagicBytes) != 0) fail("not a frostline message");
  const auto version = decoder.number<std::uint32_t>();
  const auto flags = decoder.number<std::uint32_t>();
  decoder.raw(header_.session);
  decoder.raw(header_.code);
  header_.block_length = decoder.number<std::uint32_t>();
  header_.lanes = decoder.number<std::uint32_t>();
  header_.key_bits = decoder.number<std::uint64_t>();
  header_.check_bits = decoder.number<std::uint32_t>();
  const Span<const std::uint8_t> covered(bytes.data(), kHeaderBytes);
  if (decoder.number<std::uint32_t>() != crc32c(covered)) fail("the header is damaged");
  total_.update(covered);
  if (version != kVersion) {
    fail("message version " + std::to_string(version) + "; this program reads version " +
         std::to_string(kVersion));
  }
  if ((flags & ~kTestOnlyFlag) != 0) fail("unknown flags");
  header_.test_only = (flags & kTestOnlyFlag) != 0;
  if (header_.code != code_sha256(code)) fail("made for another design (code_sha256 differs)");
  if (header_.block_length != code.block_length().bits() || header_.check_bits != code.check_bits) {
    fail("the header contradicts the design");
  }
  if (header_.lanes == 0 || header_.lanes > 512 || (header_.lanes & (header_.lanes - 1)) != 0) {
    fail("lanes " + std::to_string(header_.lanes) + " is not a power of two from 1 to 512");
  }
  cut_.emplace(code.block_length(), header_.key_bits, header_.lanes);
}

void MessageReader::fail(const std::string& what) const {
  throw InputError("message '" + source_->name() + "': " + what);
}

void MessageReader::get(Span<std::uint8_t> bytes) {
  if (source_->read(bytes) != bytes.size()) fail("truncated");
  digest_.update(bytes);
}

MessageRecord MessageReader::next() {
  const Batch batch = cut_->batch(batches_);
  const std::size_t syndrome_bits = frozen_count_ * batch.lanes;
  const std::size_t check_count = std::size_t{header_.check_bits} * batch.lanes;
  const std::size_t payload = bytes_for(syndrome_bits + check_count);
  std::vector<std::uint8_t> bytes(4 + payload + kCrcBytes);
  get(bytes);
  const std::string where = "record " + std::to_string(batches_ + 1);
  const Span<const std::uint8_t> covered(bytes.data(), 4 + payload);
  Decoder tail(Span<const std::uint8_t>(bytes).subspan(covered.size(), kCrcBytes));
  if (tail.number<std::uint32_t>() != crc32c(covered)) fail(where + " is damaged");
  total_.update(covered);
  if (Decoder(bytes).number<std::uint32_t>() != batch.lanes) fail(where + ": wrong lanes");
  const Span<const std::uint8_t> packed = Span<const std::uint8_t>(bytes).subspan(4, payload);
  const BitString padded = bits_from_packed(packed, 8 * payload);
  const std::size_t used = syndrome_bits + check_count;
  if (padded.slice(used, padded.size() - used).count() != 0) {
    fail(where + ": pad bits are not zero");
  }
  ++batches_;
  return {padded.slice(0, syndrome_bits), padded.slice(syndrome_bits, check_count)};
}

Sha256 MessageReader::finish() {
  std::array<std::uint8_t, 12> mark{};
  get(mark);
  total_.update(mark);
  const std::uint32_t total = total_.value();
  std::array<std::uint8_t, 4> crc{};
  get(crc);
  Decoder decoder(mark);
  if (decoder.number<std::uint32_t>() != 0) fail("the end mark is missing");
  if (decoder.number<std::uint64_t>() != batches_) fail("the end mark counts other batches");
  if (Decoder(crc).number<std::uint32_t>() != total) fail("damaged (total CRC-32C)");
  std::array<std::uint8_t, 1> more{};
  if (source_->read(more) != 0) fail("bytes after the end mark");
  return digest_.finish();
}

}  // namespace frostline
