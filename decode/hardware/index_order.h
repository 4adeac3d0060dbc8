// The order in which hardware keeps the N elements of u, or of a mask over them.
//
// In bit-reversed order element k is index r(k), the n bits of k read backwards; r is its own
// inverse. Permuting by r commutes with the polar transform (E. Arikan, IEEE Trans. IT 55(7), 2009,
// section VII), so that the same butterfly network yields u in bit-reversed order from x in
// bit-reversed order.
#pragma once

#include <cstddef>
#include <string_view>

#include "polar/bits.h"
#include "polar/block_length.h"
#include "polar/error.h"

namespace frostline {

enum class IndexOrder { natural, bit_reversed };

// "natural", "bit-reversed".
inline std::string_view index_order_name(IndexOrder order) {
  return order == IndexOrder::natural ? "natural" : "bit-reversed";
}
// Throws InputError on another word.
inline IndexOrder parse_index_order(const std::string& word) {
  if (word == "natural") return IndexOrder::natural;
  if (word == "bit-reversed") return IndexOrder::bit_reversed;
  throw InputError("index order '" + word + "' is neither natural nor bit-reversed");
}

// The index of u that element k is, and the element that index k is.
inline std::size_t in_order(std::size_t k, BlockLength block_length, IndexOrder order) {
  if (order == IndexOrder::natural) return k;
  std::size_t reversed = 0;
  for (unsigned bit = 0; bit < block_length.log2(); ++bit)
    reversed |= (k >> bit & 1U) << (block_length.log2() - 1 - bit);
  return reversed;
}
// N bits, element k of the result being index in_order(k) of bits.
inline BitString in_order(const BitString& bits, BlockLength block_length, IndexOrder order) {
  if (order == IndexOrder::natural) return bits;
  BitString result(bits.size());
  for (std::size_t k = 0; k < bits.size(); ++k) {
    result.set(k, bits[in_order(k, block_length, order)]);
  }
  return result;
}

}  // namespace frostline
