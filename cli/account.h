// What commands print when they are done: a short account in sentences and a small table.
#pragma once

#include <cstdint>
#include <string>
#include <utility>
#include <vector>

namespace frostline::cli {

// Numbers for people: "65 536" grouped in threes; a fixed number of digits; three significant
// digits with an exponent where that is shorter; a share as "93.8 %".
std::string grouped(std::uint64_t value);
std::string fixed(double value, int digits);
std::string short_number(double value);
std::string percent(double share, int digits = 1);
// "1 block", "3 blocks".
std::string counted(std::uint64_t count, const std::string& noun);

// A table of two columns, labels left.
class Table {
 public:
  Table& row(const std::string& label, const std::string& value) {
    rows_.emplace_back(label, value);
    return *this;
  }
  std::string text() const;

 private:
  std::vector<std::pair<std::string, std::string>> rows_;
};

}  // namespace frostline::cli
