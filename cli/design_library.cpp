#include "cli/design_library.h"

#include <fcntl.h>
#include <sys/file.h>
#include <sys/stat.h>
#include <unistd.h>

#include <algorithm>
#include <cerrno>
#include <cstring>
#include <filesystem>
#include <tuple>

#include "cli/grid.h"
#include "decode/exchange/streams.h"
#include "polar/error.h"

namespace frostline::cli {
namespace {

constexpr std::uint64_t kVersion = 1;
constexpr const char* kFormat = "frostline-index";

void sort_entries(std::vector<LibraryEntry>& entries) {
  std::sort(entries.begin(), entries.end(), [](const LibraryEntry& a, const LibraryEntry& b) {
    return std::tie(a.block_length, a.qber, b.fer_target, a.file) <
           std::tie(b.block_length, b.qber, a.fer_target, b.file);
  });
}

Json entry_to_json(const LibraryEntry& entry) {
  Json object;
  object["file"] = entry.file;
  object["block_length"] = entry.block_length;
  object["qber"] = entry.qber;
  object["fer_target"] = entry.fer_target;
  object["construction"] = entry.construction;
  object["list"] = entry.list;
  object["arithmetic"] = entry.arithmetic;
  object["frozen_count"] = entry.frozen_count;
  object["leakage"] = to_json(entry.leakage);
  object["predicted_fer"] = entry.predicted_fer ? Json(*entry.predicted_fer) : Json(nullptr);
  object["predicted_kind"] = entry.predicted_kind;
  object["code_sha256"] = entry.code_sha256;
  return object;
}

DesignLeakage leakage_from_json(const Json& object, const std::string& where) {
  require_keys(object,
               {"bits", "efficiency", "syndrome_efficiency", "limit_bits", "limit_efficiency"}, {},
               where);
  DesignLeakage leakage{};
  leakage.bits = get_unsigned(object, "bits", where);
  leakage.efficiency = get_number(object, "efficiency", where);
  leakage.syndrome_efficiency = get_number(object, "syndrome_efficiency", where);
  if (!object.at("limit_bits").is_null()) {
    leakage.limit_bits = get_unsigned(object, "limit_bits", where);
    leakage.limit_efficiency = get_number(object, "limit_efficiency", where);
  }
  return leakage;
}

LibraryEntry entry_from_json(const Json& object, const std::string& where) {
  require_keys(object,
               {"file", "block_length", "qber", "fer_target", "construction", "list", "arithmetic",
                "frozen_count", "leakage", "predicted_fer", "predicted_kind", "code_sha256"},
               {}, where);
  LibraryEntry entry;
  entry.file = get_string(object, "file", where);
  entry.block_length = get_unsigned(object, "block_length", where);
  entry.qber = get_number(object, "qber", where);
  entry.fer_target = get_number(object, "fer_target", where);
  entry.construction = get_string(object, "construction", where);
  entry.list = static_cast<unsigned>(get_unsigned(object, "list", where));
  entry.arithmetic = get_string(object, "arithmetic", where);
  entry.frozen_count = get_unsigned(object, "frozen_count", where);
  entry.leakage = leakage_from_json(object.at("leakage"), where + ": leakage");
  if (!object.at("predicted_fer").is_null()) {
    entry.predicted_fer = get_number(object, "predicted_fer", where);
  }
  entry.predicted_kind = get_string(object, "predicted_kind", where);
  entry.code_sha256 = get_string(object, "code_sha256", where);
  return entry;
}

// Files that a killed process left under their temporary names. No other process can be at work
// on them while the folder is held.
void remove_unfinished(const std::string& folder) {
  namespace fs = std::filesystem;
  std::error_code error;
  for (fs::recursive_directory_iterator at(folder, error), end; at != end; at.increment(error)) {
    if (error) break;
    const std::string name = at->path().filename().string();
    const bool ours = name.find(".design.json.part-") != std::string::npos ||
                      name.find("index.json.part-") == 0 || name.find("index.csv.part-") == 0;
    if (ours && at->is_regular_file(error)) fs::remove(at->path(), error);
  }
  if (error) throw InputError("cannot read folder '" + folder + "': " + error.message());
}

}  // namespace

LibraryEntry library_entry(const std::string& file, double fer_target, const Design& design) {
  LibraryEntry entry;
  entry.file = file;
  entry.block_length = design.code.block_length().bits();
  entry.qber = design.qber;
  entry.fer_target = fer_target;
  entry.construction = design.construction.name;
  entry.list = design.list;
  entry.arithmetic = to_string(design.arithmetic);
  entry.frozen_count = design.code.frozen.frozen_count();
  entry.leakage = design_leakage(design);
  entry.predicted_fer = design.predicted.fer;
  entry.predicted_kind = design.predicted.kind;
  entry.code_sha256 = to_hex(code_sha256(design.code));
  return entry;
}

std::string index_to_json(std::vector<LibraryEntry> entries) {
  sort_entries(entries);
  Json root;
  root["format"] = kFormat;
  root["version"] = kVersion;
  root["designs"] = Json::array();
  for (const LibraryEntry& entry : entries) root["designs"].push_back(entry_to_json(entry));
  return root.dump(1) + "\n";
}

std::string index_to_csv(std::vector<LibraryEntry> entries) {
  sort_entries(entries);
  std::string csv =
      "file,block_length,qber,fer_target,construction,list,arithmetic,frozen_count,leakage_bits,"
      "efficiency,syndrome_efficiency,limit_bits,limit_efficiency,predicted_fer,predicted_kind,"
      "code_sha256\n";
  for (const LibraryEntry& entry : entries) {
    const auto& [bits, f, syndrome_f, limit_bits, limit_f] = entry.leakage;
    const std::string fields[] = {entry.file,
                                  std::to_string(entry.block_length),
                                  shortest(entry.qber),
                                  shortest(entry.fer_target),
                                  entry.construction,
                                  std::to_string(entry.list),
                                  entry.arithmetic,
                                  std::to_string(entry.frozen_count),
                                  std::to_string(bits),
                                  shortest(f),
                                  shortest(syndrome_f),
                                  limit_bits ? std::to_string(*limit_bits) : "",
                                  limit_f ? shortest(*limit_f) : "",
                                  entry.predicted_fer ? shortest(*entry.predicted_fer) : "",
                                  entry.predicted_kind,
                                  entry.code_sha256};
    for (const std::string& field : fields) csv += (&field == fields ? "" : ",") + field;
    csv += '\n';
  }
  return csv;
}

std::vector<LibraryEntry> index_from_json(std::string_view text, std::string_view name_view) {
  const std::string name(name_view);
  const Json root = parse_json(text, name);
  if (!root.is_object() || !root.contains("format") || root.at("format") != kFormat) {
    throw InputError(name + ": not an index of frostline designs");
  }
  if (!root.contains("version") || root.at("version") != kVersion) {
    throw InputError(name + ": another version of the index; this program reads version " +
                     std::to_string(kVersion));
  }
  require_keys(root, {"format", "version", "designs"}, {}, name);
  if (!root.at("designs").is_array()) throw InputError(name + ": 'designs' is not an array");
  std::vector<LibraryEntry> entries;
  for (const Json& object : root.at("designs")) {
    entries.push_back(
        entry_from_json(object, name + ": design " + std::to_string(entries.size() + 1)));
  }
  return entries;
}

std::vector<LibraryEntry> read_index(const std::string& folder) {
  const std::string path = folder + "/index.json";
  if (!std::filesystem::exists(path)) return {};
  return index_from_json(read_file(path), path);
}

void write_index(const std::string& folder, const std::vector<LibraryEntry>& entries) {
  FileSink csv(folder + "/index.csv");
  FileSink json(folder + "/index.json");
  csv.write(index_to_csv(entries));
  json.write(index_to_json(entries));
  csv.finish();
  json.finish();
  csv.commit();
  json.commit();
}

LibraryLock::LibraryLock(std::string folder) {
  make_folder(folder);
  descriptor_ = ::open(folder.c_str(), O_RDONLY | O_DIRECTORY | O_CLOEXEC);
  if (descriptor_ < 0) {
    throw InputError("cannot use folder '" + folder + "': " + std::strerror(errno));
  }
  if (::flock(descriptor_, LOCK_EX | LOCK_NB) != 0) {
    const int error = errno;
    ::close(descriptor_);
    throw InputError(
        "cannot use folder '" + folder +
        "': " + (error == EWOULDBLOCK ? "another batch is at work in it" : std::strerror(error)));
  }
  try {
    remove_unfinished(folder);
  } catch (...) {
    ::close(descriptor_);
    throw;
  }
}

LibraryLock::~LibraryLock() { ::close(descriptor_); }

void make_folder(const std::string& path) {
  if (::mkdir(path.c_str(), 0777) == 0) return;
  const int error = errno;
  if (error == EEXIST && std::filesystem::is_directory(path)) return;
  throw InputError("cannot make folder '" + path + "': " + std::strerror(error));
}

}  // namespace frostline::cli
