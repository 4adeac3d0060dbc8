#include "polar/syndrome.h"

#include <algorithm>
#include <stdexcept>

#include "polar/transform.h"

namespace frostline {

SyndromeFormer::SyndromeFormer(FrozenSet frozen, Precoding precoding)
    : frozen_(std::move(frozen)), schedule_(frozen_, precoding) {}

void SyndromeFormer::to_public_rows(Span<std::uint64_t> rows, unsigned lanes) const {
  polar_transform(rows, frozen_.block_length(), lanes);
  apply_precoding(schedule_, lanes, rows);
}

BitString SyndromeFormer::gather(Span<const std::uint64_t> rows, unsigned lanes) const {
  BitString syndrome(frozen_.frozen_count() * lanes);
  std::size_t next = 0;
  for (const FrozenSet::Run& run : frozen_.runs()) {
    const std::size_t bits = std::size_t{run.count} * lanes;
    copy_bits(rows, std::size_t{run.first} * lanes, syndrome.words(), next, bits);
    next += bits;
  }
  return syndrome;
}

void SyndromeFormer::scatter(const BitString& syndrome, unsigned lanes,
                             Span<std::uint64_t> rows) const {
  if (syndrome.size() != frozen_.frozen_count() * lanes) {
    throw std::invalid_argument("syndrome of " + std::to_string(syndrome.size()) + " bits for " +
                                std::to_string(frozen_.frozen_count()) + " frozen indices and " +
                                std::to_string(lanes) + " lanes");
  }
  std::fill(rows.begin(), rows.end(), 0);
  std::size_t next = 0;
  for (const FrozenSet::Run& run : frozen_.runs()) {
    const std::size_t bits = std::size_t{run.count} * lanes;
    copy_bits(syndrome.words(), next, rows, std::size_t{run.first} * lanes, bits);
    next += bits;
  }
}

void SyndromeFormer::subtract(const BitString& syndrome, unsigned lanes,
                              Span<std::uint64_t> rows) const {
  BitString own = gather(rows, lanes);
  own ^= syndrome;
  scatter(own, lanes, rows);
}

BitString SyndromeFormer::syndrome(const BitString& block) const {
  if (block.size() != frozen_.block_length().bits()) {
    throw std::invalid_argument("syndrome of a block of another length");
  }
  BitString rows = block;
  to_public_rows(rows.words(), 1);
  return gather(rows.words(), 1);
}

}  // namespace frostline
