#include "polar/design.h"

#include <algorithm>
#include <array>
#include <cmath>

#include "polar/check_bits.h"
#include "polar/design_json.h"
#include "polar/error.h"
#include "polar/limits.h"

namespace frostline {
namespace {

constexpr const char* kFormat = "frostline-design";
constexpr std::uint64_t kVersion = 1;
constexpr std::array<const char*, 5> kPredictionKinds = {"upper-bound", "exact-union", "estimate",
                                                         "trial", "order-only"};

Json value_to_json(const Parameter& parameter) {
  return std::visit([](const auto& value) { return Json(value); }, parameter);
}

Parameters parameters_from_json(const Json& object, const std::string& where) {
  if (!object.is_object()) throw InputError(where + ": not a JSON object");
  Parameters parameters;
  for (const auto& [key, value] : object.items()) {
    if (value.is_number_float()) {
      parameters.emplace_back(key, value.get<double>());
    } else if (value.is_number_integer()) {
      parameters.emplace_back(key, value.get<std::int64_t>());
    } else if (value.is_string()) {
      parameters.emplace_back(key, value.get<std::string>());
    } else {
      throw InputError(where + ": '" + key + "' is neither a number nor a text");
    }
  }
  return parameters;
}

// The digest over everything but itself: it only detects edits.
std::string edit_digest(Json design) {
  design.erase("sha256");
  return to_hex(sha256(design.dump()));
}

Construction construction_from_json(const Json& object, const std::string& where) {
  if (!object.is_object() || !object.contains("name")) {
    throw InputError(where + ": key 'name' is missing");
  }
  Json parameters = object;
  parameters.erase("name");
  return {get_string(object, "name", where), parameters_from_json(parameters, where)};
}

Prediction prediction_from_json(const Json& object, const std::string& where) {
  require_keys(object, {"fer", "kind", "interval", "blocks"}, {}, where);
  Prediction predicted;
  predicted.kind = get_string(object, "kind", where);
  if (std::find(kPredictionKinds.begin(), kPredictionKinds.end(), predicted.kind) ==
      kPredictionKinds.end()) {
    throw InputError(where + ": unknown kind '" + predicted.kind + "'");
  }
  const auto require_rate = [&](double rate) {
    if (!(rate >= 0 && rate <= 1)) throw InputError(where + ": a FER outside 0 .. 1");
    return rate;
  };
  if (!object.at("fer").is_null()) predicted.fer = require_rate(get_number(object, "fer", where));
  const Json& interval = object.at("interval");
  if (!interval.is_null()) {
    if (!interval.is_array() || interval.size() != 2 || !interval[0].is_number() ||
        !interval[1].is_number()) {
      throw InputError(where + ": 'interval' is not a pair of numbers");
    }
    predicted.interval = std::make_pair(require_rate(interval[0].get<double>()),
                                        require_rate(interval[1].get<double>()));
  }
  if (!object.at("blocks").is_null()) predicted.blocks = get_unsigned(object, "blocks", where);
  return predicted;
}

std::vector<std::uint32_t> reveal_order_from_json(const Json& array, const FrozenSet& frozen,
                                                  const std::string& where) {
  if (!array.is_array()) throw InputError(where + ": not an array");
  std::vector<std::uint32_t> order;
  BitString seen(frozen.block_length().bits());
  for (const Json& entry : array) {
    if (!entry.is_number_unsigned() || entry.get<std::uint64_t>() >= seen.size()) {
      throw InputError(where + ": an entry is no index of the block");
    }
    const auto index = entry.get<std::uint32_t>();
    if (frozen.is_frozen(index) || seen[index]) {
      throw InputError(where + ": index " + std::to_string(index) + " is frozen or stands twice");
    }
    seen.flip(index);
    order.push_back(index);
  }
  return order;
}

Code code_from_json(const Json& root, const std::string& name) {
  const BlockLength block_length(get_unsigned(root, "block_length", name));
  const std::string hex = get_string(root, "frozen_hex", name);
  FrozenSet frozen(block_length, bits_from_hex(hex, block_length.bits(), name + ": frozen_hex"));
  if (frozen.frozen_count() != get_unsigned(root, "frozen_count", name)) {
    throw InputError(name + ": frozen_count is " +
                     std::to_string(get_unsigned(root, "frozen_count", name)) +
                     " but the mask freezes " + std::to_string(frozen.frozen_count()) + " indices");
  }
  const std::uint64_t width = get_unsigned(root, "check_bits", name);
  require_check_width(static_cast<unsigned>(std::min<std::uint64_t>(width, 1000)));
  Code code{std::move(frozen), parse_precoding(get_string(root, "precoding", name)),
            static_cast<unsigned>(width)};
  if (to_hex(code_sha256(code)) != get_string(root, "code_sha256", name)) {
    throw InputError(name +
                     ": code_sha256 does not fit block length, mask, precoding and check bits: "
                     "the file was edited or damaged");
  }
  return code;
}

void require_same_leakage(const Design& design, const Json& object, const std::string& where) {
  require_keys(object,
               {"bits", "efficiency", "syndrome_efficiency", "limit_bits", "limit_efficiency"}, {},
               where);
  const DesignLeakage leakage = design_leakage(design);
  if (get_unsigned(object, "bits", where) != leakage.bits ||
      std::abs(get_number(object, "efficiency", where) - leakage.efficiency) > 1e-9) {
    throw InputError(where + ": does not follow from the rest of the design");
  }
}

Json design_object(const Design& design) {
  Json root;
  root["format"] = kFormat;
  root["version"] = kVersion;
  root["block_length"] = design.code.block_length().bits();
  root["qber"] = design.qber;
  root["construction"] = to_json(design.construction);
  root["decoder"] = {{"list", design.list}, {"arithmetic", to_string(design.arithmetic)}};
  root["frozen_count"] = design.code.frozen.frozen_count();
  root["frozen_hex"] = design.code.frozen.to_hex();
  root["precoding"] = precoding_name(design.code.precoding);
  root["check_bits"] = design.code.check_bits;
  if (design.reveal_order) root["reveal_order"] = *design.reveal_order;
  root["predicted"] = to_json(design.predicted);
  root["leakage"] = to_json(design_leakage(design));
  root["provenance"] = {{"options", to_json(design.options)},
                        {"seed", design.seed ? Json(*design.seed) : Json(nullptr)}};
  root["code_sha256"] = to_hex(code_sha256(design.code));
  return root;
}

Design design_from_object(const Json& root, const std::string& name) {
  Design design{code_from_json(root, name), 0, {}, 1, {}, {}, {}, {}, {}};
  design.qber = get_number(root, "qber", name);
  require_error_rate(design.qber, "qber");
  design.construction = construction_from_json(root.at("construction"), name + ": construction");
  const Json& decoder = root.at("decoder");
  require_keys(decoder, {"list", "arithmetic"}, {}, name + ": decoder");
  const std::uint64_t list = get_unsigned(decoder, "list", name + ": decoder");
  if (list == 0 || list > 128 || (list & (list - 1)) != 0) {
    throw InputError(name + ": decoder: list size " + std::to_string(list) +
                     " is not a power of two from 1 to 128");
  }
  design.list = static_cast<unsigned>(list);
  design.arithmetic = parse_arithmetic(get_string(decoder, "arithmetic", name + ": decoder"));
  if (root.contains("reveal_order")) {
    design.reveal_order = reveal_order_from_json(root.at("reveal_order"), design.code.frozen,
                                                 name + ": reveal_order");
  }
  design.predicted = prediction_from_json(root.at("predicted"), name + ": predicted");
  const Json& provenance = root.at("provenance");
  require_keys(provenance, {"options", "seed"}, {}, name + ": provenance");
  design.options = parameters_from_json(provenance.at("options"), name + ": provenance");
  if (!provenance.at("seed").is_null()) {
    design.seed = get_unsigned(provenance, "seed", name + ": provenance");
  }
  require_same_leakage(design, root.at("leakage"), name + ": leakage");
  return design;
}

}  // namespace

Json to_json(const Parameters& parameters) {
  Json object = Json::object();
  for (const auto& [key, value] : parameters) object[key] = value_to_json(value);
  return object;
}

Json to_json(const Construction& construction) {
  Json object;
  object["name"] = construction.name;
  for (const auto& [key, value] : construction.parameters) object[key] = value_to_json(value);
  return object;
}

Json to_json(const Prediction& predicted) {
  Json object;
  object["fer"] = predicted.fer ? Json(*predicted.fer) : Json(nullptr);
  object["kind"] = predicted.kind;
  object["interval"] = predicted.interval
                           ? Json{predicted.interval->first, predicted.interval->second}
                           : Json(nullptr);
  object["blocks"] = predicted.blocks ? Json(*predicted.blocks) : Json(nullptr);
  return object;
}

Json to_json(const DesignLeakage& leakage) {
  Json object;
  object["bits"] = leakage.bits;
  object["efficiency"] = leakage.efficiency;
  object["syndrome_efficiency"] = leakage.syndrome_efficiency;
  object["limit_bits"] = leakage.limit_bits ? Json(*leakage.limit_bits) : Json(nullptr);
  object["limit_efficiency"] =
      leakage.limit_efficiency ? Json(*leakage.limit_efficiency) : Json(nullptr);
  return object;
}

DesignLeakage design_leakage(const Design& design) {
  const auto length = static_cast<double>(design.code.block_length().bits());
  const double entropy = length * binary_entropy(design.qber);
  DesignLeakage leakage{};
  leakage.bits = design.code.leakage_bits();
  leakage.efficiency = static_cast<double>(leakage.bits) / entropy;
  leakage.syndrome_efficiency = static_cast<double>(design.code.frozen.frozen_count()) / entropy;
  if (design.predicted.fer && *design.predicted.fer > 0 && *design.predicted.fer < 1) {
    const FiniteLengthLimit limit =
        finite_length_limit(design.code.block_length().bits(), design.qber, *design.predicted.fer);
    leakage.limit_bits = limit.bits;
    leakage.limit_efficiency = limit.efficiency;
  }
  return leakage;
}

std::string design_to_json(const Design& design) {
  Json root = design_object(design);
  root["sha256"] = edit_digest(root);
  return root.dump(2) + "\n";
}

Design design_from_json(std::string_view text, std::string_view name_view) {
  const std::string name(name_view);
  const Json root = parse_json(text, name);
  if (!root.is_object() || !root.contains("format") || root.at("format") != kFormat) {
    throw InputError(name + ": not a frostline design");
  }
  if (!root.contains("version") || root.at("version") != kVersion) {
    throw InputError(name + ": another version of the design format; this program reads version " +
                     std::to_string(kVersion));
  }
  require_keys(root,
               {"format", "version", "block_length", "qber", "construction", "decoder",
                "frozen_count", "frozen_hex", "precoding", "check_bits", "predicted", "leakage",
                "provenance", "code_sha256", "sha256"},
               {"reveal_order"}, name);
  try {
    Design design = design_from_object(root, name);
    if (get_string(root, "sha256", name) != edit_digest(root)) {
      throw InputError(name + ": sha256 does not fit the contents: the file was edited or damaged");
    }
    return design;
  } catch (const InputError& error) {
    // Checks that know nothing of files get the file's name in front.
    const std::string what = error.what();
    if (what.rfind(name + ":", 0) == 0) throw;
    throw InputError(name + ": " + what);
  }
}

}  // namespace frostline
