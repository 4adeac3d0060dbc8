// Several decoders one after the other: each decodes what the check bits of the one before reject.
//
// Most blocks need only a short list. The few that fail it are gathered into a smaller batch, which
// the next decoder takes as full rows of lanes. B. Li, H. Shen, D. Tse, "An Adaptive Successive
// Cancellation List Decoder for Polar Codes with Cyclic Redundancy Check", IEEE Commun. Lett.
// 16(12), 2012.
#pragma once

#include <memory>
#include <vector>

#include "decode/batch_decoder.h"
#include "polar/block_length.h"

namespace frostline {

class PassesDecoder : public BatchDecoder {
 public:
  // check_bits: c of the code. REQUIRES: c is not 0, and there is a pass (std::invalid_argument
  // otherwise).
  PassesDecoder(BlockLength block_length, unsigned check_bits,
                std::vector<std::unique_ptr<BatchDecoder>> passes);

  // A block that no pass decodes keeps the error pattern of the last one.
  void decode(const BatchDifference& difference, Span<std::uint64_t> error_rows) const override;

 private:
  BlockLength block_length_;
  unsigned check_bits_;
  std::vector<std::unique_ptr<BatchDecoder>> passes_;
};

}  // namespace frostline
