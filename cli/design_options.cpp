#include "cli/design_options.h"

#include <algorithm>
#include <charconv>
#include <cmath>

#include "polar/check_bits.h"
#include "polar/error.h"

namespace frostline::cli {
namespace {

constexpr std::uint64_t kNoSuchWidth = 1000;

}  // namespace

void add_code_options(Options& options) {
  options.value("arithmetic", "A", "of the decoder: exact, planes:W or integer:Q:A (planes:3)")
      .value("exact-levels", "K", "levels of gaussian that are tracked exactly, 0 to 12 (6)")
      .value("merge-letters", "MU", "output letters of degrading-merge, even, 4 to 1024 (32)")
      .value("order", "ORDER", "reliability, or weighted:ALPHA to prefer heavy rows (reliability)")
      .value("check-bits", "C", "0, 6, 8, 11, 16 or 24 (11 up to N = 2^11, 16 up to 2^13, then 24)")
      .value("precoding", "NAME", "none or state8 (state8 for lists, none for list size 1)");
}

std::string construction_list() {
  std::string list;
  for (const std::string& name : construction_names()) list += (list.empty() ? "" : ", ") + name;
  return list + " (density-evolution; degrading-merge with exact arithmetic)";
}

Arithmetic arithmetic_option(const Options& options) {
  return parse_arithmetic(options.optional_text("arithmetic").value_or("planes:3"));
}

Construction construction_named(const std::string& name, const Options& options) {
  return make_construction(
      name, {options.optional_whole("exact-levels"), options.optional_whole("merge-letters")});
}

Construction construction_option(const Options& options, const Arithmetic& arithmetic) {
  return construction_named(
      options.optional_text("construction").value_or(default_construction(arithmetic).name),
      options);
}

double order_alpha_option(const Options& options) {
  const std::string order = options.optional_text("order").value_or("reliability");
  if (order == "reliability") return 0;
  const std::string prefix = "weighted:";
  if (order.rfind(prefix, 0) == 0) {
    double alpha = 0;
    const char* end = order.data() + order.size();
    const auto parsed = std::from_chars(order.data() + prefix.size(), end, alpha);
    if (parsed.ec == std::errc() && parsed.ptr == end && std::isfinite(alpha)) return alpha;
  }
  throw InputError("--order: '" + order + "' is neither reliability nor weighted:ALPHA");
}

CodeOptions code_options(const Options& options, BlockLength block_length, std::uint64_t list) {
  CodeOptions code;
  if (list == 0 || list > 128 || (list & (list - 1)) != 0) {
    throw InputError("list size " + std::to_string(list) + " is not a power of two from 1 to 128");
  }
  code.list = static_cast<unsigned>(list);
  code.check_bits = static_cast<unsigned>(
      std::min(options.optional_whole("check-bits").value_or(default_check_bits(block_length)),
               kNoSuchWidth));
  require_check_width(code.check_bits);
  code.precoding = parse_precoding(
      options.optional_text("precoding").value_or(code.list == 1 ? "none" : "state8"));
  return code;
}

}  // namespace frostline::cli
