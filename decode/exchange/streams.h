// Streams of bytes that the exchange reads and writes, and the files behind them.
//
// Output files appear whole or not at all: they are written under a temporary name beside the
// target and renamed by commit(). What is not a regular file (a pipe,
// /dev/stdout) is written straight. Every failed call of the operating system is an InputError that
// names the file.
#pragma once

#include <cstdint>
#include <optional>
#include <string>
#include <vector>

#include "polar/bits.h"

namespace frostline {

class ByteSource {
 public:
  virtual ~ByteSource() = default;
  // Reads up to bytes.size() bytes, fewer only at the end. Returns how many.
  virtual std::size_t read(Span<std::uint8_t> bytes) = 0;
  // What messages call it.
  virtual const std::string& name() const = 0;
};

class ByteSink {
 public:
  virtual ~ByteSink() = default;
  virtual void write(Span<const std::uint8_t> bytes) = 0;
};

class MemorySource : public ByteSource {
 public:
  MemorySource(Span<const std::uint8_t> bytes, std::string name)
      : bytes_(bytes), name_(std::move(name)) {}
  std::size_t read(Span<std::uint8_t> bytes) override;
  const std::string& name() const override { return name_; }

 private:
  Span<const std::uint8_t> bytes_;
  std::size_t next_ = 0;
  std::string name_;
};

class MemorySink : public ByteSink {
 public:
  void write(Span<const std::uint8_t> bytes) override {
    bytes_.insert(bytes_.end(), bytes.begin(), bytes.end());
  }
  const KeyBytes& bytes() const { return bytes_; }

 private:
  KeyBytes bytes_;
};

class FileSource : public ByteSource {
 public:
  // Throws InputError "cannot read 'PATH': ..." when it cannot be opened or is a folder.
  explicit FileSource(std::string path);
  ~FileSource() override;
  FileSource(const FileSource&) = delete;
  FileSource& operator=(const FileSource&) = delete;
  std::size_t read(Span<std::uint8_t> bytes) override;
  const std::string& name() const override { return path_; }
  // Size in bytes of a regular file, none for a pipe or a device.
  std::optional<std::uint64_t> size() const { return size_; }
  // Reads exactly bytes.size() bytes at an offset of a regular file.
  void read_at(std::uint64_t offset, Span<std::uint8_t> bytes) const;

 private:
  std::string path_;
  int descriptor_;
  std::optional<std::uint64_t> size_;
};

// The whole contents of a file that holds no key. Throws InputError when it is longer than 1 GiB.
std::string read_file(const std::string& path);

// secret: mode 0600. exchanged and secret files are on the disk before they have their name: after
// a crash they are there whole, or not at all.
enum class FileAccess { normal, exchanged, secret };
enum class FileReplace { allowed, refuse_if_there };

class FileSink : public ByteSink {
 public:
  // Throws InputError when the folder is missing or not writable, or the target may not be
  // replaced.
  explicit FileSink(std::string path, FileAccess access = FileAccess::normal,
                    FileReplace replace = FileReplace::allowed);
  // Without commit() nothing of the file is left (but for what went straight to a pipe).
  ~FileSink() override;
  FileSink(const FileSink&) = delete;
  FileSink& operator=(const FileSink&) = delete;
  void write(Span<const std::uint8_t> bytes) override;
  void write(std::string_view text);
  // Writes what is buffered and checks that the disk took it. Called by commit(); where several
  // files belong together, finish all before the first is committed.
  void finish();
  // Puts the file in place.
  void commit();
  const std::string& path() const { return path_; }

 private:
  void flush();
  bool lasts() const { return access_ != FileAccess::normal; }
  [[noreturn]] void fail(int error) const;

  std::string path_;       // as the user calls it
  std::string target_;     // behind symbolic links
  std::string temporary_;  // empty where the target is written straight
  FileAccess access_;
  FileReplace replace_;
  int descriptor_ = -1;
  KeyBytes buffer_;
};

}  // namespace frostline
