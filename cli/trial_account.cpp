#include "cli/trial_account.h"

#include "cli/account.h"
#include "cli/decoder_plan.h"
#include "cli/design_file.h"
#include "construct/designer.h"
#include "polar/limits.h"

namespace frostline::cli {
namespace {

bool is_symmetric(const MeasuredTrial& trial) { return trial.channel.rfind("bsc:", 0) == 0; }

Json speed_json(const MeasuredTrial& trial) {
  const TrialSummary& summary = trial.summary;
  Json object;
  const auto measured = [&](double value) { return trial.timed ? Json(value) : Json(nullptr); };
  object["throughput_mbit_s"] = measured(summary.throughput_mbit_s);
  object["total_throughput_mbit_s"] = measured(summary.total_throughput_mbit_s);
  object["latency_us"] = {{"median", measured(summary.latency_median_us)},
                          {"p99", measured(summary.latency_p99_us)}};
  object["single_block_latency_us"] = nullptr;
  if (trial.single_block) {
    object["single_block_latency_us"] = {{"median", trial.single_block->median_us},
                                         {"p99", trial.single_block->p99_us},
                                         {"blocks", trial.single_block->blocks}};
  }
  return object;
}

std::string outcome_sentence(const TrialSummary& summary, const Shard& shard) {
  std::string text =
      counted(summary.failures, "block") + " of " + grouped(summary.blocks) + " failed";
  if (shard.count > 1) {
    text += ", in shard " + std::to_string(shard.index) + " of " + std::to_string(shard.count);
  }
  if (summary.interrupted) text += "; interrupted";
  if (summary.out_of_time) text += "; the time is over";
  return text + ".\n";
}

std::string undetected_text(const MeasuredTrial& trial) {
  return grouped(trial.summary.undetected) + " passed the " +
         std::to_string(trial.design.code.check_bits) + " check bits; below " +
         short_number(undetected_upper_bound(trial.summary)) + " a block at 95 %";
}

std::string leakage_text(const Code& code) {
  return grouped(code.leakage_bits()) + " bits a block: syndrome " +
         grouped(code.frozen.frozen_count()) + ", check bits " + std::to_string(code.check_bits) +
         "; tags come on top, 128 a group";
}

void add_speed(Table& table, const MeasuredTrial& trial) {
  const TrialSummary& summary = trial.summary;
  table
      .row("decoder's speed", fixed(summary.throughput_mbit_s, 1) +
                                  " Mbit/s of key on one core; the whole trial " +
                                  fixed(summary.total_throughput_mbit_s, 1))
      .row("latency", fixed(summary.latency_median_us, 1) + " us, 99 % below " +
                          fixed(summary.latency_p99_us, 1) + " us, for " +
                          counted(summary.lanes, "block") + " in step");
  if (trial.single_block) {
    table.row("one block alone", fixed(trial.single_block->median_us, 1) + " us, 99 % below " +
                                     fixed(trial.single_block->p99_us, 1) + " us");
  }
}

}  // namespace

Expectation expectation_of(const MeasuredTrial& trial) {
  const Design& design = trial.design;
  const std::uint64_t length = design.code.block_length().bits();
  const double entropy = static_cast<double>(length) * binary_entropy(trial.qber);
  const auto leakage = static_cast<double>(design.code.leakage_bits());
  Expectation expectation{
      predict(design.code.frozen, judge(design.code.block_length(), trial.qber, design.arithmetic),
              list_setting(design, trial.qber, trial.lists.back())),
      leakage / entropy, static_cast<double>(design.code.frozen.frozen_count()) / entropy,
      std::nullopt,
      net_key(trial.summary.fer(), leakage / static_cast<double>(length), trial.phase_error)};
  // The limit is that of independent errors of one probability.
  const double high = trial.summary.fer_interval.high;
  if (is_symmetric(trial) && high > 0 && high < 1) {
    expectation.limit_efficiency = finite_length_limit(length, trial.qber, high).efficiency;
  }
  return expectation;
}

Json trial_json(const MeasuredTrial& trial, const Expectation& expectation) {
  const Code& code = trial.design.code;
  const TrialSummary& summary = trial.summary;
  Json root;
  root["block_length"] = code.block_length().bits();
  root["frozen_count"] = code.frozen.frozen_count();
  root["arithmetic"] = to_string(trial.design.arithmetic);
  root["lists"] = trial.lists;
  root["precoding"] = precoding_name(code.precoding);
  root["channel"] = trial.channel;
  root["qber"] = trial.qber;
  root["shard"] = {trial.shard.index, trial.shard.count};
  root["blocks"] = summary.blocks;
  root["failures"] = summary.failures;
  root["undetected"] = summary.undetected;
  root["undetected_upper_bound"] = undetected_upper_bound(summary);
  root["fer"] = summary.fer();
  root["fer_interval"] = {summary.fer_interval.low, summary.fer_interval.high};
  root["stopped_at_failure"] = summary.stopped_at_failure;
  root["out_of_time"] = summary.out_of_time;
  root["interrupted"] = summary.interrupted;
  root["predicted"] = to_json(expectation.predicted);
  root["leakage"] = {{"syndrome_bits", code.frozen.frozen_count()},
                     {"check_bits", code.check_bits},
                     {"bits", code.leakage_bits()}};
  root["efficiency"] = expectation.efficiency;
  root["syndrome_efficiency"] = expectation.syndrome_efficiency;
  root["limit_efficiency"] =
      expectation.limit_efficiency ? Json(*expectation.limit_efficiency) : Json(nullptr);
  root["phase_error"] = trial.phase_error;
  root["net_key"] = {{"plain", expectation.net_key.plain},
                     {"conservative", expectation.net_key.conservative}};
  root["errors"] = summary.errors;
  root["lanes"] = summary.lanes;
  root.update(speed_json(trial));
  return root;
}

std::string trial_account(const MeasuredTrial& trial, const Expectation& expectation) {
  const TrialSummary& summary = trial.summary;
  DecoderPlan plan;
  plan.lists = trial.lists;
  Table table;
  table
      .row("decoder", describe_decoder(plan, trial.design.arithmetic) + ", precoding " +
                          std::string(precoding_name(trial.design.code.precoding)))
      .row("channel", trial.channel + ", QBER " + short_number(trial.qber) + " in the mean")
      .row("FER", short_number(summary.fer()) + " (" + short_number(summary.fer_interval.low) +
                      " to " + short_number(summary.fer_interval.high) + " at 95 %)")
      .row("predicted", prediction_sentence(expectation.predicted) +
                            (is_symmetric(trial) ? "" : ", for independent errors of that QBER"))
      .row("undetected", undetected_text(trial))
      .row("leakage", leakage_text(trial.design.code))
      .row("f", fixed(expectation.efficiency, 4) + " (syndrome alone " +
                    fixed(expectation.syndrome_efficiency, 4) + ")");
  if (expectation.limit_efficiency) {
    table.row("finite-length limit",
              "f " + fixed(*expectation.limit_efficiency, 4) + " at the upper end of the FER");
  }
  table.row("net key", expectation.net_key.plain <= 0
                           ? "no key at this error rate"
                           : fixed(expectation.net_key.plain, 4) +
                                 " bits a sifted bit, failed blocks discarded; " +
                                 fixed(expectation.net_key.conservative, 4) +
                                 " with failed blocks taken as public");
  if (trial.timed) add_speed(table, trial);
  return outcome_sentence(summary, trial.shard) + table.text();
}

}  // namespace frostline::cli
