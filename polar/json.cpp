#include <algorithm>
#include <set>
#include <string>
#include <vector>

#include "polar/design_json.h"
#include "polar/error.h"

namespace frostline {

Json parse_json(std::string_view text, std::string_view name) {
  // The library keeps the last of repeated keys; two readers could then see two designs.
  std::vector<std::set<std::string>> open_objects;
  std::string repeated;
  const auto watch = [&](int, nlohmann::detail::parse_event_t event, Json& parsed) {
    using Event = nlohmann::detail::parse_event_t;
    if (event == Event::object_start) open_objects.emplace_back();
    if (event == Event::object_end) open_objects.pop_back();
    if (event == Event::key && !open_objects.back().insert(parsed.get<std::string>()).second) {
      repeated = parsed.get<std::string>();
    }
    return true;
  };
  Json value;
  try {
    value = Json::parse(text.begin(), text.end(), watch);
  } catch (const Json::parse_error& error) {
    throw InputError(std::string(name) + ": not JSON, byte " + std::to_string(error.byte));
  } catch (const Json::out_of_range&) {
    throw InputError(std::string(name) + ": a number is too large");
  }
  if (!repeated.empty()) {
    throw InputError(std::string(name) + ": key '" + repeated + "' stands twice");
  }
  return value;
}

void require_keys(const Json& value, std::initializer_list<const char*> required,
                  std::initializer_list<const char*> optional, const std::string& where) {
  if (!value.is_object()) throw InputError(where + ": not a JSON object");
  for (const char* key : required) {
    if (!value.contains(key)) throw InputError(where + ": key '" + key + "' is missing");
  }
  const auto lists = [](std::initializer_list<const char*> keys, const std::string& key) {
    return std::any_of(keys.begin(), keys.end(), [&](const char* known) { return key == known; });
  };
  for (const auto& [key, ignored] : value.items()) {
    if (!lists(required, key) && !lists(optional, key)) {
      throw InputError(where + ": unknown key '" + key + "'");
    }
  }
}

std::uint64_t get_unsigned(const Json& object, const char* key, const std::string& where) {
  const Json& value = object.at(key);
  if (!value.is_number_unsigned()) {
    throw InputError(where + ": '" + key + "' is not a whole number from 0 up");
  }
  return value.get<std::uint64_t>();
}

double get_number(const Json& object, const char* key, const std::string& where) {
  const Json& value = object.at(key);
  if (!value.is_number()) throw InputError(where + ": '" + key + "' is not a number");
  return value.get<double>();
}

std::string get_string(const Json& object, const char* key, const std::string& where) {
  const Json& value = object.at(key);
  if (!value.is_string()) throw InputError(where + ": '" + key + "' is not a text");
  return value.get<std::string>();
}

}  // namespace frostline
