#include "decode/trial/campaign.h"

#include <gtest/gtest.h>
#include <tbb/global_control.h>

#include "construct/designer.h"
#include "decode/lanes/lane_decoder.h"
#include "polar/error.h"

namespace frostline {
namespace {

const Arithmetic kPlanes3 = Arithmetic::planes_of(3);

class CampaignTest : public ::testing::Test {
 protected:
  CampaignTest()
      : design_(make_design(rank_indices(BlockLength::from_log2(9), 0.05,
                                         default_construction(kPlanes3), 0, kPlanes3),
                            {Goal::Kind::fer, 0.1, 0}, {6, Precoding::none, false}, {})
                    .design),
        decoder_(design_.code, kPlanes3),
        channel_(parse_channel("drift:0.03:0.07:5000")) {}

  CampaignState run(const TrialOptions& options, const RunControl& control = {}) const {
    const TrialSummary summary = run_trial(design_.code, decoder_, *channel_, options, control);
    return {make_campaign(design_, {1}, *channel_, summary.lanes, options), summary};
  }

  Design design_;
  LaneDecoder decoder_;
  std::unique_ptr<Channel> channel_;
};

TrialOptions blocks_of(std::uint64_t blocks) {
  TrialOptions options;
  options.blocks = blocks;
  return options;
}

// The run stops after every few batches and goes on from what its file says.
TEST_F(CampaignTest, ResumedAgainAndAgainEndsWithTheSameBytes) {
  for (const bool by_failures : {false, true}) {
    TrialOptions options = blocks_of(20011);
    if (by_failures) options.failures = 400;
    const std::string whole = campaign_to_json(run(options));
    CampaignState state;
    unsigned runs = 0;
    while (!state.counts.over) {
      std::atomic<bool> stop{false};
      RunControl control;
      control.stop = &stop;
      control.progress = [&](std::uint64_t done, std::uint64_t) {
        stop = done >= state.counts.blocks + 600;
      };
      state = run(options, control);
      state = campaign_from_json(campaign_to_json(state), "state");
      options.resume = state.counts;
      ++runs;
    }
    EXPECT_GT(runs, 1U);
    EXPECT_EQ(campaign_to_json(state), whole);
  }
}

TEST_F(CampaignTest, FourShardsAddUpToTheWhole) {
  for (const std::uint64_t blocks : {20011U, 700U}) {
    std::vector<CampaignState> shards;
    for (const std::uint64_t index : {3U, 1U, 4U, 2U}) {
      TrialOptions options = blocks_of(blocks);
      options.shard = {index, 4};
      const tbb::global_control limit(tbb::global_control::max_allowed_parallelism, index);
      shards.push_back(run(options));
    }
    const CampaignState merged = merge_shards(shards, {"c", "a", "d", "b"});
    EXPECT_EQ(campaign_to_json(merged), campaign_to_json(run(blocks_of(blocks))));
    EXPECT_EQ(merged.counts.blocks, blocks);
  }
}

TEST_F(CampaignTest, RefusesShardsThatDoNotBelongTogether) {
  TrialOptions options = blocks_of(5000);
  options.shard = {1, 2};
  const CampaignState first = run(options);
  options.shard = {2, 2};
  const CampaignState second = run(options);
  options.seed = 9;
  const CampaignState foreign = run(options);
  CampaignState unfinished = second;
  unfinished.counts.over = false;
  EXPECT_NO_THROW(merge_shards({first, second}, {"a", "b"}));
  EXPECT_THROW(merge_shards({first}, {"a"}), InputError);
  EXPECT_THROW(merge_shards({first, first}, {"a", "b"}), InputError);
  EXPECT_THROW(merge_shards({first, foreign}, {"a", "b"}), InputError);
  EXPECT_THROW(merge_shards({first, unfinished}, {"a", "b"}), InputError);
}

TEST_F(CampaignTest, TellsWhatIsWrongWithAFile) {
  const std::string good = campaign_to_json(run(blocks_of(1000)));
  EXPECT_EQ(campaign_to_json(campaign_from_json(good, "good")), good);
  const auto with = [&](const std::string& from, const std::string& to) {
    std::string text = good;
    const std::size_t at = text.find(from);
    EXPECT_NE(at, std::string::npos) << from;
    return text.replace(at, from.size(), to);
  };
  for (const std::string& text :
       {std::string("{}"), std::string("no JSON"), with("frostline-trial", "frostline-design"),
        with("\"version\": 1", "\"version\": 2"), with("\"lanes\": ", "\"lanes\": 3"),
        with("\"over\": true", "\"over\": 1"), with("\"batches\": ", "\"batches\": 99999"),
        with("planes:3", "planes:9"), with("\"failures\": null", "\"failures\": -1")}) {
    EXPECT_THROW(campaign_from_json(text, "text"), InputError) << text;
  }
}

// Bursts far longer than a machine word: side by side, all blocks of a batch share them; one after
// the other, a burst falls on one block alone. Source of the claim: common practice in
// interleaving.
TEST_F(CampaignTest, LanesShareBurstsAmongBlocks) {
  const auto burst = parse_channel("burst:0.02:0.2:0.0002:0.002");
  TrialOptions options = blocks_of(8192);
  const TrialSummary interleaved = run_trial(design_.code, decoder_, *burst, options);
  options.lanes = 1;
  const TrialSummary alone = run_trial(design_.code, decoder_, *burst, options);
  EXPECT_EQ(alone.lanes, 1U);
  EXPECT_LT(fixed_blocks_interval(interleaved.failures, interleaved.blocks, 0.999).high,
            fixed_blocks_interval(alone.failures, alone.blocks, 0.999).low);
}

}  // namespace
}  // namespace frostline
