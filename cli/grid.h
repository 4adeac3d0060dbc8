// Lists of values on the command line: "1024,4096", "0.01:0.11:0.005", or both mixed.
#pragma once

#include <cstdint>
#include <string>
#include <string_view>
#include <vector>

namespace frostline::cli {

// Values and ranges LOW:HIGH:STEP (both ends included), separated by commas, in ascending order.
// Values are rounded to 12 significant digits, so that 0.03 from a range is the 0.03 that a person
// types. Throws InputError "OPTION: ..." on a word that is no number, an empty range, a step that
// is not positive, more than 10000 values, or a value that comes twice (overlapping ranges).
std::vector<double> parse_values(std::string_view text, const std::string& option);
// The same for whole numbers, without ranges.
std::vector<std::uint64_t> parse_whole_values(std::string_view text, const std::string& option);
// Words separated by commas, each once.
std::vector<std::string> parse_words(std::string_view text, const std::string& option);

// The shortest decimal text of a number: "0.1", "1e-06", "0.023".
std::string shortest(double value);

}  // namespace frostline::cli
