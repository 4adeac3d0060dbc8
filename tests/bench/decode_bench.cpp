// The reference SC decoder in each arithmetic, check bits, precoding, and the counts behind the
// QBER estimate. Counter key_bits: key bits a second on one core.
#include <benchmark/benchmark.h>

#include <cstdint>

#include "decode/exchange/qber_estimate.h"
#include "decode/reference/successive_cancellation.h"
#include "polar/check_bits.h"
#include "polar/random.h"
#include "polar/syndrome.h"
#include "tests/support/polarized_frozen_set.h"

namespace frostline {
namespace {

constexpr double kQber = 0.02;

// A code for QBER 2 % with M = 1.4 N h2(p), the efficiency of a good code at N = 2^16.
Code bench_code(BlockLength length, Precoding precoding) {
  return {testing::polarized_frozen_set(length, testing::bsc_bhattacharyya(kQber),
                                        length.bits() * 198 / 1000),
          precoding, 0};
}

BitString difference_rows(const Code& code, unsigned lanes) {
  BitString rows(code.block_length().bits() * lanes);
  RandomStream(1, "bench", 0).bernoulli(kQber, rows.size(), rows.words());
  SyndromeFormer(code.frozen, code.precoding).to_public_rows(rows.words(), lanes);
  return rows;
}

void count_key_bits(benchmark::State& state, std::size_t bits) {
  state.counters["key_bits"] =
      benchmark::Counter(static_cast<double>(bits), benchmark::Counter::kIsIterationInvariantRate);
}

void reference_sc(benchmark::State& state, const Arithmetic& arithmetic) {
  const auto length = BlockLength::from_log2(static_cast<unsigned>(state.range(0)));
  const Code code = bench_code(length, Precoding::state8);
  const BitString difference = difference_rows(code, 1);
  for (auto _ : state) {
    benchmark::DoNotOptimize(decode_sc(code, arithmetic, kQber, difference));
  }
  count_key_bits(state, length.bits());
}
BENCHMARK_CAPTURE(reference_sc, exact, Arithmetic::exact())->Arg(10)->Arg(12)->Arg(16);
BENCHMARK_CAPTURE(reference_sc, planes_3, Arithmetic::planes_of(3))->Arg(10)->Arg(12)->Arg(16);
BENCHMARK_CAPTURE(reference_sc, integer_6_8, Arithmetic::integer_of(6, 8))
    ->Arg(10)
    ->Arg(12)
    ->Arg(16);

void crc_of_blocks(benchmark::State& state) {
  const auto width = static_cast<unsigned>(state.range(0));
  BitString block(65536);
  RandomStream(1, "bench", 0).bernoulli(0.5, block.size(), block.words());
  for (auto _ : state) benchmark::DoNotOptimize(check_bits(block, width));
  count_key_bits(state, block.size());
}
BENCHMARK(crc_of_blocks)->Arg(6)->Arg(11)->Arg(24);

void precoding_of_batch(benchmark::State& state) {
  const auto length = BlockLength::from_log2(static_cast<unsigned>(state.range(0)));
  const auto lanes = static_cast<unsigned>(state.range(1));
  const Code code = bench_code(length, Precoding::state8);
  const PrecodingSchedule schedule(code.frozen, code.precoding);
  BitString rows = difference_rows(code, lanes);
  for (auto _ : state) {
    apply_precoding(schedule, lanes, rows.words());
    benchmark::ClobberMemory();
  }
  count_key_bits(state, rows.size());
}
BENCHMARK(precoding_of_batch)->Args({10, 512})->Args({16, 64})->Args({20, 16})->Args({16, 1});

void difference_counts(benchmark::State& state) {
  const auto length = BlockLength::from_log2(static_cast<unsigned>(state.range(0)));
  const auto lanes = static_cast<unsigned>(state.range(1));
  const Code code = bench_code(length, Precoding::state8);
  const DifferenceCounter counter(code.frozen, code.precoding);
  const BitString rows = difference_rows(code, lanes);
  for (auto _ : state) benchmark::DoNotOptimize(counter.count(rows.words(), lanes));
  count_key_bits(state, rows.size());
}
BENCHMARK(difference_counts)->Args({10, 512})->Args({16, 64})->Args({20, 16})->Args({16, 1});

void qber_from_counts(benchmark::State& state) {
  const auto length = BlockLength::from_log2(static_cast<unsigned>(state.range(0)));
  const Code code = bench_code(length, Precoding::state8);
  const DifferenceCounter counter(code.frozen, code.precoding);
  const BitString rows = difference_rows(code, 8);
  const DifferenceCounts counts = counter.count(rows.words(), 8);
  for (auto _ : state) benchmark::DoNotOptimize(estimate_qber(counter, counts));
}
BENCHMARK(qber_from_counts)->Arg(12)->Arg(16)->Arg(20)->Unit(benchmark::kMillisecond);

}  // namespace
}  // namespace frostline
