// The lane decoder beside the plain scalar reference and memcpy: Gbit/s of key a core.
#include <benchmark/benchmark.h>

#include <algorithm>
#include <cmath>
#include <cstdlib>
#include <cstring>
#include <vector>

#include "construct/designer.h"
#include "decode/exchange/cut.h"
#include "decode/lanes/lane_decoder.h"
#include "decode/reference/successive_cancellation.h"
#include "polar/lanes.h"
#include "polar/random.h"
#include "polar/simd.h"
#include "polar/syndrome.h"
#include "tests/bench/textbook_sc.h"

namespace frostline {
namespace {

// FROSTLINE_SIMD forces a vector set here as it does for the command.
const bool kForced = [] {
  const char* const name = std::getenv("FROSTLINE_SIMD");
  if (name == nullptr || *name == '\0') return false;
  force_simd(name);
  return true;
}();

struct Setup {
  Code code;
  KeyWords difference;
};

// A design for FER bound 0.1 and the difference rows of a batch at its QBER, as N and p in 1e-3.
Setup make_setup(unsigned log2, double p, unsigned lanes) {
  const Arithmetic arithmetic = Arithmetic::planes_of(3);
  const BlockLength block_length = BlockLength::from_log2(log2);
  const Ranking ranking =
      rank_indices(block_length, p, default_construction(arithmetic), 0, arithmetic);
  Setup setup{make_design(ranking, {Goal::Kind::fer, 0.1, 0}, {}, {}).design.code, {}};
  const SyndromeFormer former(setup.code.frozen, Precoding::none);
  setup.difference.resize(words_for(block_length.bits() * lanes));
  RandomStream(1, "lanes bench", log2).bernoulli(p, block_length.bits() * lanes, setup.difference);
  former.to_public_rows(setup.difference, lanes);
  former.scatter(former.gather(setup.difference, lanes), lanes, setup.difference);
  return setup;
}

void report(benchmark::State& state, std::size_t bits) {
  state.counters["Gbit/s"] = benchmark::Counter(static_cast<double>(bits) * 1e-9,
                                                benchmark::Counter::kIsIterationInvariantRate);
}

// range(0): n, range(1): p in 1e-3, range(2): lanes, 0 for the default.
void LaneDecoding(benchmark::State& state) {
  const auto log2 = static_cast<unsigned>(state.range(0));
  const double p = static_cast<double>(state.range(1)) * 1e-3;
  const unsigned lanes = state.range(2) > 0 ? static_cast<unsigned>(state.range(2))
                                            : default_lanes(BlockLength::from_log2(log2));
  const Setup setup = make_setup(log2, p, lanes);
  const LaneDecoder decoder(setup.code, Arithmetic::planes_of(3));
  KeyWords errors(setup.difference.size());
  for (auto _ : state) {
    decoder.decode({lanes, setup.difference, {}}, errors);
    benchmark::ClobberMemory();
  }
  report(state, setup.difference.size() * 64);
}
void grid(benchmark::internal::Benchmark* benchmark) {
  for (const int n : {10, 12, 14, 16, 18, 20, 22, 24}) {
    for (const int p : {10, 20, 50, 110}) benchmark->Args({n, p, 0});
  }
}
BENCHMARK(LaneDecoding)->Apply(grid);
// Other numbers of lanes, single blocks among them.
void lanes_grid(benchmark::internal::Benchmark* benchmark) {
  for (const auto& [n, most] : {std::pair{10, 512},
                                {12, 512},
                                {14, 512},
                                {16, 512},
                                {18, 64},
                                {20, 128},
                                {22, 64},
                                {24, 8}}) {
    for (int lanes = 1; lanes <= most; lanes *= 2) benchmark->Args({n, 20, lanes});
  }
}
BENCHMARK(LaneDecoding)->Apply(lanes_grid);

// The message of the same batch: what the receiver does besides decoding.
void SyndromeOfDesign(benchmark::State& state) {
  const auto log2 = static_cast<unsigned>(state.range(0));
  const unsigned lanes = default_lanes(BlockLength::from_log2(log2));
  const Setup setup = make_setup(log2, 0.02, lanes);
  const SyndromeFormer former(setup.code.frozen, Precoding::none);
  KeyWords rows = setup.difference;
  for (auto _ : state) {
    former.to_public_rows(rows, lanes);
    benchmark::DoNotOptimize(former.gather(rows, lanes));
  }
  report(state, setup.difference.size() * 64);
}
BENCHMARK(SyndromeOfDesign)->Arg(12)->Arg(16)->Arg(20)->Arg(22);

// What the receiver does with a batch: its own syndrome, and the decoding of the difference.
// range(0): n, range(1): p in 1e-3. tests/bench/sc_table prints these beside the next two.
void ReceiverOfDesign(benchmark::State& state) {
  const auto log2 = static_cast<unsigned>(state.range(0));
  const unsigned lanes = default_lanes(BlockLength::from_log2(log2));
  const Setup setup = make_setup(log2, static_cast<double>(state.range(1)) * 1e-3, lanes);
  const LaneDecoder decoder(setup.code, Arithmetic::planes_of(3));
  const SyndromeFormer former(setup.code.frozen, Precoding::none);
  KeyWords rows = setup.difference;
  KeyWords errors(setup.difference.size());
  decoder.decode({lanes, setup.difference, {}}, errors);
  for (auto _ : state) {
    former.to_public_rows(rows, lanes);
    benchmark::DoNotOptimize(former.gather(rows, lanes));
    decoder.decode({lanes, setup.difference, {}}, errors);
    benchmark::ClobberMemory();
  }
  report(state, setup.difference.size() * 64);
  if (kForced) state.SetLabel(simd_in_use());
}
BENCHMARK(ReceiverOfDesign)->Apply(grid);

// Many blocks in turn: one block again and again would teach its decisions to the branch predictor.
void TextbookDecoding(benchmark::State& state) {
  const auto log2 = static_cast<unsigned>(state.range(0));
  const double p = static_cast<double>(state.range(1)) * 1e-3;
  const unsigned lanes = std::clamp(1U << (20 - std::min(log2, 20U)), 1U, 64U);
  const BlockLength block_length = BlockLength::from_log2(log2);
  const Setup setup = make_setup(log2, p, lanes);
  KeyWords blocks(setup.difference.size());
  lanes_to_blocks(setup.difference, block_length, lanes, blocks);
  std::vector<BitString> differences(lanes, BitString(block_length.bits()));
  for (unsigned lane = 0; lane < lanes; ++lane) {
    copy_bits(blocks, block_length.bits() * lane, differences[lane].words(), 0,
              block_length.bits());
  }
  bench::TextbookSc decoder(setup.code.frozen);
  const auto channel_llr = static_cast<float>(std::log((1 - p) / p));
  std::size_t next = 0;
  for (auto _ : state) {
    benchmark::DoNotOptimize(decoder.decode(differences[next], channel_llr).data());
    next = (next + 1) % lanes;
  }
  report(state, block_length.bits());
}
BENCHMARK(TextbookDecoding)->Apply(grid);

// A copy of the same batch.
void CopyOfBatch(benchmark::State& state) {
  const auto log2 = static_cast<unsigned>(state.range(0));
  const std::size_t words =
      words_for((std::size_t{1} << log2) * default_lanes(BlockLength::from_log2(log2)));
  const KeyWords from(words, 1);
  KeyWords to(words, 2);
  for (auto _ : state) {
    std::memcpy(to.data(), from.data(), words * 8);
    benchmark::ClobberMemory();
  }
  report(state, words * 64);
}
BENCHMARK(CopyOfBatch)->DenseRange(10, 24, 2);

// Plain scalar SC on one block, exact (double LLRs) and planes:3.
void ScalarDecoding(benchmark::State& state, const Arithmetic& arithmetic) {
  const auto log2 = static_cast<unsigned>(state.range(0));
  const Setup setup = make_setup(log2, 0.02, 1);
  BitString difference(std::size_t{1} << log2);
  std::copy(setup.difference.begin(), setup.difference.end(), difference.words().begin());
  for (auto _ : state) {
    benchmark::DoNotOptimize(decode_sc(setup.code, arithmetic, 0.02, difference));
  }
  report(state, difference.size());
}
BENCHMARK_CAPTURE(ScalarDecoding, exact, Arithmetic::exact())->Arg(12)->Arg(16)->Arg(20);
BENCHMARK_CAPTURE(ScalarDecoding, planes_3, Arithmetic::planes_of(3))->Arg(12)->Arg(16)->Arg(20);

}  // namespace
}  // namespace frostline
