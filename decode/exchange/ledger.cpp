#include "decode/exchange/ledger.h"

#include "polar/limits.h"
#include "polar/tag.h"

namespace frostline {

Ledger book_leakage(std::uint64_t frozen_count, unsigned check_bits, std::uint64_t blocks,
                    std::uint64_t accepted, std::uint64_t tags, std::uint64_t kept_tags) {
  const auto book = [&](std::uint64_t block_count, std::uint64_t tag_count) {
    LeakedBits bits;
    bits.syndrome = block_count * frozen_count;
    bits.check = block_count * check_bits;
    bits.tag = tag_count * kTagBits;
    bits.accept = block_count;
    return bits;
  };
  return {book(blocks, tags), book(accepted, kept_tags)};
}

double efficiency(const LeakedBits& leaked, std::uint64_t bits, double p) {
  if (bits == 0 || p <= 0) return 0;
  return static_cast<double>(leaked.total() - leaked.accept) /
         (static_cast<double>(bits) * binary_entropy(p));
}

NetKey net_key(double fer, double leakage, double phase_error) {
  const double phase = binary_entropy(phase_error);
  return {(1 - fer) * (1 - phase - leakage), (1 - fer) * (1 - leakage) - phase};
}

}  // namespace frostline
