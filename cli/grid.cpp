#include "cli/grid.h"

#include <algorithm>
#include <charconv>
#include <cmath>
#include <cstdio>
#include <cstdlib>

#include "polar/error.h"

namespace frostline::cli {
namespace {

constexpr std::size_t kMaxValues = 10000;

std::vector<std::string> split(std::string_view text, char separator) {
  std::vector<std::string> words(1);
  for (const char c : text) {
    if (c == separator) {
      words.emplace_back();
    } else {
      words.back() += c;
    }
  }
  return words;
}

double rounded(double value) {
  char text[40];
  std::snprintf(text, sizeof text, "%.12g", value);
  return std::strtod(text, nullptr);
}

double number(const std::string& word, const std::string& option) {
  double value = 0;
  const char* end = word.data() + word.size();
  const auto parsed = std::from_chars(word.data(), end, value);
  if (parsed.ec != std::errc() || parsed.ptr != end || !std::isfinite(value)) {
    throw InputError(option + ": '" + word + "' is not a number");
  }
  return value;
}

void append_range(const std::string& word, const std::string& option, std::vector<double>& values) {
  const std::vector<std::string> parts = split(word, ':');
  if (parts.size() != 3) throw InputError(option + ": '" + word + "' is not LOW:HIGH:STEP");
  const double low = number(parts[0], option);
  const double high = number(parts[1], option);
  const double step = number(parts[2], option);
  if (!(step > 0)) throw InputError(option + ": the step of '" + word + "' is not above 0");
  if (high < low) throw InputError(option + ": the range '" + word + "' is empty");
  // Half a thousandth of a step makes up for the rounding of the quotient.
  const double count = std::floor((high - low) / step + 0.0005) + 1;
  if (count + static_cast<double>(values.size()) > static_cast<double>(kMaxValues)) {
    throw InputError(option + ": more than " + std::to_string(kMaxValues) + " values");
  }
  for (int k = 0; k < static_cast<int>(count); ++k) values.push_back(rounded(low + k * step));
}

template <typename T>
std::vector<T> sorted_without_repeats(std::vector<T> values, const std::string& option,
                                      std::string (*show)(T)) {
  std::sort(values.begin(), values.end());
  const auto twice = std::adjacent_find(values.begin(), values.end());
  if (twice != values.end()) throw InputError(option + ": " + show(*twice) + " comes twice");
  return values;
}

}  // namespace

std::string shortest(double value) {
  char text[40];
  const auto written = std::to_chars(text, text + sizeof text, value);
  return {text, written.ptr};
}

std::vector<double> parse_values(std::string_view text, const std::string& option) {
  std::vector<double> values;
  for (const std::string& word : split(text, ',')) {
    if (word.find(':') != std::string::npos) {
      append_range(word, option, values);
    } else {
      values.push_back(rounded(number(word, option)));
    }
  }
  return sorted_without_repeats(std::move(values), option, shortest);
}

std::vector<std::uint64_t> parse_whole_values(std::string_view text, const std::string& option) {
  std::vector<std::uint64_t> values;
  for (const std::string& word : split(text, ',')) {
    std::uint64_t value = 0;
    const char* end = word.data() + word.size();
    const auto parsed = std::from_chars(word.data(), end, value);
    if (parsed.ec != std::errc() || parsed.ptr != end) {
      throw InputError(option + ": '" + word + "' is not a whole number");
    }
    values.push_back(value);
  }
  return sorted_without_repeats<std::uint64_t>(
      std::move(values), option, [](std::uint64_t value) { return std::to_string(value); });
}

std::vector<std::string> parse_words(std::string_view text, const std::string& option) {
  std::vector<std::string> words = split(text, ',');
  for (const std::string& word : words) {
    if (std::count(words.begin(), words.end(), word) > 1) {
      throw InputError(option + ": '" + word + "' comes twice");
    }
  }
  return words;
}

}  // namespace frostline::cli
