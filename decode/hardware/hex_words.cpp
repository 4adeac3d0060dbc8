#include "decode/hardware/hex_words.h"

#include <algorithm>

#include "polar/error.h"

namespace frostline {
namespace {

bool is_space(char c) { return c == ' ' || c == '\t' || c == '\n' || c == '\r' || c == '\f'; }

// The digit as it is kept; 0 where it is none.
char digit_of(char c) {
  if ((c >= '0' && c <= '9') || (c >= 'a' && c <= 'f')) return c;
  if (c >= 'A' && c <= 'F') return static_cast<char>(c - 'A' + 'a');
  return c == 'x' || c == 'X' || c == 'z' || c == 'Z' ? 'x' : '\0';
}

}  // namespace

std::string hex_word(const BitString& bits) {
  BitString padded((4 - bits.size() % 4) % 4);
  padded.append(bits);
  return bits_to_hex(padded);
}

std::vector<std::string> parse_hex_words(std::string_view text, std::string_view name) {
  std::vector<std::string> words;
  std::string word;
  std::size_t line = 1;
  const auto finish_word = [&] {
    if (!word.empty()) words.push_back(std::move(word));
    word.clear();
  };
  const auto fail = [&](const std::string& what) {
    throw InputError(std::string(name) + ": line " + std::to_string(line) + ": " + what);
  };
  for (std::size_t at = 0; at < text.size(); ++at) {
    const std::string_view rest = text.substr(at, 2);
    if (rest == "//" || rest == "/*") {
      finish_word();
      const std::size_t end = rest == "//" ? text.find('\n', at) : text.find("*/", at + 2);
      if (end == std::string_view::npos && rest == "/*") fail("a comment without an end");
      const std::size_t next = std::min(end, text.size());
      for (std::size_t i = at; i < next; ++i) line += text[i] == '\n' ? 1 : 0;
      at = rest == "//" ? next - 1 : next + 1;
    } else if (is_space(text[at])) {
      finish_word();
      line += text[at] == '\n' ? 1 : 0;
    } else if (const char digit = digit_of(text[at]); digit != '\0') {
      word += digit;
    } else if (text[at] != '_' || word.empty()) {
      fail(text[at] == '@' ? std::string("addresses (@) are not read")
                           : "'" + std::string(1, text[at]) + "' is no hexadecimal digit");
    }
  }
  finish_word();
  return words;
}

}  // namespace frostline
