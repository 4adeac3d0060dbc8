#include "decode/batch_decoder.h"

#include "decode/lanes/lane_decoder.h"
#include "decode/reference/reference_batch_decoder.h"
#include "polar/error.h"

namespace frostline {

std::unique_ptr<BatchDecoder> make_batch_decoder(const Design& design) {
  if (design.list != 1) {
    throw InputError("the design asks for list size " + std::to_string(design.list) +
                     "; this version decodes with list size 1");
  }
  if (LaneDecoder::serves(design.code, design.arithmetic)) {
    return std::make_unique<LaneDecoder>(design.code, design.arithmetic);
  }
  return std::make_unique<ReferenceBatchDecoder>(design.code, design.arithmetic, design.qber);
}

}  // namespace frostline
