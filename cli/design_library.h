// A folder of designs with an index: what batch makes, and where a user looks for the design that
// fits a link.
#pragma once

#include <optional>
#include <string>
#include <vector>

#include "polar/design.h"
#include "polar/design_json.h"

namespace frostline::cli {

// One line of the index.
struct LibraryEntry {
  std::string file;  // relative to the folder
  std::uint64_t block_length = 0;
  double qber = 0;
  double fer_target = 0;
  std::string construction;
  unsigned list = 1;
  std::string arithmetic;
  std::uint64_t frozen_count = 0;
  DesignLeakage leakage{};
  std::optional<double> predicted_fer;
  std::string predicted_kind;
  std::string code_sha256;
};

LibraryEntry library_entry(const std::string& file, double fer_target, const Design& design);

// The index as files hold it. Entries are sorted by N, p, FER target and file.
std::string index_to_json(std::vector<LibraryEntry> entries);
std::string index_to_csv(std::vector<LibraryEntry> entries);
// Throws InputError "NAME: ..." on anything but an index of this version.
std::vector<LibraryEntry> index_from_json(std::string_view text, std::string_view name);

// The entries of FOLDER/index.json; empty where there is no such file.
std::vector<LibraryEntry> read_index(const std::string& folder);
// Writes FOLDER/index.csv and FOLDER/index.json.
void write_index(const std::string& folder, const std::vector<LibraryEntry>& entries);

// Holds a folder for one batch at a time, and removes what an interrupted one left half-written.
class LibraryLock {
 public:
  // Makes the folder where it is missing (its parent must be there). Throws InputError when that
  // fails or another process holds the folder.
  explicit LibraryLock(std::string folder);
  ~LibraryLock();
  LibraryLock(const LibraryLock&) = delete;
  LibraryLock& operator=(const LibraryLock&) = delete;

 private:
  int descriptor_;
};

// Makes a folder; no error when it is there.
void make_folder(const std::string& path);

}  // namespace frostline::cli
