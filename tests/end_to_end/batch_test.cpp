// batch: grids of designs, resumption after a kill, the index, and the choice among designs.
#include <gtest/gtest.h>
#include <signal.h>

#include <chrono>
#include <filesystem>
#include <fstream>
#include <map>
#include <nlohmann/json.hpp>
#include <sstream>
#include <thread>

#include "polar/design.h"
#include "polar/random.h"
#include "tests/end_to_end/run_command.h"

namespace frostline::testing {
namespace {

namespace fs = std::filesystem;
using Json = nlohmann::json;

// All files below a folder by relative name.
std::map<std::string, std::string> tree(const std::string& folder) {
  std::map<std::string, std::string> files;
  for (const auto& entry : fs::recursive_directory_iterator(folder)) {
    if (!entry.is_regular_file()) continue;
    std::ifstream file(entry.path(), std::ios::binary);
    std::ostringstream text;
    text << file.rdbuf();
    files[fs::relative(entry.path(), folder).string()] = text.str();
  }
  return files;
}

const Arguments kSmallGrid = {
    "batch", "--block-lengths", "64,256", "--qbers", "0.02,0.04:0.06:0.01", "--fers", "0.1,0.01"};

TEST(Batch, MakesEveryDesignOfTheGridAndAnIndex) {
  const Folder folder;
  const CommandResult result = run_command(folder, kSmallGrid + Arguments{"-o", "sets", "--json"});
  ASSERT_EQ(result.status, 0) << result.err;
  const Json summary = Json::parse(result.out);
  EXPECT_EQ(summary.at("made"), 2 * 4 * 2);
  EXPECT_EQ(summary.at("kept"), 0);
  const Json index = Json::parse(folder.read("sets/index.json"));
  ASSERT_EQ(index.at("designs").size(), 16U);
  for (const Json& entry : index.at("designs")) {
    const std::string file = entry.at("file");
    const Design design = design_from_json(folder.read("sets/" + file), file);
    EXPECT_EQ(design.code.block_length().bits(), entry.at("block_length"));
    EXPECT_EQ(design.qber, entry.at("qber"));
    EXPECT_EQ(design.code.frozen.frozen_count(), entry.at("frozen_count"));
    EXPECT_EQ(design.predicted.kind, "exact-union");
    EXPECT_LE(*design.predicted.fer, entry.at("fer_target").get<double>());
    EXPECT_EQ(design_leakage(design).bits, entry.at("leakage").at("bits"));
    EXPECT_EQ(to_hex(code_sha256(design.code)), entry.at("code_sha256"));
  }
  const std::string csv = folder.read("sets/index.csv");
  EXPECT_EQ(std::count(csv.begin(), csv.end(), '\n'), 17);
}

TEST(Batch, WritesTheSameBytesAsDesignForAnyThreadsAndVectors) {
  const Folder folder;
  for (const std::string threads : {"1", "2", "8"}) {
    ASSERT_EQ(run_command(folder, kSmallGrid + Arguments{"-o", "sets" + threads, "--threads",
                                                         threads, "--quiet"})
                  .status,
              0);
  }
  const auto one = tree(folder.path("sets1"));
  EXPECT_EQ(one.size(), 18U);
  EXPECT_EQ(one, tree(folder.path("sets2")));
  EXPECT_EQ(one, tree(folder.path("sets8")));
  ASSERT_EQ(run_command(folder, kSmallGrid + Arguments{"-o", "scalar", "--simd", "scalar"}).status,
            0);
  EXPECT_EQ(one, tree(folder.path("scalar")));
  ASSERT_EQ(run_command(folder, {"design", "--block-length", "256", "--qber", "0.05", "--fer",
                                 "0.01", "-o", "d.json", "--quiet"})
                .status,
            0);
  EXPECT_EQ(folder.read("d.json"), one.at("n256/qber-0.050-fer-0.01.design.json"));
}

TEST(Batch, KeepsWholeFilesAndMakesBrokenOnesAgain) {
  const Folder folder;
  ASSERT_EQ(run_command(folder, kSmallGrid + Arguments{"-o", "sets"}).status, 0);
  const auto before = tree(folder.path("sets"));
  const std::string broken = "sets/n64/qber-0.020-fer-0.1.design.json";
  folder.write(broken, folder.read(broken).substr(0, 300));
  folder.remove("sets/n64/qber-0.040-fer-0.1.design.json");
  folder.remove("sets/index.json");
  folder.write("sets/n64/qber-0.050-fer-0.1.design.json.part-00aa11bb22cc", "{");
  const CommandResult result = run_command(folder, kSmallGrid + Arguments{"-o", "sets", "--json"});
  ASSERT_EQ(result.status, 0) << result.err;
  EXPECT_EQ(Json::parse(result.out).at("made"), 2);
  EXPECT_EQ(Json::parse(result.out).at("kept"), 14);
  EXPECT_EQ(before, tree(folder.path("sets")));
}

TEST(Batch, AnotherGridExtendsTheFolder) {
  const Folder folder;
  ASSERT_EQ(run_command(folder, kSmallGrid + Arguments{"-o", "sets"}).status, 0);
  ASSERT_EQ(run_command(folder, {"batch", "--block-lengths", "128", "--qbers", "0.02", "-o", "sets",
                                 "--constructions", "gaussian,polarization-weight"})
                .status,
            0);
  EXPECT_EQ(Json::parse(folder.read("sets/index.json")).at("designs").size(), 18U);
  EXPECT_TRUE(folder.holds("sets/n128/qber-0.020-fer-0.1-gaussian.design.json"));
  EXPECT_TRUE(folder.holds("sets/n128/qber-0.020-fer-0.1-polarization-weight.design.json"));
}

// Killed ten times at random moments and run again each time; at last left alone.
TEST(Batch, ResumesAfterKillsToTheSameBytes) {
  const Arguments grid = {"batch",     "--block-lengths", "1024,4096,65536",
                          "--qbers",   "0.01:0.11:0.005", "--fers",
                          "0.1,0.001", "--threads",       "2"};
  const Folder folder;
  ASSERT_EQ(run_command(folder, grid + Arguments{"-o", "undisturbed", "--quiet"}).status, 0);
  RandomStream random(31, "kill moments", 0);
  int killed = 0;
  for (int k = 0; k < 10; ++k) {
    RunningCommand running(folder, grid + Arguments{"-o", "killed", "--quiet"});
    std::this_thread::sleep_for(std::chrono::microseconds(random.below(60000)));
    running.send(SIGKILL);
    if (running.finish().status == 128 + SIGKILL) ++killed;
  }
  EXPECT_GT(killed, 0);
  const CommandResult last = run_command(folder, grid + Arguments{"-o", "killed", "--quiet"});
  ASSERT_EQ(last.status, 0) << last.err;
  EXPECT_EQ(tree(folder.path("undisturbed")), tree(folder.path("killed")));
}

TEST(Batch, SelectsTheSmallestDesignQberAtOrAboveTheMeasuredOne) {
  const Folder folder;
  ASSERT_EQ(run_command(folder, kSmallGrid + Arguments{"-o", "sets"}).status, 0);
  const auto selected = [&](const std::string& qber) {
    const CommandResult result =
        run_command(folder, {"batch", "--select", "256", qber, "-o", "sets", "--quiet"});
    EXPECT_EQ(result.status, 0) << result.err;
    return result.out;
  };
  EXPECT_EQ(selected("0.02"), "sets/n256/qber-0.020-fer-0.1.design.json\n");
  EXPECT_EQ(selected("0.021"), "sets/n256/qber-0.040-fer-0.1.design.json\n");
  EXPECT_EQ(selected("0.0599"), "sets/n256/qber-0.060-fer-0.1.design.json\n");
  const CommandResult result = run_command(
      folder, {"batch", "--select", "256", "0.03", "-o", "sets", "--fers", "0.01", "--json"});
  ASSERT_EQ(result.status, 0) << result.err;
  const Json choice = Json::parse(result.out);
  EXPECT_EQ(choice.at("file"), "sets/n256/qber-0.040-fer-0.01.design.json");
  EXPECT_GT(choice.at("mismatch_bits").get<int>(), 0);
  EXPECT_LT(choice.at("predicted").at("fer").get<double>(), 0.01);
}

TEST(Batch, ShippedLibraryIsWhatTheScriptMakes) {
  const Folder folder;
  ASSERT_EQ(run_command(folder, {"batch", "--block-lengths", "1024,65536", "--qbers",
                                 "0.005,0.02,0.11", "--fers", "0.1,0.001", "-o", "part"})
                .status,
            0);
  const auto part = tree(folder.path("part"));
  const auto shipped = tree(FROSTLINE_SOURCE_DIR "/designs");
  int compared = 0;
  for (const auto& [name, contents] : part) {
    if (name.rfind("index", 0) == 0) continue;
    ASSERT_TRUE(shipped.count(name)) << name;
    EXPECT_EQ(contents, shipped.at(name)) << name;
    ++compared;
  }
  EXPECT_EQ(compared, 12);
  // Every line of the index of the part stands in the shipped index.
  const Json index = Json::parse(shipped.at("index.json"));
  std::map<std::string, Json> by_file;
  for (const Json& entry : index.at("designs")) by_file[entry.at("file")] = entry;
  const Json of_part = Json::parse(part.at("index.json"));
  for (const Json& entry : of_part.at("designs")) {
    EXPECT_EQ(entry, by_file[entry.at("file")]);
  }
}

TEST(Batch, SaysClearlyWhatIsWrongAndOverwritesNothing) {
  struct Case {
    Arguments arguments;
    std::string says;
  };
  const Arguments lengths = {"batch", "--block-lengths", "64"};
  const Arguments good = lengths + Arguments{"--qbers", "0.02"};
  const std::vector<Case> cases = {
      {lengths + Arguments{"--qbers", "0.02,0.01:0.03:0.01", "-o", "x"}, "comes twice"},
      {lengths + Arguments{"--qbers", "0.03:0.01:0.01", "-o", "x"}, "is empty"},
      {lengths + Arguments{"--qbers", "0.01:0.03:0", "-o", "x"}, "not above 0"},
      {lengths + Arguments{"--qbers", "0.01:0.03", "-o", "x"}, "LOW:HIGH:STEP"},
      {lengths + Arguments{"--qbers", "", "-o", "x"}, "not a number"},
      {lengths + Arguments{"--qbers", "0.4:0.6:0.1", "-o", "x"}, "0.5"},
      {lengths + Arguments{"--qbers", "abc", "-o", "x"}, "'abc' is not a number"},
      {good + Arguments{"--fers", "1", "-o", "x"}, "--fers"},
      {{"batch", "--block-lengths", "33554432", "--qbers", "0.02", "-o", "x"}, "power of two"},
      {{"batch", "--block-lengths", "64,64", "--qbers", "0.02", "-o", "x"}, "comes twice"},
      {{"batch", "--block-lengths", "64", "-o", "x"}, "missing"},
      {good, "missing"},
      {good + Arguments{"--constructions", "magic", "-o", "x"}, "unknown construction"},
      {good + Arguments{"--order", "weighted:x", "-o", "x"}, "weighted:ALPHA"},
      {good + Arguments{"--constructions", "nr-sequence", "--order", "weighted:1", "-o", "x"},
       "without probabilities"},
      {good + Arguments{"-o", "no/such/folder"}, "cannot make folder"},
      {good + Arguments{"-o", "/proc"}, "/proc"},
      {good + Arguments{"--plot", "x.pdf", "-o", "x"}, ".svg"},
      {{"batch", "--select", "64", "0.02", "-o", "x"}, "index.json"},
  };
  for (const Case& each : cases) {
    const Folder folder;
    const CommandResult result = run_command(folder, each.arguments);
    EXPECT_EQ(result.status, 2) << each.says;
    EXPECT_EQ(result.err.rfind("frostline: ", 0), 0U) << result.err;
    EXPECT_EQ(std::count(result.err.begin(), result.err.end(), '\n'), 1) << result.err;
    EXPECT_NE(result.err.find(each.says), std::string::npos) << result.err;
  }
}

TEST(Batch, RefusesAnEditedDesignAndAnotherIndexVersion) {
  const Folder folder;
  ASSERT_EQ(run_command(folder, kSmallGrid + Arguments{"-o", "sets"}).status, 0);
  const auto expect_refused = [&](const std::string& says) {
    const auto before = tree(folder.path("sets"));
    const CommandResult result = run_command(folder, kSmallGrid + Arguments{"-o", "sets"});
    EXPECT_EQ(result.status, 2);
    EXPECT_NE(result.err.find(says), std::string::npos) << result.err;
    EXPECT_EQ(before, tree(folder.path("sets")));
  };
  const std::string file = "sets/n64/qber-0.020-fer-0.1.design.json";
  const std::string whole = folder.read(file);
  std::string edited = whole;
  edited.replace(edited.find("\"seed\": null"), 12, "\"seed\": 4711");
  folder.write(file, edited);
  expect_refused("edited or damaged");
  folder.write(file, whole);
  std::string index = folder.read("sets/index.json");
  index.replace(index.find("\"version\": 1"), 12, "\"version\": 9");
  folder.write("sets/index.json", index);
  expect_refused("another version");
}

TEST(Batch, RefusesAFileOfOtherOptionsUnderTheSameName) {
  const Folder folder;
  const Arguments grid = {"batch",           "--block-lengths", "64", "--qbers", "0.02",
                          "--constructions", "gaussian",        "-o", "sets"};
  ASSERT_EQ(run_command(folder, grid).status, 0);
  const CommandResult result = run_command(folder, grid + Arguments{"--exact-levels", "2"});
  EXPECT_EQ(result.status, 2);
  EXPECT_NE(result.err.find("made with other options"), std::string::npos) << result.err;
}

TEST(Pictures, AreDrawnAsSvgAndPng) {
  const Folder folder;
  ASSERT_EQ(run_command(folder, kSmallGrid + Arguments{"-o", "sets", "--plot", "f.svg"}).status, 0);
  EXPECT_NE(folder.read("f.svg").find("<svg"), std::string::npos);
  EXPECT_NE(folder.read("f.svg").find("finite-length limit"), std::string::npos);
  const std::string file = "sets/n256/qber-0.050-fer-0.1.design.json";
  ASSERT_EQ(run_command(folder, {"inspect", file, "--plot", "p.png"}).status, 0);
  EXPECT_EQ(folder.read("p.png").substr(1, 3), "PNG");
  ASSERT_EQ(run_command(folder, {"inspect", file, "--qber", "0.06", "--plot", "d.svg"}).status, 0);
  EXPECT_NE(folder.read("d.svg").find("asked QBER"), std::string::npos);
}

TEST(Pictures, SayThatGnuplotIsMissing) {
  const Folder folder;
  ASSERT_EQ(run_command(folder, kSmallGrid + Arguments{"-o", "sets"}).status, 0);
  const std::string path = std::getenv("PATH");
  ::setenv("PATH", folder.path().c_str(), 1);
  const CommandResult result = run_command(
      folder, {"inspect", "sets/n64/qber-0.020-fer-0.1.design.json", "--plot", "x.svg"});
  ::setenv("PATH", path.c_str(), 1);
  EXPECT_EQ(result.status, 2);
  EXPECT_NE(result.err.find("gnuplot, which is not installed"), std::string::npos) << result.err;
  EXPECT_FALSE(folder.holds("x.svg"));
}

TEST(Inspect, TellsHowTwoDesignsDiffer) {
  const Folder folder;
  ASSERT_EQ(run_command(folder, kSmallGrid + Arguments{"-o", "sets"}).status, 0);
  const std::string low = "sets/n256/qber-0.020-fer-0.1.design.json";
  const std::string high = "sets/n256/qber-0.050-fer-0.1.design.json";
  const CommandResult result = run_command(folder, {"inspect", low, "--against", high, "--json"});
  ASSERT_EQ(result.status, 0) << result.err;
  const Json against = Json::parse(result.out).at("against");
  const Design a = design_from_json(folder.read(low), low);
  const Design b = design_from_json(folder.read(high), high);
  std::size_t only_a = 0;
  std::size_t only_b = 0;
  for (std::size_t i = 0; i < 256; ++i) {
    only_a += a.code.frozen.is_frozen(i) && !b.code.frozen.is_frozen(i);
    only_b += b.code.frozen.is_frozen(i) && !a.code.frozen.is_frozen(i);
  }
  EXPECT_EQ(against.at("this").at("frozen_only_here"), only_a);
  EXPECT_EQ(against.at("other").at("frozen_only_here"), only_b);
  EXPECT_EQ(against.at("this").at("cost_in_efficiency"), 0.0);
  EXPECT_EQ(against.at("this").at("predicted").at("fer"), *a.predicted.fer);
  EXPECT_LT(against.at("other").at("predicted").at("fer").get<double>(), *a.predicted.fer);
  EXPECT_EQ(
      run_command(folder, {"inspect", low, "--against", "sets/n64/qber-0.020-fer-0.1.design.json"})
          .status,
      2);
}

}  // namespace
}  // namespace frostline::testing
