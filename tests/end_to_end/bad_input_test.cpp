// Bad usage, bad input and bad output: one line on stderr, status 2, nothing left behind.
#include <gtest/gtest.h>
#include <sys/mount.h>
#include <sys/wait.h>
#include <unistd.h>

#include <algorithm>
#include <cctype>
#include <cerrno>
#include <chrono>
#include <csignal>
#include <cstring>
#include <filesystem>
#include <functional>
#include <thread>

#include "tests/end_to_end/whole_job.h"

namespace frostline::testing {
namespace {

namespace fs = std::filesystem;

std::string replaced(std::string text, const std::string& from, const std::string& to) {
  const std::size_t at = text.find(from);
  if (at == std::string::npos) throw std::runtime_error("nothing to replace: " + from);
  return text.replace(at, from.size(), to);
}

std::string lower_case(std::string text) {
  for (char& c : text) c = static_cast<char>(std::tolower(static_cast<unsigned char>(c)));
  return text;
}

// A folder with one whole run in it, made once: design d.json, keys a and b (16 blocks of 256 and
// no rest), message m, receipt r (4 groups), verdict v, provisional key p; another run of another
// design with names that end in 2; a text key t; a folder called folder.
class BadInput : public ::testing::Test {
 protected:
  static void SetUpTestSuite() {
    folder_ = new Folder();
    must({"design", "--block-length", "256", "--qber", "0.02", "--fer", "0.001", "-o", "d.json"});
    must({"design", "--block-length", "256", "--qber", "0.03", "--fer", "0.001", "-o", "d2.json"});
    must({"design", "--block-length", "256", "--qber", "0.02", "--frozen", "120", "--check-bits",
          "0", "-o", "d0.json"});
    must({"sample", "--bits", "4096", "--qber", "0.02", "--seed", "3", "-o", "a", "b"});
    must({"sample", "--bits", "4104", "--qber", "0.02", "--seed", "3", "-o", "a-long", "b-long"});
    must({"sample", "--bits", "248", "--qber", "0.02", "-o", "short", "short-b"});
    must({"sample", "--bits", "4096", "--qber", "0.02", "--key-format", "text", "-o", "t", "t-b"});
    for (const std::string run : {"", "2"}) {
      must({"syndrome", "d" + run + ".json", "a", "-o", "m" + run});
      must({"reconcile", "d" + run + ".json", "b", "m" + run, "-o", "p" + run, "--receipt",
            "r" + run, "--group", "1024"});
      must({"settle", "d" + run + ".json", "a", "m" + run, "r" + run, "-o", "s" + run, "--verdict",
            "v" + run});
    }
    must({"syndrome", "d0.json", "a", "-o", "m0"});
    // The same design and key once more: another session, the same sizes.
    must({"syndrome", "d.json", "a", "-o", "m3"});
    must({"reconcile", "d.json", "b", "m3", "-o", "p3", "--receipt", "r3", "--group", "1024"});
    fs::create_directory(folder_->path("folder"));
    folder_->write("empty", "");
    names_ = folder_->names();
  }
  static void TearDownTestSuite() {
    delete folder_;
    folder_ = nullptr;
  }
  static void must(const Arguments& arguments) {
    const CommandResult result = run_command(*folder_, arguments);
    ASSERT_EQ(result.status, 0) << arguments.front() << ": " << result.err;
  }

  // Runs a command that must fail, and returns its one line without "frostline: ".
  static std::string error_of(const Arguments& arguments) {
    const CommandResult result = run_command(*folder_, arguments);
    std::string words;
    for (const std::string& word : arguments) words += word + ' ';
    EXPECT_EQ(result.status, 2) << words << result.err;
    EXPECT_EQ(result.out, "") << words;
    EXPECT_EQ(std::count(result.err.begin(), result.err.end(), '\n'), 1) << words << result.err;
    EXPECT_EQ(result.err.rfind("frostline: ", 0), 0U) << words << result.err;
    EXPECT_EQ(result.err.find("unexpected:"), std::string::npos) << words << result.err;
    for (const std::string& name : folder_->names()) {
      const bool expected = std::find(names_.begin(), names_.end(), name) != names_.end();
      EXPECT_TRUE(expected) << words << "left " << name << " behind";
      if (!expected) folder_->remove(name);  // so that it fails this case alone
    }
    if (result.err.size() < 12) return result.err;
    return result.err.substr(11, result.err.size() - 12);
  }
  static void expect_error(const Arguments& arguments, const std::string& part) {
    const std::string error = error_of(arguments);
    EXPECT_NE(error.find(part), std::string::npos) << "'" << part << "' is not in: " << error;
  }
  // The same with a file of this name and contents there meanwhile.
  static void expect_error_with(const std::string& name, const std::string& contents,
                                const Arguments& arguments, const std::string& part) {
    folder_->write(name, contents);
    names_.push_back(name);
    std::sort(names_.begin(), names_.end());
    expect_error(arguments, part);
    folder_->remove(name);
    names_ = folder_->names();
  }

  static Folder* folder_;
  static std::vector<std::string> names_;
};
Folder* BadInput::folder_ = nullptr;
std::vector<std::string> BadInput::names_;

const Arguments kDesign = {"design", "-o", "out"};
const Arguments kReconcile = {"reconcile", "d.json", "b", "m", "-o", "out", "--receipt", "out2"};
const Arguments kSettle = {"settle", "d.json", "a", "m", "r", "-o", "out", "--verdict", "out2"};

Arguments reconcile_of(const std::string& design, const std::string& key,
                       const std::string& message) {
  return {"reconcile", design, key, message, "-o", "out", "--receipt", "out2", "--report", "out3"};
}
Arguments settle_of(const std::string& message, const std::string& receipt) {
  return {"settle", "d.json", "a", message, receipt, "-o", "out", "--verdict", "out2"};
}
Arguments confirm_of(const std::string& key, const std::string& receipt,
                     const std::string& verdict) {
  return {"confirm", key, receipt, verdict, "-o", "out"};
}

// ---------------------------------------------------------------- usage

TEST_F(BadInput, UsageIsToldInTheProgramsWords) {
  struct Case {
    Arguments arguments;
    const char* part;
  };
  const std::vector<Case> cases = {
      {{"polish"}, "unknown command 'polish'"},
      {{"--polish"}, "unknown command '--polish'"},
      {{"design", "--polish"}, "option '--polish'"},
      {{"syndrome", "d.json", "a", "-o", "out", "--polish", "3"}, "option '--polish'"},
      {{"syndrome", "d.json", "a", "-o"}, "option '--output' is missing"},
      {{"syndrome", "d.json", "a", "--lanes"}, "option '--lanes' is missing"},
      {{"syndrome", "d.json", "a", "-o", "out", "-o", "out2"}, "more than once"},
      {{"syndrome", "d.json", "a", "-o", "out", "--lane", "4"}, "option '--lane'"},
      {{"syndrome", "d.json", "a", "-o", "out", "--json=yes"}, "'--json'"},
      {{"syndrome", "--positional", "d.json", "--positional", "a", "-o", "out"},
       "option '--positional'"},
      {{"syndrome", "d.json"}, "missing KEY"},
      {{"syndrome", "d.json", "a"}, "missing -o, --output FILE"},
      {{"syndrome", "d.json", "a", "b", "-o", "out"}, "unexpected argument 'b'"},
      {{"reconcile", "d.json", "b", "m", "-o", "out"}, "missing --receipt FILE"},
      {{"settle", "d.json", "a", "m", "r", "-o", "out"}, "missing --verdict FILE"},
      {{"syndrome", "d.json", "a", "-o", "out", "--threads", "0"}, "--threads"},
      {{"syndrome", "d.json", "a", "-o", "out", "--threads", "2000"}, "--threads"},
      {{"syndrome", "d.json", "a", "-o", "out", "--threads", "many"}, "'many'"},
      {{"syndrome", "d.json", "a", "-o", "out", "--lanes", "3"}, "lanes 3"},
      {{"syndrome", "d.json", "a", "-o", "out", "--lanes", "0"}, "lanes 0"},
      {{"syndrome", "d.json", "a", "-o", "out", "--lanes", "1024"}, "lanes 1024"},
      {{"syndrome", "d.json", "a", "-o", "out", "--lanes", "-4"}, "'-4'"},
      {{"syndrome", "d.json", "a", "-o", "out", "--key-format", "hex"}, "key format 'hex'"},
      {{"syndrome", "d.json", "a", "-o", "out", "--simd", "nonsense"}, "'nonsense'"},
      {{"syndrome", "d.json", "a", "-o", "out", "--bits", "5000"}, "5000 bits take 625"},
      {{"syndrome", "d.json", "a", "-o", "out", "--test-only-seed", "x"}, "'x'"},
      {{"sample", "--bits", "8", "--qber", "0.1", "-o", "out"}, "two files"},
      {{"sample", "--bits", "0", "--qber", "0.1", "-o", "out", "out2"}, "--bits"},
      {{"sample", "--bits", "8", "--qber", "1.5", "-o", "out", "out2"}, "1.5"},
      {{"limits", "--block-length", "1024", "--qber", "0.02", "--fer", "0"}, "--fer"},
      {{"limits", "--block-length", "1000", "--qber", "0.02"}, "1000"},
      {{"inspect", "d.json", "--qber", "0.5"}, "--qber"},
      {{"inspect", "d.json", "--clock-mhz", "0"}, "--clock-mhz"},
      {{"vectors", "d.json"}, "missing -o, --output DIR"},
      {{"vectors", "d.json", "-o", "out", "--count", "2"}, "--count"},
      {{"vectors", "d.json", "-o", "out", "--arithmetic", "exact"}, "--arithmetic"},
      {{"vectors", "d.json", "-o", "out", "--list", "3"}, "--list"},
      {{"vectors", "d.json", "-o", "out", "--list", "4", "--messages"}, "--messages"},
      {{"vectors", "d.json", "-o", "a/out"}, "cannot make folder 'a/out'"},
      {{"vectors", "d.json", "-o", "out", "--answers", "a"}, "--answers goes with --check"},
      {{"vectors", "--check", "folder"}, "missing --answers FILE"},
      {{"vectors", "--check", "folder", "--answers", "a"}, "manifest.json"},
      {{"export", "d.json", "-o", "out"}, "missing --as FORMAT"},
      {{"export", "d.json", "--as", "csv"}, "missing -o, --output FILE"},
      {{"export", "d.json", "--as", "verilog", "-o", "out"}, "unknown format 'verilog'"},
      {{"export", "d.json", "--as", "hex-memory", "--word-bits", "24", "-o", "out"},
       "24 does not divide the block length 256"},
      {{"export", "d.json", "--as", "hex-memory", "--word-bits", "0", "-o", "out"}, "--word-bits"},
      {{"export", "d.json", "--as", "hex-memory", "--word-bits", "512", "-o", "out"},
       "512 does not divide"},
      {{"export", "d.json", "--as", "csv", "--word-bits", "8", "-o", "out"}, "hex-memory"},
      {{"export", "d.json", "--as", "csv", "--index-order", "reversed", "-o", "out"},
       "index order 'reversed'"},
      {{"export", "d.json", "--as", "vhdl", "--name", "a__b", "-o", "out"}, "'a__b'"},
      {{"export", "d.json", "--as", "vhdl", "--array", "1st", "-o", "out"}, "'1st'"},
      {{"export", "d.json", "--as", "csv", "-o", "d.json"}, "also an input"},
      {{"inspect", "d.json", "--processing-elements", "0"}, "--processing-elements"},
      {{"inspect", "d.json", "--llr-bits", "1"}, "--llr-bits"},
      {{"inspect", "d.json", "--sorter", "quick"}, "'quick'"},
      {kReconcile + Arguments{"--phase-error", "0.7"}, "--phase-error"},
      {kReconcile + Arguments{"--group", "all"}, "'all'"},
      {{"reconcile", "d0.json", "b", "m0", "-o", "out", "--receipt", "out2", "--group", "512"},
       "no check bits"},
  };
  for (const Case& each : cases) expect_error(each.arguments, each.part);
}

TEST_F(BadInput, DesignNeedsANumberOfItsRange) {
  const Arguments rest = {"--fer", "0.1"};
  for (const std::string word :
       {"0", "0.5", "0.7", "abc", "nan", "inf", "-inf", "-0.1", "", "0.02x", "1e999", "0,02"}) {
    const std::string error =
        error_of(kDesign + Arguments{"--block-length", "256", "--qber", word} + rest);
    EXPECT_NE(lower_case(error).find("qber"), std::string::npos) << error;
  }
  for (const std::string word : {"1000", "4", "33554432", "0", "-8", "8.0", "1e3", ""}) {
    const std::string error =
        error_of(kDesign + Arguments{"--block-length", word, "--qber", "0.02"} + rest);
    EXPECT_NE(error.find("block"), std::string::npos) << error;
    if (!word.empty()) {
      EXPECT_NE(error.find(word), std::string::npos) << error;
    }
  }
  const Arguments length = {"--block-length", "256", "--qber", "0.02"};
  for (const std::string word : {"0", "1", "1.5", "-1", "nan", "often"}) {
    const std::string error = error_of(kDesign + length + Arguments{"--fer", word});
    EXPECT_NE(lower_case(error).find("fer"), std::string::npos) << error;
    EXPECT_NE(error.find(word), std::string::npos) << error;
  }
}

TEST_F(BadInput, DesignNeedsOneGoalAndOptionsThatExist) {
  const Arguments length = kDesign + Arguments{"--block-length", "256", "--qber", "0.02"};
  expect_error(length, "give one of --fer");
  expect_error(length + Arguments{"--fer", "0.1", "--frozen", "100"}, "only one of");
  expect_error(length + Arguments{"--best-key", "--efficiency", "1.5"}, "only one of");
  expect_error(length + Arguments{"--fer", "0.1", "--phase-error", "0.1"}, "--phase-error");
  expect_error(length + Arguments{"--best-key", "--phase-error", "0.6"},
               "0.6 is not from 0 to 0.5");
  expect_error(length + Arguments{"--frozen", "257"}, "257");
  expect_error(length + Arguments{"--efficiency", "0.01"}, "fficiency 0.01");
  expect_error(length + Arguments{"--efficiency", "50"}, "fficiency 50");
  expect_error(length + Arguments{"--fer", "0.1", "--check-bits", "7"}, "7");
  expect_error(length + Arguments{"--fer", "0.1", "--precoding", "state9"}, "state9");
  expect_error(length + Arguments{"--fer", "0.1", "--construction", "guess"}, "'guess'");
  for (const char* word :
       {"planes", "planes:1", "planes:8", "integer:6", "integer:6:32", "float"}) {
    expect_error(length + Arguments{"--fer", "0.1", "--arithmetic", word}, word);
  }
}

TEST_F(BadInput, OutputsMustNotMeetEachOtherOrAnInput) {
  expect_error({"reconcile", "d.json", "b", "m", "-o", "out", "--receipt", "out"}, "two outputs");
  expect_error({"reconcile", "d.json", "b", "m", "-o", "out", "--receipt", "./out"}, "two outputs");
  expect_error(
      {"reconcile", "d.json", "b", "m", "-o", "out", "--receipt", folder_->path("folder/../out")},
      "two outputs");
  expect_error(kReconcile + Arguments{"--rest", "out2"}, "two outputs");
  expect_error({"settle", "d.json", "a", "m", "r", "-o", "out", "--verdict", "out"}, "two outputs");
  expect_error({"sample", "--bits", "8", "--qber", "0", "-o", "out", "out"}, "two outputs");
  expect_error({"reconcile", "d.json", "b", "m", "-o", "b", "--receipt", "out"}, "also an input");
  expect_error({"reconcile", "d.json", "b", "m", "-o", "./b", "--receipt", "out"}, "also an input");
  expect_error({"settle", "d.json", "a", "m", "r", "-o", "out", "--verdict", "r"}, "also an input");
  expect_error({"confirm", "p", "r", "v", "-o", "p"}, "also an input");
  expect_error({"syndrome", "d.json", "a", "-o", "a"}, "also an input");
}

// ---------------------------------------------------------------- files that are not there

TEST_F(BadInput, FilesThatCannotBeReadAreNamed) {
  for (const std::string name : {"missing", "folder", "missing/file", "d.json/file"}) {
    const std::string part = "cannot read '" + name + "'";
    expect_error({"inspect", name}, part);
    expect_error({"syndrome", name, "a", "-o", "out"}, part);
    expect_error({"syndrome", "d.json", name, "-o", "out"}, part);
    expect_error(reconcile_of(name, "b", "m"), part);
    expect_error(reconcile_of("d.json", name, "m"), part);
    expect_error(reconcile_of("d.json", "b", name), part);
    expect_error(settle_of(name, "r"), part);
    expect_error(settle_of("m", name), part);
    expect_error(confirm_of(name, "r", "v"), part);
    expect_error(confirm_of("p", name, "v"), part);
    expect_error(confirm_of("p", "r", name), part);
    expect_error(kDesign + Arguments{"--block-length", "256", "--qber", "0.02", "--mask", name},
                 part);
  }
}

TEST_F(BadInput, OutputsThatCannotBeWrittenAreNamed) {
  for (const std::string name : {"missing/out", "folder", "d.json/out", ""}) {
    const std::string part = "cannot write '" + name + "'";
    expect_error({"design", "--block-length", "8", "--qber", "0.02", "--fer", "0.1", "-o", name},
                 part);
    expect_error({"sample", "--bits", "8", "--qber", "0.02", "-o", "out", name}, part);
    expect_error({"syndrome", "d.json", "a", "-o", name}, part);
    expect_error({"reconcile", "d.json", "b", "m", "-o", name, "--receipt", "out"}, part);
    expect_error({"reconcile", "d.json", "b", "m", "-o", "out", "--receipt", name}, part);
    expect_error(kReconcile + Arguments{"--rest", name}, part);
    expect_error({"settle", "d.json", "a", "m", "r", "-o", "out", "--verdict", name}, part);
    expect_error({"confirm", "p", "r", "v", "-o", name}, part);
  }
}

TEST_F(BadInput, AMessageThatIsThereIsNotReplaced) {
  const std::string before = folder_->read("m");
  expect_error({"syndrome", "d.json", "a", "-o", "m"}, "send a message that is there again");
  EXPECT_EQ(folder_->read("m"), before);
}

// ---------------------------------------------------------------- keys

TEST_F(BadInput, KeysThatDoNotFit) {
  expect_error({"syndrome", "d.json", "short", "-o", "out"},
               "key 'short' holds 248 bits, less than one block of 256");
  expect_error({"syndrome", "d.json", "empty", "-o", "out"}, "'empty' is empty");
  expect_error({"syndrome", "d.json", "empty", "-o", "out", "--key-format", "text"}, "is empty");
  expect_error(reconcile_of("d.json", "b-long", "m"),
               "key 'b-long' holds 4104 bits, but message 'm' was made of a key of 4096");
  expect_error(reconcile_of("d.json", "short", "m"), "4096");
  expect_error({"settle", "d.json", "a-long", "m", "r", "-o", "out", "--verdict", "out2"},
               "key 'a-long' holds 4104 bits");
  expect_error({"syndrome", "d.json", "t", "-o", "out", "--key-format", "text", "--bits", "4095"},
               "holds 4096 bits, not 4095");
  expect_error(confirm_of("short", "r", "v"), "key 'short' holds 248 bits, but the receipt");
  expect_error(confirm_of("empty", "r", "v"), "key 'empty' holds 0 bits, but the receipt");
}

TEST_F(BadInput, ATextKeyWithALetterTellsWhere) {
  std::string text = folder_->read("t");
  text.insert(1000, "\n\n");
  text[1007] = 'x';
  expect_error_with("letter", text,
                    {"syndrome", "d.json", "letter", "-o", "out", "--key-format", "text"},
                    "letter: line 3, column 6: 'x' is neither 0 nor 1");
  // A packed key taken for a text.
  expect_error({"syndrome", "d.json", "a", "-o", "out", "--key-format", "text"},
               "a: line 1, column ");
}

TEST_F(BadInput, AProvisionalKeyOfAnotherRunIsNotConfirmed) {
  // A key of the very same size: only the tags tell that it is another one.
  std::string other = folder_->read("p");
  other[other.size() / 2] = static_cast<char>(other[other.size() / 2] ^ 1);
  expect_error_with("other", other, confirm_of("other", "r", "v"),
                    "'other' is not the provisional key");
}

// ---------------------------------------------------------------- designs

TEST_F(BadInput, DesignsThatWereEditedOrAreNone) {
  const std::string design = folder_->read("d.json");
  const std::string hex = Json::parse(design).at("frozen_hex");
  struct Case {
    std::string contents;
    const char* part;
  };
  std::vector<Case> cases = {
      {"", "not JSON"},
      {"frozen", "not JSON"},
      {design + "x", "not JSON"},
      {design.substr(0, design.size() / 2), "not JSON"},
      {"[]", "not a frostline design"},
      {"{}", "not a frostline design"},
      {"{\"format\": \"frostline-receipt\"}", "not a frostline design"},
      {std::string(100000, '['), "not JSON"},
      {replaced(design, "\"version\": 1", "\"version\": 2"), "another version"},
      {replaced(design, "\"version\": 1,", ""), "another version"},
      {replaced(design, "\"version\": 1", "\"version\": 1e999"), "too large"},
      {replaced(design, "\"qber\": 0.02", "\"qber\": 0.02, \"colour\": 3"), "unknown key 'colour'"},
      {replaced(design, "\"precoding\": \"none\",", ""), "key 'precoding' is missing"},
      {replaced(design, "\"qber\": 0.02", "\"qber\": 0.02, \"qber\": 0.03"),
       "key 'qber' stands twice"},
      {replaced(design, "\"qber\": 0.02", "\"qber\": 0.7"), "qber"},
      {replaced(design, "\"qber\": 0.02", "\"qber\": \"0.02\""), "'qber' is not a number"},
      {replaced(design, "\"qber\": 0.02", "\"qber\": 0.021"), "leakage"},
      {replaced(design, "\"block_length\": 256", "\"block_length\": 250"), "250"},
      {replaced(design, "\"block_length\": 256", "\"block_length\": 512"), "hexadecimal digits"},
      {replaced(design, "\"block_length\": 256", "\"block_length\": -256"), "block_length"},
      {replaced(design, "\"precoding\": \"none\"", "\"precoding\": \"state8\""), "code_sha256"},
      {replaced(design, "\"check_bits\": 11", "\"check_bits\": 16"), "code_sha256"},
      {replaced(design, "\"check_bits\": 11", "\"check_bits\": 12"), "12"},
      {replaced(design, "\"list\": 1", "\"list\": 2"), "sha256"},
      {replaced(design, "\"list\": 1", "\"list\": 3"), "list size 3"},
      {replaced(design, hex, hex.substr(1)), "hexadecimal digits"},
      {replaced(design, hex, "g" + hex.substr(1)), "is no hexadecimal digit"},
  };
  // Another digit: another number of frozen indices, or the digest tells.
  for (std::size_t k = 0; k < hex.size(); k += 7) {
    std::string flipped = hex;
    flipped[k] = flipped[k] == '0' ? '8' : '0';
    if (flipped == hex) continue;
    cases.push_back({replaced(design, hex, flipped), "frozen_count"});
  }
  for (const Case& each : cases) {
    expect_error_with("bad.json", each.contents, {"inspect", "bad.json"}, each.part);
    expect_error_with("bad.json", each.contents, {"syndrome", "bad.json", "a", "-o", "out"},
                      "bad.json");
  }
  // The same number of frozen indices: two digits that trade places.
  std::string swapped = hex;
  const std::size_t first = swapped.find_first_not_of('f');
  std::swap(swapped[first], swapped[swapped.find_last_not_of(swapped[first])]);
  expect_error_with("bad.json", replaced(design, hex, swapped), {"inspect", "bad.json"},
                    "code_sha256");
}

TEST_F(BadInput, EveryFlippedDigitOfADigestIsSeen) {
  const std::string design = folder_->read("d.json");
  for (const std::string key : {"\"code_sha256\": \"", "\"sha256\": \""}) {
    const std::size_t start = design.find(key) + key.size();
    for (std::size_t k = 0; k < 64; k += 21) {
      std::string flipped = design;
      flipped[start + k] = flipped[start + k] == 'a' ? 'b' : 'a';
      expect_error_with("bad.json", flipped, {"inspect", "bad.json"}, "does not fit");
    }
  }
}

TEST_F(BadInput, MasksThatDoNotFit) {
  const Arguments design =
      kDesign + Arguments{"--block-length", "8", "--qber", "0.02", "--mask", "mask"};
  expect_error_with("mask", "1111000", design, "mask");
  expect_error_with("mask", "111100001", design, "mask");
  expect_error_with("mask", "1111000x", design, "column 8");
  expect_error_with("mask", "", design, "mask");
  expect_error_with("mask", "f", design + Arguments{"--mask-format", "hex"}, "mask");
  expect_error_with("mask", "fg", design + Arguments{"--mask-format", "hex"}, "mask");
  expect_error_with("mask", "ab", design + Arguments{"--mask-format", "packed"}, "mask");
  expect_error_with("mask", "11110000", design + Arguments{"--mask-format", "octal"}, "octal");
}

// ---------------------------------------------------------------- messages
// (every length and every byte is tried in tests/unit/message_test.cpp; here a few by command)

TEST_F(BadInput, MessagesThatAreNotWhole) {
  const std::string message = folder_->read("m");
  for (const std::size_t size :
       {std::size_t{0}, std::size_t{8}, std::size_t{87}, std::size_t{88}, std::size_t{90},
        message.size() / 2, message.size() - 16, message.size() - 1}) {
    expect_error_with("bad", message.substr(0, size), reconcile_of("d.json", "b", "bad"),
                      "message 'bad': truncated");
    expect_error_with("bad", message.substr(0, size), settle_of("bad", "r"),
                      "message 'bad': truncated");
  }
  expect_error_with("bad", message + '\0', reconcile_of("d.json", "b", "bad"),
                    "bytes after the end mark");
  expect_error_with("bad", message + message, settle_of("bad", "r"), "bytes after the end mark");
  for (std::size_t at = 0; at < message.size(); at += message.size() / 9) {
    std::string flipped = message;
    flipped[at] = static_cast<char>(flipped[at] ^ 0x10);
    expect_error_with("bad", flipped, reconcile_of("d.json", "b", "bad"), "message 'bad': ");
    expect_error_with("bad", flipped, settle_of("bad", "r"), "message 'bad': ");
  }
}

TEST_F(BadInput, MessagesOfAnotherDesign) {
  expect_error(reconcile_of("d.json", "b", "m2"), "message 'm2': made for another design");
  expect_error(reconcile_of("d2.json", "b", "m"), "message 'm': made for another design");
  expect_error(settle_of("m2", "r2"), "message 'm2': made for another design");
  expect_error(reconcile_of("d.json", "b", "a"), "message 'a': not a frostline message");
}

// ---------------------------------------------------------------- receipts and verdicts

TEST_F(BadInput, ReceiptsOfAnotherMessageOrDesign) {
  expect_error(settle_of("m", "r2"), "receipt 'r2' answers another message");
  expect_error(settle_of("m", "r3"), "receipt 'r3' answers another message");
  expect_error(settle_of("m3", "r"), "receipt 'r' answers another message");
  expect_error(settle_of("m", "v"), "v: not a frostline-receipt file");
  expect_error(settle_of("m", "d.json"), "not a frostline-receipt file");
  expect_error(settle_of("m", "m"), "m: not JSON");
  expect_error(settle_of("m", "empty"), "not JSON");
}

TEST_F(BadInput, VerdictsOfAnotherReceipt) {
  expect_error(confirm_of("p", "r", "v2"), "verdict 'v2' answers another receipt");
  expect_error(confirm_of("p3", "r3", "v"), "verdict 'v' answers another receipt");
  expect_error(confirm_of("p", "r", "r"), "r: not a frostline-verdict file");
  const std::string verdict = folder_->read("v");
  expect_error_with("bad", replaced(verdict, "\"kept_bits\": \"1", "\"kept_bits\": \"2"),
                    confirm_of("p", "r", "bad"), "kept_bits");
  expect_error_with("bad", replaced(verdict, "\"groups\": 4", "\"groups\": 5"),
                    confirm_of("p", "r", "bad"), "'groups'");
  expect_error_with("bad", replaced(verdict, "\"kept_bits\": \"1111", "\"kept_bits\": \"111"),
                    confirm_of("p", "r", "bad"), "'groups'");
  // A receipt that was changed on the way back.
  expect_error_with("bad", folder_->read("r") + "\n", confirm_of("p", "bad", "v"),
                    "answers another receipt");
}

TEST_F(BadInput, ReceiptsThatContradictThemselves) {
  const std::string receipt = folder_->read("r");
  ASSERT_EQ(Json::parse(receipt).at("accept_hex"), "ffff");
  const std::string accept = "\"accept_hex\": \"ffff\"";
  const std::vector<std::pair<std::string, const char*>> cases = {
      {replaced(receipt, accept, "\"accept_hex\": \"7fff\""), "'accepted' does not fit"},
      {replaced(replaced(receipt, accept, "\"accept_hex\": \"7fff\""), "\"accepted\": 16",
                "\"accepted\": 15"),
       "group 0: 4 accepted blocks, but the accept bits tell 3"},
      {replaced(receipt, "\"accepted\": 16", "\"accepted\": 15"), "'accepted' does not fit"},
      {replaced(receipt, accept, "\"accept_hex\": \"fff\""), "too few accept bits"},
      {replaced(receipt, accept, "\"accept_hex\": \"fffff\""), "hexadecimal digits"},
      {replaced(receipt, accept, "\"accept_hex\": \"fffx\""), "no hexadecimal digit"},
      {replaced(receipt, "\"blocks\": 16", "\"blocks\": 15"), "beyond the end"},
      {replaced(receipt, "\"blocks\": 16", "\"blocks\": 18446744073709551615"),
       "too few accept bits"},
      {replaced(receipt, "\"first_block\": 4", "\"first_block\": 3"), "overlap"},
      {replaced(receipt, "\"first_block\": 12", "\"first_block\": 18446744073709551612"),
       "do not exist"},
      {replaced(receipt, "\"blocks\": 4", "\"blocks\": 3"), "group 0"},
      {replaced(receipt, "\"blocks\": 4", "\"blocks\": 0"), "group 0"},
      {replaced(receipt, "\"test_only\": false", "\"test_only\": 0"), "'test_only'"},
      {replaced(receipt, "\"hash_key\": \"", "\"hash_key\": \"0"), "'hash_key' is not 32 bytes"},
      {replaced(receipt, "\"tag\": \"", "\"tag\": \"0"), "'tag' is not 16 bytes"},
      {replaced(receipt, "\"version\": 1", "\"version\": 2"), "another version"},
      {replaced(receipt, "\"block_length\": 256", "\"block_length\": 128"), "another design"},
      {replaced(receipt, "\"groups\": [", "\"groups\": 4, \"more\": ["), "unknown key 'more'"},
  };
  for (const auto& [contents, part] : cases) {
    expect_error_with("bad", contents, settle_of("m", "bad"), part);
  }
  // A group less: its blocks are accepted and proved by nobody.
  Json dropped = Json::parse(receipt);
  dropped["groups"].erase(3);
  expect_error_with("bad", dropped.dump(), settle_of("m", "bad"), "in no group");
}

TEST_F(BadInput, WithoutCheckBitsNoTagMayCoverTwoBlocks) {
  const Folder folder;
  WholeJob job;
  job.block_length = 256;
  job.key_bits = 1024;
  job.design = {"--check-bits", "0"};
  run_whole_job(folder, job);
  Json receipt = Json::parse(folder.read("receipt.json"));
  Json group = receipt.at("groups").at(0);
  group["blocks"] = 4;
  group["accepted"] = 4;
  receipt["groups"] = Json::array({group});
  folder.write("bad.json", receipt.dump());
  const CommandResult result = run_command(folder, {"settle", "link.design.json", "a.key", "a.syn",
                                                    "bad.json", "-o", "out", "--verdict", "out2"});
  EXPECT_EQ(result.status, 2);
  EXPECT_NE(result.err.find("a tag must cover each block alone"), std::string::npos) << result.err;
  EXPECT_FALSE(folder.holds("out"));
}

// Whoever changes accept bits on the way, with all counts made to fit, changes what the tag covers.
TEST_F(BadInput, ForgedAcceptBitsCostTheGroupAndNothingElse) {
  Json receipt = Json::parse(folder_->read("r"));
  receipt["accept_hex"] = "fbff";  // block 5, of group 1
  receipt["accepted"] = 15;
  receipt["groups"][1]["accepted"] = 3;
  folder_->write("forged", receipt.dump());
  const CommandResult result =
      run_command(*folder_, {"settle", "d.json", "a", "m", "forged", "-o", "out", "--verdict",
                             "out2", "--report", "out3"});
  EXPECT_EQ(result.status, 1) << result.err;
  EXPECT_NE(result.out.find("1 group of 4 rejected whole"), std::string::npos) << result.out;
  EXPECT_EQ(Json::parse(folder_->read("out2")).at("kept_bits"), "1011");
  const Json report = Json::parse(folder_->read("out3"));
  EXPECT_EQ(report.at("settled_blocks"), 12);
  EXPECT_EQ(report.at("ledger").at("accepted").at("tag"), 3 * 128);
  // Nothing of blocks 4 to 7 is in it: the honest settled key is all 16 blocks of 32 bytes.
  const std::string honest = folder_->read("s");
  EXPECT_EQ(folder_->read("out"), honest.substr(0, 4 * 32) + honest.substr(8 * 32));
  for (const char* name : {"forged", "out", "out2", "out3"}) folder_->remove(name);
}

// ---------------------------------------------------------------- full disks and broken pipes

TEST_F(BadInput, AFullDeviceIsToldAndNothingIsLeft) {
  const std::string part = "cannot write '/dev/full': No space left on device";
  expect_error(
      {"design", "--block-length", "8", "--qber", "0.1", "--fer", "0.5", "-o", "/dev/full"}, part);
  expect_error({"syndrome", "d.json", "a", "-o", "/dev/full"}, part);
  expect_error({"reconcile", "d.json", "b", "m", "-o", "/dev/full", "--receipt", "out"}, part);
  expect_error({"reconcile", "d.json", "b", "m", "-o", "out", "--receipt", "/dev/full"}, part);
  expect_error(kReconcile + Arguments{"--report", "/dev/full"}, part);
  expect_error({"settle", "d.json", "a", "m", "r", "-o", "out", "--verdict", "/dev/full"}, part);
  expect_error({"confirm", "p", "r", "v", "-o", "/dev/full"}, part);
  expect_error({"sample", "--bits", "8", "--qber", "0", "-o", "out", "/dev/full"}, part);
}

TEST(FullDisk, IsToldAndNothingIsLeft) {
  const Folder folder;
  fs::create_directory(folder.path("disk"));
  const std::string disk = folder.path("disk");
  if (::mount("tmpfs", disk.c_str(), "tmpfs", 0, "size=64k") != 0) {
    GTEST_SKIP() << "no small file system can be mounted here: " << std::strerror(errno);
  }
  const CommandResult result =
      run_command(folder, {"sample", "--bits", "8000000", "--qber", "0", "-o", "a", "disk/b"});
  const auto left = fs::directory_iterator(disk);
  EXPECT_EQ(left, fs::directory_iterator()) << left->path();
  ASSERT_EQ(::umount(disk.c_str()), 0);
  EXPECT_EQ(result.status, 2);
  EXPECT_EQ(result.err, "frostline: cannot write 'disk/b': No space left on device\n");
  EXPECT_EQ(folder.names(), std::vector<std::string>{"disk"});
}

TEST(BrokenPipe, LeavesNoTemporaryFiles) {
  const Folder folder;
  WholeJob job;
  job.key_bits = 1 << 16;
  run_to_message(folder, job);
  const std::vector<std::string> before = folder.names();
  RunningCommand command(folder, {"reconcile", "link.design.json", "b.key", "a.syn", "-o", "out",
                                  "--receipt", "/dev/stdout", "--quiet"});
  command.close_stdout();
  const CommandResult result = command.finish();
  EXPECT_EQ(result.status, 2);
  EXPECT_EQ(result.err, "frostline: cannot write '/dev/stdout': Broken pipe\n");
  EXPECT_EQ(folder.names(), before);
}

// ---------------------------------------------------------------- interruption

class Interruption : public ::testing::TestWithParam<int> {};

TEST_P(Interruption, OfALongReconcileLeavesNoFile) {
  const Folder folder;
  WholeJob job;
  job.key_bits = 1 << 23;
  job.design = {"--arithmetic", "exact"};
  job.lanes = 16;
  run_to_message(folder, job);
  const std::vector<std::string> before = folder.names();
  RunningCommand command(
      folder, {"reconcile", "link.design.json", "b.key", "a.syn", "-o", "out", "--receipt", "out2",
               "--report", "out3", "--rest", "out4", "--threads", "1"});
  // The run takes seconds; its temporary files show that it is under way.
  for (int wait = 0; wait < 2000 && folder.names().size() == before.size(); ++wait) {
    std::this_thread::sleep_for(std::chrono::milliseconds(2));
  }
  std::this_thread::sleep_for(std::chrono::milliseconds(50));
  command.send(GetParam());
  const CommandResult result = command.finish();
  EXPECT_EQ(result.status, 130);
  EXPECT_EQ(result.err, "frostline: interrupted\n");
  EXPECT_EQ(result.out, "");
  EXPECT_EQ(folder.names(), before);
}

INSTANTIATE_TEST_SUITE_P(Signals, Interruption, ::testing::Values(SIGINT, SIGTERM, SIGHUP),
                         [](const auto& one) {
                           return one.param == SIGINT    ? "Int"
                                  : one.param == SIGTERM ? "Term"
                                                         : "Hup";
                         });

}  // namespace
}  // namespace frostline::testing
