// frostline inspect: checks a design file and describes it.
#include <cmath>
#include <iostream>

#include "cli/account.h"
#include "cli/command.h"
#include "cli/design_file.h"
#include "cli/options.h"
#include "construct/catalogue.h"
#include "construct/gaussian.h"
#include "polar/limits.h"

namespace frostline::cli {
namespace {

Options make_options() {
  Options options("inspect", "Checks a design file and describes it.", {"FILE"});
  options.value("qber", "P", "also estimate the FER of this frozen set at another error rate")
      .computing()
      .epilogue(
          "Example: how far does the design carry when the link drifts to 2.6 %?\n"
          "  frostline inspect link.design.json --qber 0.026\n");
  return options;
}

// The union over the open indices at another error rate, by the Gaussian approximation.
Prediction predict_at(const Design& design, double p) {
  const Reliability reliability = gaussian_approximation(design.code.block_length(), p);
  double sum = 0;
  for (std::size_t i = 0; i < design.code.block_length().bits(); ++i) {
    if (!design.code.frozen.is_frozen(i)) sum += std::exp(reliability.log_error_probability[i]);
  }
  Prediction predicted;
  predicted.fer = std::min(1.0, sum);
  predicted.kind = prediction_kind(reliability.kind);
  return predicted;
}

}  // namespace

int run_inspect(const std::vector<std::string>& arguments) {
  Options options = make_options();
  if (!options.parse(arguments)) return kDone;
  const Design design = read_design(options.text("FILE"));
  std::optional<Prediction> drifted;
  double p = 0;
  if (options.has("qber")) {
    p = options.number("qber");
    require_error_rate(p, "--qber");
    drifted = predict_at(design, p);
  }
  if (options.json()) {
    Json root = design_summary(design);
    if (drifted) root["at_qber"] = {{"qber", p}, {"predicted", to_json(*drifted)}};
    std::cout << root.dump(2) << '\n';
    return kDone;
  }
  std::cout << options.text("FILE") << " is whole: counts and digests fit.\n" << describe(design);
  if (drifted) {
    const double entropy =
        static_cast<double>(design.code.block_length().bits()) * binary_entropy(p);
    std::cout << "At QBER " << short_number(p) << " the predicted FER is "
              << prediction_sentence(*drifted) << ", and f is "
              << fixed(static_cast<double>(design.code.leakage_bits()) / entropy, 4) << ".\n";
  }
  return kDone;
}

}  // namespace frostline::cli
