#include "decode/exchange/key_files.h"

#include <stdexcept>

#include "polar/error.h"

namespace frostline {
namespace {

class PackedFileKey : public KeySource {
 public:
  PackedFileKey(std::unique_ptr<FileSource> file, std::uint64_t bits)
      : file_(std::move(file)), bits_(bits) {}
  std::uint64_t bits() const override { return bits_; }
  const std::string& name() const override { return file_->name(); }
  void read(std::uint64_t first, std::size_t count, Span<std::uint64_t> words) const override {
    if (first % 8 != 0) throw std::invalid_argument("a key is read from whole bytes on");
    KeyBytes packed(bytes_for(count));
    file_->read_at(first / 8, packed);
    unpack_bits(packed, count, words);
  }

 private:
  std::unique_ptr<FileSource> file_;
  std::uint64_t bits_;
};

KeyBytes read_whole(FileSource& file) {
  KeyBytes contents;
  KeyBytes piece(std::size_t{1} << 16);
  while (const std::size_t got = file.read(piece)) {
    contents.insert(contents.end(), piece.begin(),
                    piece.begin() + static_cast<std::ptrdiff_t>(got));
  }
  return contents;
}

std::uint64_t packed_bits(const std::string& path, std::uint64_t bytes,
                          std::optional<std::uint64_t> bits) {
  if (!bits) return 8 * bytes;
  if (bytes_for(*bits) != bytes) {
    throw InputError("key '" + path + "' holds " + std::to_string(bytes) + " bytes, but " +
                     std::to_string(*bits) + " bits take " + std::to_string(bytes_for(*bits)));
  }
  return *bits;
}

}  // namespace

KeyFormat parse_key_format(std::string_view word) {
  if (word == "packed") return KeyFormat::packed;
  if (word == "text") return KeyFormat::text;
  throw InputError("key format '" + std::string(word) + "' is neither packed nor text");
}

void MemoryKey::read(std::uint64_t first, std::size_t count, Span<std::uint64_t> words) const {
  if (count % 64 != 0) words[count / 64] = 0;
  copy_bits(bits_.words(), first, words, 0, count);
}

std::unique_ptr<KeySource> open_key(const std::string& path, KeyFormat format,
                                    std::optional<std::uint64_t> bits) {
  auto file = std::make_unique<FileSource>(path);
  if (format == KeyFormat::packed && file->size()) {
    if (*file->size() == 0) throw InputError("key '" + path + "' is empty");
    const std::uint64_t count = packed_bits(path, *file->size(), bits);
    return std::make_unique<PackedFileKey>(std::move(file), count);
  }
  const KeyBytes contents = read_whole(*file);
  if (contents.empty()) throw InputError("key '" + path + "' is empty");
  if (format == KeyFormat::packed) {
    return std::make_unique<MemoryKey>(
        bits_from_packed(contents, packed_bits(path, contents.size(), bits)), path);
  }
  const std::string_view text(reinterpret_cast<const char*>(contents.data()), contents.size());
  BitString key = bits_from_text(text, path);
  if (bits && *bits != key.size()) {
    throw InputError("key '" + path + "' holds " + std::to_string(key.size()) + " bits, not " +
                     std::to_string(*bits));
  }
  return std::make_unique<MemoryKey>(std::move(key), path);
}

void KeySink::write(Span<const std::uint64_t> words, std::size_t count) {
  if (count == 0) return;
  if (format_ == KeyFormat::packed) {
    if (bits_ % 8 != 0) throw std::invalid_argument("bits after the end of a packed key");
    KeyBytes packed(bytes_for(count));
    pack_bits(words, count, packed);
    sink_->write(packed);
  } else {
    KeyBytes text(count);
    for (std::size_t i = 0; i < count; ++i) {
      text[i] = static_cast<std::uint8_t>('0' + ((words[i / 64] >> (i % 64)) & 1U));
    }
    sink_->write(text);
  }
  bits_ += count;
}

void KeySink::write_packed(Span<const std::uint8_t> bytes) {
  if (format_ == KeyFormat::packed) {
    if (bits_ % 8 != 0) throw std::invalid_argument("bits after the end of a packed key");
    sink_->write(bytes);
    bits_ += 8 * bytes.size();
  } else {
    const BitString bits = bits_from_packed(bytes, 8 * bytes.size());
    write(bits.words(), bits.size());
  }
}

void KeySink::finish() {
  static const std::uint8_t kLineFeed[] = {'\n'};
  if (format_ == KeyFormat::text) sink_->write(Span<const std::uint8_t>(kLineFeed, 1));
}

}  // namespace frostline
