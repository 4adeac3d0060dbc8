#include "cli/report.h"

#include <algorithm>
#include <cmath>

#include "cli/account.h"
#include "cli/exchange_options.h"
#include "polar/limits.h"

namespace frostline::cli {
namespace {

// Above this share of failed blocks the run does not look like bad luck.
constexpr double kNearlyAllFailed = 0.9;

Json net_key_json(const NetKey& net) {
  return {{"plain", net.plain}, {"conservative", net.conservative}};
}

Json ledger_json(const Ledger& ledger, std::uint64_t subtract_bits) {
  Json object;
  object["disclosed"] = to_json(ledger.disclosed);
  object["disclosed_bits"] = ledger.disclosed.total();
  object["accepted"] = to_json(ledger.accepted);
  object["accepted_leakage_bits"] = ledger.accepted.total();
  object["privacy_amplification_subtracts_bits"] = subtract_bits;
  return object;
}

Json figures_json(const RunFigures& figures) {
  Json object;
  object["qber"] = figures.qber;
  object["fer"] = figures.fer;
  object["efficiency"] = figures.efficiency ? Json(*figures.efficiency) : Json(nullptr);
  object["limit_efficiency"] =
      figures.limit_efficiency ? Json(*figures.limit_efficiency) : Json(nullptr);
  object["phase_error"] = figures.phase_error;
  object["net_key"] = net_key_json(figures.net_key);
  return object;
}

Json qber_json(const ReconcileSummary& summary) {
  Json object;
  object["accepted_blocks"] = summary.accepted > 0 ? Json(summary.accepted_qber) : Json(nullptr);
  object["accepted_blocks_note"] = "biased low: blocks with many errors fail";
  const auto& all = summary.all_blocks_qber;
  object["all_blocks"] = all ? Json(all->qber) : Json(nullptr);
  object["all_blocks_interval"] = all ? Json{all->low, all->high} : Json(nullptr);
  object["all_blocks_note"] = "failed blocks by maximum likelihood from their syndrome differences";
  return object;
}

// Number of corrected positions a block; null where it failed.
Json errors_json(const ReconcileSummary& summary) {
  Json errors = Json::array();
  for (const auto& count : summary.errors) {
    errors.push_back(count ? Json(*count) : Json(nullptr));
  }
  return errors;
}

Json failed_blocks_json(const ReconcileSummary& summary) {
  Json failed = Json::array();
  for (std::size_t b = 0; b < summary.errors.size(); ++b) {
    if (!summary.errors[b]) failed.push_back(b);
  }
  return failed;
}

}  // namespace

RunFigures run_figures(const Design& design, std::uint64_t blocks, std::uint64_t kept_blocks,
                       const Ledger& ledger, double qber, std::optional<double> phase_error) {
  RunFigures figures{};
  figures.block_length = design.code.block_length().bits();
  figures.blocks = blocks;
  figures.kept_blocks = kept_blocks;
  figures.fer = 1 - static_cast<double>(kept_blocks) / static_cast<double>(blocks);
  figures.qber = qber;
  const std::uint64_t kept_bits = kept_blocks * figures.block_length;
  if (kept_blocks > 0 && qber > 0) {
    figures.efficiency = efficiency(ledger.accepted, kept_bits, qber);
  }
  if (qber > 0 && qber < 0.5 && figures.fer > 0 && figures.fer < 1) {
    figures.limit_efficiency =
        finite_length_limit(figures.block_length, qber, figures.fer).efficiency;
  }
  figures.phase_error = phase_error.value_or(qber);
  figures.leakage_per_bit =
      kept_bits > 0 ? static_cast<double>(ledger.accepted.total()) / static_cast<double>(kept_bits)
                    : 1.0;
  figures.net_key = net_key(figures.fer, figures.leakage_per_bit, figures.phase_error);
  return figures;
}

void add_figures(Table& table, const RunFigures& figures, const Ledger& ledger,
                 double epsilon_correctness) {
  table.row("disclosed", leaked_by_kind(ledger.disclosed))
      .row("of it, of kept blocks", leaked_by_kind(ledger.accepted));
  if (figures.kept_blocks == 0) return;
  if (figures.efficiency) {
    std::string f = fixed(*figures.efficiency, 4) + " at QBER " + short_number(figures.qber);
    if (figures.limit_efficiency) {
      f += "; finite-length limit " + fixed(*figures.limit_efficiency, 4) + " at this FER";
    }
    table.row("f", f);
  }
  table.row("eps_cor", short_number(epsilon_correctness));
  const std::string phase = " (phase error " + short_number(figures.phase_error) + ")";
  if (figures.net_key.plain <= 0) {
    table.row("net key", "no key at this error rate" + phase);
    return;
  }
  const std::string conservative = figures.net_key.conservative > 0
                                       ? fixed(figures.net_key.conservative, 4)
                                       : std::string("no key");
  table
      .row("net key", fixed(figures.net_key.plain, 4) + " bits a sifted bit; conservative " +
                          conservative + phase)
      .row("to be subtracted", grouped(ledger.accepted.total()) +
                                   " bits of leakage, besides what the phase error costs");
}

Json receiver_report(const Design& design, const ReconcileSummary& summary,
                     const RunFigures& figures) {
  Json root;
  root["format"] = "frostline-report";
  root["version"] = 1;
  root["end"] = "receiver";
  root["state"] = "provisional: if the verdict keeps every group";
  root["test_only"] = summary.receipt.test_only;
  root["session"] = to_hex(summary.header.session);
  root["code_sha256"] = to_hex(summary.header.code);
  root["block_length"] = figures.block_length;
  root["design_qber"] = design.qber;
  root["key_bits"] = summary.header.key_bits;
  root["rest_bits"] = summary.rest_bits;
  root["lanes"] = summary.header.lanes;
  root["blocks"] = summary.blocks;
  root["accepted"] = summary.accepted;
  root["failed"] = summary.failed();
  root["failed_blocks"] = failed_blocks_json(summary);
  root["groups"] = summary.receipt.groups.size();
  root["errors_corrected_total"] = summary.errors_corrected;
  root["observed_qber"] = qber_json(summary);
  root["ledger"] = ledger_json(summary.ledger, summary.ledger.accepted.total());
  root["epsilon_correctness"] = summary.epsilon_correctness;
  root["figures"] = figures_json(figures);
  root["errors_corrected"] = errors_json(summary);
  return root;
}

Json confirm_report(const ConfirmSummary& summary) {
  Json root;
  root["format"] = "frostline-report";
  root["version"] = 1;
  root["end"] = "receiver";
  root["state"] = "settled";
  root["test_only"] = summary.test_only;
  root["session"] = to_hex(summary.session);
  root["block_length"] = summary.block_length;
  root["blocks"] = summary.blocks;
  root["settled_blocks"] = summary.settled_blocks;
  root["settled_bits"] = summary.settled_bits;
  root["groups"] = summary.groups;
  root["rejected_groups"] = summary.rejected_groups;
  root["ledger"] = ledger_json(summary.ledger, summary.ledger.accepted.total());
  root["epsilon_correctness"] = summary.epsilon_correctness;
  return root;
}

Json sender_report(const Design& design, const SettleSummary& summary, const RunFigures& figures) {
  Json root;
  root["format"] = "frostline-report";
  root["version"] = 1;
  root["end"] = "sender";
  root["state"] = "settled";
  root["test_only"] = summary.verdict.test_only;
  root["session"] = to_hex(summary.verdict.session);
  root["code_sha256"] = to_hex(code_sha256(design.code));
  root["block_length"] = figures.block_length;
  root["design_qber"] = design.qber;
  root["blocks"] = summary.blocks;
  root["accepted"] = summary.accepted_by_receiver;
  root["settled_blocks"] = summary.settled_blocks;
  root["settled_bits"] = summary.settled_bits;
  root["groups"] = summary.verdict.group_kept.size();
  root["rejected_groups"] = summary.rejected_groups;
  root["ledger"] = ledger_json(summary.ledger, summary.ledger.accepted.total());
  root["epsilon_correctness"] = summary.epsilon_correctness;
  root["figures"] = figures_json(figures);
  return root;
}

std::string failure_diagnosis(const Design& design, const ReconcileSummary& summary) {
  const double failed = static_cast<double>(summary.failed()) / static_cast<double>(summary.blocks);
  if (failed < kNearlyAllFailed) return "";
  const QberEstimate& estimate = summary.failed_qber;
  std::string text =
      counted(summary.failed(), "block") + " of " + grouped(summary.blocks) + " failed. ";
  if (estimate.looks_unrelated) {
    return text + "Either their QBER is above " + percent(estimate.low, 2) +
           " (the design is for " + percent(design.qber, 2) +
           "), or the strings do not belong together: a slip, or another key. A syndrome of this "
           "length cannot tell which.\n";
  }
  text += "Their syndromes look like a QBER of " + percent(estimate.qber, 2) + " (" +
          percent(estimate.low, 2) + " to " + percent(estimate.high, 2) + "); the design is for " +
          percent(design.qber, 2) + ".";
  if (estimate.low > design.qber) text += " Take a design for the higher QBER.";
  return text + "\n";
}

}  // namespace frostline::cli
