// The private reports of receiver and sender: what was corrected, what leaked, what is left.
#pragma once

#include <optional>
#include <string>

#include "cli/account.h"
#include "decode/exchange/receiver.h"
#include "decode/exchange/sender.h"
#include "polar/design_json.h"

namespace frostline::cli {

// The figures that both ends' reports and accounts tell about a run.
struct RunFigures {
  std::uint64_t block_length;
  std::uint64_t blocks;
  std::uint64_t kept_blocks;
  double fer;                              // 1 - kept / blocks
  double qber;                             // by which f and net key are told
  std::optional<double> efficiency;        // over the kept blocks, tags counted, at that QBER;
                                           // none where no block is kept or the QBER is 0
  std::optional<double> limit_efficiency;  // finite-length limit at that QBER and the measured FER
  double leakage_per_bit;                  // accepted leakage over kept key bits
  double phase_error;
  NetKey net_key;  // a sifted bit
};

// qber: observed or of the design; phase_error: where the user gave none, the same.
RunFigures run_figures(const Design& design, std::uint64_t blocks, std::uint64_t kept_blocks,
                       const Ledger& ledger, double qber, std::optional<double> phase_error);

// Adds the rows of the account about leakage, f, limit and net key.
void add_figures(Table& table, const RunFigures& figures, const Ledger& ledger,
                 double epsilon_correctness);

Json receiver_report(const Design& design, const ReconcileSummary& summary,
                     const RunFigures& figures);
Json confirm_report(const ConfirmSummary& summary);
Json sender_report(const Design& design, const SettleSummary& summary, const RunFigures& figures);

// What it looks like when nearly all blocks fail; empty when they do not.
std::string failure_diagnosis(const Design& design, const ReconcileSummary& summary);

}  // namespace frostline::cli
