#include "construct/catalogue.h"

#include "construct/bhattacharyya.h"
#include "construct/gaussian.h"
#include "polar/error.h"

namespace frostline {
namespace {

[[noreturn]] void unknown(std::string_view name) {
  std::string known;
  for (const std::string& each : construction_names()) {
    known += (known.empty() ? "" : ", ") + each;
  }
  throw InputError("unknown construction '" + std::string(name) + "'; there is " + known);
}

unsigned whole_parameter(const Construction& construction, const std::string& key) {
  for (const auto& [name, value] : construction.parameters) {
    if (name != key) continue;
    const auto* whole = std::get_if<std::int64_t>(&value);
    if (whole != nullptr && *whole >= 0 && *whole <= 1000) return static_cast<unsigned>(*whole);
  }
  throw InputError("construction '" + construction.name + "' needs a whole number '" + key + "'");
}

}  // namespace

std::vector<std::string> construction_names() { return {"gaussian", "bhattacharyya"}; }

Construction make_construction(std::string_view name, unsigned exact_levels) {
  if (name == "gaussian") {
    return {"gaussian", {{"exact_levels", static_cast<std::int64_t>(exact_levels)}}};
  }
  if (name == "bhattacharyya") return {"bhattacharyya", {}};
  unknown(name);
}

Reliability run_construction(const Construction& construction, BlockLength block_length, double p) {
  if (construction.name == "gaussian") {
    return gaussian_approximation(block_length, p, whole_parameter(construction, "exact_levels"));
  }
  if (construction.name == "bhattacharyya") return bhattacharyya_bound(block_length, p);
  unknown(construction.name);
}

}  // namespace frostline
