// frostline limits: what no one-way code can beat at this N, p and FER.
#include "polar/limits.h"

#include <iostream>

#include "cli/account.h"
#include "cli/command.h"
#include "cli/options.h"
#include "polar/block_length.h"
#include "polar/design_json.h"

namespace frostline::cli {
namespace {

Options make_options() {
  Options options("limits", "Tells the least leakage that any one-way code needs.", {});
  options.value("block-length", "N", "block length, a power of two from 8 to 16777216")
      .value("qber", "P", "probability that one position differs, above 0 and below 0.5")
      .value("fer", "T", "probability that a block fails (0.1, 0.01 and 0.001)")
      .epilogue(
          "Example:\n"
          "  frostline limits --block-length 65536 --qber 0.02 --fer 0.1\n"
          "Exact count of the most probable error patterns; the second-order formula beside it.\n"
          "A budget of 1.1 N h2(p) is common practice for a reconciliation stage.\n");
  return options;
}

}  // namespace

int run_limits(const std::vector<std::string>& arguments) {
  Options options = make_options();
  if (!options.parse(arguments)) return kDone;
  const BlockLength block_length(options.whole("block-length"));
  const double p = options.number("qber");
  require_error_rate(p, "--qber");
  std::vector<double> fers = {0.1, 0.01, 0.001};
  if (options.has("fer")) {
    fers = {options.number("fer")};
    require_probability(fers[0], "--fer");
  }
  const double entropy = static_cast<double>(block_length.bits()) * binary_entropy(p);
  Json root;
  root["block_length"] = block_length.bits();
  root["qber"] = p;
  root["entropy_bits"] = entropy;
  root["limits"] = Json::array();
  Table table;
  table.row("N h2(p)", fixed(entropy, 1) + " bits, " + fixed(binary_entropy(p), 5) + " a key bit");
  for (const double fer : fers) {
    const FiniteLengthLimit limit = finite_length_limit(block_length.bits(), p, fer);
    root["limits"].push_back({{"fer", fer},
                              {"limit_bits", limit.bits},
                              {"limit_efficiency", limit.efficiency},
                              {"second_order_bits", limit.second_order_bits}});
    table.row("FER " + short_number(fer), "at least " + grouped(limit.bits) + " bits, f " +
                                              fixed(limit.efficiency, 4) + " (second order " +
                                              fixed(limit.second_order_bits, 1) + " bits)");
  }
  table.row("common practice", "1.1 N h2(p) = " + fixed(1.1 * entropy, 0) + " bits are budgeted");
  if (options.json()) {
    std::cout << root.dump(2) << '\n';
    return kDone;
  }
  std::cout << "No one-way code of block length " << grouped(block_length.bits())
            << " leaks less at QBER " << short_number(p) << ":\n"
            << table.text();
  return kDone;
}

}  // namespace frostline::cli
