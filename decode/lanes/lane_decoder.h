// Successive cancellation in planes:2 and planes:3 for all lanes of a batch in step.
//
// Bit-sliced: a message is a sign bit and W magnitude bits, and each of these bits of all positions
// and lanes of a node lies in one row (a plane), so that one logic operation on a vector of 512
// bits serves 512 messages. The tree is walked depth first, the same way for all lanes: there is no
// divergence. Arithmetic: DEVELOPERS.md, "Arithmetics"; it equals decode/reference bit for bit, on
// every target of Google Highway and for every number of lanes.
// Pruning of all-frozen and all-open nodes: A. Alamdar-Yazdi, F. R. Kschischang, IEEE Commun. Lett.
// 15(12), 2011.
#pragma once

#include <tbb/enumerable_thread_specific.h>

#include "decode/batch_decoder.h"
#include "decode/lanes/lane_program.h"

namespace frostline {

class LaneDecoder : public BatchDecoder {
 public:
  // Whether it decodes such a code in such an arithmetic: planes:2 or planes:3, no precoding.
  static bool serves(const Code& code, const Arithmetic& arithmetic);

  // REQUIRES: serves(code, arithmetic) (std::invalid_argument otherwise).
  LaneDecoder(const Code& code, const Arithmetic& arithmetic);

  // Memory: N lanes bytes a thread, kept for the next batch.
  void decode(const BatchDifference& difference, Span<std::uint64_t> error_rows) const override;

 private:
  LaneProgram program_;
  unsigned planes_;
  mutable tbb::enumerable_thread_specific<KeyWords> scratch_;
};

}  // namespace frostline
