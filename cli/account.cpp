#include "cli/account.h"

#include <algorithm>
#include <cmath>
#include <cstdio>

namespace frostline::cli {

std::string grouped(std::uint64_t value) {
  std::string digits = std::to_string(value);
  for (std::size_t i = digits.size(); i > 3; i -= 3) digits.insert(i - 3, " ");
  return digits;
}

std::string fixed(double value, int digits) {
  char text[64];
  std::snprintf(text, sizeof text, "%.*f", digits, value);
  return text;
}

std::string short_number(double value) {
  char text[64];
  std::snprintf(text, sizeof text, "%.3g", value);
  return text;
}

std::string percent(double share, int digits) { return fixed(100 * share, digits) + " %"; }

std::string counted(std::uint64_t count, const std::string& noun) {
  return grouped(count) + " " + noun + (count == 1 ? "" : "s");
}

std::string Table::text() const {
  std::size_t width = 0;
  for (const auto& [label, value] : rows_) width = std::max(width, label.size());
  std::string text;
  for (const auto& [label, value] : rows_) {
    text += "  " + label + std::string(width + 2 - label.size(), ' ') + value + '\n';
  }
  return text;
}

}  // namespace frostline::cli
