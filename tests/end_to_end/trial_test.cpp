// trial: the command, its account and its refusals.
#include <gtest/gtest.h>

#include <algorithm>
#include <nlohmann/json.hpp>

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

TEST_F(TrialCommand, SaysClearlyWhatIsWrong) {
  const std::vector<std::pair<Arguments, std::string>> cases = {
      {{"trial", "none.json"}, "cannot read"},
      {{"trial"}, "missing FILE"},
      {{"trial", "d.json", "--channel", "burst:1"}, "not bsc:P"},
      {{"trial", "d.json", "--channel", "bsc:x"}, "not a number"},
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
