// Files that appear whole or not at all.
#include "decode/exchange/streams.h"

#include <fcntl.h>
#include <gtest/gtest.h>
#include <sys/stat.h>
#include <unistd.h>

#include <array>
#include <filesystem>
#include <functional>
#include <thread>

#include "polar/digest.h"
#include "polar/error.h"
#include "tests/support/folder.h"

namespace frostline {
namespace {

using testing::Folder;

std::string error_of(const std::function<void()>& act) {
  try {
    act();
  } catch (const InputError& error) {
    return error.what();
  }
  return "no error";
}

TEST(FileSink, IsNotSeenUnderItsNameBeforeItIsCommitted) {
  const Folder folder;
  FileSink sink(folder.path("out"));
  sink.write(std::string_view("whole"));
  EXPECT_FALSE(folder.holds("out"));
  sink.finish();
  EXPECT_FALSE(folder.holds("out"));
  sink.commit();
  EXPECT_EQ(folder.read("out"), "whole");
  EXPECT_EQ(folder.names(), std::vector<std::string>{"out"});
}

TEST(FileSink, KeepsTheOldFileUntilTheNewOneIsWhole) {
  const Folder folder;
  folder.write("out", "old");
  {
    FileSink sink(folder.path("out"));
    sink.write(std::string_view("new"));
    sink.finish();
    EXPECT_EQ(folder.read("out"), "old");
  }
  EXPECT_EQ(folder.read("out"), "old");
  FileSink sink(folder.path("out"));
  sink.write(std::string_view("new"));
  sink.commit();
  EXPECT_EQ(folder.read("out"), "new");
  EXPECT_EQ(folder.names(), std::vector<std::string>{"out"});
}

TEST(FileSink, LeavesNothingBehindWithoutCommit) {
  const Folder folder;
  {
    FileSink sink(folder.path("out"));
    // More than any buffer, so that some of it is on the disk.
    sink.write(std::string(5000000, 'x'));
    EXPECT_EQ(folder.names().size(), 1U);
  }
  EXPECT_EQ(folder.names(), std::vector<std::string>{});
}

TEST(FileSink, WritesPiecesInOrder) {
  const Folder folder;
  FileSink sink(folder.path("out"));
  std::string expected;
  for (std::size_t i = 0; i < 300; ++i) {
    const std::string piece(i * 97 % 20011, static_cast<char>('a' + i % 26));
    sink.write(piece);
    expected += piece;
  }
  sink.commit();
  EXPECT_EQ(folder.read("out"), expected);
}

TEST(FileSink, SecretFilesAreTheOwnersAloneWhateverTheUmask) {
  const Folder folder;
  const mode_t before = ::umask(0);
  FileSink secret(folder.path("secret"), FileAccess::secret);
  FileSink open(folder.path("open"));
  ::umask(before);
  for (const std::string& name : folder.names()) {
    // Also while they have their temporary names.
    const bool is_secret = name.find("secret") == 0;
    EXPECT_EQ(folder.mode(name), is_secret ? 0600U : 0666U) << name;
  }
  secret.commit();
  open.commit();
  EXPECT_EQ(folder.mode("secret"), 0600U);
  EXPECT_EQ(folder.mode("open"), 0666U);
}

TEST(FileSink, RefusesAFileThatIsThere) {
  const Folder folder;
  folder.write("out", "old");
  EXPECT_EQ(error_of([&] {
              FileSink(folder.path("out"), FileAccess::normal, FileReplace::refuse_if_there);
            }),
            "cannot write '" + folder.path("out") + "': File exists");
  EXPECT_EQ(folder.read("out"), "old");
}

TEST(FileSink, RefusesAFileThatComesMeanwhile) {
  const Folder folder;
  {
    FileSink sink(folder.path("out"), FileAccess::normal, FileReplace::refuse_if_there);
    sink.write(std::string_view("late"));
    folder.write("out", "early");
    EXPECT_NE(error_of([&] { sink.commit(); }).find("File exists"), std::string::npos);
  }
  EXPECT_EQ(folder.read("out"), "early");
  EXPECT_EQ(folder.names(), std::vector<std::string>{"out"});
}

TEST(FileSink, CreatesARefusingFileAsAnyOther) {
  const Folder folder;
  FileSink sink(folder.path("out"), FileAccess::normal, FileReplace::refuse_if_there);
  sink.write(std::string_view("first"));
  sink.commit();
  EXPECT_EQ(folder.read("out"), "first");
  EXPECT_EQ(folder.names(), std::vector<std::string>{"out"});
}

TEST(FileSink, TellsWhyAPlaceCannotBeWritten) {
  const Folder folder;
  folder.write("file", "");
  std::filesystem::create_directory(folder.path("folder"));
  const auto error = [&](const std::string& name) {
    return error_of([&] { FileSink(folder.path(name)); });
  };
  EXPECT_EQ(error("missing/out"),
            "cannot write '" + folder.path("missing/out") + "': No such file or directory");
  EXPECT_EQ(error("folder"), "cannot write '" + folder.path("folder") + "': Is a directory");
  EXPECT_EQ(error("file/out"), "cannot write '" + folder.path("file/out") + "': Not a directory");
  EXPECT_EQ(error_of([] { FileSink sink(""); }), "cannot write '': No such file or directory");
  EXPECT_EQ(folder.names(), (std::vector<std::string>{"file", "folder"}));
}

TEST(FileSink, SeesAFullDisk) {
  FileSink sink("/dev/full");
  sink.write(std::string_view("x"));
  EXPECT_EQ(error_of([&] { sink.finish(); }), "cannot write '/dev/full': No space left on device");
}

TEST(FileSink, WritesStraightToWhatIsNoRegularFile) {
  const Folder folder;
  ASSERT_EQ(::mkfifo(folder.path("pipe").c_str(), 0600), 0);
  std::string got;
  std::thread reader([&] { got = folder.read("pipe"); });
  FileSink sink(folder.path("pipe"), FileAccess::secret, FileReplace::refuse_if_there);
  sink.write(std::string_view("through"));
  sink.commit();
  reader.join();
  EXPECT_EQ(got, "through");
  EXPECT_EQ(folder.names(), std::vector<std::string>{"pipe"});
}

TEST(FileSink, WritesToADescriptorOfItsOwnWhereItStands) {
  const Folder folder;
  const int descriptor = ::open(folder.path("log").c_str(), O_WRONLY | O_CREAT, 0600);
  ASSERT_GE(descriptor, 0);
  ASSERT_EQ(::write(descriptor, "first ", 6), 6);
  FileSink sink("/dev/fd/" + std::to_string(descriptor));
  sink.write(std::string_view("second "));
  sink.commit();
  ASSERT_EQ(::write(descriptor, "third", 5), 5);
  ::close(descriptor);
  EXPECT_EQ(folder.read("log"), "first second third");
}

TEST(FileSink, KeepsASymbolicLink) {
  const Folder folder;
  folder.write("real", "old");
  std::filesystem::create_symlink("real", folder.path("link"));
  FileSink sink(folder.path("link"));
  sink.write(std::string_view("new"));
  sink.commit();
  EXPECT_TRUE(std::filesystem::is_symlink(folder.path("link")));
  EXPECT_EQ(folder.read("real"), "new");
}

TEST(FileSource, ReadsInPiecesAndAnywhere) {
  const Folder folder;
  folder.write("in", "0123456789");
  FileSource source(folder.path("in"));
  EXPECT_EQ(source.size(), 10U);
  std::array<std::uint8_t, 4> four{};
  std::string got;
  while (const std::size_t count = source.read(four))
    got.append(four.begin(), four.begin() + count);
  EXPECT_EQ(got, "0123456789");
  source.read_at(5, four);
  EXPECT_EQ(std::string(four.begin(), four.end()), "5678");
  EXPECT_NE(error_of([&] { source.read_at(7, four); }).find("became shorter"), std::string::npos);
}

TEST(FileSource, TellsWhyAFileCannotBeRead) {
  const Folder folder;
  EXPECT_EQ(error_of([&] { FileSource(folder.path("missing")); }),
            "cannot read '" + folder.path("missing") + "': No such file or directory");
  EXPECT_EQ(error_of([&] { FileSource{folder.path()}; }),
            "cannot read '" + folder.path() + "': it is a folder");
}

TEST(FileSource, KnowsNoSizeOfADevice) {
  EXPECT_EQ(FileSource("/dev/null").size(), std::nullopt);
  EXPECT_EQ(read_file("/dev/null"), "");
}

TEST(MemorySource, GivesFewerBytesOnlyAtTheEnd) {
  const std::string text = "abcdefg";
  MemorySource source(bytes_of(text), "text");
  std::array<std::uint8_t, 3> three{};
  EXPECT_EQ(source.read(three), 3U);
  EXPECT_EQ(source.read(three), 3U);
  EXPECT_EQ(source.read(three), 1U);
  EXPECT_EQ(three[0], 'g');
  EXPECT_EQ(source.read(three), 0U);
}

}  // namespace
}  // namespace frostline
