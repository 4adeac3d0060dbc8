// The main job, design to confirm, through the commands.
#include <gtest/gtest.h>

#include <algorithm>
#include <cctype>
#include <cmath>
#include <filesystem>
#include <numeric>

#include "tests/end_to_end/whole_job.h"

namespace frostline::testing {
namespace {

std::size_t count_in(const std::string& text, const std::string& part) {
  std::size_t count = 0;
  for (std::size_t at = text.find(part); at != std::string::npos; at = text.find(part, at + 1)) {
    ++count;
  }
  return count;
}

// ---------------------------------------------------------------- the ordinary case

TEST(MainJob, SettlesEqualKeysAtTheFerAskedFor) {
  const Folder folder;
  WholeJob job;
  job.key_bits = 1024 * 1500 + 40;
  job.goal = {"--fer", "0.1"};
  job.design = {"--arithmetic", "exact"};
  const JobOutcome outcome = run_and_check(folder, job);
  ASSERT_FALSE(HasFailure());
  const double blocks = static_cast<double>(outcome.blocks());
  const double failed = blocks - static_cast<double>(outcome.accepted_count());
  // The design takes the smallest frozen count whose union sum meets 0.1; a union bounds the FER
  // from above, and at this length by less than a factor of two. Four standard deviations.
  const double predicted = outcome.design_file.at("predicted").at("fer");
  EXPECT_LE(predicted, 0.1);
  EXPECT_GT(predicted, 0.09);
  EXPECT_LE(failed, 0.1 * blocks + 4 * std::sqrt(0.1 * 0.9 * blocks));
  EXPECT_GE(failed, 0.05 * blocks - 4 * std::sqrt(0.05 * 0.95 * blocks));
}

TEST(MainJob, EstimatesTheQberOfAllBlocksWithoutBias) {
  const Folder folder;
  WholeJob job;
  job.key_bits = 1024 * 600;
  const JobOutcome outcome = run_and_check(folder, job);
  ASSERT_FALSE(HasFailure());
  const double errors = static_cast<double>(
      std::accumulate(outcome.errors.begin(), outcome.errors.end(), std::size_t{0}));
  const double qber = errors / static_cast<double>(job.key_bits);
  const Json& observed = outcome.receiver_report.at("observed_qber");
  const double low = observed.at("all_blocks_interval").at(0);
  const double high = observed.at("all_blocks_interval").at(1);
  // The interval is of 95 %; twice its width never fails for a right estimate.
  EXPECT_NEAR(observed.at("all_blocks").get<double>(), qber, high - low);
  EXPECT_LT(high - low, 0.003);
  // Blocks with many errors fail, so the accepted ones show fewer.
  EXPECT_LT(observed.at("accepted_blocks").get<double>(), qber);
}

TEST(MainJob, TellsAPersonWhatHappened) {
  const Folder folder;
  const JobOutcome outcome = run_and_check(folder, {});
  ASSERT_FALSE(HasFailure());
  for (const char* row : {"blocks", "failed", "errors corrected", "observed QBER", "disclosed",
                          "f ", "eps_cor", "net key", "to be subtracted", "time"}) {
    EXPECT_EQ(count_in(outcome.reconcile.out, std::string("\n  ") + row), 1U) << row;
  }
  EXPECT_NE(outcome.settle.out.find("settled"), std::string::npos);
  EXPECT_NE(outcome.confirm.out.find("settled"), std::string::npos);
  EXPECT_EQ(count_in(outcome.reconcile.out, "TEST ONLY"), 0U);
}

// ---------------------------------------------------------------- lengths and lanes

struct Shape {
  std::uint64_t block_length;
  std::uint64_t key_bits;
  unsigned lanes;
};

class MainJobOfShape : public ::testing::TestWithParam<Shape> {};

TEST_P(MainJobOfShape, SettlesEqualKeysAndAccountsForEveryBit) {
  const Folder folder;
  WholeJob job;
  job.block_length = GetParam().block_length;
  job.key_bits = GetParam().key_bits;
  job.lanes = GetParam().lanes;
  job.design = {"--arithmetic", "planes:3"};
  if (job.block_length <= 64) job.goal = {"--efficiency", "5.5"};
  if (job.block_length == 8) job.design = {"--check-bits", "6"};
  if (job.block_length == 8) job.goal = {"--frozen", "6"};
  if (job.block_length == 1U << 20)
    job.design = job.design + Arguments{"--construction", "gaussian"};
  job.reconcile = {"--rest", "b.rest"};
  const JobOutcome outcome = run_and_check(folder, job);
  ASSERT_FALSE(HasFailure());
  EXPECT_GT(outcome.settled_count(), 0U);
  const std::size_t rest = job.key_bits % job.block_length;
  EXPECT_EQ(bits_of_packed(folder.read("b.rest"), rest), outcome.receiver.rest);
}

INSTANTIATE_TEST_SUITE_P(
    Lengths, MainJobOfShape,
    ::testing::Values(Shape{8, 8, 0}, Shape{8, 4099, 0}, Shape{8, 4099, 1}, Shape{16, 5000, 4},
                      Shape{32, 7777, 0}, Shape{64, 64 * 77 + 63, 8}, Shape{128, 20001, 128},
                      Shape{256, 256 * 31, 16}, Shape{512, 512 * 40 + 1, 2}, Shape{1024, 1024, 512},
                      Shape{1024, 1024 * 37 + 1023, 1}, Shape{1024, 1024 * 37 + 1023, 2},
                      Shape{1024, 1024 * 37 + 1023, 16}, Shape{1024, 1024 * 37 + 1023, 32},
                      Shape{1024, 1024 * 37 + 1023, 512}, Shape{2048, 2048 * 20 + 7, 0},
                      Shape{4096, 4096 * 11, 4}, Shape{16384, 16384 * 7 + 5, 0},
                      Shape{65536, 65536 * 5 + 9999, 0}, Shape{262144, 262144 * 2 + 1, 0},
                      Shape{1048576, 1048576 + 77, 0}),
    [](const auto& one) {
      return "N" + std::to_string(one.param.block_length) + "Bits" +
             std::to_string(one.param.key_bits) + "Lanes" + std::to_string(one.param.lanes);
    });

TEST(MainJob, TellsHowManyBitsOfAnOddKeyAreRest) {
  const Folder folder;
  WholeJob job;
  job.key_bits = 1024 * 9 + 333;
  const JobOutcome outcome = run_and_check(folder, job);
  ASSERT_FALSE(HasFailure());
  EXPECT_EQ(outcome.blocks(), 9U);
  EXPECT_EQ(outcome.message_account.at("rest_bits"), 333);
  EXPECT_NE(outcome.reconcile.out.find("rest 333 bits"), std::string::npos);
}

// ---------------------------------------------------------------- what a channel can do

TEST(MainJob, AcceptsAllBlocksWhereTheDesignHasRoom) {
  const Folder folder;
  WholeJob job;
  job.goal = {"--fer", "1e-9"};
  const JobOutcome outcome = run_and_check(folder, job);
  ASSERT_FALSE(HasFailure());
  EXPECT_EQ(outcome.settled_count(), outcome.blocks());
  EXPECT_EQ(outcome.receiver_report.at("failed_blocks"), Json::array());
}

TEST(MainJob, TakesEqualKeys) {
  const Folder folder;
  WholeJob job;
  job.key_qber = 0;
  const JobOutcome outcome = run_and_check(folder, job);
  ASSERT_FALSE(HasFailure());
  EXPECT_EQ(folder.read("a.key"), folder.read("b.key"));
  EXPECT_EQ(outcome.settled_count(), outcome.blocks());
  EXPECT_EQ(outcome.receiver_report.at("errors_corrected_total"), 0);
  EXPECT_EQ(outcome.receiver_report.at("observed_qber").at("accepted_blocks"), 0.0);
  // An efficiency over h2(0) = 0 says nothing, and nothing is said.
  EXPECT_TRUE(outcome.receiver_report.at("figures").at("efficiency").is_null());
  EXPECT_EQ(outcome.reconcile.out.find("\n  f "), std::string::npos);
}

TEST(MainJob, KeepsWhatItCanAboveTheDesignsQber) {
  const Folder folder;
  WholeJob job;
  job.key_qber = 0.026;
  job.key_bits = 1024 * 300;
  const JobOutcome outcome = run_and_check(folder, job);
  ASSERT_FALSE(HasFailure());
  EXPECT_GT(outcome.settled_count(), 0U);
  EXPECT_LT(outcome.settled_count(), outcome.blocks());
}

TEST(MainJob, SaysThatTheQberIsFarAboveTheDesigns) {
  const Folder folder;
  WholeJob job;
  job.key_qber = 0.045;
  job.key_bits = 1024 * 200;
  const JobOutcome outcome = run_and_check(folder, job);
  ASSERT_FALSE(HasFailure());
  EXPECT_LT(outcome.accepted_count(), outcome.blocks() / 10);
  EXPECT_NE(outcome.reconcile.out.find("look like a QBER of 4."), std::string::npos)
      << outcome.reconcile.out;
  EXPECT_NE(outcome.reconcile.out.find("the design is for 2.00 %"), std::string::npos);
  EXPECT_NE(outcome.reconcile.out.find("higher QBER"), std::string::npos);
  EXPECT_EQ(outcome.reconcile.out.find("belong together"), std::string::npos);
  const Json& observed = outcome.receiver_report.at("observed_qber");
  EXPECT_NEAR(observed.at("all_blocks").get<double>(), 0.045, 0.006);
}

void expect_all_failed(const Folder& folder, const JobOutcome& outcome) {
  EXPECT_EQ(outcome.accepted_count(), 0U);
  EXPECT_EQ(outcome.reconcile.status, 1);
  EXPECT_EQ(outcome.settle.status, 1);
  EXPECT_EQ(outcome.confirm.status, 1);
  EXPECT_EQ(folder.read("b.provisional"), "");
  EXPECT_EQ(folder.read("a.settled"), "");
  EXPECT_EQ(folder.read("b.settled"), "");
  EXPECT_EQ(outcome.receipt.at("groups"), Json::array());
  EXPECT_LE(outcome.receiver_report.at("figures").at("net_key").at("plain"), 0.0);
  EXPECT_NE(outcome.reconcile.out.find("the strings do not belong together"), std::string::npos)
      << outcome.reconcile.out;
  EXPECT_TRUE(outcome.receiver_report.at("observed_qber").at("all_blocks").is_null());
}

TEST(MainJob, SaysWhatItLooksLikeWhenAllBlocksFail) {
  const Folder folder;
  WholeJob job;
  job.key_qber = 0.15;
  job.key_bits = 1024 * 100;
  const JobOutcome outcome = run_and_check(folder, job);
  ASSERT_FALSE(HasFailure());
  expect_all_failed(folder, outcome);
}

TEST(MainJob, SaysThatStringsDoNotBelongTogether) {
  const Folder folder;
  WholeJob job;
  job.key_qber = 0.5;
  job.key_bits = 1024 * 100;
  const JobOutcome outcome = run_and_check(folder, job);
  ASSERT_FALSE(HasFailure());
  expect_all_failed(folder, outcome);
}

TEST(MainJob, SaysThatASlippedKeyDoesNotBelongTogether) {
  const Folder folder;
  WholeJob job;
  job.key_bits = 1024 * 100;
  run_to_message(folder, job);
  Bits slipped = bits_of_packed(folder.read("b.key"), job.key_bits);
  std::rotate(slipped.begin(), slipped.begin() + 1, slipped.end());
  folder.write("b.key", packed_of_bits(slipped));
  const CommandResult result =
      run_command(folder, {"reconcile", "link.design.json", "b.key", "a.syn", "-o", "b.provisional",
                           "--receipt", "receipt.json"});
  EXPECT_EQ(result.status, 1);
  EXPECT_NE(result.out.find("a slip, or another key"), std::string::npos) << result.out;
}

TEST(MainJob, StrictTurnsAFailedBlockIntoStatusOne) {
  const Folder folder;
  WholeJob job;
  job.key_qber = 0.026;
  run_to_message(folder, job);
  const Arguments reconcile = {"reconcile", "link.design.json", "b.key",     "a.syn",
                               "-o",        "b.provisional",    "--receipt", "receipt.json"};
  EXPECT_EQ(run_command(folder, reconcile).status, 0);
  EXPECT_EQ(run_command(folder, reconcile + Arguments{"--strict"}).status, 1);
}

// ---------------------------------------------------------------- codes and arithmetics

class MainJobOfDesign : public ::testing::TestWithParam<Arguments> {};

TEST_P(MainJobOfDesign, SettlesEqualKeysAndAccountsForEveryBit) {
  const Folder folder;
  WholeJob job;
  job.block_length = 512;
  job.key_bits = 512 * 50;
  job.goal = {"--fer", "0.05"};
  job.design = GetParam();
  const JobOutcome outcome = run_and_check(folder, job);
  ASSERT_FALSE(HasFailure());
  EXPECT_GT(outcome.settled_count(), outcome.blocks() / 2);
}

INSTANTIATE_TEST_SUITE_P(
    Designs, MainJobOfDesign,
    ::testing::Values(Arguments{"--precoding", "state8"},
                      Arguments{"--precoding", "state8", "--arithmetic", "planes:3"},
                      Arguments{"--arithmetic", "exact"}, Arguments{"--arithmetic", "planes:2"},
                      Arguments{"--arithmetic", "planes:4"}, Arguments{"--arithmetic", "planes:7"},
                      Arguments{"--arithmetic", "integer:6:8"},
                      Arguments{"--arithmetic", "integer:4:2"},
                      Arguments{"--construction", "bhattacharyya"}, Arguments{"--check-bits", "6"},
                      Arguments{"--check-bits", "8"}, Arguments{"--check-bits", "16"},
                      Arguments{"--check-bits", "24"}),
    [](const auto& one) {
      std::string name;
      for (const std::string& word : one.param) {
        for (const char c : word) {
          if (std::isalnum(static_cast<unsigned char>(c)) != 0) name += c;
        }
      }
      return name;
    });

TEST(MainJob, TakesEveryGoalOfADesign) {
  for (const Arguments& goal :
       {Arguments{"--fer", "0.01"}, Arguments{"--frozen", "300"}, Arguments{"--efficiency", "1.9"},
        Arguments{"--best-key"}, Arguments{"--best-key", "--phase-error", "0.03"}}) {
    const Folder folder;
    WholeJob job;
    job.goal = goal;
    const JobOutcome outcome = run_and_check(folder, job);
    ASSERT_FALSE(HasFailure()) << goal.front();
    EXPECT_GT(outcome.settled_count(), 0U);
    if (goal.front() == "--frozen") {
      EXPECT_EQ(outcome.frozen_count, 300U);
    }
    if (goal.front() == "--efficiency") {
      const auto leakage = static_cast<double>(outcome.frozen_count + outcome.check_bits);
      EXPECT_EQ(leakage, std::floor(1.9 * 1024 * entropy(0.02)));
    }
  }
}

TEST(MainJob, TakesTheUsersOwnFrozenSetInEachFormat) {
  const Folder folder;
  WholeJob job;
  run_to_message(folder, job);
  const std::string hex = Json::parse(folder.read("link.design.json")).at("frozen_hex");
  std::string text;
  std::string packed;
  for (std::size_t k = 0; k < hex.size(); k += 2) {
    const int byte = std::stoi(hex.substr(k, 2), nullptr, 16);
    packed += static_cast<char>(byte);
    for (int b = 7; b >= 0; --b) text += ((byte >> b) & 1) != 0 ? '1' : '0';
    if (k % 16 == 14) text += '\n';
  }
  folder.write("mask.text", text);
  folder.write("mask.hex", hex + "\n");
  folder.write("mask.packed", packed);
  for (const std::string format : {"text", "hex", "packed"}) {
    const CommandResult result =
        run_command(folder, {"design", "--block-length", "1024", "--qber", "0.02", "--mask",
                             "mask." + format, "--mask-format", format, "-o", format + ".json"});
    ASSERT_EQ(result.status, 0) << result.err;
    const Json design = Json::parse(folder.read(format + ".json"));
    EXPECT_EQ(design.at("frozen_hex"), hex) << format;
    EXPECT_EQ(design.at("code_sha256"),
              Json::parse(folder.read("link.design.json")).at("code_sha256"));
  }
}

// ---------------------------------------------------------------- groups and tags

TEST(MainJob, WithoutCheckBitsTheTagOfEachBlockDecides) {
  const Folder folder;
  WholeJob job;
  job.key_bits = 1024 * 100;
  job.goal = {"--fer", "0.2"};
  job.design = {"--check-bits", "0"};
  const JobOutcome outcome = run_and_check(folder, job);
  ASSERT_FALSE(HasFailure());
  EXPECT_EQ(outcome.accepted_count(), outcome.blocks());
  EXPECT_EQ(outcome.receipt.at("groups").size(), outcome.blocks());
  // Exactly the blocks that the provisional key has wrong are rejected.
  const Bits provisional = bits_of_packed(folder.read("b.provisional"), job.key_bits);
  std::size_t wrong = 0;
  for (std::size_t b = 0; b < outcome.blocks(); ++b) {
    const Bits& block = outcome.sender.blocks[b];
    const bool right = std::equal(block.begin(), block.end(),
                                  provisional.begin() + static_cast<std::ptrdiff_t>(1024 * b));
    EXPECT_EQ(outcome.settled[b], right) << "block " << b;
    wrong += right ? 0 : 1;
  }
  EXPECT_GT(wrong, 0U);
}

TEST(MainJob, GroupsHoldAsManyBlocksAsAsked) {
  for (const std::uint64_t bits : {1, 1024, 5 * 1024, 5 * 1024 + 1023, 1 << 30}) {
    const Folder folder;
    WholeJob job;
    job.key_bits = 1024 * 23;
    job.reconcile = {"--group", std::to_string(bits)};
    const JobOutcome outcome = run_and_check(folder, job);
    ASSERT_FALSE(HasFailure());
    const std::uint64_t blocks = std::max<std::uint64_t>(1, bits / 1024);
    for (const Json& group : outcome.receipt.at("groups")) {
      const std::uint64_t first = group.at("first_block");
      EXPECT_EQ(first % blocks, 0U);
      EXPECT_EQ(group.at("blocks"), std::min<std::uint64_t>(blocks, 23 - first));
    }
  }
}

TEST(MainJob, EachGroupHasAHashKeyOfItsOwn) {
  const Folder folder;
  WholeJob job;
  job.reconcile = {"--group", "1024"};
  const JobOutcome first = run_and_check(folder, job);
  folder.remove("a.syn");
  const JobOutcome second = run_and_check(folder, job);
  ASSERT_FALSE(HasFailure());
  std::vector<std::string> keys;
  for (const JobOutcome* outcome : {&first, &second}) {
    for (const Json& group : outcome->receipt.at("groups")) keys.push_back(group.at("hash_key"));
  }
  std::sort(keys.begin(), keys.end());
  EXPECT_EQ(std::adjacent_find(keys.begin(), keys.end()), keys.end());
  EXPECT_NE(first.receipt.at("session"), second.receipt.at("session"));
}

TEST(MainJob, SettleRefusesAKeyThatTheMessageWasNotMadeOf) {
  const Folder folder;
  WholeJob job;
  job.key_bits = 1024 * 20;
  job.lanes = 1;
  run_to_message(folder, job);
  ASSERT_EQ(run_command(folder, {"reconcile", "link.design.json", "b.key", "a.syn", "-o",
                                 "b.provisional", "--receipt", "receipt.json"})
                .status,
            0);
  std::string key = folder.read("a.key");
  key[7 * 128 + 50] = static_cast<char>(key[7 * 128 + 50] ^ 4);
  folder.write("other.key", key);
  const CommandResult settle =
      run_command(folder, {"settle", "link.design.json", "other.key", "a.syn", "receipt.json", "-o",
                           "a.settled", "--verdict", "verdict.json"});
  EXPECT_EQ(settle.status, 2);
  EXPECT_NE(settle.err.find("was not made of key 'other.key'"), std::string::npos) << settle.err;
  EXPECT_FALSE(folder.holds("a.settled"));
  EXPECT_FALSE(folder.holds("verdict.json"));
}

// ---------------------------------------------------------------- files

TEST(MainJob, KeepsFailedBlocksAsTheyWereReceived) {
  const Folder folder;
  WholeJob job;
  job.key_qber = 0.025;
  job.key_bits = 1024 * 60;
  job.reconcile = {"--keep-failed", "b.failed"};
  const JobOutcome outcome = run_and_check(folder, job);
  ASSERT_FALSE(HasFailure());
  Bits expected;
  for (std::size_t b = 0; b < outcome.blocks(); ++b) {
    if (outcome.accepted[b]) continue;
    const Bits& block = outcome.receiver.blocks[b];
    expected.insert(expected.end(), block.begin(), block.end());
  }
  EXPECT_FALSE(expected.empty());
  EXPECT_EQ(folder.read("b.failed"), packed_of_bits(expected));
}

TEST(MainJob, KeepsKeysAndReportsFromOtherUsers) {
  const Folder folder;
  WholeJob job;
  job.key_bits = 1024 * 20 + 9;
  job.reconcile = {"--keep-failed", "b.failed", "--rest", "b.rest"};
  folder.write("b.settled", "a file that is there and open to all keeps no key");
  run_and_check(folder, job);
  for (const char* name : {"a.key", "b.key", "b.provisional", "b.failed", "b.rest", "a.settled",
                           "b.settled", "a.report", "b.report"}) {
    EXPECT_EQ(folder.mode(name), 0600U) << name;
  }
  for (const char* name : {"a.syn", "receipt.json", "verdict.json", "link.design.json"}) {
    EXPECT_NE(folder.mode(name) & 0044U, 0U) << name;
  }
}

TEST(MainJob, LeavesNoFileButThoseAskedFor) {
  const Folder folder;
  run_and_check(folder, {});
  const std::vector<std::string> expected = {
      "a.key",        "a.report",      "a.settled", "a.syn",     "b.final",
      "b.key",        "b.provisional", "b.report",  "b.settled", "link.design.json",
      "receipt.json", "verdict.json"};
  EXPECT_EQ(folder.names(), expected);
}

TEST(MainJob, TextAndPackedKeysGiveTheSameBits) {
  const Folder packed_folder;
  const Folder text_folder;
  WholeJob job;
  job.key_bits = 1024 * 12 + 5;
  job.exchange = {"--test-only-seed", "3"};
  const JobOutcome packed = run_and_check(packed_folder, job);
  job.key_format = "text";
  const JobOutcome text = run_and_check(text_folder, job);
  ASSERT_FALSE(HasFailure());
  EXPECT_EQ(packed.sender.blocks, text.sender.blocks);
  EXPECT_EQ(packed_folder.read("a.syn"), text_folder.read("a.syn"));
  EXPECT_EQ(packed_folder.read("receipt.json"), text_folder.read("receipt.json"));
  EXPECT_EQ(bits_of_text(text_folder.read("a.settled")),
            bits_of_packed(packed_folder.read("a.settled"), packed.settled_count() * 1024));
}

TEST(MainJob, MarksWhatWasMadeForTestsOnly) {
  const Folder folder;
  WholeJob job;
  job.exchange = {"--test-only-seed", "3"};
  const JobOutcome outcome = run_and_check(folder, job);
  ASSERT_FALSE(HasFailure());
  EXPECT_EQ(outcome.message_account.at("test_only"), true);
  for (const Json* file :
       {&outcome.receipt, &outcome.verdict, &outcome.receiver_report, &outcome.sender_report}) {
    EXPECT_EQ(file->at("test_only"), true);
  }
  for (const CommandResult* step : {&outcome.reconcile, &outcome.settle, &outcome.confirm}) {
    EXPECT_EQ(count_in(step->out, "TEST ONLY"), 1U);
  }
}

// ---------------------------------------------------------------- the same bytes

// All files that a job leaves.
std::vector<std::string> contents(const Folder& folder) {
  std::vector<std::string> all;
  for (const std::string& name : folder.names()) all.push_back(name + "\n" + folder.read(name));
  return all;
}

TEST(MainJob, GivesTheSameBytesForAnyNumberOfThreads) {
  WholeJob job;
  job.block_length = 256;
  job.key_bits = 256 * 900 + 100;
  job.lanes = 8;
  job.exchange = {"--test-only-seed", "11"};
  job.reconcile = {"--keep-failed", "b.failed", "--rest", "b.rest"};
  std::vector<std::vector<std::string>> seen;
  for (const char* threads : {"1", "2", "8"}) {
    const Folder folder;
    job.computing = {"--threads", threads};
    run_and_check(folder, job);
    seen.push_back(contents(folder));
  }
  ASSERT_FALSE(HasFailure());
  EXPECT_EQ(seen[0].size(), 14U);
  EXPECT_EQ(seen[0], seen[1]);
  EXPECT_EQ(seen[0], seen[2]);
}

TEST(MainJob, GivesTheSameBytesWithAndWithoutVectorInstructions) {
  WholeJob job;
  job.key_bits = 1024 * 40;
  job.exchange = {"--test-only-seed", "11"};
  job.design = {"--precoding", "state8", "--arithmetic", "planes:3"};
  const Folder best;
  run_and_check(best, job);
  const Folder scalar;
  job.computing = {"--simd", "scalar"};
  run_and_check(scalar, job);
  ASSERT_FALSE(HasFailure());
  EXPECT_EQ(contents(best), contents(scalar));
}

// ---------------------------------------------------------------- machines that read it

// Status, and stdout as one JSON object.
Json json_of(const Folder& folder, const Arguments& arguments) {
  const CommandResult result = run_command(folder, arguments + Arguments{"--json"});
  EXPECT_EQ(result.status, 0) << arguments.front() << ": " << result.err;
  EXPECT_EQ(result.err, "");
  const Json object = Json::parse(result.out, nullptr, false);
  EXPECT_TRUE(object.is_object()) << arguments.front() << " printed " << result.out;
  return object;
}

void expect_keys(const Json& object, const std::vector<std::string>& keys, const char* which) {
  for (const std::string& key : keys) EXPECT_TRUE(object.contains(key)) << which << ": " << key;
}

TEST(Json, IsOneObjectWithTheKeysOfTheFiles) {
  const Folder folder;
  const Json design = json_of(folder, {"design", "--block-length", "1024", "--qber", "0.02",
                                       "--fer", "0.1", "-o", "d.json"});
  const Json file = Json::parse(folder.read("d.json"));
  const Json inspect = json_of(folder, {"inspect", "d.json"});
  for (const char* key : {"block_length", "qber", "construction", "decoder", "frozen_count",
                          "precoding", "check_bits", "predicted", "leakage", "code_sha256"}) {
    EXPECT_EQ(design.at(key), file.at(key)) << key;
    EXPECT_EQ(inspect.at(key), file.at(key)) << key;
  }
  expect_keys(json_of(folder, {"inspect", "d.json", "--qber", "0.03"}), {"at_qber"}, "inspect");
  const Json limits = json_of(folder, {"limits", "--block-length", "1024", "--qber", "0.02"});
  expect_keys(limits, {"block_length", "qber", "limits"}, "limits");
  expect_keys(json_of(folder, {"sample", "--bits", "16384", "--qber", "0.02", "-o", "a", "b"}),
              {"bits", "qber", "differences", "files"}, "sample");
  expect_keys(json_of(folder, {"syndrome", "d.json", "a", "-o", "m"}),
              {"blocks", "disclosed_bits", "message_sha256", "session"}, "syndrome");
  const Json reconcile = json_of(
      folder, {"reconcile", "d.json", "b", "m", "-o", "p", "--receipt", "r", "--report", "rr"});
  Json report = Json::parse(folder.read("rr"));
  report.erase("errors_corrected");
  Json told = reconcile;
  told.erase("seconds");
  EXPECT_EQ(told, report);
  const Json settle = json_of(
      folder, {"settle", "d.json", "a", "m", "r", "-o", "s", "--verdict", "v", "--report", "sr"});
  told = settle;
  told.erase("seconds");
  EXPECT_EQ(told, Json::parse(folder.read("sr")));
  expect_keys(json_of(folder, {"confirm", "p", "r", "v", "-o", "t"}),
              {"settled_blocks", "settled_bits", "groups", "rejected_groups"}, "confirm");
}

TEST(Json, StaysOneObjectWhereTheAnswerIsNo) {
  const Folder folder;
  WholeJob job;
  job.key_qber = 0.5;
  run_to_message(folder, job);
  const CommandResult result =
      run_command(folder, {"reconcile", "link.design.json", "b.key", "a.syn", "-o", "b.provisional",
                           "--receipt", "receipt.json", "--json"});
  EXPECT_EQ(result.status, 1);
  EXPECT_EQ(Json::parse(result.out).at("accepted"), 0);
  const CommandResult none = run_command(folder, {"design", "--block-length", "1024", "--qber",
                                                  "0.2", "--best-key", "-o", "d.json", "--json"});
  EXPECT_EQ(none.status, 1);
  EXPECT_LE(Json::parse(none.out).at("net_key_rate").get<double>(), 0.0);
}

TEST(Quiet, PrintsNothing) {
  const Folder folder;
  WholeJob job;
  run_to_message(folder, job);
  const CommandResult result =
      run_command(folder, {"reconcile", "link.design.json", "b.key", "a.syn", "-o", "b.provisional",
                           "--receipt", "receipt.json", "--quiet"});
  EXPECT_EQ(result.out, "");
  EXPECT_EQ(result.err, "");
}

TEST(Design, WritesNothingWhereNoKeyIsLeft) {
  const Folder folder;
  const CommandResult result = run_command(
      folder, {"design", "--block-length", "1024", "--qber", "0.11", "--best-key", "-o", "d"});
  EXPECT_EQ(result.status, 1);
  EXPECT_EQ(result.out.rfind("No key at this error rate", 0), 0U) << result.out;
  EXPECT_TRUE(folder.names().empty());
}

TEST(Help, OfEveryCommandShowsAnExample) {
  const Folder folder;
  const CommandResult overview = run_command(folder, {"--help"});
  EXPECT_EQ(overview.status, 0);
  for (const std::string command : {"design", "batch", "inspect", "limits", "sample", "trial",
                                    "syndrome", "reconcile", "settle", "confirm"}) {
    EXPECT_NE(overview.out.find("\n  " + command), std::string::npos) << command;
    const CommandResult help = run_command(folder, {command, "--help"});
    EXPECT_EQ(help.status, 0);
    EXPECT_EQ(help.err, "");
    EXPECT_NE(help.out.find("Example"), std::string::npos) << command;
    EXPECT_NE(help.out.find("\n  frostline " + command + " "), std::string::npos) << command;
    EXPECT_NE(help.out.find("--json"), std::string::npos) << command;
  }
}

// ---------------------------------------------------------------- outputs that are no files

TEST(StandardOutput, TakesAMessageThroughAPipe) {
  const Folder folder;
  WholeJob job;
  job.exchange = {"--test-only-seed", "5"};
  run_to_message(folder, job);
  const CommandResult result =
      run_command(folder, {"syndrome", "link.design.json", "a.key", "-o", "/dev/stdout", "--quiet",
                           "--test-only-seed", "5"});
  EXPECT_EQ(result.status, 0) << result.err;
  EXPECT_EQ(result.out, folder.read("a.syn"));
}

TEST(StandardOutput, TakesAMessageRedirectedToAFile) {
  const Folder folder;
  WholeJob job;
  job.exchange = {"--test-only-seed", "5"};
  run_to_message(folder, job);
  const CommandResult result = run_command(folder,
                                           {"syndrome", "link.design.json", "a.key", "-o",
                                            "/dev/stdout", "--quiet", "--test-only-seed", "5"},
                                           "redirected");
  EXPECT_EQ(result.status, 0) << result.err;
  EXPECT_EQ(folder.read("redirected"), folder.read("a.syn"));
}

// As root a program that renames its output onto /dev/stdout would take that name away from all.
TEST(StandardOutput, StaysADeviceWhenItIsAFile) {
  const Folder folder;
  const auto device = std::filesystem::read_symlink("/dev/stdout");
  const Arguments design = {"design", "--block-length", "64", "--qber", "0.02", "--fer", "0.1"};
  const CommandResult result =
      run_command(folder, design + Arguments{"-o", "/dev/stdout", "--quiet"}, "redirected");
  EXPECT_EQ(result.status, 0) << result.err;
  EXPECT_EQ(std::filesystem::read_symlink("/dev/stdout"), device);
  ASSERT_EQ(run_command(folder, design + Arguments{"-o", "d.json", "--quiet"}).status, 0);
  EXPECT_EQ(folder.read("redirected"), folder.read("d.json"));
  // What is printed afterwards follows the file, and does not fall on it.
  ASSERT_EQ(run_command(folder, design + Arguments{"-o", "/dev/stdout"}, "redirected").status, 0);
  EXPECT_EQ(folder.read("redirected").substr(0, folder.read("d.json").size()),
            folder.read("d.json"));
}

TEST(Outputs, ReplaceTheFileBehindASymbolicLink) {
  const Folder folder;
  folder.write("real", "old");
  std::filesystem::create_symlink("real", folder.path("link"));
  ASSERT_EQ(run_command(folder, {"design", "--block-length", "64", "--qber", "0.02", "--fer", "0.1",
                                 "-o", "link"})
                .status,
            0);
  EXPECT_TRUE(std::filesystem::is_symlink(folder.path("link")));
  EXPECT_EQ(folder.read("real").front(), '{');
  EXPECT_EQ(folder.names(), (std::vector<std::string>{"link", "real"}));
}

}  // namespace
}  // namespace frostline::testing
