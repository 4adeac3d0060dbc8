// What trial tells at the end: counts, FER and what it is measured against, speed, net key.
#pragma once

#include <optional>
#include <string>
#include <vector>

#include "decode/exchange/ledger.h"
#include "decode/trial/trial.h"
#include "polar/design_json.h"

namespace frostline::cli {

// A trial that is done: by this run, or merged from others.
struct MeasuredTrial {
  Design design;  // with the arithmetic that was tried
  std::vector<unsigned> lists;
  std::string channel;
  double qber;  // the channel's mean
  Shard shard;
  double phase_error;
  TrialSummary summary;
  bool timed;  // whether the summary's speeds are measured
  std::optional<SingleBlockLatency> single_block;
};

// What the counts are measured against.
struct Expectation {
  Prediction predicted;  // of this frozen set in this arithmetic on a BSC of the channel's mean
  double efficiency;     // (M + c) / (N h2)
  double syndrome_efficiency;
  std::optional<double> limit_efficiency;  // bsc only, at the upper end of the FER interval
  NetKey net_key;                          // at the measured FER, tags not counted
};
Expectation expectation_of(const MeasuredTrial& trial);

Json trial_json(const MeasuredTrial& trial, const Expectation& expectation);
// Sentences and a table.
std::string trial_account(const MeasuredTrial& trial, const Expectation& expectation);

}  // namespace frostline::cli
