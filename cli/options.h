// Options of a command: Boost.Program_options with strict numbers and one-line errors.
#pragma once

#include <cstdint>
#include <iosfwd>
#include <optional>
#include <string>
#include <vector>

namespace frostline::cli {

// Describes and parses the options of one command. Every command has --help; computing commands
// have --threads, --simd and --quiet, and all have --json.
class Options {
 public:
  // positionals: names of the arguments without a dash, all required, in order.
  Options(std::string command, std::string summary, std::vector<std::string> positionals);

  // An option with a value ("qber", "P", "probability that ..."), a switch, or several values.
  Options& value(const std::string& name, const std::string& metavar, const std::string& help);
  Options& flag(const std::string& name, const std::string& help);
  Options& values(const std::string& name, const std::string& metavar, const std::string& help);
  // --threads, --simd, --quiet.
  Options& computing();
  // Text after the options in --help: an example, cautions.
  Options& epilogue(const std::string& text);

  // Parses. Returns false when --help was asked for and printed. Throws InputError. Applies
  // --threads and --simd.
  bool parse(const std::vector<std::string>& arguments);

  bool has(const std::string& name) const;
  // Value of an option or positional. REQUIRES: has(name) for the first; InputError
  // "missing --NAME" otherwise.
  std::string text(const std::string& name) const;
  std::optional<std::string> optional_text(const std::string& name) const;
  std::vector<std::string> texts(const std::string& name) const;
  // Strict numbers: the whole word, finite, no sign for unsigned ones.
  double number(const std::string& name) const;
  std::uint64_t whole(const std::string& name) const;
  std::optional<double> optional_number(const std::string& name) const;
  std::optional<std::uint64_t> optional_whole(const std::string& name) const;

  // Where the account for a person goes: stdout, or stderr where an output of the command takes
  // stdout.
  std::ostream& account() const;

  bool json() const { return has("json"); }
  bool quiet() const { return has("quiet"); }

 private:
  struct Entry {
    std::string name;
    std::string metavar;  // empty for a switch
    std::string help;
    bool several;
  };
  void print_help() const;

  std::string command_;
  std::string summary_;
  std::vector<std::string> positionals_;
  std::vector<Entry> entries_;
  std::string epilogue_;
  std::vector<std::pair<std::string, std::vector<std::string>>> given_;
};

// The whole word as a finite number. Throws InputError "WHAT: 'WORD' is not a number".
double parse_number(const std::string& word, const std::string& what);

// Throws InputError when a file would be written twice, or is read and written.
void require_distinct_files(const std::vector<std::string>& inputs,
                            const std::vector<std::string>& outputs);

// The cautions that the help of every command with key material carries.
extern const char* const kKeyCautions;

}  // namespace frostline::cli
