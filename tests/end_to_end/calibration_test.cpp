// design --by trial: the file, what it says was spent, and its refusals.
#include <gtest/gtest.h>

#include <algorithm>
#include <nlohmann/json.hpp>

#include "tests/end_to_end/run_command.h"

namespace frostline::testing {
namespace {

using Json = nlohmann::json;

const Arguments kDesign = {"design", "--block-length", "1024", "--qber", "0.03",     "--fer",
                           "0.1",    "--json",         "--by", "trial",  "--effort", "quick"};

TEST(CalibratedDesign, RecordsTheTrialThatConfirmedIt) {
  const Folder folder;
  for (const char* list : {"1", "4"}) {
    const CommandResult result =
        run_command(folder, kDesign + Arguments{"--list", list, "-o", "d.json"});
    ASSERT_EQ(result.status, 0) << result.err;
    const Json said = Json::parse(result.out);
    EXPECT_GT(said.at("calibration").at("trials"), 1);
    EXPECT_GT(said.at("calibration").at("blocks"), 1000);
    const Json design = Json::parse(folder.read("d.json"));
    const Json& predicted = design.at("predicted");
    EXPECT_EQ(predicted.at("kind"), "trial");
    EXPECT_EQ(predicted.at("blocks"), 1000);
    EXPECT_LE(predicted.at("interval").at(1), 0.1);
    EXPECT_EQ(design.at("provenance").at("options").at("effort"), "quick");
    const CommandResult trial =
        run_command(folder, {"trial", "d.json", "--json", "--blocks", "1000", "--seed",
                             design.at("provenance").at("seed").dump()});
    EXPECT_EQ(Json::parse(trial.out).at("fer"), predicted.at("fer"));
  }
}

TEST(CalibratedDesign, IsTheSameFileForAnyNumberOfThreads) {
  const Folder folder;
  const Arguments seeded = kDesign + Arguments{"--seed", "7"};
  ASSERT_EQ(run_command(folder, seeded + Arguments{"-o", "a.json", "--threads", "1"}).status, 0);
  ASSERT_EQ(run_command(folder, seeded + Arguments{"-o", "b.json", "--threads", "4"}).status, 0);
  EXPECT_EQ(folder.read("a.json"), folder.read("b.json"));
}

TEST(CalibratedDesign, SaysClearlyWhatIsWrong) {
  const Folder folder;
  const Arguments base = {"design", "--block-length", "1024", "--qber", "0.03", "-o", "d.json"};
  const std::vector<std::pair<Arguments, std::string>> cases = {
      {{"--fer", "0.1", "--by", "luck"}, "neither bound nor trial"},
      {{"--fer", "0.1", "--by", "trial", "--effort", "some"}, "quick, normal or thorough"},
      {{"--fer", "0.1", "--effort", "quick"}, "goes with --by trial"},
      {{"--frozen", "300", "--by", "trial"}, "goes with --fer"},
      {{"--fer", "1e-13", "--by", "trial"}, "cannot be shown"},
      {{"--fer", "0.1", "--by", "trial", "--construction", "genie-trial"}, "genie-trial"},
  };
  for (const auto& [arguments, says] : cases) {
    const CommandResult result = run_command(folder, base + arguments);
    EXPECT_EQ(result.status, 2) << says;
    EXPECT_EQ(std::count(result.err.begin(), result.err.end(), '\n'), 1) << result.err;
    EXPECT_NE(result.err.find(says), std::string::npos) << result.err;
    EXPECT_FALSE(folder.holds("d.json"));
  }
}

}  // namespace
}  // namespace frostline::testing
