// Words of a memory text as $readmemh (IEEE 1364, IEEE 1800) reads them and $writememh writes them.
#pragma once

#include <string>
#include <string_view>
#include <vector>

#include "polar/bits.h"

namespace frostline {

// The value whose bits are the given ones, the first the most significant: what $readmemh puts into
// a reg [0:size-1]. Sizes that are no multiple of 4 leave the first digit short.
std::string hex_word(const BitString& bits);

// All words, lower case, without underscores. White space separates them; comments of both kinds
// are skipped. Digits x and z stay as x. Throws InputError "NAME: line L: ..." on anything else,
// addresses (@) included.
std::vector<std::string> parse_hex_words(std::string_view text, std::string_view name);

}  // namespace frostline
