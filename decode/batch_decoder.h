// What the exchange asks of a decoder: the error patterns of a batch of blocks side by side.
//
// The exchange knows nothing of arithmetics or vectors; a decoder knows nothing of keys, messages
// or check bits.
#pragma once

#include <cstdint>
#include <memory>

#include "polar/bits.h"
#include "polar/design.h"

namespace frostline {

class BatchDecoder {
 public:
  virtual ~BatchDecoder() = default;

  // difference_rows: N lanes bits; bit i lanes + l is the difference of the two ends' public bits
  // at frozen index i of block l, and 0 at open indices. error_rows: the same layout, receives the
  // error pattern that the decoder settled on in each lane; it shows the given difference, but may
  // be wrong: the check bits tell. Safe to call from many threads at once; one lane never
  // influences another.
  virtual void decode(Span<const std::uint64_t> difference_rows, unsigned lanes,
                      Span<std::uint64_t> error_rows) const = 0;
};

// The decoder that a design asks for. Throws InputError when it asks for one that there is not.
std::unique_ptr<BatchDecoder> make_batch_decoder(const Design& design);

}  // namespace frostline
