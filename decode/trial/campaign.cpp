#include "decode/trial/campaign.h"

#include <stdexcept>

#include "polar/design_json.h"
#include "polar/digest.h"
#include "polar/error.h"

namespace frostline {
namespace {

constexpr const char* kFormat = "frostline-trial";
constexpr std::uint64_t kVersion = 1;

Json shard_json(const Shard& shard) { return {shard.index, shard.count}; }

Json to_json(const Campaign& campaign) {
  Json object;
  object["code_sha256"] = campaign.code_sha256;
  object["arithmetic"] = campaign.arithmetic;
  object["decoder_qber"] = campaign.decoder_qber;
  object["lists"] = campaign.lists;
  object["channel"] = campaign.channel;
  object["qber"] = campaign.qber;
  object["lanes"] = campaign.lanes;
  object["blocks"] = campaign.blocks;
  object["failures"] = campaign.failures ? Json(*campaign.failures) : Json(nullptr);
  object["seed"] = campaign.seed;
  object["shard"] = shard_json(campaign.shard);
  return object;
}

Json to_json(const TrialCounts& counts) {
  Json object;
  object["batches"] = counts.batches;
  object["blocks"] = counts.blocks;
  object["failures"] = counts.failures;
  object["undetected"] = counts.undetected;
  object["errors"] = counts.errors;
  object["over"] = counts.over;
  object["stopped_at_failure"] = counts.stopped_at_failure;
  return object;
}

bool get_flag(const Json& object, const char* key, const std::string& where) {
  if (!object.at(key).is_boolean()) throw InputError(where + ": '" + key + "' is no true or false");
  return object.at(key).get<bool>();
}

std::vector<std::uint64_t> get_counts(const Json& object, const char* key,
                                      const std::string& where) {
  std::vector<std::uint64_t> values;
  const Json& array = object.at(key);
  if (array.is_array()) {
    for (const Json& each : array) {
      if (!each.is_number_unsigned()) break;
      values.push_back(each.get<std::uint64_t>());
    }
  }
  if (!array.is_array() || values.empty() || values.size() != array.size()) {
    throw InputError(where + ": '" + key + "' is no list of counts");
  }
  return values;
}

Campaign campaign_from(const Json& object, const std::string& where) {
  require_keys(object,
               {"code_sha256", "arithmetic", "decoder_qber", "lists", "channel", "qber", "lanes",
                "blocks", "failures", "seed", "shard"},
               {}, where);
  Campaign campaign;
  campaign.code_sha256 = get_string(object, "code_sha256", where);
  campaign.arithmetic = get_string(object, "arithmetic", where);
  campaign.decoder_qber = get_number(object, "decoder_qber", where);
  for (const std::uint64_t list : get_counts(object, "lists", where)) {
    if (list > kMostTrialBlocks) throw InputError(where + ": a list size out of range");
    campaign.lists.push_back(static_cast<unsigned>(list));
  }
  try {
    require_lists(campaign.lists);
    parse_arithmetic(campaign.arithmetic);
    const std::uint64_t lanes = get_unsigned(object, "lanes", where);
    require_lanes(lanes);
    campaign.lanes = static_cast<unsigned>(lanes);
  } catch (const InputError& error) {
    const std::string text = error.what();
    throw InputError(text.rfind(where, 0) == 0 ? text : where + ": " + text);
  }
  campaign.channel = get_string(object, "channel", where);
  campaign.qber = get_number(object, "qber", where);
  campaign.blocks = get_unsigned(object, "blocks", where);
  if (!object.at("failures").is_null()) {
    campaign.failures = get_unsigned(object, "failures", where);
  }
  campaign.seed = get_unsigned(object, "seed", where);
  const auto shard = get_counts(object, "shard", where);
  if (shard.size() != 2 || shard[0] < 1 || shard[0] > shard[1]) {
    throw InputError(where + ": 'shard' is not [I, K]");
  }
  campaign.shard = {shard[0], shard[1]};
  return campaign;
}

TrialCounts counts_from(const Json& object, const Campaign& campaign, const std::string& where) {
  require_keys(
      object,
      {"batches", "blocks", "failures", "undetected", "errors", "over", "stopped_at_failure"}, {},
      where);
  TrialCounts counts;
  counts.batches = get_unsigned(object, "batches", where);
  counts.blocks = get_unsigned(object, "blocks", where);
  counts.failures = get_unsigned(object, "failures", where);
  counts.undetected = get_unsigned(object, "undetected", where);
  counts.errors = get_unsigned(object, "errors", where);
  counts.over = get_flag(object, "over", where);
  counts.stopped_at_failure = get_flag(object, "stopped_at_failure", where);
  if (counts.blocks > campaign.blocks || counts.failures > counts.blocks ||
      counts.undetected > counts.failures || counts.batches > counts.blocks ||
      (counts.stopped_at_failure && campaign.failures != counts.failures)) {
    throw InputError(where + ": counts that no trial gives");
  }
  return counts;
}

}  // namespace

Campaign make_campaign(const Design& design, const std::vector<unsigned>& lists,
                       const Channel& channel, unsigned lanes, const TrialOptions& options) {
  return {to_hex(code_sha256(design.code)),
          to_string(design.arithmetic),
          design.qber,
          lists,
          channel.name(),
          channel.mean_qber(),
          lanes,
          options.blocks,
          options.failures,
          options.seed,
          options.shard};
}

std::string campaign_to_json(const CampaignState& state) {
  Json root;
  root["format"] = kFormat;
  root["version"] = kVersion;
  root["trial"] = to_json(state.campaign);
  root["counts"] = to_json(state.counts);
  return root.dump(2) + '\n';
}

CampaignState campaign_from_json(std::string_view text, std::string_view name) {
  const std::string where(name);
  const Json root = parse_json(text, name);
  require_keys(root, {"format", "version", "trial", "counts"}, {}, where);
  if (get_string(root, "format", where) != kFormat) {
    throw InputError(where + ": not a " + kFormat + " file");
  }
  if (get_unsigned(root, "version", where) != kVersion) {
    throw InputError(where + ": of another version than " + std::to_string(kVersion));
  }
  CampaignState state;
  state.campaign = campaign_from(root.at("trial"), where + ": trial");
  state.counts = counts_from(root.at("counts"), state.campaign, where + ": counts");
  return state;
}

void require_same_campaign(const Campaign& expected, const Campaign& found, std::string_view name) {
  const Json a = to_json(expected);
  const Json b = to_json(found);
  for (const auto& [key, value] : a.items()) {
    if (b.at(key) == value) continue;
    throw InputError(std::string(name) + ": of another trial: " + key + " is " + b.at(key).dump() +
                     " there and " + value.dump() + " here");
  }
}

CampaignState merge_shards(const std::vector<CampaignState>& shards,
                           const std::vector<std::string>& names) {
  if (shards.empty() || names.size() != shards.size()) {
    throw std::invalid_argument("merge_shards: no shards, or not a name for each");
  }
  CampaignState whole{shards.front().campaign, {}};
  const std::uint64_t count = whole.campaign.shard.count;
  std::vector<bool> seen(shards.size(), false);
  for (std::size_t k = 0; k < shards.size(); ++k) {
    Campaign expected = whole.campaign;
    const Shard& shard = shards[k].campaign.shard;
    expected.shard.index = shard.index;
    require_same_campaign(expected, shards[k].campaign, names[k]);
    const TrialCounts& counts = shards[k].counts;
    if (!counts.over) throw InputError(names[k] + ": this shard is not finished");
    if (shard.index <= seen.size()) {
      if (seen[shard.index - 1]) {
        throw InputError(names[k] + ": shard " + std::to_string(shard.index) + " is there twice");
      }
      seen[shard.index - 1] = true;
    }
    whole.counts.batches += counts.batches;
    whole.counts.blocks += counts.blocks;
    whole.counts.failures += counts.failures;
    whole.counts.undetected += counts.undetected;
    whole.counts.errors += counts.errors;
    whole.counts.stopped_at_failure |= counts.stopped_at_failure;
  }
  if (shards.size() != count) {
    throw InputError(std::to_string(shards.size()) + " shards of a trial in " +
                     std::to_string(count));
  }
  whole.campaign.shard = {1, 1};
  whole.counts.over = true;
  return whole;
}

}  // namespace frostline
