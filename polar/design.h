// A design: a code together with how it was chosen and what is expected of it, and its file.
//
// The file is one JSON object with a fixed order of keys, the same bytes for the same options (see
// designs/FORMATS.md). Reading is strict: an unknown, missing or repeated key, a count that does
// not fit, another version or an edited file is an error with a message of its own.
#pragma once

#include <cstdint>
#include <optional>
#include <string>
#include <string_view>
#include <utility>
#include <variant>
#include <vector>

#include "polar/arithmetic.h"
#include "polar/code.h"

namespace frostline {

// Named values that a construction or a command line was given, in the order in which they are
// written.
using Parameter = std::variant<std::int64_t, double, std::string>;
using Parameters = std::vector<std::pair<std::string, Parameter>>;

struct Construction {
  std::string name;  // "gaussian", "bhattacharyya", "user-mask", ...
  Parameters parameters;
};

struct Prediction {
  std::optional<double> fer;  // none where only an order is known
  std::string kind;           // upper-bound, exact-union, estimate, trial, order-only
  std::optional<std::pair<double, double>> interval;
  std::optional<std::uint64_t> blocks;  // of the trial behind it
};

struct Design {
  Code code;
  double qber = 0;  // the design's p, 0 < p < 0.5
  Construction construction;
  unsigned list = 1;
  Arithmetic arithmetic;
  std::optional<std::vector<std::uint32_t>> reveal_order;  // open indices, first to reveal first
  Prediction predicted;
  Parameters options;                 // provenance: what was asked
  std::optional<std::uint64_t> seed;  // provenance: of the trial, where there was one
};

// Leakage of one block at the design's QBER, tags not counted.
struct DesignLeakage {
  std::uint64_t bits;                       // M + c
  double efficiency;                        // bits / (N h2(p))
  double syndrome_efficiency;               // M / (N h2(p))
  std::optional<std::uint64_t> limit_bits;  // finite-length limit at the predicted FER
  std::optional<double> limit_efficiency;   // none where no FER in (0, 1) is predicted
};
DesignLeakage design_leakage(const Design& design);

// The design as the text of its file, line feed at the end.
std::string design_to_json(const Design& design);
// Throws InputError "NAME: ..." when the text is not a valid design.
Design design_from_json(std::string_view text, std::string_view name);

}  // namespace frostline
