#include "decode/reference/reference_list_batch_decoder.h"

#include <utility>

#include "decode/reference/lane_by_lane.h"
#include "decode/reference/list_decoder.h"

namespace frostline {

ReferenceListBatchDecoder::ReferenceListBatchDecoder(Code code, Arithmetic arithmetic, double qber,
                                                     unsigned list,
                                                     std::shared_ptr<const MetricWeights> weights)
    : code_(std::move(code)),
      arithmetic_(arithmetic),
      qber_(qber),
      list_(list),
      weights_(std::move(weights)) {
  require_list_arguments(code_, arithmetic_, list_, weights_.get());
}

void ReferenceListBatchDecoder::decode(const BatchDifference& difference,
                                       Span<std::uint64_t> error_rows) const {
  decode_lane_by_lane(
      difference, code_.block_length(), code_.check_bits,
      [&](const BitString& of_block, std::uint32_t check) {
        return decode_list(code_, arithmetic_, qber_, list_, weights_.get(), of_block, check)
            .errors();
      },
      error_rows);
}

}  // namespace frostline
