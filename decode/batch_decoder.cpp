#include "decode/batch_decoder.h"

#include <stdexcept>
#include <string>
#include <utility>

#include "decode/lanes/lane_decoder.h"
#include "decode/list/list_decoder.h"
#include "decode/list/passes.h"
#include "decode/reference/list_decoder.h"
#include "decode/reference/reference_batch_decoder.h"
#include "decode/reference/reference_list_batch_decoder.h"
#include "polar/error.h"

namespace frostline {
namespace {

std::unique_ptr<BatchDecoder> make_pass(const Design& design, unsigned list,
                                        const std::shared_ptr<const MetricWeights>& weights) {
  const bool lanes = LaneDecoder::serves(design.code, design.arithmetic);
  if (ListDecoder::serves(design.arithmetic, list) && !(list == 1 && lanes)) {
    return std::make_unique<ListDecoder>(design.code, design.arithmetic, list, weights.get());
  }
  if (list > 1) {
    return std::make_unique<ReferenceListBatchDecoder>(design.code, design.arithmetic, design.qber,
                                                       list, weights);
  }
  if (lanes) {
    return std::make_unique<LaneDecoder>(design.code, design.arithmetic);
  }
  return std::make_unique<ReferenceBatchDecoder>(design.code, design.arithmetic, design.qber);
}

}  // namespace

void require_lists(const std::vector<unsigned>& lists) {
  if (lists.empty()) throw std::invalid_argument("a decoder without passes");
  unsigned last = 0;
  for (const unsigned list : lists) {
    if (list == 0 || (list & (list - 1)) != 0 || list > kLargestReferenceList) {
      throw InputError("list size " + std::to_string(list) +
                       " is not a power of two from 1 to 128");
    }
    if (list <= last) {
      throw InputError("list sizes do not ascend: " + std::to_string(last) + ", then " +
                       std::to_string(list));
    }
    last = list;
  }
}

std::unique_ptr<BatchDecoder> make_batch_decoder(const Design& design) {
  return make_batch_decoder(design, {{design.list}, nullptr});
}

std::unique_ptr<BatchDecoder> make_batch_decoder(const Design& design, const DecoderPlan& plan) {
  require_lists(plan.lists);
  if (plan.lists.size() == 1) return make_pass(design, plan.lists.back(), plan.weights);
  if (design.code.check_bits == 0) {
    throw InputError(
        "several list sizes are asked for, but the design has no check bits to tell "
        "which blocks need another pass");
  }
  std::vector<std::unique_ptr<BatchDecoder>> passes;
  for (const unsigned list : plan.lists) passes.push_back(make_pass(design, list, plan.weights));
  return std::make_unique<PassesDecoder>(design.code.block_length(), design.code.check_bits,
                                         std::move(passes));
}

}  // namespace frostline
