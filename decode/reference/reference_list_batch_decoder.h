// The plain scalar list decoder behind the interface of batches: block after block, blocks of a
// batch in parallel (oneTBB).
#pragma once

#include <memory>

#include "decode/batch_decoder.h"
#include "polar/arithmetic.h"
#include "polar/code.h"

namespace frostline {

class ReferenceListBatchDecoder : public BatchDecoder {
 public:
  // qber: 0 < p < 0.5, used by exact arithmetic only. list: a power of two from 1 to 128. weights:
  // used by planes only, which must have them (std::invalid_argument otherwise).
  ReferenceListBatchDecoder(Code code, Arithmetic arithmetic, double qber, unsigned list,
                            std::shared_ptr<const MetricWeights> weights);
  void decode(const BatchDifference& difference, Span<std::uint64_t> error_rows) const override;

 private:
  Code code_;
  Arithmetic arithmetic_;
  double qber_;
  unsigned list_;
  std::shared_ptr<const MetricWeights> weights_;
};

}  // namespace frostline
