#include "construct/catalogue.h"

#include <algorithm>

#include "construct/bhattacharyya.h"
#include "construct/degrading_merge.h"
#include "construct/density_evolution.h"
#include "construct/gaussian.h"
#include "construct/orders.h"
#include "polar/error.h"

namespace frostline {
namespace {

// A method: its name, the one whole-number parameter that it may have, and how it is run.
struct Method {
  const char* name;
  const char* parameter;  // null without
  std::uint64_t default_value;
  std::optional<std::uint64_t> ConstructionOptions::*option;
  Reliability (*run)(BlockLength, double p, unsigned parameter, const Arithmetic&);
  bool order_only;
};

Reliability run_density_evolution(BlockLength block_length, double p, unsigned,
                                  const Arithmetic& arithmetic) {
  if (arithmetic.kind == Arithmetic::Kind::exact) {
    throw InputError(
        "density-evolution is for planes and integer arithmetic; take degrading-merge for exact");
  }
  return density_evolution(block_length, p, arithmetic);
}

constexpr Method kMethods[] = {
    {"density-evolution", nullptr, 0, nullptr, run_density_evolution, false},
    {"degrading-merge", "letters", kDefaultMergeLetters, &ConstructionOptions::merge_letters,
     [](BlockLength n, double p, unsigned letters, const Arithmetic&) {
       return degrading_merge(n, p, letters);
     },
     false},
    {"gaussian", "exact_levels", kDefaultExactLevels, &ConstructionOptions::exact_levels,
     [](BlockLength n, double p, unsigned levels, const Arithmetic&) {
       return gaussian_approximation(n, p, levels);
     },
     false},
    {"bhattacharyya", nullptr, 0, nullptr,
     [](BlockLength n, double p, unsigned, const Arithmetic&) { return bhattacharyya_bound(n, p); },
     false},
    {"polarization-weight", nullptr, 0, nullptr,
     [](BlockLength n, double, unsigned, const Arithmetic&) {
       return polarization_weight_order(n);
     },
     true},
    {"nr-sequence", nullptr, 0, nullptr,
     [](BlockLength n, double, unsigned, const Arithmetic&) { return nr_sequence_order(n); }, true},
};

const Method& find_method(std::string_view name) {
  for (const Method& method : kMethods) {
    if (name == method.name) return method;
  }
  std::string known;
  for (const Method& method : kMethods)
    known += (known.empty() ? "" : ", ") + std::string(method.name);
  throw InputError("unknown construction '" + std::string(name) + "'; there is " + known);
}

unsigned parameter_of(const Construction& construction, const Method& method) {
  if (method.parameter == nullptr) return 0;
  for (const auto& [name, value] : construction.parameters) {
    if (name != method.parameter) continue;
    const auto* whole = std::get_if<std::int64_t>(&value);
    if (whole != nullptr && *whole >= 0 && *whole <= 1000000) return static_cast<unsigned>(*whole);
  }
  throw InputError("construction '" + construction.name + "' needs a whole number '" +
                   method.parameter + "'");
}

}  // namespace

std::vector<std::string> construction_names() {
  std::vector<std::string> names;
  for (const Method& method : kMethods) names.emplace_back(method.name);
  return names;
}

Construction make_construction(std::string_view name, const ConstructionOptions& options) {
  const Method& method = find_method(name);
  for (const auto option :
       {&ConstructionOptions::exact_levels, &ConstructionOptions::merge_letters}) {
    if ((options.*option) && option != method.option) {
      throw InputError(
          "construction '" + std::string(name) + "' has no " +
          (option == &ConstructionOptions::exact_levels ? "exact levels" : "merge letters"));
    }
  }
  Construction construction{method.name, {}};
  if (method.parameter != nullptr) {
    const std::uint64_t value = (options.*(method.option)).value_or(method.default_value);
    construction.parameters.emplace_back(
        method.parameter, static_cast<std::int64_t>(std::min<std::uint64_t>(value, 1000000)));
  }
  return construction;
}

bool is_order_only(const Construction& construction) {
  return find_method(construction.name).order_only;
}

unsigned merge_letters_of(const Construction& construction) {
  return parameter_of(construction, find_method("degrading-merge"));
}

Reliability run_construction(const Construction& construction, BlockLength block_length, double p,
                             const Arithmetic& arithmetic) {
  const Method& method = find_method(construction.name);
  return method.run(block_length, p, parameter_of(construction, method), arithmetic);
}

}  // namespace frostline
