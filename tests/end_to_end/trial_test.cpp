// trial: the command, its account and its refusals.
#include <gtest/gtest.h>

#include <unistd.h>

#include <algorithm>
#include <cmath>
#include <csignal>
#include <map>
#include <nlohmann/json.hpp>
#include <sstream>

#include "tests/end_to_end/run_command.h"

namespace frostline::testing {
namespace {

using Json = nlohmann::json;

class TrialCommand : public ::testing::Test {
 protected:
  void SetUp() override {
    ASSERT_EQ(run_command(folder_, {"design", "--block-length", "1024", "--qber", "0.03", "--fer",
                                    "0.1", "-o", "d.json", "--quiet"})
                  .status,
              0);
  }
  Json measured(const Arguments& more) {
    const CommandResult result =
        run_command(folder_, Arguments{"trial", "d.json", "--json"} + more);
    EXPECT_EQ(result.status, 0) << result.err;
    return Json::parse(result.out);
  }
  Folder folder_;
};

TEST_F(TrialCommand, CountsFailuresBelowTheUnion) {
  const Json trial = measured({"--blocks", "20000"});
  EXPECT_EQ(trial.at("blocks"), 20000);
  EXPECT_LE(trial.at("fer_interval").at(0), trial.at("predicted").at("fer"));
  EXPECT_GT(trial.at("failures"), 500);
  EXPECT_EQ(trial.at("fer").get<double>() * 20000, trial.at("failures").get<double>());
  EXPECT_GT(trial.at("efficiency"), trial.at("limit_efficiency"));
  EXPECT_GT(trial.at("throughput_mbit_s"), 0.0);
  EXPECT_LE(trial.at("latency_us").at("median"), trial.at("latency_us").at("p99"));
}

TEST_F(TrialCommand, StopsAtFailuresAndRepeatsItself) {
  const Json once = measured({"--failures", "40", "--seed", "8"});
  EXPECT_EQ(once.at("failures"), 40);
  const Json again = measured({"--failures", "40", "--seed", "8", "--threads", "1"});
  EXPECT_EQ(once.at("blocks"), again.at("blocks"));
  EXPECT_EQ(once.at("errors"), again.at("errors"));
  EXPECT_NE(once.at("blocks"), measured({"--failures", "40", "--seed", "9"}).at("blocks"));
  EXPECT_EQ(measured({}).at("failures"), 100);
}

TEST_F(TrialCommand, RunsEveryArithmeticAndAnotherQber) {
  for (const char* arithmetic : {"exact", "planes:2", "planes:5", "integer:6:4"}) {
    const Json trial = measured({"--blocks", "600", "--arithmetic", arithmetic});
    EXPECT_EQ(trial.at("arithmetic"), arithmetic);
    EXPECT_LT(trial.at("failures"), 300) << arithmetic;
  }
  const Json worse = measured({"--blocks", "5000", "--channel", "bsc:0.04"});
  EXPECT_EQ(worse.at("qber"), 0.04);
  EXPECT_GT(worse.at("fer"), 0.2);
  EXPECT_EQ(measured({"--blocks", "5000", "--qber", "0.04"}).at("failures"), worse.at("failures"));
}

TEST_F(TrialCommand, TellsLeakageNetKeyAndWhatIsUndetected) {
  const Json trial = measured({"--blocks", "4000", "--qber", "0.02"});
  const Json& leakage = trial.at("leakage");
  EXPECT_EQ(leakage.at("bits"), leakage.at("syndrome_bits").get<int>() + 11);
  // With none seen in n blocks, 1 - 0.05^(1/n).
  ASSERT_EQ(trial.at("undetected"), 0);
  EXPECT_NEAR(trial.at("undetected_upper_bound").get<double>(), 1 - std::pow(0.05, 1.0 / 4000),
              1e-12);
  const double fer = trial.at("fer");
  const double h2 = -0.02 * std::log2(0.02) - 0.98 * std::log2(0.98);
  EXPECT_NEAR(trial.at("net_key").at("plain").get<double>(),
              (1 - fer) * (1 - h2 - leakage.at("bits").get<double>() / 1024), 1e-9);
  EXPECT_LT(trial.at("net_key").at("conservative"), trial.at("net_key").at("plain"));
  EXPECT_GT(trial.at("single_block_latency_us").at("median"), 0.0);
}

TEST_F(TrialCommand, TriesWhatACapturedPairHolds) {
  ASSERT_EQ(run_command(folder_, {"sample", "--bits", "205000", "--qber", "0.04", "--seed", "3",
                                  "-o", "a.key", "b.key", "--quiet"})
                .status,
            0);
  const Json trial = measured({"--channel", "file:a.key:b.key"});
  EXPECT_EQ(trial.at("blocks"), 200);  // 205000 / 1024, rounded down
  EXPECT_NEAR(trial.at("qber").get<double>(), 0.04, 0.005);
  EXPECT_NEAR(trial.at("errors").get<double>() / (200 * 1024), trial.at("qber").get<double>(),
              0.0005);
  EXPECT_GT(trial.at("failures"), 0);
}

TEST_F(TrialCommand, ShardsMergeToTheBytesOfTheWhole) {
  const Arguments all = {"--blocks", "9000", "--channel", "burst:0.02:0.1:0.001:0.01"};
  const Json whole = measured(all + Arguments{"--checkpoint", "whole.json"});
  Arguments merge = {"--merge"};
  for (const char* index : {"1", "2", "3", "4"}) {
    const std::string file = std::string("part") + index + ".json";
    measured(all + Arguments{"--shard", std::string(index) + "/4", "--checkpoint", file});
    merge.push_back(file);
  }
  const Json merged = measured(merge + Arguments{"--checkpoint", "merged.json"});
  for (const char* key : {"blocks", "failures", "undetected", "errors", "fer_interval", "channel",
                          "predicted", "net_key"}) {
    EXPECT_EQ(merged.at(key), whole.at(key)) << key;
  }
  EXPECT_EQ(folder_.read("merged.json"), folder_.read("whole.json"));
}

TEST_F(TrialCommand, InterruptedGoesOnFromItsCheckpoint) {
  const Arguments all = {"trial",  "d.json", "--json", "--blocks",
                         "400000", "--seed", "4",      "--checkpoint"};
  RunningCommand running(folder_, all + Arguments{"parts.json"});
  ::usleep(400000);
  running.send(SIGINT);
  const CommandResult stopped = running.finish();
  if (stopped.status != 0) {  // a very fast machine may have been done already
    EXPECT_EQ(stopped.status, 130) << stopped.err;
    if (!stopped.out.empty()) {
      EXPECT_EQ(Json::parse(stopped.out).at("interrupted"), true);
    }
    EXPECT_EQ(run_command(folder_, all + Arguments{"parts.json"}).status, 0);
  }
  EXPECT_EQ(run_command(folder_, all + Arguments{"whole.json"}).status, 0);
  EXPECT_EQ(folder_.read("parts.json"), folder_.read("whole.json"));
  // Another trial must not go on from it.
  const CommandResult other = run_command(folder_, {"trial", "d.json", "--blocks", "400000",
                                                    "--seed", "5", "--checkpoint", "whole.json"});
  EXPECT_EQ(other.status, 2);
  EXPECT_NE(other.err.find("of another trial: seed is 4 there and 5 here"), std::string::npos)
      << other.err;
}

TEST_F(TrialCommand, EndsByTheClock) {
  const Json trial = measured({"--seconds", "0.05"});
  EXPECT_EQ(trial.at("out_of_time"), true);
  EXPECT_GT(trial.at("blocks"), 0);
}

TEST_F(TrialCommand, CurveGoesThroughTrialsOfOtherFrozenCounts) {
  const Arguments all = {"--blocks", "3000", "--seed", "3"};
  const Json curve = measured(all + Arguments{"--curve", "c.csv", "--plot", "c.svg"});
  EXPECT_EQ(curve.at("failures"), measured(all).at("failures"));
  EXPECT_NE(folder_.read("c.svg").find("FER of every frozen count"), std::string::npos);
  std::istringstream csv(folder_.read("c.csv"));
  std::string line;
  std::getline(csv, line);
  EXPECT_EQ(line.rfind("frozen_count,blocks,failures,fer,", 0), 0U) << line;
  std::map<std::string, int> failures;
  while (std::getline(csv, line)) {
    const std::size_t first = line.find(',');
    failures[line.substr(0, first)] = std::stoi(line.substr(line.find(',', first + 1) + 1));
  }
  for (const char* frozen : {"300", "315", "330", "345", "360"}) {
    ASSERT_EQ(run_command(folder_, {"design", "--block-length", "1024", "--qber", "0.03",
                                    "--frozen", frozen, "-o", "m.json", "--quiet"})
                  .status,
              0);
    const CommandResult trial =
        run_command(folder_, {"trial", "m.json", "--json", "--blocks", "3000", "--seed", "3"});
    ASSERT_EQ(failures.count(frozen), 1U) << frozen;
    EXPECT_EQ(Json::parse(trial.out).at("failures"), failures[frozen]) << frozen;
  }
  // Smaller steps never leak more, and starting where it is best no more than from the design.
  double last = 0;
  for (const Json& reveal : curve.at("reveals")) {
    EXPECT_GE(reveal.at("best_bits"), last);
    EXPECT_LE(reveal.at("best_bits"), reveal.at("from_design_bits"));
    last = reveal.at("best_bits");
  }
}

TEST_F(TrialCommand, SaysClearlyWhatIsWrong) {
  folder_.write("short.key", "0123");
  folder_.write("long.key", "012345");
  const std::vector<std::pair<Arguments, std::string>> cases = {
      {{"trial", "none.json"}, "cannot read"},
      {{"trial"}, "missing FILE"},
      {{"trial", "d.json", "--channel", "burst:1"}, "not bsc:P"},
      {{"trial", "d.json", "--channel", "bsc:x"}, "not a number"},
      {{"trial", "d.json", "--channel", "rain:0.1"}, "burst:P_GOOD:P_BAD:TO_BAD:TO_GOOD"},
      {{"trial", "d.json", "--channel", "file:short.key:long.key"}, "of the same length"},
      {{"trial", "d.json", "--channel", "file:short.key:none.key"}, "cannot read"},
      {{"trial", "d.json", "--lanes", "3"}, "lanes"},
      {{"trial", "d.json", "--seconds", "0"}, "0 seconds"},
      {{"trial", "d.json", "--shard", "2"}, "not I/K"},
      {{"trial", "d.json", "--shard", "3/2", "--blocks", "10"}, "shard 3 of 2"},
      {{"trial", "d.json", "--shard", "1/2"}, "needs --blocks"},
      {{"trial", "d.json", "--shard", "1/2", "--blocks", "9", "--failures", "2"}, "a shard cannot"},
      {{"trial", "d.json", "--merge", "d.json"}, "d.json: "},
      {{"trial", "d.json", "--merge", "none.json"}, "cannot read"},
      {{"trial", "d.json", "--merge", "x.json", "--seed", "2"}, "does not go with --merge"},
      {{"trial", "d.json", "--checkpoint", "d.json"}, "d.json"},
      {{"trial", "d.json", "--plot", "c.svg"}, "--plot goes with --curve"},
      {{"trial", "d.json", "--curve", "d.json"}, "d.json"},
      {{"trial", "d.json", "--curve", "c.csv", "--list", "8"}, "list size 1"},
      {{"trial", "d.json", "--curve", "c.csv", "--failures", "8"}, "does not go with --curve"},
      {{"trial", "d.json", "--phase-error", "0.6"}, "--phase-error"},
      {{"trial", "d.json", "--channel", "bsc:0.1", "--qber", "0.1"}, "only one"},
      {{"trial", "d.json", "--qber", "0.5"}, "0.5"},
      {{"trial", "d.json", "--blocks", "0"}, "0 blocks"},
      {{"trial", "d.json", "--failures", "0"}, "0 failures"},
      {{"trial", "d.json", "--arithmetic", "planes:9"}, "planes"},
  };
  for (const auto& [arguments, says] : cases) {
    const CommandResult result = run_command(folder_, arguments);
    EXPECT_EQ(result.status, 2) << says;
    EXPECT_EQ(std::count(result.err.begin(), result.err.end(), '\n'), 1) << result.err;
    EXPECT_NE(result.err.find(says), std::string::npos) << result.err;
  }
}

}  // namespace
}  // namespace frostline::testing
