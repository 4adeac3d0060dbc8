// The syndrome: the M public bits of a block, in increasing index, for B blocks side by side.
//
// It is linear in x, so the sum of the two ends' syndromes is the syndrome of their error pattern.
#pragma once

#include <cstdint>

#include "polar/bits.h"
#include "polar/frozen_set.h"
#include "polar/precoding.h"

namespace frostline {

// Forms syndromes of one code. Immutable after construction, so any number of threads may share it.
class SyndromeFormer {
 public:
  SyndromeFormer(FrozenSet frozen, Precoding precoding);

  const FrozenSet& frozen() const { return frozen_; }
  const PrecodingSchedule& schedule() const { return schedule_; }

  // In place: from x to the public value at frozen and plain u at open indices.
  // rows: words_for(N lanes) words, bit i lanes + l is position i of lane l.
  void to_public_rows(Span<std::uint64_t> rows, unsigned lanes) const;

  // Takes the frozen rows out: M lanes bits, row after row in increasing index.
  BitString gather(Span<const std::uint64_t> rows, unsigned lanes) const;
  // Puts M lanes bits back at the frozen rows and zeros elsewhere. REQUIRES: syndrome.size() ==
  // M lanes (std::invalid_argument otherwise).
  void scatter(const BitString& syndrome, unsigned lanes, Span<std::uint64_t> rows) const;
  // Adds M lanes bits to the frozen rows and clears the others: from the public rows of one end and
  // the syndrome of the other to their difference. REQUIRES: as scatter.
  void subtract(const BitString& syndrome, unsigned lanes, Span<std::uint64_t> rows) const;

  // The syndrome of one block of N bits: M bits.
  BitString syndrome(const BitString& block) const;

 private:
  FrozenSet frozen_;
  PrecodingSchedule schedule_;
};

}  // namespace frostline
