#include "decode/batch_decoder.h"

#include <stdexcept>
#include <string>

#include "decode/lanes/lane_decoder.h"
#include "decode/reference/reference_batch_decoder.h"
#include "polar/error.h"

namespace frostline {

std::unique_ptr<BatchDecoder> make_batch_decoder(const Design& design) {
  return make_batch_decoder(design, {{design.list}, nullptr});
}

std::unique_ptr<BatchDecoder> make_batch_decoder(const Design& design, const DecoderPlan& plan) {
  if (plan.lists.empty()) throw std::invalid_argument("a decoder without passes");
  if (plan.lists != std::vector<unsigned>{1}) {
    throw InputError("list size " + std::to_string(plan.lists.back()) +
                     " is asked for; this version decodes with list size 1");
  }
  if (LaneDecoder::serves(design.code, design.arithmetic)) {
    return std::make_unique<LaneDecoder>(design.code, design.arithmetic);
  }
  return std::make_unique<ReferenceBatchDecoder>(design.code, design.arithmetic, design.qber);
}

}  // namespace frostline
