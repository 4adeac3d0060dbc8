// Lists on the command line: design, inspect, trial, the exchange, batch.
#include <gtest/gtest.h>

#include <algorithm>
#include <nlohmann/json.hpp>
#include <utility>

#include "tests/end_to_end/run_command.h"
#include "tests/end_to_end/whole_job.h"

namespace frostline::testing {
namespace {

Json json_of(const Folder& folder, const Arguments& arguments) {
  const CommandResult result = run_command(folder, arguments + Arguments{"--json"});
  EXPECT_EQ(result.status, 0) << result.err;
  return Json::parse(result.out);
}

const Arguments kDesign = {"design", "--block-length", "1024", "--qber", "0.03", "--fer", "0.1"};

TEST(ListCommands, DesignForListsLeaksLessAndIsPrecoded) {
  const Folder folder;
  const Json one = json_of(folder, kDesign + Arguments{"-o", "one.json"});
  const Json eight = json_of(folder, kDesign + Arguments{"--list", "8", "-o", "eight.json"});
  EXPECT_EQ(one.at("precoding"), "none");
  EXPECT_EQ(eight.at("precoding"), "state8");
  EXPECT_EQ(eight.at("decoder").at("list"), 8);
  EXPECT_EQ(eight.at("predicted").at("kind"), "estimate");
  EXPECT_LT(eight.at("frozen_count"), one.at("frozen_count"));
  EXPECT_EQ(json_of(folder, kDesign + Arguments{"--list", "8", "--precoding", "none", "-o", "p"})
                .at("precoding"),
            "none");
  const Json inspected = json_of(folder, {"inspect", "eight.json", "--qber", "0.032"});
  EXPECT_GT(inspected.at("never_forks"), 100);
  EXPECT_EQ(inspected.at("at_qber").at("predicted").at("kind"), "estimate");
  EXPECT_GT(inspected.at("at_qber").at("predicted").at("fer"),
            eight.at("predicted").at("fer").get<double>());
  EXPECT_FALSE(json_of(folder, {"inspect", "one.json"}).contains("never_forks"));
}

TEST(ListCommands, TrialDecodesWithTheListOfTheDesignOrAnother) {
  const Folder folder;
  ASSERT_EQ(run_command(folder, kDesign + Arguments{"--list", "4", "-o", "d.json"}).status, 0);
  const auto trial = [&](const Arguments& more) {
    return json_of(folder, Arguments{"trial", "d.json", "--blocks", "2000"} + more);
  };
  const Json own = trial({});
  EXPECT_EQ(own.at("lists"), Json({4}));
  // The estimate is meant to hold within half of the FER.
  EXPECT_GT(own.at("fer_interval").at(1), own.at("predicted").at("fer").get<double>() / 1.5);
  EXPECT_LT(own.at("fer_interval").at(0), own.at("predicted").at("fer").get<double>() * 1.5);
  const Json one = trial({"--list", "1"});
  EXPECT_EQ(one.at("lists"), Json({1}));
  EXPECT_EQ(one.at("predicted").at("kind"), "exact-union");
  EXPECT_GT(one.at("failures"), 2 * own.at("failures").get<int>());
  const Json sixteen = trial({"--list", "16"});
  EXPECT_LT(sixteen.at("failures"), own.at("failures"));
  // Two passes find what the second finds, but for a wrong path that the first accepts.
  const Json passes = trial({"--list", "4,16"});
  EXPECT_EQ(passes.at("lists"), Json({4, 16}));
  EXPECT_NEAR(passes.at("failures").get<double>(), sixteen.at("failures").get<double>(), 5);
}

TEST(ListCommands, WholeJobWithAListIsAccountedFor) {
  const Folder folder;
  WholeJob job;
  job.design = {"--list", "8"};
  const JobOutcome outcome = run_and_check(folder, job);
  EXPECT_EQ(outcome.design_file.at("decoder").at("list"), 8);
  EXPECT_EQ(outcome.design_file.at("precoding"), "state8");
  EXPECT_EQ(outcome.receiver_report.at("decoder").at("lists"), Json({8}));
  EXPECT_GT(outcome.accepted_count(), outcome.blocks() / 2);
}

TEST(ListCommands, ReconcileTakesAnotherListForTheSameMessage) {
  const Folder folder;
  WholeJob job;
  job.design = {"--list", "2"};
  run_to_message(folder, job);
  std::vector<std::uint64_t> accepted;
  for (const char* list : {"1", "2", "16", "2,16"}) {
    const std::string name(list);
    const CommandResult result =
        run_command(folder, {"reconcile", "link.design.json", "b.key", "a.syn", "-o", "key" + name,
                             "--receipt", "receipt" + name, "--list", list, "--json"});
    ASSERT_EQ(result.status, 0) << result.err;
    const Json report = Json::parse(result.out);
    EXPECT_EQ(report.at("decoder").at("lists").back(), name == "2,16" ? 16 : std::stoi(name));
    EXPECT_EQ(report.at("decoder").at("lists").size(), name == "2,16" ? 2U : 1U);
    accepted.push_back(report.at("accepted"));
  }
  EXPECT_LE(accepted[0], accepted[1]);
  EXPECT_LE(accepted[1], accepted[2]);
  EXPECT_LT(accepted[0], accepted[2]);
  EXPECT_EQ(accepted[3], accepted[2]);
}

TEST(ListCommands, BatchGoesOverListSizes) {
  const Folder folder;
  const Arguments grid = {
      "batch", "--block-lengths", "256,1024", "--qbers", "0.03", "--lists", "1,8", "-o", "sets"};
  EXPECT_EQ(json_of(folder, grid).at("made"), 4);
  EXPECT_EQ(json_of(folder, grid).at("kept"), 4);
  const Json index = Json::parse(folder.read("sets/index.json"));
  for (const Json& entry : index.at("designs")) {
    const std::string file = entry.at("file");
    EXPECT_EQ(file.find("-list-8.") != std::string::npos, entry.at("list") == 8) << file;
    EXPECT_EQ(entry.at("predicted_kind"), entry.at("list") == 8 ? "estimate" : "exact-union");
  }
  // The same bytes as design.
  ASSERT_EQ(run_command(folder, kDesign + Arguments{"--list", "8", "-o", "d.json"}).status, 0);
  EXPECT_EQ(folder.read("sets/n1024/qber-0.030-fer-0.1-list-8.design.json"), folder.read("d.json"));
  const auto selected = [&](const Arguments& more) {
    return json_of(folder, Arguments{"batch", "--select", "1024", "0.025", "-o", "sets"} + more);
  };
  EXPECT_EQ(selected({}).at("file"), "sets/n1024/qber-0.030-fer-0.1.design.json");
  const Json of_eight = selected({"--lists", "8"});
  EXPECT_EQ(of_eight.at("file"), "sets/n1024/qber-0.030-fer-0.1-list-8.design.json");
  EXPECT_GT(of_eight.at("mismatch_bits"), 0);
}

TEST(ListCommands, SayClearlyWhatIsWrong) {
  const Folder folder;
  ASSERT_EQ(run_command(folder, kDesign + Arguments{"--list", "4", "-o", "d.json"}).status, 0);
  ASSERT_EQ(run_command(folder, kDesign + Arguments{"--list", "4", "--check-bits", "0", "-o",
                                                    "unchecked.json"})
                .status,
            0);
  const Arguments trial = {"trial", "d.json", "--blocks", "10", "--list"};
  const std::vector<std::pair<Arguments, std::string>> cases = {
      {trial + Arguments{"0"}, "list size 0 is not a power of two"},
      {trial + Arguments{"3"}, "list size 3 is not a power of two"},
      {trial + Arguments{"4096"}, "list size 4096 is not a power of two"},
      {trial + Arguments{"32,8"}, "do not ascend"},
      {trial + Arguments{"8,8"}, "do not ascend"},
      {trial + Arguments{"8,"}, "is not a list size"},
      {trial + Arguments{"eight"}, "is not a list size"},
      {trial + Arguments{"-8"}, "--list"},
      {{"trial", "unchecked.json", "--list", "2,4"}, "needs check bits"},
      {kDesign + Arguments{"--list", "0", "-o", "x"}, "list size 0"},
      {kDesign + Arguments{"--list", "12", "-o", "x"}, "list size 12"},
      {kDesign + Arguments{"--list", "256", "-o", "x"}, "list size 256"},
      {kDesign + Arguments{"--list", "8,32", "-o", "x"}, "--list"},
      {kDesign + Arguments{"--list", "8", "--arithmetic", "integer:6:4", "-o", "x"}, "not known"},
      {{"batch", "--block-lengths", "64", "--qbers", "0.05", "--lists", "3", "-o", "s"},
       "list size 3"},
      {{"batch", "--block-lengths", "64", "--qbers", "0.05", "--lists", "2", "--arithmetic",
        "integer:6:4", "-o", "s"},
       "not known"},
  };
  for (const auto& [arguments, says] : cases) {
    const CommandResult result = run_command(folder, arguments);
    EXPECT_EQ(result.status, 2) << says;
    EXPECT_EQ(std::count(result.err.begin(), result.err.end(), '\n'), 1) << result.err;
    EXPECT_NE(result.err.find(says), std::string::npos) << result.err;
  }
  EXPECT_FALSE(folder.holds("x"));
}

}  // namespace
}  // namespace frostline::testing
