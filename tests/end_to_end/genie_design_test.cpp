// frostline design --construction genie-trial.
#include <gtest/gtest.h>

#include <nlohmann/json.hpp>

#include "tests/end_to_end/run_command.h"

namespace frostline::testing {
namespace {

using Json = nlohmann::ordered_json;

const Arguments kDesign = {"design",      "--block-length", "256",
                           "--qber",      "0.04",           "--construction",
                           "genie-trial", "--trial-blocks", "4000"};

Arguments to(const std::string& file) { return {"--fer", "0.1", "-o", file}; }

TEST(GenieDesign, RecordsItsBlocksAndItsSeed) {
  const Folder folder;
  const CommandResult result =
      run_command(folder, kDesign + to("d.json") + Arguments{"--seed", "7"});
  ASSERT_EQ(result.status, 0) << result.err;
  EXPECT_NE(result.out.find("4 000 blocks tried"), std::string::npos) << result.out;
  EXPECT_EQ(result.out.find("exact arithmetic"), std::string::npos) << result.out;
  const Json design = Json::parse(folder.read("d.json"));
  EXPECT_EQ(design.at("construction").at("name"), "genie-trial");
  EXPECT_EQ(design.at("construction").at("blocks"), 4000);
  EXPECT_EQ(design.at("construction").at("prior"), "gaussian");
  EXPECT_EQ(design.at("predicted").at("kind"), "estimate");
  EXPECT_EQ(design.at("predicted").at("blocks"), 4000);
  EXPECT_EQ(design.at("provenance").at("seed"), 7);
  EXPECT_EQ(design.at("provenance").at("options").at("trial_blocks"), 4000);
  EXPECT_EQ(run_command(folder, {"inspect", "d.json"}).status, 0);
}

TEST(GenieDesign, IsTheSameForTheSameSeedOnAnyNumberOfThreads) {
  const Folder folder;
  for (const Arguments& more : {Arguments{"--threads", "1"}, Arguments{"--threads", "2"}}) {
    ASSERT_EQ(run_command(folder, kDesign + to(more[1] + ".json") + more).status, 0);
  }
  ASSERT_EQ(run_command(folder, kDesign + to("seed.json") + Arguments{"--seed", "2"}).status, 0);
  EXPECT_EQ(folder.read("1.json"), folder.read("2.json"));
  EXPECT_NE(folder.read("1.json"), folder.read("seed.json"));
}

// Near the set that density evolution, which knows the probabilities, takes for the same FER.
TEST(GenieDesign, LeaksNearlyWhatTheExactConstructionDoes) {
  const Folder folder;
  for (const char* arithmetic : {"planes:3", "integer:6:8"}) {
    const Arguments of = {"--arithmetic", arithmetic};
    ASSERT_EQ(run_command(folder, kDesign + to("genie.json") + of).status, 0);
    ASSERT_EQ(run_command(folder, Arguments{"design", "--block-length", "256", "--qber", "0.04"} +
                                      to("exact.json") + of)
                  .status,
              0);
    const double genie = Json::parse(folder.read("genie.json")).at("frozen_count");
    const double exact = Json::parse(folder.read("exact.json")).at("frozen_count");
    EXPECT_NEAR(genie, exact, 0.03 * exact) << arithmetic;
  }
}

TEST(GenieDesign, RefusesWhatDoesNotGoTogetherBeforeItTriesAnything) {
  const struct {
    Arguments arguments;
    const char* message;
  } cases[] = {
      {{"--construction", "genie-trial", "--trial-blocks", "0"}, "0 blocks"},
      {{"--construction", "genie-trial", "--trial-blocks", "4294967296"}, "4294967296 blocks"},
      {{"--construction", "genie-trial", "--trial-blocks", "many"}, "trial-blocks"},
      {{"--construction", "genie-trial", "--seed", "-1"}, "seed"},
      {{"--construction", "genie-trial", "--merge-letters", "8"}, "--merge-letters is not for"},
      {{"--construction", "genie-trial", "--exact-levels", "3"}, "--exact-levels is not for"},
      {{"--construction", "genie-trial", "--order", "weighted:11"}, "order weight 11"},
      {{"--construction", "gaussian", "--trial-blocks", "10"}, "goes with"},
      {{"--seed", "3"}, "--seed goes with"},
  };
  const Folder folder;
  for (const auto& one : cases) {
    const CommandResult result =
        run_command(folder, Arguments{"design", "--block-length", "64", "--qber", "0.02"} +
                                to("d.json") + one.arguments);
    EXPECT_EQ(result.status, 2) << one.message;
    EXPECT_NE(result.err.find(one.message), std::string::npos) << result.err;
    EXPECT_FALSE(folder.holds("d.json"));
  }
  // This one would take hours, if it were not for the FER.
  const CommandResult late = run_command(
      folder, {"design", "--block-length", "65536", "--qber", "0.02", "--construction",
               "genie-trial", "--trial-blocks", "4000000000", "--fer", "2", "-o", "d.json"});
  EXPECT_EQ(late.status, 2);
  EXPECT_NE(late.err.find("FER"), std::string::npos) << late.err;
}

}  // namespace
}  // namespace frostline::testing
