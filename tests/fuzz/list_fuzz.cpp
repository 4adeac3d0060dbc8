// List decoding of random frozen sets, list sizes, lanes and differences: the decoder that a design
// gets beside the plain scalar one. Every error pattern must show the difference that was given; no
// lane may influence another; a list of one is successive cancellation; check bits that a pass over
// the list can meet are met.
//
//   cmake -S . -B build-fuzz -DCMAKE_CXX_COMPILER=clang++ -DFROSTLINE_FUZZ=ON
//   cmake --build build-fuzz --target frostline_list_fuzz
//   build-fuzz/tests/fuzz/frostline_list_fuzz -max_len=512 -max_total_time=600
#include <array>
#include <cstddef>
#include <cstdint>
#include <memory>
#include <utility>
#include <vector>

#include "construct/metric_weights.h"
#include "decode/batch_decoder.h"
#include "decode/exchange/lane_checks.h"
#include "decode/reference/list_decoder.h"
#include "decode/reference/successive_cancellation.h"
#include "polar/lanes.h"
#include "polar/random.h"
#include "polar/syndrome.h"
#include "tests/fuzz/fuzz_input.h"

namespace frostline::fuzz {
namespace {

constexpr std::array<unsigned, 6> kCheckWidths = {0, 6, 8, 11, 16, 24};
constexpr std::array<double, 4> kQbers = {0.01, 0.05, 0.11, 0.3};

struct Case {
  Design design;
  DecoderPlan plan;
  unsigned lanes;
  KeyWords difference;  // rows of a batch
  BitString checks;
};

// Frozen places at random, or by whole bytes, which makes nodes of one kind.
FrozenSet frozen_set(FuzzInput& input, BlockLength length) {
  if (input.below(2) == 0) return FrozenSet(length, input.bits(length.bits()));
  BitString mask(length.bits());
  for (std::size_t j = 0; j < length.bytes(); ++j) {
    const std::uint8_t kind = input.byte();
    const unsigned places = kind < 96 ? 0xFFU : kind < 192 ? 0U : input.byte();
    for (std::size_t k = 0; k < 8; ++k) mask.set(8 * j + k, (places >> k) & 1U);
  }
  return FrozenSet(length, std::move(mask));
}

Arithmetic arithmetic(FuzzInput& input) {
  switch (input.below(8)) {
    case 0:
      return Arithmetic::exact();
    case 1:
      return Arithmetic::integer_of(6, 4);
    case 2:
      return Arithmetic::planes_of(2 + input.below(6));
    case 3:
      return Arithmetic::planes_of(2);
    default:
      return Arithmetic::planes_of(3);
  }
}

Case make_case(FuzzInput& input) {
  const BlockLength length = BlockLength::from_log2(3 + input.below(6));
  const unsigned lanes = 1U << input.below(7);
  const unsigned list = 1U << input.below(6);
  const double p = kQbers[input.below(kQbers.size())];
  Case made{{{frozen_set(input, length), input.below(2) == 0 ? Precoding::none : Precoding::state8,
              kCheckWidths[input.below(kCheckWidths.size())]},
             p,
             {},
             list,
             arithmetic(input),
             {},
             {},
             {},
             {}},
            {{list}, nullptr},
            lanes,
            KeyWords(words_for(length.bits() * lanes)),
            {}};
  const Code& code = made.design.code;
  if (made.design.arithmetic.kind == Arithmetic::Kind::planes) {
    made.plan.weights = std::make_shared<const MetricWeights>(
        metric_weights(code.frozen, p, made.design.arithmetic));
  }
  // Patterns of the channel, or of a much worse one, drawn from a seed of the input.
  KeyWords errors(made.difference.size());
  const double drawn = input.below(4) == 0 ? 0.5 : p;
  RandomStream(input.word(), "list fuzz", 0).bernoulli(drawn, length.bits() * lanes, errors);
  KeyWords blocks(errors.size());
  lanes_to_blocks(errors, length, lanes, blocks);
  made.checks = lane_checks(blocks, code, lanes);
  const SyndromeFormer former(code.frozen, code.precoding);
  former.to_public_rows(errors, lanes);
  former.scatter(former.gather(errors, lanes), lanes, made.difference);
  return made;
}

// One block of rows as a string.
BitString lane_of(const KeyWords& rows, BlockLength length, unsigned lanes, unsigned lane) {
  BitString bits(length.bits());
  for (std::size_t i = 0; i < length.bits(); ++i) {
    const std::size_t at = i * lanes + lane;
    bits.set(i, (rows[at / 64] >> (at % 64)) & 1U);
  }
  return bits;
}

std::uint32_t check_of(const Case& made, unsigned lane) {
  std::uint32_t check = 0;
  for (unsigned t = 0; t < made.design.code.check_bits; ++t) {
    check = (check << 1) | (made.checks[std::size_t{t} * made.lanes + lane] ? 1U : 0U);
  }
  return check;
}

void require_difference(const Case& made, const KeyWords& errors) {
  const Code& code = made.design.code;
  const SyndromeFormer former(code.frozen, code.precoding);
  KeyWords shown = errors;
  former.to_public_rows(shown, made.lanes);
  require(former.gather(shown, made.lanes) == former.gather(made.difference, made.lanes),
          "the error pattern shows another difference");
}

// A lane decoded alone, and by the reference.
void require_lane(const Case& made, const BatchDecoder& decoder, const KeyWords& errors,
                  unsigned lane) {
  const Code& code = made.design.code;
  const BlockLength length = code.block_length();
  const BitString found = lane_of(errors, length, made.lanes, lane);
  const BitString difference = lane_of(made.difference, length, made.lanes, lane);
  BitString check(code.check_bits);
  for (unsigned t = 0; t < code.check_bits; ++t) {
    check.set(t, made.checks[std::size_t{t} * made.lanes + lane]);
  }
  BitString alone(length.bits());
  decoder.decode({1, difference.words(), check.words()}, alone.words());
  require(alone == found, "a lane depends on the others");
  const ListDecision reference =
      decode_list(code, made.design.arithmetic, made.design.qber, made.plan.lists.back(),
                  made.plan.weights.get(), difference, check_of(made, lane));
  for (const ListPath& path : reference.paths) {
    KeyWords rows(words_for(length.bits()));
    std::copy(path.errors.words().begin(), path.errors.words().end(), rows.begin());
    const SyndromeFormer former(code.frozen, code.precoding);
    former.to_public_rows(rows, 1);
    KeyWords given(rows.size());
    std::copy(difference.words().begin(), difference.words().end(), given.begin());
    require(former.gather(rows, 1) == former.gather(given, 1),
            "a path of the reference shows another difference");
  }
  if (made.plan.lists.back() == 1) {
    require(found == reference.errors(), "a list of one is not successive cancellation");
    require(found == decode_sc(code, made.design.arithmetic, made.design.qber, difference).errors,
            "the reference list of one is not successive cancellation");
  }
}

}  // namespace
}  // namespace frostline::fuzz

extern "C" int LLVMFuzzerTestOneInput(const std::uint8_t* data, std::size_t size) {
  using namespace frostline;
  using namespace frostline::fuzz;
  FuzzInput input(data, size);
  const Case made = make_case(input);
  const auto decoder = make_batch_decoder(made.design, made.plan);
  KeyWords errors(made.difference.size());
  decoder->decode({made.lanes, made.difference, made.checks.words()}, errors);
  require_difference(made, errors);
  require_lane(made, *decoder, errors, input.below(made.lanes));
  return 0;
}
