// The list decoder beside a textbook one in the same run: Mbit/s of key a core.
#include <benchmark/benchmark.h>

#include <array>
#include <cmath>
#include <map>
#include <memory>
#include <utility>

#include "construct/designer.h"
#include "construct/metric_weights.h"
#include "decode/exchange/cut.h"
#include "decode/exchange/lane_checks.h"
#include "decode/list/list_decoder.h"
#include "polar/check_bits.h"
#include "polar/lanes.h"
#include "polar/limits.h"
#include "polar/random.h"
#include "polar/syndrome.h"
#include "tests/bench/textbook_list.h"

namespace frostline {
namespace {

const Arithmetic kArithmetic = Arithmetic::planes_of(3);

// Syndrome efficiencies near FER 0.1, measured with precoding; by n, p in 1e-3, log2 L - 1.
double efficiency(unsigned log2, int p, unsigned log2_list) {
  static const std::map<std::pair<unsigned, int>, std::array<double, 5>> kMeasured = {
      {{10, 50}, {1.386, 1.306, 1.248, 1.216, 1.187}},
      {{12, 20}, {1.477, 1.375, 1.316, 1.274, 1.245}},
      {{12, 50}, {1.321, 1.258, 1.219, 1.196, 1.174}},
      {{16, 20}, {1.311, 1.249, 1.211, 1.186, 1.169}},
      {{16, 50}, {1.203, 1.171, 1.148, 1.135, 1.123}},
      {{16, 110}, {1.125, 1.109, 1.095, 1.085, 1.080}},
      {{20, 20}, {1.184, 1.154, 1.134, 1.126, 1.117}},
      {{20, 50}, {1.123, 1.109, 1.097, 1.091, 1.084}},
      {{20, 110}, {1.087, 1.074, 1.068, 1.061, 1.055}},
  };
  return kMeasured.at({log2, p}).at(log2_list - 1);
}

struct Setup {
  Code code;
  unsigned lanes;
  KeyWords rows;
  BitString checks;
  std::unique_ptr<MetricWeights> weights;
};

Setup make_setup(unsigned log2, int p_thousandths, unsigned log2_list, Precoding precoding) {
  const double p = p_thousandths * 1e-3;
  const BlockLength length = BlockLength::from_log2(log2);
  const Ranking ranking =
      rank_indices(length, p, default_construction(kArithmetic), 0, kArithmetic);
  const auto frozen_count =
      static_cast<std::size_t>(std::lround(efficiency(log2, p_thousandths, log2_list) *
                                           static_cast<double>(length.bits()) * binary_entropy(p)));
  const CodeOptions options{default_check_bits(length), precoding, false, 1U << log2_list};
  Setup setup{make_design(ranking, {Goal::Kind::frozen, 0, frozen_count}, options, {}).design.code,
              default_lanes(length),
              {},
              {},
              nullptr};
  setup.weights =
      std::make_unique<MetricWeights>(metric_weights(setup.code.frozen, p, kArithmetic));
  const std::size_t bits = length.bits() * setup.lanes;
  setup.rows.resize(words_for(bits));
  RandomStream(1, "list bench", log2).bernoulli(p, bits, setup.rows);
  KeyWords blocks(setup.rows.size());
  lanes_to_blocks(setup.rows, length, setup.lanes, blocks);
  setup.checks = lane_checks(blocks, setup.code, setup.lanes);
  const SyndromeFormer former(setup.code.frozen, precoding);
  former.to_public_rows(setup.rows, setup.lanes);
  former.scatter(former.gather(setup.rows, setup.lanes), setup.lanes, setup.rows);
  return setup;
}

void report(benchmark::State& state, std::size_t bits) {
  state.counters["Mbit/s"] = benchmark::Counter(static_cast<double>(bits) * 1e-6,
                                                benchmark::Counter::kIsIterationInvariantRate);
}

// range(0): n, range(1): p in 1e-3, range(2): log2 L.
void ListDecoding(benchmark::State& state) {
  const auto log2 = static_cast<unsigned>(state.range(0));
  const auto log2_list = static_cast<unsigned>(state.range(2));
  const Setup setup =
      make_setup(log2, static_cast<int>(state.range(1)), log2_list, Precoding::state8);
  const ListDecoder decoder(setup.code, kArithmetic, 1U << log2_list, setup.weights.get());
  KeyWords errors(setup.rows.size());
  for (auto _ : state) {
    decoder.decode({setup.lanes, setup.rows, setup.checks.words()}, errors);
    benchmark::ClobberMemory();
  }
  report(state, setup.rows.size() * 64);
}

void TextbookListDecoding(benchmark::State& state) {
  const auto log2 = static_cast<unsigned>(state.range(0));
  const auto log2_list = static_cast<unsigned>(state.range(2));
  const Setup setup =
      make_setup(log2, static_cast<int>(state.range(1)), log2_list, Precoding::none);
  const double p = static_cast<double>(state.range(1)) * 1e-3;
  KeyWords blocks(setup.rows.size());
  lanes_to_blocks(setup.rows, setup.code.block_length(), setup.lanes, blocks);
  BitString difference(setup.code.block_length().bits());
  copy_bits(blocks, 0, difference.words(), 0, difference.size());
  bench::TextbookListDecoder decoder(setup.code.frozen, 1U << log2_list);
  for (auto _ : state) {
    benchmark::DoNotOptimize(decoder.decode(difference, static_cast<float>(std::log((1 - p) / p))));
  }
  report(state, difference.size());
}

void grid(benchmark::internal::Benchmark* benchmark) {
  for (const auto& [n, p] : {std::pair{10, 50},
                             {12, 20},
                             {12, 50},
                             {16, 20},
                             {16, 50},
                             {16, 110},
                             {20, 20},
                             {20, 50},
                             {20, 110}}) {
    for (int log2_list = 1; log2_list <= 5; ++log2_list) benchmark->Args({n, p, log2_list});
  }
}
BENCHMARK(ListDecoding)->Apply(grid);
BENCHMARK(TextbookListDecoding)
    ->Args({12, 50, 3})
    ->Args({12, 50, 5})
    ->Args({16, 50, 3})
    ->Args({16, 50, 5});

}  // namespace
}  // namespace frostline
