// A temporary folder for tests that work with files, and what a test looks at in it.
#pragma once

#include <sys/stat.h>

#include <algorithm>
#include <cerrno>
#include <cstdlib>
#include <filesystem>
#include <fstream>
#include <iterator>
#include <stdexcept>
#include <string>
#include <system_error>
#include <vector>

namespace frostline::testing {

// Removed with all it holds.
class Folder {
 public:
  Folder() {
    // mkdtemp puts six characters of its own in the place of the X.
    std::string pattern =
        (std::filesystem::temp_directory_path() / "frostline-test-XXXXXX").string();
    if (::mkdtemp(pattern.data()) == nullptr) {
      throw std::system_error(errno, std::generic_category(), "mkdtemp");
    }
    path_ = pattern;
  }
  ~Folder() {
    std::error_code ignored;  // a destructor must not throw; a folder left in /tmp does no harm
    std::filesystem::remove_all(path_, ignored);
  }
  Folder(const Folder&) = delete;
  Folder& operator=(const Folder&) = delete;

  const std::string& path() const { return path_; }
  std::string path(const std::string& name) const { return path_ + "/" + name; }
  // Names of what the folder holds, sorted.
  std::vector<std::string> names() const {
    std::vector<std::string> names;
    for (const auto& entry : std::filesystem::directory_iterator(path_)) {
      names.push_back(entry.path().filename().string());
    }
    std::sort(names.begin(), names.end());
    return names;
  }
  bool holds(const std::string& name) const { return std::filesystem::exists(path(name)); }
  std::string read(const std::string& name) const {
    std::ifstream file(path(name), std::ios::binary);
    if (!file) throw std::runtime_error("the test cannot read " + path(name));
    return {std::istreambuf_iterator<char>(file), std::istreambuf_iterator<char>()};
  }
  void write(const std::string& name, const std::string& contents) const {
    std::ofstream file(path(name), std::ios::binary | std::ios::trunc);
    file << contents;
    file.close();
    if (!file) throw std::runtime_error("the test cannot write " + path(name));
  }
  void remove(const std::string& name) const { std::filesystem::remove_all(path(name)); }
  // Permission bits.
  unsigned mode(const std::string& name) const {
    struct stat status {};
    if (::stat(path(name).c_str(), &status) != 0) {
      throw std::system_error(errno, std::generic_category(), path(name));
    }
    return status.st_mode & 07777U;
  }

 private:
  std::string path_;
};

}  // namespace frostline::testing
