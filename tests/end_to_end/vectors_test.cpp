// Golden vectors as a hardware engineer uses them: a decoder in SystemVerilog (tests/hdl), run by
// Icarus Verilog, reads the exported package and the vectors as they are and must give the golden
// output; with a rule broken it must be caught.
#include <gtest/gtest.h>

#include <algorithm>

#include "polar/design_json.h"
#include "tests/end_to_end/run_command.h"
#include "tests/end_to_end/run_tool.h"

namespace frostline::testing {
namespace {

void must(const Folder& folder, const Arguments& arguments) {
  const CommandResult result = run_command(folder, arguments);
  ASSERT_EQ(result.status, 0) << arguments[0] << ": " << result.err;
}

std::string shipped(const std::string& name) {
  return std::string(FROSTLINE_SOURCE_DIR) + "/designs/" + name + ".design.json";
}

// Runs the model on the folder v with package p.sv; macro: a rule to break, or NONE. What it
// prints.
std::string run_model(const Folder& folder, unsigned count, const std::string& macro) {
  const ToolResult result =
      run_tool(folder, "iverilog -g2012 -DCOUNT=" + std::to_string(count) + " -I'" + hdl_path("") +
                           "' -D" + macro + " -o bench p.sv " + hdl_path("sc_decoder.sv") + " " +
                           hdl_path("syndrome_former.sv") + " " + hdl_path("golden_bench.sv") +
                           " && vvp -n bench +vectors=v +answers=answers.hex");
  EXPECT_EQ(result.status, 0) << result.out;
  return result.out;
}

void make_vectors(const Folder& folder, const std::string& design, const std::string& order,
                  const Arguments& more) {
  must(folder, {"export", design, "--as", "systemverilog", "--index-order", order, "-o", "p.sv",
                "--quiet"});
  must(folder, Arguments{"vectors", design, "-o", "v", "--quiet"} + more);
}

TEST(HardwareModel, EqualsTheGoldenVectorsOnEveryCase) {
  struct Case {
    const char* length;
    const char* qber;
    const char* order;
    const char* arithmetic;
  };
  for (const Case& each :
       {Case{"8", "0.05", "natural", "planes:3"}, Case{"32", "0.05", "bit-reversed", "planes:3"},
        Case{"128", "0.02", "natural", "planes:2"}, Case{"256", "0.11", "bit-reversed", "planes:5"},
        Case{"512", "0.03", "natural", "planes:3"}}) {
    const Folder folder;
    must(folder, {"design", "--block-length", each.length, "--qber", each.qber, "--fer", "0.1",
                  "--arithmetic", each.arithmetic, "-o", "d.json", "--quiet"});
    make_vectors(folder, "d.json", each.order, {"--count", "12", "--seed", each.length});
    EXPECT_EQ(run_model(folder, 12, "NONE"), "12 cases, 0 wrong syndromes, 0 wrong outputs\n")
        << each.length;
  }
}

TEST(HardwareModel, EqualsTheGoldenVectorsOfAShippedDesign) {
  const Folder folder;
  make_vectors(folder, shipped("n1024/qber-0.020-fer-0.001"), "natural", {"--count", "5"});
  EXPECT_EQ(run_model(folder, 5, "NONE"), "5 cases, 0 wrong syndromes, 0 wrong outputs\n");
}

// Precoded frozen bits, which designs for lists have.
TEST(HardwareModel, FollowsPrecoding) {
  for (const std::string order : {"natural", "bit-reversed"}) {
    const Folder folder;
    must(folder, {"design", "--block-length", "256", "--qber", "0.05", "--fer", "0.1", "--list",
                  "4", "--precoding", "state8", "-o", "d.json", "--quiet"});
    make_vectors(folder, "d.json", order, {"--count", "9", "--list", "1"});
    EXPECT_EQ(run_model(folder, 9, "STATE8"), "9 cases, 0 wrong syndromes, 0 wrong outputs\n");
  }
}

TEST(HardwareModel, IsCaughtWithEveryRuleBroken) {
  const Folder folder;
  must(folder, {"design", "--block-length", "256", "--qber", "0.11", "--fer", "0.1", "-o", "d.json",
                "--quiet"});
  make_vectors(folder, "d.json", "natural", {"--count", "8"});
  EXPECT_EQ(run_model(folder, 8, "NONE"), "8 cases, 0 wrong syndromes, 0 wrong outputs\n");
  EXPECT_EQ(run_command(folder, {"vectors", "--check", "v", "--answers", "answers.hex"}).out,
            "8 of 8 cases are equal to the golden vectors, bit for bit.\n");
  for (const char* macro : {"ZERO_IS_POSITIVE", "WRAPS", "REVERSED_INDICES"}) {
    EXPECT_EQ(run_model(folder, 8, macro).find(", 0 wrong outputs"), std::string::npos) << macro;
    const CommandResult check =
        run_command(folder, {"vectors", "--check", "v", "--answers", "answers.hex"});
    EXPECT_EQ(check.status, 1) << macro;
    EXPECT_NE(check.out.find("  block "), std::string::npos) << check.out;
    EXPECT_NE(check.out.find("the first wrong decision is u_"), std::string::npos) << check.out;
  }
}

TEST(Vectors, ComeWithAManifestThatAnyJsonReaderReads) {
  const Folder folder;
  must(folder, {"design", "--block-length", "256", "--qber", "0.05", "--fer", "0.1", "-o", "d.json",
                "--quiet"});
  for (const std::string arithmetic : {"planes:4", "integer:6:3"}) {
    must(folder,
         {"vectors", "d.json", "-o", "v", "--count", "9", "--arithmetic", arithmetic, "--quiet"});
    const Json manifest = Json::parse(folder.read("v/manifest.json"));
    EXPECT_EQ(manifest["arithmetic"], arithmetic);
    EXPECT_EQ(manifest["frozen_hex"], Json::parse(folder.read("d.json"))["frozen_hex"]);
    ASSERT_EQ(manifest["cases"].size(), 9U);
    EXPECT_EQ(manifest["cases"][0]["errors"], 0);
    EXPECT_EQ(manifest["cases"][1]["errors"], 256);
    unsigned failed = 0;
    unsigned saturated = 0;
    unsigned tied = 0;
    for (const Json& one : manifest["cases"]) {
      failed += one["recovered"].get<bool>() ? 0 : 1;
      saturated += one["saturated_sums"].get<unsigned>() > 0 ? 1 : 0;
      tied += one["zero_decisions"].get<unsigned>() > 0 ? 1 : 0;
    }
    EXPECT_GE(failed, 3U);
    EXPECT_GT(tied, 0U);
    EXPECT_GT(saturated, 0U) << arithmetic;
    // Files and levels are all there: eight strings and the messages of levels 0 to 8.
    EXPECT_EQ(manifest["files"].size(), 8U + 9U);
    for (const Json& file : manifest["files"]) {
      EXPECT_TRUE(folder.holds("v/" + file["name"].get<std::string>()));
    }
    const std::string root = folder.read("v/messages-level-8.hex");
    EXPECT_EQ(root.find('x', root.find("// case 0")) != std::string::npos,
              arithmetic == "planes:4");
  }
}

TEST(Vectors, AreTheSameBytesForTheSameSeed) {
  const Folder folder;
  must(folder, {"design", "--block-length", "64", "--qber", "0.05", "--fer", "0.1", "-o", "d.json",
                "--quiet"});
  for (const std::string name : {"one", "two"}) {
    must(folder, {"vectors", "d.json", "-o", name, "--seed", "5", "--threads",
                  name == "one" ? "1" : "2", "--quiet"});
  }
  must(folder, {"vectors", "d.json", "-o", "three", "--seed", "6", "--quiet"});
  EXPECT_EQ(run_tool(folder, "diff -r one two").status, 0);
  EXPECT_NE(folder.read("one/error-pattern.hex"), folder.read("three/error-pattern.hex"));
}

TEST(Vectors, OfListsCarryWeightsAndMetrics) {
  const Folder folder;
  must(folder, {"design", "--block-length", "128", "--qber", "0.05", "--fer", "0.1", "--list", "4",
                "-o", "d.json", "--quiet"});
  must(folder, {"vectors", "d.json", "-o", "v", "--quiet"});
  const Json manifest = Json::parse(folder.read("v/manifest.json"));
  EXPECT_EQ(manifest["list"], 4);
  EXPECT_EQ(manifest["metric_weights"]["unit_nats"], 0.5);
  EXPECT_EQ(manifest["metric_weights"]["nodes"].size(), 256U);
  EXPECT_EQ(manifest["metric_weights"]["never_forks_hex"].get<std::string>().size(), 32U);
  for (const Json& one : manifest["cases"]) {
    EXPECT_EQ(one["path_metrics"].size(), 4U);
    EXPECT_LT(one["chosen_path"].get<unsigned>(), 4U);
  }
  EXPECT_EQ(
      run_command(folder, {"vectors", "--check", "v", "--answers", "v/decoder-output.hex"}).status,
      0);
}

// Vectors of 64 bits with messages, and answers with known mistakes.
class VectorsCheck : public ::testing::Test {
 protected:
  void SetUp() override {
    must(folder_, {"design", "--block-length", "64", "--qber", "0.05", "--fer", "0.1", "-o",
                   "d.json", "--quiet"});
    must(folder_, {"vectors", "d.json", "-o", "v", "--count", "4", "--quiet"});
    output_ = run_tool(folder_, "grep -v '^//' v/decoder-output.hex").out;
  }
  CommandResult check(const Arguments& more = {}) const {
    return run_command(folder_,
                       Arguments{"vectors", "--check", "v", "--answers", "answers"} + more);
  }
  void must_shell(const std::string& line) const {
    const ToolResult result = run_tool(folder_, line);
    ASSERT_EQ(result.status, 0) << result.out;
  }
  void expect_error(const std::string& part, const Arguments& more = {}) const {
    const CommandResult result = check(more);
    EXPECT_EQ(result.status, 2);
    EXPECT_EQ(result.out, "");
    EXPECT_EQ(std::count(result.err.begin(), result.err.end(), '\n'), 1) << result.err;
    EXPECT_NE(result.err.find(part), std::string::npos) << "'" << part << "' in " << result.err;
  }

  Folder folder_;
  std::string output_;  // 4 lines of 16 digits
};

TEST_F(VectorsCheck, TellsBlockBitAndDecision) {
  std::string answers = output_;
  char& digit = answers[2 * 17 + 5];  // case 2, bits 20 to 23
  digit = digit == '0' ? '1' : '0';   // changes bit 23 alone, or more
  answers[3 * 17] = 'x';
  folder_.write("answers", answers);
  const CommandResult result = check();
  EXPECT_EQ(result.status, 1);
  EXPECT_EQ(result.out.find("2 of 4 cases are equal"), 0U) << result.out;
  EXPECT_NE(result.out.find("block 2: "), std::string::npos);
  EXPECT_NE(result.out.find("the first is bit 2"), std::string::npos) << result.out;
  EXPECT_NE(result.out.find("block 3: "), std::string::npos);
  EXPECT_NE(result.out.find("undefined"), std::string::npos);
  const Json told = Json::parse(check({"--json"}).out);
  ASSERT_EQ(told["differing"].size(), 2U);
  EXPECT_EQ(told["differing"][0]["case"], 2);
  EXPECT_GE(told["differing"][0]["first_bit"], 20);
  EXPECT_LE(told["differing"][0]["first_bit"], 23);
}

// Of several wrong messages the one that a decoder makes first is named: the right half of the root
// (level 5, indices 32 to 63) comes before all that is made from it.
TEST_F(VectorsCheck, TellsTheFirstLevelThatWentWrong) {
  folder_.write("answers",
                "0" == output_.substr(0, 1) ? "1" + output_.substr(1) : "0" + output_.substr(1));
  must_shell("mkdir hw && cp v/messages-level-*.hex hw");
  // Case 0, message 40 of levels 5 and 3: word 8 of the second line behind the first case's mark.
  for (const std::string level : {"5", "3"}) {
    must_shell(
        "awk '/^\\/\\/ case 0/ { seen = 1 } seen == 1 && !/^\\/\\// { ++line; if (line == 2) "
        "$9 = ($9 == \"7\" ? \"6\" : \"7\") } { print }' v/messages-level-" +
        level + ".hex > hw/messages-level-" + level + ".hex");
  }
  const Json told = Json::parse(check({"--answer-messages", "hw", "--json"}).out);
  ASSERT_EQ(told["differing"].size(), 1U);
  EXPECT_EQ(told["differing"][0]["first_message"]["level"], 5);
  EXPECT_EQ(told["differing"][0]["first_message"]["index"], 40);
  EXPECT_NE(check({"--answer-messages", "hw"})
                .out.find("first at level 5, in the node from index 32 on, message 8"),
            std::string::npos);
}

TEST_F(VectorsCheck, RefusesWhatDoesNotFit) {
  folder_.write("answers", output_.substr(17));
  expect_error("3 words where there must be 4");
  folder_.write("answers", output_ + output_);
  expect_error("8 words where there must be 4");
  folder_.write("answers", output_.substr(1));
  expect_error("word 0 has 15 digits where there must be 16");
  folder_.write("answers", "hello");
  expect_error("line 1: 'h' is no hexadecimal digit");
  folder_.write("answers", output_);
  expect_error("no level of 'nowhere'", {"--answer-messages", "nowhere"});
  folder_.remove("v/messages-level-3.hex");
  expect_error("names the file 'messages-level-3.hex', which is not in 'v'");
  folder_.write("v/manifest.json", "{}");
  expect_error("manifest.json");
  folder_.remove("v/manifest.json");
  expect_error("cannot read 'v/manifest.json'");
}

}  // namespace
}  // namespace frostline::testing
