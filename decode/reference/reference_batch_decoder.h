// The plain scalar SC decoder behind the interface of batches: block after block, blocks of a batch
// in parallel (oneTBB).
#pragma once

#include "decode/batch_decoder.h"
#include "polar/arithmetic.h"
#include "polar/code.h"

namespace frostline {

class ReferenceBatchDecoder : public BatchDecoder {
 public:
  // qber: 0 < p < 0.5, used by exact arithmetic only.
  ReferenceBatchDecoder(Code code, Arithmetic arithmetic, double qber);
  void decode(const BatchDifference& difference, Span<std::uint64_t> error_rows) const override;

 private:
  Code code_;
  Arithmetic arithmetic_;
  double qber_;
};

}  // namespace frostline
