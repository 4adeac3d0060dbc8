// frostline trial: Monte Carlo of a design.
#include <sys/stat.h>

#include <chrono>
#include <iostream>

#include "cli/account.h"
#include "cli/command.h"
#include "cli/decoder_plan.h"
#include "cli/design_file.h"
#include "cli/options.h"
#include "cli/run_state.h"
#include "cli/trial_account.h"
#include "cli/trial_curve.h"
#include "decode/batch_decoder.h"
#include "decode/exchange/streams.h"
#include "decode/trial/campaign.h"
#include "polar/error.h"
#include "polar/limits.h"

namespace frostline::cli {
namespace {

constexpr std::uint64_t kDefaultBlocks = 1000000;
constexpr std::uint64_t kDefaultFailures = 100;
constexpr std::uint64_t kDefaultCurveBlocks = 10000;
// Between two writings of the checkpoint.
constexpr double kCheckpointSeconds = 10;
// The look at one block alone.
constexpr std::uint64_t kSingleBlocks = 1000;
constexpr double kSingleSeconds = 0.5;

Options make_options() {
  Options options("trial", "Runs a design against a channel and counts the blocks that fail.",
                  {"FILE"});
  options.value("qber", "P", "short for --channel bsc:P (the design's QBER)")
      .value("channel", "CHANNEL",
             "bsc:P; drift:LOW:HIGH:PERIOD, a QBER that rises from LOW to HIGH and falls back in "
             "PERIOD blocks; burst:P_GOOD:P_BAD:TO_BAD:TO_GOOD, two states that change with these "
             "probabilities after each bit (Gilbert-Elliott); file:A:B, where two captured strings "
             "differ")
      .value("key-format", "FORMAT", "of captured strings: packed or text (packed)")
      .value("bits", "B", "how many bits packed captured strings hold, where not a multiple of 8")
      .value("arithmetic", "A", "exact, planes:W or integer:Q:A (the design's)");
  add_list_option(options);
  options.value("lanes", "B", "blocks side by side, among which bursts are shared (a table of N)")
      .value("blocks", "B", "stop at so many blocks (1000000; with it no stop at failures)")
      .value("failures", "E", "stop at so many failures (100)")
      .value("seconds", "S", "stop after so long (with it no stop at failures unless asked for)")
      .value("seed", "S", "the same seed gives the same counts (1)")
      .value("phase-error", "E", "for the net key (the channel's mean QBER)")
      .value("checkpoint", "FILE", "keeps the counts in FILE, and goes on from there where it is")
      .value("shard", "I/K", "the I-th of K disjoint parts of the --blocks")
      .values("merge", "FILES", "adds up the checkpoints of all K shards instead of a run");
  add_curve_options(options);
  options.computing().epilogue(
      "Example: is the predicted FER what the decoder does?\n"
      "  frostline trial fibre.design.json --blocks 100000\n"
      "On a link with bursts, with a small list first and a large one for what it leaves:\n"
      "  frostline trial fibre.design.json --channel burst:0.01:0.1:0.0001:0.001 --list 8,32\n"
      "How many public bits for which FER, and what would reveals cost?\n"
      "  frostline trial fibre.design.json --curve fibre.csv --plot fibre.svg\n"
      "Two parts on two machines, and their sum:\n"
      "  frostline trial d.json --blocks 1000000 --shard 1/2 --checkpoint part1.json\n"
      "  frostline trial d.json --blocks 1000000 --shard 2/2 --checkpoint part2.json\n"
      "  frostline trial d.json --merge part1.json part2.json\n");
  return options;
}

std::unique_ptr<Channel> channel_option(const Options& options, const Design& design) {
  if (options.has("qber") && options.has("channel")) {
    throw InputError("trial: give only one of --qber and --channel");
  }
  std::unique_ptr<Channel> channel;
  if (options.has("channel")) {
    channel =
        parse_channel(options.text("channel"),
                      parse_key_format(options.optional_text("key-format").value_or("packed")),
                      options.optional_whole("bits"));
  } else {
    channel =
        std::make_unique<SymmetricChannel>(options.optional_number("qber").value_or(design.qber));
  }
  require_error_rate(channel->mean_qber(), "the channel's error rate");
  return channel;
}

Shard shard_option(const Options& options) {
  if (!options.has("shard")) return {};
  const std::string text = options.text("shard");
  const std::size_t slash = text.find('/');
  const bool digits = text.find_first_not_of("0123456789/") == std::string::npos &&
                      slash != std::string::npos && slash == text.rfind('/') && slash > 0 &&
                      slash + 1 < text.size() && text.size() < 20;
  if (!digits) throw InputError("--shard: '" + text + "' is not I/K");
  return {std::stoull(text.substr(0, slash)), std::stoull(text.substr(slash + 1))};
}

TrialOptions trial_options(const Options& options) {
  TrialOptions trial;
  trial.seconds = options.optional_number("seconds");
  trial.blocks =
      options.optional_whole("blocks").value_or(trial.seconds ? kMostTrialBlocks : kDefaultBlocks);
  trial.failures = options.optional_whole("failures");
  const bool stop_given =
      options.has("blocks") || options.has("failures") || options.has("seconds");
  if (!stop_given && options.has("curve")) {
    trial.blocks = kDefaultCurveBlocks;
  } else if (!stop_given) {
    trial.failures = kDefaultFailures;
  }
  trial.seed = options.optional_whole("seed").value_or(1);
  if (options.has("lanes")) {
    const std::uint64_t lanes = options.whole("lanes");
    require_lanes(lanes);
    trial.lanes = static_cast<unsigned>(lanes);
  }
  trial.shard = shard_option(options);
  if (trial.shard.count > 1 && !options.has("blocks")) {
    throw InputError("trial: --shard needs --blocks, which is cut into parts");
  }
  return trial;
}

bool file_is_there(const std::string& path) {
  struct stat status {};
  return ::stat(path.c_str(), &status) == 0;
}

// The file that a trial goes on from: read at its start, written now and then and at its end.
class Checkpoint {
 public:
  Checkpoint(std::string path, Campaign campaign)
      : path_(std::move(path)), campaign_(std::move(campaign)) {}

  // The counts so far; none where the file is not there yet.
  TrialCounts load() const {
    if (!file_is_there(path_)) return {};
    const CampaignState state = campaign_from_json(read_file(path_), path_);
    require_same_campaign(campaign_, state.campaign, path_);
    return state.counts;
  }
  void save_now_and_then(const TrialCounts& counts) {
    const auto now = std::chrono::steady_clock::now();
    if (std::chrono::duration<double>(now - last_).count() < kCheckpointSeconds) return;
    last_ = now;
    save(counts);
  }
  void save(const TrialCounts& counts) const {
    FileSink file(path_);
    file.write(campaign_to_json({campaign_, counts}));
    file.commit();
  }

 private:
  std::string path_;
  Campaign campaign_;
  std::chrono::steady_clock::time_point last_ = std::chrono::steady_clock::now();
};

std::optional<Checkpoint> checkpoint_option(const Options& options, Campaign campaign) {
  if (!options.has("checkpoint")) return std::nullopt;
  std::vector<std::string> inputs{options.text("FILE")};
  if (options.has("merge")) {
    for (const std::string& each : options.texts("merge")) inputs.push_back(each);
  }
  require_distinct_files(inputs, {options.text("checkpoint")});
  return Checkpoint(options.text("checkpoint"), std::move(campaign));
}

MeasuredTrial measure(const Options& options, Design design) {
  if (options.has("arithmetic")) design.arithmetic = parse_arithmetic(options.text("arithmetic"));
  const auto channel = channel_option(options, design);
  TrialOptions trial = trial_options(options);
  const DecoderPlan plan = decoder_plan(options, design);
  const auto decoder = make_batch_decoder(design, plan);
  const Cut cut = trial_cut(design.code.block_length(), *channel, trial);
  std::optional<Checkpoint> checkpoint =
      checkpoint_option(options, make_campaign(design, plan.lists, *channel, cut.lanes(), trial));
  if (checkpoint) trial.resume = checkpoint->load();
  RunState state("trial", static_cast<double>(design.code.block_length().bits()), options.quiet());
  std::uint64_t failures = trial.resume.failures;
  state.tell([&failures] { return counted(failures, "failure"); });
  trial.observe = [&](const TrialCounts& counts) {
    failures = counts.failures;
    if (checkpoint) checkpoint->save_now_and_then(counts);
  };
  const TrialSummary summary =
      frostline::run_trial(design.code, *decoder, *channel, trial, state.control());
  if (checkpoint) checkpoint->save(summary);
  if (summary.blocks == 0 && summary.interrupted) throw Interrupted();
  std::optional<SingleBlockLatency> single;
  if (!summary.interrupted) {
    single = single_block_latency(design.code, *decoder, *channel, trial.seed, kSingleBlocks,
                                  kSingleSeconds);
  }
  const double qber = channel->mean_qber();
  return {design,          plan.lists,
          channel->name(), qber,
          trial.shard,     options.optional_number("phase-error").value_or(qber),
          summary,         summary.batches > trial.resume.batches,
          single};
}

int draw_curve(const Options& options, Design design) {
  if (options.has("arithmetic")) design.arithmetic = parse_arithmetic(options.text("arithmetic"));
  require_curve_options(options, decoder_plan(options, design).lists);
  return run_curve(options, design, *channel_option(options, design), trial_options(options));
}

MeasuredTrial merge(const Options& options, Design design) {
  for (const char* other : {"qber", "channel", "arithmetic", "list", "lanes", "blocks", "failures",
                            "seconds", "seed", "shard", "key-format", "bits"}) {
    if (options.has(other)) {
      throw InputError(std::string("trial: --") + other + " does not go with --merge");
    }
  }
  const std::vector<std::string> names = options.texts("merge");
  std::vector<CampaignState> shards;
  for (const std::string& name : names) {
    shards.push_back(campaign_from_json(read_file(name), name));
  }
  const CampaignState whole = merge_shards(shards, names);
  const Campaign& campaign = whole.campaign;
  if (campaign.code_sha256 != to_hex(code_sha256(design.code))) {
    throw InputError(names.front() + ": a trial of another design than " + options.text("FILE"));
  }
  const auto checkpoint = checkpoint_option(options, campaign);
  if (checkpoint) checkpoint->save(whole.counts);
  require_error_rate(campaign.qber, "the channel's error rate");
  design.arithmetic = parse_arithmetic(campaign.arithmetic);
  TrialSummary summary;
  static_cast<TrialCounts&>(summary) = whole.counts;
  summary.fer_interval = fer_interval(whole.counts);
  summary.lanes = campaign.lanes;
  return {design,
          campaign.lists,
          campaign.channel,
          campaign.qber,
          {},
          options.optional_number("phase-error").value_or(campaign.qber),
          summary,
          false,
          std::nullopt};
}

}  // namespace

int run_trial(const std::vector<std::string>& arguments) {
  Options options = make_options();
  if (!options.parse(arguments)) return kDone;
  if (options.has("phase-error") &&
      !(options.number("phase-error") >= 0 && options.number("phase-error") <= 0.5)) {
    throw InputError("--phase-error is not from 0 to 0.5");
  }
  const Design design = read_design(options.text("FILE"));
  if (options.has("curve") || options.has("plot")) return draw_curve(options, design);
  const MeasuredTrial trial =
      options.has("merge") ? merge(options, design) : measure(options, design);
  const Expectation expectation = expectation_of(trial);
  if (options.json()) {
    std::cout << trial_json(trial, expectation).dump(2) << '\n';
  } else if (!options.quiet()) {
    std::cout << trial_account(trial, expectation);
  }
  return trial.summary.interrupted ? kInterrupted : kDone;
}

}  // namespace frostline::cli
