// What the exchange asks of a decoder: the error patterns of a batch of blocks side by side.
//
// The exchange knows nothing of arithmetics or vectors; a decoder knows nothing of keys or
// messages.
#pragma once

#include <cstdint>
#include <memory>
#include <vector>

#include "polar/bits.h"
#include "polar/design.h"
#include "polar/metric_weights.h"

namespace frostline {

// What the two ends' public bits of a batch differ in.
struct BatchDifference {
  // Blocks side by side, a power of two from 1 to 512.
  unsigned lanes = 1;
  // N lanes bits; bit i lanes + l is the difference at frozen index i of block l, and 0 at open
  // indices.
  Span<const std::uint64_t> rows;
  // c lanes bits; bit t lanes + l is the difference of the t-th check bit of block l. As a check is
  // linear, these are the check bits of the error pattern itself.
  Span<const std::uint64_t> checks;
};

class BatchDecoder {
 public:
  virtual ~BatchDecoder() = default;

  // error_rows: N lanes bits in the layout of the difference; receives the error pattern that the
  // decoder settled on in each lane. It shows the given difference at the frozen indices, but may
  // be wrong: its check bits tell. A list decoder takes the best path whose check bits are the
  // given ones, and the best of all where none has them. Safe to call from many threads at once;
  // one lane never influences another.
  virtual void decode(const BatchDifference& difference, Span<std::uint64_t> error_rows) const = 0;
};

// What the receiver chooses besides the design: both ends need not agree on it.
struct DecoderPlan {
  // The list size of each pass, ascending; a pass decodes what the check bits of the one before
  // reject. {1} is successive cancellation.
  std::vector<unsigned> lists = {1};
  // What list decoding in planes needs, and nothing else does; from construct/metric_weights.h.
  std::shared_ptr<const MetricWeights> weights;
};

// Throws InputError unless all list sizes are powers of two from 1 to 128, each above the one
// before; std::invalid_argument when there is none.
void require_lists(const std::vector<unsigned>& lists);

// Throws InputError when there is no such decoder, or a list size is not a power of two from 1 to
// 128 or not above the one before; std::invalid_argument when a list of more than one path lacks
// the weights.
std::unique_ptr<BatchDecoder> make_batch_decoder(const Design& design, const DecoderPlan& plan);
// The decoder that the design names, which must be of list size 1 (InputError otherwise).
std::unique_ptr<BatchDecoder> make_batch_decoder(const Design& design);

}  // namespace frostline
