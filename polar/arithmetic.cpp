#include "polar/arithmetic.h"

#include <charconv>
#include <optional>
#include <stdexcept>

#include "polar/error.h"

namespace frostline {
namespace {

constexpr std::string_view kPlanes = "planes:";
constexpr std::string_view kInteger = "integer:";

bool starts_with(std::string_view text, std::string_view start) {
  return text.substr(0, start.size()) == start;
}

// A number in the one form in which to_string writes it: digits alone, no leading zero.
std::optional<unsigned> parse_number(std::string_view digits) {
  unsigned value = 0;
  const char* const end = digits.data() + digits.size();
  const auto [stop, error] = std::from_chars(digits.data(), end, value);
  if (digits.empty() || digits.front() == '0' || error != std::errc() || stop != end) {
    return std::nullopt;
  }
  return value;
}

[[noreturn]] void reject(std::string_view word, std::string_view why) {
  throw InputError("arithmetic '" + std::string(word) + "': " + std::string(why));
}

Arithmetic parse_planes(std::string_view word) {
  const auto planes = parse_number(word.substr(kPlanes.size()));
  if (!planes || *planes < 2 || *planes > 7) reject(word, "planes:W needs W from 2 to 7");
  return Arithmetic::planes_of(*planes);
}

Arithmetic parse_integer(std::string_view word) {
  const std::string_view numbers = word.substr(kInteger.size());
  const std::size_t colon = numbers.find(':');
  if (colon == std::string_view::npos) reject(word, "expected integer:Q:A, as in integer:6:8");
  const auto bits = parse_number(numbers.substr(0, colon));
  if (!bits || *bits < 3 || *bits > 15) reject(word, "integer:Q:A needs Q from 3 to 15");
  const auto level = parse_number(numbers.substr(colon + 1));
  const unsigned largest = (1U << (*bits - 1)) - 1;
  if (!level || *level < 1 || *level > largest) {
    reject(word,
           "integer:" + std::to_string(*bits) + ":A needs A from 1 to " + std::to_string(largest));
  }
  return Arithmetic::integer_of(*bits, *level);
}

}  // namespace

std::string to_string(const Arithmetic& arithmetic) {
  switch (arithmetic.kind) {
    case Arithmetic::Kind::exact:
      return "exact";
    case Arithmetic::Kind::planes:
      return std::string(kPlanes) + std::to_string(arithmetic.planes);
    case Arithmetic::Kind::integer:
      return std::string(kInteger) + std::to_string(arithmetic.llr_bits) + ":" +
             std::to_string(arithmetic.channel_level);
  }
  throw std::invalid_argument("unknown kind of arithmetic");
}

Arithmetic parse_arithmetic(std::string_view word) {
  if (word == "exact") return Arithmetic::exact();
  if (starts_with(word, kPlanes)) return parse_planes(word);
  if (starts_with(word, kInteger)) return parse_integer(word);
  reject(word, "expected exact, planes:W or integer:Q:A");
}

}  // namespace frostline
