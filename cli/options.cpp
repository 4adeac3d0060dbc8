#include "cli/options.h"

#include <sys/stat.h>
#include <tbb/global_control.h>

#include <algorithm>
#include <boost/program_options.hpp>
#include <charconv>
#include <cmath>
#include <filesystem>
#include <iostream>
#include <memory>

#include "polar/error.h"
#include "polar/simd.h"

namespace frostline::cli {
namespace {

namespace po = boost::program_options;

// What Boost calls the arguments without a dash: nothing that a user types for an option.
constexpr const char* kPositional = "arguments without a dash";

// The name and the dash-letter form of Boost ("output,o").
std::string long_name(const std::string& name) { return name.substr(0, name.find(',')); }

std::string shown_name(const std::string& name) {
  const std::size_t comma = name.find(',');
  if (comma == std::string::npos) return "--" + name;
  return "-" + name.substr(comma + 1) + ", --" + name.substr(0, comma);
}

void set_threads(std::uint64_t threads) {
  if (threads == 0 || threads > 1024) throw InputError("--threads: from 1 to 1024");
  // Lives as long as the program: the limit holds while the object does.
  static std::unique_ptr<tbb::global_control> limit;
  limit = std::make_unique<tbb::global_control>(tbb::global_control::max_allowed_parallelism,
                                                static_cast<std::size_t>(threads));
}

// Where a file is or would be, however its name is spelled; the name itself where nobody can tell.
std::filesystem::path place(const std::string& name) {
  std::error_code error;
  std::filesystem::path path = std::filesystem::absolute(name, error);
  if (!error) path = std::filesystem::weakly_canonical(path, error);
  return error ? std::filesystem::path(name) : path;
}

std::string wrapped(const std::string& text, std::size_t indent) {
  constexpr std::size_t kColumns = 96;
  std::string out;
  std::size_t column = indent;
  std::size_t first = 0;
  while (first < text.size()) {
    const std::size_t end = std::min(text.find(' ', first), text.size());
    if (column + (end - first) > kColumns && column > indent) {
      out += '\n' + std::string(indent, ' ');
      column = indent;
    } else if (first > 0) {
      out += ' ';
      ++column;
    }
    out += text.substr(first, end - first);
    column += end - first;
    first = end + 1;
  }
  return out;
}

}  // namespace

const char* const kKeyCautions =
    "Cautions: this is no certified security module. The classical channel that carries message,\n"
    "receipt and verdict must be authenticated. Every leaked bit that the report lists must reach\n"
    "privacy amplification. Certification and the operator's own rules come first. Files with key\n"
    "bits are created with mode 0600; guard and wipe them as key material.\n";

Options::Options(std::string command, std::string summary, std::vector<std::string> positionals)
    : command_(std::move(command)),
      summary_(std::move(summary)),
      positionals_(std::move(positionals)) {
  flag("help,h", "this text");
  flag("json", "print one JSON object on stdout and nothing else");
}

Options& Options::value(const std::string& name, const std::string& metavar,
                        const std::string& help) {
  entries_.push_back({name, metavar, help, false});
  return *this;
}

Options& Options::flag(const std::string& name, const std::string& help) {
  entries_.push_back({name, "", help, false});
  return *this;
}

Options& Options::values(const std::string& name, const std::string& metavar,
                         const std::string& help) {
  entries_.push_back({name, metavar, help, true});
  return *this;
}

Options& Options::computing() {
  value("threads", "T", "worker threads; files are read and written by one more (all cores)");
  value("simd", "NAME", "use these vector instructions and nothing above them (best there is)");
  flag("quiet", "no progress line and no account");
  return *this;
}

Options& Options::epilogue(const std::string& text) {
  epilogue_ = text;
  return *this;
}

void Options::print_help() const {
  std::cout << "frostline " << command_;
  for (const std::string& positional : positionals_) std::cout << ' ' << positional;
  std::cout << " [options]\n" << summary_ << "\n\n";
  constexpr std::size_t kIndent = 30;
  for (const Entry& entry : entries_) {
    std::string left = "  " + shown_name(entry.name);
    if (!entry.metavar.empty()) left += ' ' + entry.metavar;
    if (left.size() < kIndent - 1) {
      left.resize(kIndent, ' ');
    } else {
      left += '\n' + std::string(kIndent, ' ');
    }
    std::cout << left << wrapped(entry.help, kIndent) << '\n';
  }
  if (!epilogue_.empty()) std::cout << '\n' << epilogue_;
}

bool Options::parse(const std::vector<std::string>& arguments) {
  po::options_description description;
  for (const Entry& entry : entries_) {
    if (entry.metavar.empty()) {
      description.add_options()(entry.name.c_str(), po::bool_switch());
    } else if (entry.several) {
      description.add_options()(entry.name.c_str(),
                                po::value<std::vector<std::string>>()->multitoken());
    } else {
      description.add_options()(entry.name.c_str(), po::value<std::string>());
    }
  }
  po::options_description all = description;
  all.add_options()(kPositional, po::value<std::vector<std::string>>());
  po::positional_options_description positional;
  positional.add(kPositional, -1);
  po::variables_map map;
  try {
    // No guessing of shortened names: a script must not change its meaning with the next option.
    const int style =
        po::command_line_style::default_style & ~po::command_line_style::allow_guessing;
    po::store(
        po::command_line_parser(arguments).options(all).positional(positional).style(style).run(),
        map);
  } catch (const po::error& error) {
    throw InputError(command_ + ": " + error.what());
  }
  for (const Entry& entry : entries_) {
    const std::string name = long_name(entry.name);
    if (!map.count(name)) continue;
    if (entry.metavar.empty()) {
      if (map[name].as<bool>()) given_.emplace_back(name, std::vector<std::string>{});
    } else if (entry.several) {
      given_.emplace_back(name, map[name].as<std::vector<std::string>>());
    } else {
      given_.emplace_back(name, std::vector<std::string>{map[name].as<std::string>()});
    }
  }
  if (has("help")) {
    print_help();
    return false;
  }
  const auto words = map.count(kPositional) ? map[kPositional].as<std::vector<std::string>>()
                                            : std::vector<std::string>{};
  if (words.size() > positionals_.size()) {
    throw InputError(command_ + ": unexpected argument '" + words[positionals_.size()] + "'");
  }
  if (words.size() < positionals_.size()) {
    throw InputError(command_ + ": missing " + positionals_[words.size()] + "; see 'frostline " +
                     command_ + " --help'");
  }
  for (std::size_t i = 0; i < words.size(); ++i) {
    given_.emplace_back(positionals_[i], std::vector<std::string>{words[i]});
  }
  if (const auto threads = optional_whole("threads")) set_threads(*threads);
  if (has("simd")) force_simd(text("simd"));
  return true;
}

bool Options::has(const std::string& name) const {
  return std::any_of(given_.begin(), given_.end(),
                     [&](const auto& given) { return given.first == name; });
}

std::vector<std::string> Options::texts(const std::string& name) const {
  for (const auto& [given, words] : given_) {
    if (given == name) return words;
  }
  for (const Entry& entry : entries_) {
    if (long_name(entry.name) == name) {
      throw InputError(command_ + ": missing " + shown_name(entry.name) + " " + entry.metavar);
    }
  }
  throw InputError(command_ + ": missing " + name);
}

std::string Options::text(const std::string& name) const { return texts(name).front(); }

std::optional<std::string> Options::optional_text(const std::string& name) const {
  if (!has(name)) return std::nullopt;
  return text(name);
}

double parse_number(const std::string& word, const std::string& what) {
  double value = 0;
  const char* end = word.data() + word.size();
  const auto parsed = std::from_chars(word.data(), end, value);
  if (parsed.ec != std::errc() || parsed.ptr != end || !std::isfinite(value)) {
    throw InputError(what + ": '" + word + "' is not a number");
  }
  return value;
}

double Options::number(const std::string& name) const {
  return parse_number(text(name), "--" + name);
}

std::uint64_t Options::whole(const std::string& name) const {
  const std::string word = text(name);
  std::uint64_t value = 0;
  const char* end = word.data() + word.size();
  const auto parsed = std::from_chars(word.data(), end, value);
  if (parsed.ec != std::errc() || parsed.ptr != end) {
    throw InputError("--" + name + ": '" + word + "' is not a whole number from 0 up");
  }
  return value;
}

std::optional<double> Options::optional_number(const std::string& name) const {
  if (!has(name)) return std::nullopt;
  return number(name);
}

std::optional<std::uint64_t> Options::optional_whole(const std::string& name) const {
  if (!has(name)) return std::nullopt;
  return whole(name);
}

std::ostream& Options::account() const {
  for (const auto& [name, words] : given_) {
    for (const std::string& word : words) {
      if (word == "/dev/stdout" || word == "/dev/fd/1" || word == "/proc/self/fd/1") {
        return std::cerr;
      }
    }
  }
  return std::cout;
}

void require_distinct_files(const std::vector<std::string>& inputs,
                            const std::vector<std::string>& outputs) {
  // One regular file, there or to be, however it is spelled.
  const auto same = [](const std::string& a, const std::string& b) {
    struct stat one {};
    struct stat two {};
    const bool there = ::stat(a.c_str(), &one) == 0 && ::stat(b.c_str(), &two) == 0;
    if (!there) return place(a) == place(b);
    return S_ISREG(one.st_mode) && one.st_dev == two.st_dev && one.st_ino == two.st_ino;
  };
  for (std::size_t i = 0; i < outputs.size(); ++i) {
    for (std::size_t j = i + 1; j < outputs.size(); ++j) {
      if (same(outputs[i], outputs[j])) {
        throw InputError("'" + outputs[i] + "' is named for two outputs");
      }
    }
    for (const std::string& input : inputs) {
      if (same(outputs[i], input)) {
        throw InputError("output '" + outputs[i] + "' is also an input");
      }
    }
  }
}

}  // namespace frostline::cli
