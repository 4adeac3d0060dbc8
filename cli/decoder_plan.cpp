#include "cli/decoder_plan.h"

#include <charconv>

#include "construct/metric_weights.h"
#include "polar/error.h"

namespace frostline::cli {
namespace {

// In the order given, which is checked afterwards; grid.h would sort them.
std::vector<unsigned> parse_lists(const std::string& text) {
  std::vector<unsigned> lists;
  const char* const end = text.data() + text.size();
  for (const char* begin = text.data();; ++begin) {
    unsigned list = 0;
    const auto parsed = std::from_chars(begin, end, list);
    if (parsed.ec != std::errc() || (parsed.ptr != end && *parsed.ptr != ',')) {
      throw InputError("--list: '" + text + "' is not a list size, nor several with commas");
    }
    lists.push_back(list);
    if (parsed.ptr == end) return lists;
    begin = parsed.ptr;
  }
}

}  // namespace

void add_list_option(Options& options) {
  options.value("list", "L",
                "list size, a power of two from 1 to 128; 8,32 decodes with 8 first, and what "
                "fails with 32 (the design's)");
}

DecoderPlan decoder_plan(const Options& options, const Design& design) {
  DecoderPlan plan{{design.list}, nullptr};
  if (options.has("list")) plan.lists = parse_lists(options.text("list"));
  try {
    require_lists(plan.lists);
  } catch (const InputError& error) {
    throw InputError(std::string("--list: ") + error.what());
  }
  if (plan.lists.size() > 1 && design.code.check_bits == 0) {
    throw InputError("--list: a second pass needs check bits, which this design has none of");
  }
  if (plan.lists.back() > 1 && design.arithmetic.kind == Arithmetic::Kind::planes) {
    plan.weights = std::make_shared<const MetricWeights>(
        metric_weights(design.code.frozen, design.qber, design.arithmetic));
  }
  return plan;
}

std::string describe_decoder(const DecoderPlan& plan, const Arithmetic& arithmetic) {
  std::string text = "list size ";
  for (const unsigned list : plan.lists) {
    if (list != plan.lists.front()) text += ", then ";
    text += std::to_string(list);
  }
  return text + (plan.lists.size() > 1 ? "; " : ", ") + to_string(arithmetic);
}

Json decoder_json(const DecoderPlan& plan, const Arithmetic& arithmetic) {
  return {{"lists", plan.lists}, {"arithmetic", to_string(arithmetic)}};
}

}  // namespace frostline::cli
