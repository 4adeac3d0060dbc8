#include "cli/design_file.h"

#include "cli/account.h"
#include "decode/exchange/cut.h"
#include "decode/exchange/streams.h"
#include "polar/limits.h"

namespace frostline::cli {

Design read_design(const std::string& path) { return design_from_json(read_file(path), path); }

std::string prediction_sentence(const Prediction& predicted) {
  if (!predicted.fer) return "none (" + predicted.kind + ")";
  std::string sentence = short_number(*predicted.fer) + " (" + predicted.kind;
  if (predicted.interval) {
    sentence += ", interval " + short_number(predicted.interval->first) + " to " +
                short_number(predicted.interval->second);
  }
  if (predicted.blocks) sentence += ", " + counted(*predicted.blocks, "block") + " tried";
  return sentence + ")";
}

std::string describe(const Design& design) {
  const DesignLeakage leakage = design_leakage(design);
  const BlockLength block_length = design.code.block_length();
  Table table;
  table.row("block length N", grouped(block_length.bits()))
      .row("QBER p", short_number(design.qber))
      .row("construction", design.construction.name)
      .row("decoder",
           "list size " + std::to_string(design.list) + ", " + to_string(design.arithmetic))
      .row("frozen count M", grouped(design.code.frozen.frozen_count()))
      .row("precoding", std::string(precoding_name(design.code.precoding)))
      .row("check bits", std::to_string(design.code.check_bits))
      .row("leakage a block", grouped(leakage.bits) + " bits, f " + fixed(leakage.efficiency, 4) +
                                  " (syndrome alone " + fixed(leakage.syndrome_efficiency, 4) +
                                  ")");
  if (leakage.limit_bits) {
    table.row("finite-length limit", grouped(*leakage.limit_bits) + " bits, f " +
                                         fixed(*leakage.limit_efficiency, 4) +
                                         ", at the predicted FER");
  }
  table.row("predicted FER", prediction_sentence(design.predicted))
      .row("lanes by default", std::to_string(default_lanes(block_length)))
      .row("code_sha256", to_hex(code_sha256(design.code)));
  return table.text();
}

Json design_summary(const Design& design) {
  Json root;
  root["block_length"] = design.code.block_length().bits();
  root["qber"] = design.qber;
  root["construction"] = to_json(design.construction);
  root["decoder"] = {{"list", design.list}, {"arithmetic", to_string(design.arithmetic)}};
  root["frozen_count"] = design.code.frozen.frozen_count();
  root["precoding"] = precoding_name(design.code.precoding);
  root["check_bits"] = design.code.check_bits;
  root["predicted"] = to_json(design.predicted);
  root["leakage"] = to_json(design_leakage(design));
  root["lanes"] = default_lanes(design.code.block_length());
  root["code_sha256"] = to_hex(code_sha256(design.code));
  return root;
}

}  // namespace frostline::cli
