// The objects of a design file as JSON values, so that commands print the same key names as files.
//
// Needs nlohmann-json; kept apart from design.h, which does not.
#pragma once

#include <nlohmann/json.hpp>

#include "polar/design.h"

namespace frostline {

// Keys stay in the order in which they are written.
using Json = nlohmann::ordered_json;

// {"fer", "kind", "interval", "blocks"}; null where there is nothing to say.
Json to_json(const Prediction& predicted);
// {"bits", "efficiency", "syndrome_efficiency", "limit_bits", "limit_efficiency"}.
Json to_json(const DesignLeakage& leakage);
// {"name", parameters ...}.
Json to_json(const Construction& construction);
Json to_json(const Parameters& parameters);

// Parses one JSON value strictly: InputError "NAME: not JSON: ..." or "NAME: key 'K' stands twice".
Json parse_json(std::string_view text, std::string_view name);
// Throws InputError unless value is an object with exactly these keys (in any order); where tells
// which object, for example "FILE: leakage".
void require_keys(const Json& value, std::initializer_list<const char*> required,
                  std::initializer_list<const char*> optional, const std::string& where);

// Typed access with an error that names the key. REQUIRES: the key is there.
std::uint64_t get_unsigned(const Json& object, const char* key, const std::string& where);
double get_number(const Json& object, const char* key, const std::string& where);
std::string get_string(const Json& object, const char* key, const std::string& where);

}  // namespace frostline
