// Keys as they lie in files: packed bytes or text, read piece by piece and written piece by piece.
#pragma once

#include <cstdint>
#include <memory>
#include <optional>
#include <string>
#include <string_view>

#include "decode/exchange/streams.h"
#include "polar/bits.h"

namespace frostline {

enum class KeyFormat { packed, text };
// Throws InputError on another word than packed or text.
KeyFormat parse_key_format(std::string_view word);

// A string of bits of known length that can be read anywhere.
class KeySource {
 public:
  virtual ~KeySource() = default;
  virtual std::uint64_t bits() const = 0;
  virtual const std::string& name() const = 0;
  // Bits first .. first + count - 1 into words. REQUIRES: first a multiple of 8,
  // first + count <= bits(), words_for(count) words.
  virtual void read(std::uint64_t first, std::size_t count, Span<std::uint64_t> words) const = 0;
};

class MemoryKey : public KeySource {
 public:
  MemoryKey(BitString bits, std::string name) : bits_(std::move(bits)), name_(std::move(name)) {}
  std::uint64_t bits() const override { return bits_.size(); }
  const std::string& name() const override { return name_; }
  void read(std::uint64_t first, std::size_t count, Span<std::uint64_t> words) const override;

 private:
  BitString bits_;
  std::string name_;
};

// Opens a key file. Packed regular files are read piece by piece, so that the memory needed does
// not grow with the key; text, pipes and devices are read whole. bits: how many bits a packed file
// holds where that is no multiple of 8 (or just to be sure); it must fit the number of bytes.
// Throws InputError on a file that cannot be read, is empty, or does not fit.
std::unique_ptr<KeySource> open_key(const std::string& path, KeyFormat format,
                                    std::optional<std::uint64_t> bits);

// Writes bits one after the other in either format.
class KeySink {
 public:
  KeySink(ByteSink& sink, KeyFormat format) : sink_(&sink), format_(format) {}
  // Appends the first count bits of words. REQUIRES: in the packed format only the last call of
  // all may have a count that is no multiple of 8.
  void write(Span<const std::uint64_t> words, std::size_t count);
  // Appends whole bytes in the packed order.
  void write_packed(Span<const std::uint8_t> bytes);
  // Ends a text with a line feed.
  void finish();
  std::uint64_t bits() const { return bits_; }

 private:
  ByteSink* sink_;
  KeyFormat format_;
  std::uint64_t bits_ = 0;
};

}  // namespace frostline
