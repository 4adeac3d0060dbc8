#include "decode/exchange/streams.h"

#include <fcntl.h>
#include <sys/stat.h>
#include <unistd.h>

#include <algorithm>
#include <cerrno>
#include <charconv>
#include <cstdio>
#include <cstdlib>
#include <cstring>
#include <memory>

#include "polar/digest.h"
#include "polar/error.h"

namespace frostline {
namespace {

constexpr std::size_t kMaxTextBytes = std::size_t{1} << 30;
constexpr std::size_t kBufferBytes = std::size_t{1} << 20;

std::string reason(int error) { return std::strerror(error); }

// A name beside the target that no other process uses.
std::string temporary_name(const std::string& path) {
  std::uint8_t random[6];
  randombytes_buf(random, sizeof random);
  return path + ".part-" + to_hex(Span<const std::uint8_t>(random, sizeof random));
}

// The descriptor of this process that a path stands for. Opening such a path anew would lose its
// position, and renaming a file onto it would replace the device's name.
std::optional<int> own_descriptor(const std::string& path) {
  if (path == "/dev/stdout") return STDOUT_FILENO;
  if (path == "/dev/stderr") return STDERR_FILENO;
  for (const std::string folder : {"/dev/fd/", "/proc/self/fd/"}) {
    if (path.compare(0, folder.size(), folder) != 0) continue;
    int descriptor = -1;
    const char* const end = path.data() + path.size();
    const auto parsed = std::from_chars(path.data() + folder.size(), end, descriptor);
    if (parsed.ec == std::errc() && parsed.ptr == end) return descriptor;
  }
  return std::nullopt;
}

// Where a symbolic link leads, so that the file behind it is replaced and not the link.
std::string behind_links(const std::string& path) {
  struct FreeMemory {
    void operator()(char* memory) const { std::free(memory); }
  };
  const std::unique_ptr<char, FreeMemory> real(::realpath(path.c_str(), nullptr));
  return real ? std::string(real.get()) : path;
}

// Renames without a window between the check that the target is not there and the act. File systems
// that cannot do it at once can mostly link.
bool rename_onto_nothing(const std::string& from, const std::string& to) {
  if (::renameat2(AT_FDCWD, from.c_str(), AT_FDCWD, to.c_str(), RENAME_NOREPLACE) == 0) return true;
  if (errno != EINVAL && errno != ENOSYS) return false;
  return ::link(from.c_str(), to.c_str()) == 0 && ::unlink(from.c_str()) == 0;
}

}  // namespace

std::size_t MemorySource::read(Span<std::uint8_t> bytes) {
  const std::size_t count = std::min(bytes.size(), bytes_.size() - next_);
  std::copy_n(bytes_.data() + next_, count, bytes.data());
  next_ += count;
  return count;
}

FileSource::FileSource(std::string path)
    : path_(std::move(path)), descriptor_(::open(path_.c_str(), O_RDONLY | O_CLOEXEC)) {
  if (descriptor_ < 0) throw InputError("cannot read '" + path_ + "': " + reason(errno));
  struct stat status {};
  if (::fstat(descriptor_, &status) == 0 && S_ISDIR(status.st_mode)) {
    ::close(descriptor_);
    throw InputError("cannot read '" + path_ + "': it is a folder");
  }
  if (S_ISREG(status.st_mode)) size_ = static_cast<std::uint64_t>(status.st_size);
}

FileSource::~FileSource() { ::close(descriptor_); }

std::size_t FileSource::read(Span<std::uint8_t> bytes) {
  std::size_t done = 0;
  while (done < bytes.size()) {
    const ssize_t got = ::read(descriptor_, bytes.data() + done, bytes.size() - done);
    if (got < 0 && errno == EINTR) continue;
    if (got < 0) throw InputError("cannot read '" + path_ + "': " + reason(errno));
    if (got == 0) break;
    done += static_cast<std::size_t>(got);
  }
  return done;
}

void FileSource::read_at(std::uint64_t offset, Span<std::uint8_t> bytes) const {
  std::size_t done = 0;
  while (done < bytes.size()) {
    const ssize_t got = ::pread(descriptor_, bytes.data() + done, bytes.size() - done,
                                static_cast<off_t>(offset + done));
    if (got < 0 && errno == EINTR) continue;
    if (got < 0) throw InputError("cannot read '" + path_ + "': " + reason(errno));
    if (got == 0) throw InputError("'" + path_ + "' became shorter while it was read");
    done += static_cast<std::size_t>(got);
  }
}

std::string read_file(const std::string& path) {
  FileSource source(path);
  std::string contents;
  std::vector<std::uint8_t> buffer(kBufferBytes);
  while (const std::size_t got = source.read(Span<std::uint8_t>(buffer))) {
    contents.append(reinterpret_cast<const char*>(buffer.data()), got);
    if (contents.size() > kMaxTextBytes) {
      throw InputError("'" + path + "' is longer than 1 GiB: not one of this program's files");
    }
  }
  return contents;
}

FileSink::FileSink(std::string path, FileAccess access, FileReplace replace)
    : path_(std::move(path)), target_(behind_links(path_)), access_(access), replace_(replace) {
  if (const std::optional<int> own = own_descriptor(path_)) {
    descriptor_ = ::fcntl(*own, F_DUPFD_CLOEXEC, 0);
    if (descriptor_ < 0) fail(errno);
    return;
  }
  if (path_.empty()) fail(ENOENT);
  const mode_t mode = access == FileAccess::secret ? 0600 : 0666;
  struct stat status {};
  const bool exists = ::stat(target_.c_str(), &status) == 0;
  if (exists && S_ISDIR(status.st_mode)) fail(EISDIR);
  if (exists && !S_ISREG(status.st_mode)) {
    descriptor_ = ::open(target_.c_str(), O_WRONLY | O_CLOEXEC);
    if (descriptor_ < 0) fail(errno);
    return;
  }
  if (exists && replace_ == FileReplace::refuse_if_there) fail(EEXIST);
  temporary_ = temporary_name(target_);
  descriptor_ = ::open(temporary_.c_str(), O_WRONLY | O_CREAT | O_EXCL | O_CLOEXEC, mode);
  if (descriptor_ < 0) {
    const int error = errno;
    temporary_.clear();
    fail(error);
  }
}

FileSink::~FileSink() {
  if (descriptor_ >= 0) ::close(descriptor_);
  if (!temporary_.empty()) ::unlink(temporary_.c_str());
}

void FileSink::fail(int error) const {
  throw InputError("cannot write '" + path_ + "': " + reason(error));
}

void FileSink::write(Span<const std::uint8_t> bytes) {
  buffer_.insert(buffer_.end(), bytes.begin(), bytes.end());
  if (buffer_.size() >= kBufferBytes) flush();
}

void FileSink::write(std::string_view text) { write(bytes_of(text)); }

void FileSink::flush() {
  std::size_t done = 0;
  while (done < buffer_.size()) {
    const ssize_t put = ::write(descriptor_, buffer_.data() + done, buffer_.size() - done);
    if (put < 0 && errno == EINTR) continue;
    if (put < 0) fail(errno);
    done += static_cast<std::size_t>(put);
  }
  sodium_memzero(buffer_.data(), buffer_.size());
  buffer_.clear();
}

namespace {

// Makes a new name in the folder of a file last, where the file system can. Returns false, with
// errno set, when it fails.
bool synchronize_folder(const std::string& path) {
  const std::size_t slash = path.find_last_of('/');
  const std::string folder = slash == std::string::npos ? "." : path.substr(0, slash + 1);
  const int descriptor = ::open(folder.c_str(), O_RDONLY | O_DIRECTORY | O_CLOEXEC);
  // A folder that may be written but not read, or one that cannot be synchronized: nothing to do.
  if (descriptor < 0) return errno == EACCES;
  const bool done = ::fsync(descriptor) == 0 || errno == EINVAL || errno == ENOTSUP;
  const int error = errno;
  ::close(descriptor);
  errno = error;
  return done;
}

}  // namespace

void FileSink::finish() {
  if (descriptor_ < 0) return;
  flush();
  const bool synchronized = temporary_.empty() || !lasts() || ::fsync(descriptor_) == 0;
  const int sync_error = errno;
  const int closed = ::close(descriptor_);
  descriptor_ = -1;
  if (!synchronized) fail(sync_error);
  if (closed != 0) fail(errno);
}

void FileSink::commit() {
  finish();
  if (temporary_.empty()) return;
  if (replace_ == FileReplace::refuse_if_there) {
    if (!rename_onto_nothing(temporary_, target_)) fail(errno);
  } else if (::rename(temporary_.c_str(), target_.c_str()) != 0) {
    fail(errno);
  }
  temporary_.clear();
  if (lasts() && !synchronize_folder(target_)) fail(errno);
}

}  // namespace frostline
