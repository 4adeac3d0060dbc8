#include "decode/reference/reference_batch_decoder.h"

#include <utility>

#include "decode/reference/lane_by_lane.h"
#include "decode/reference/successive_cancellation.h"

namespace frostline {

ReferenceBatchDecoder::ReferenceBatchDecoder(Code code, Arithmetic arithmetic, double qber)
    : code_(std::move(code)), arithmetic_(arithmetic), qber_(qber) {}

void ReferenceBatchDecoder::decode(const BatchDifference& difference,
                                   Span<std::uint64_t> error_rows) const {
  decode_lane_by_lane(
      difference, code_.block_length(), 0,
      [&](const BitString& of_block, std::uint32_t) {
        return decode_sc(code_, arithmetic_, qber_, of_block).errors;
      },
      error_rows);
}

}  // namespace frostline
