// Trials that outlive a run: what a trial is, how far it has come, and its file.
//
// The file is one JSON object without times, so that it depends on nothing but what was asked and
// counted: a trial that was interrupted and went on ends with the same bytes as one left alone, and
// the shards of a trial, merged, give the bytes of the whole.
#pragma once

#include <string>
#include <string_view>
#include <vector>

#include "decode/trial/trial.h"
#include "polar/design.h"

namespace frostline {

// Everything that the counts of a trial depend on.
struct Campaign {
  std::string code_sha256;      // in hexadecimal
  std::string arithmetic;       // of the decoder
  double decoder_qber = 0;      // at which it computes LLRs and metric weights
  std::vector<unsigned> lists;  // of its passes
  std::string channel;
  double qber = 0;  // the channel's mean
  unsigned lanes = 1;
  std::uint64_t blocks = 0;
  std::optional<std::uint64_t> failures;
  std::uint64_t seed = 1;
  Shard shard;
};

struct CampaignState {
  Campaign campaign;
  TrialCounts counts;
};

// lanes: those of trial_cut.
Campaign make_campaign(const Design& design, const std::vector<unsigned>& lists,
                       const Channel& channel, unsigned lanes, const TrialOptions& options);

std::string campaign_to_json(const CampaignState& state);
// Throws InputError "NAME: ..." on anything but such a file, and on counts that cannot be.
CampaignState campaign_from_json(std::string_view text, std::string_view name);

// Throws InputError "NAME: of another trial: ..." that tells the first difference.
void require_same_campaign(const Campaign& expected, const Campaign& found, std::string_view name);

// Adds the K finished shards of a trial up to the state of the whole, in any order. names: what
// messages call them. Throws InputError when shards are of different trials, missing, given twice,
// or not finished; std::invalid_argument without any.
CampaignState merge_shards(const std::vector<CampaignState>& shards,
                           const std::vector<std::string>& names);

}  // namespace frostline
