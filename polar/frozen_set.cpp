#include "polar/frozen_set.h"

#include <string>

#include "polar/digest.h"
#include "polar/error.h"

namespace frostline {
namespace {

std::string without_white_space(std::string_view text) {
  std::string kept;
  kept.reserve(text.size());
  for (const char c : text) {
    if (c != ' ' && c != '\n' && c != '\r' && c != '\t') kept += c;
  }
  return kept;
}

}  // namespace

FrozenSet::FrozenSet(BlockLength block_length, BitString mask)
    : block_length_(block_length), mask_(std::move(mask)), frozen_count_(mask_.count()) {
  if (mask_.size() != block_length_.bits()) {
    throw InputError("a mask of " + std::to_string(mask_.size()) + " bits for a block of " +
                     std::to_string(block_length_.bits()));
  }
  for (std::uint32_t i = 0; i < mask_.size(); ++i) {
    if (!mask_[i]) continue;
    if (runs_.empty() || runs_.back().first + runs_.back().count != i) {
      runs_.push_back({i, 1});
    } else {
      ++runs_.back().count;
    }
  }
}

MaskFormat parse_mask_format(std::string_view word) {
  if (word == "text") return MaskFormat::text;
  if (word == "hex") return MaskFormat::hex;
  if (word == "packed") return MaskFormat::packed;
  throw InputError("mask format '" + std::string(word) + "' is none of text, hex, packed");
}

FrozenSet parse_mask(std::string_view contents, MaskFormat format, BlockLength block_length,
                     std::string_view name) {
  const std::size_t bits = block_length.bits();
  const auto require = [&](std::size_t found) {
    if (found != bits) {
      throw InputError(std::string(name) + ": a mask of " + std::to_string(found) +
                       " bits where the block length is " + std::to_string(bits));
    }
  };
  switch (format) {
    case MaskFormat::text: {
      BitString mask = bits_from_text(contents, name);
      require(mask.size());
      return FrozenSet(block_length, std::move(mask));
    }
    case MaskFormat::hex: {
      const std::string digits = without_white_space(contents);
      require(4 * digits.size());
      return FrozenSet(block_length, bits_from_hex(digits, bits, name));
    }
    case MaskFormat::packed:
      require(8 * contents.size());
      return FrozenSet(block_length, bits_from_packed(bytes_of(contents), bits));
  }
  throw InputError("unknown mask format");
}

}  // namespace frostline
