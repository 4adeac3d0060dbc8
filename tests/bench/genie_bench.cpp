// How fast a genie-aided trial runs. Wall clock; pin to one core (taskset -c 0) for figures of one.
#include <benchmark/benchmark.h>

#include "decode/trial/genie.h"

namespace frostline {
namespace {

// Argument: log2 N. Bits are key bits.
void genie_trial(benchmark::State& state, const Arithmetic& arithmetic) {
  const BlockLength block_length = BlockLength::from_log2(static_cast<unsigned>(state.range(0)));
  const std::uint64_t blocks = (std::uint64_t{1} << 21) / block_length.bits();
  for (auto _ : state) {
    benchmark::DoNotOptimize(run_genie_trial({block_length, 0.05, arithmetic, blocks, 1}));
  }
  state.counters["Mbit/s"] = benchmark::Counter(
      static_cast<double>(state.iterations() * blocks * block_length.bits()) / 1e6,
      benchmark::Counter::kIsRate);
  state.counters["blocks/s"] = benchmark::Counter(static_cast<double>(state.iterations() * blocks),
                                                  benchmark::Counter::kIsRate);
}
void BM_GenieTrialPlanes(benchmark::State& state) { genie_trial(state, Arithmetic::planes_of(3)); }
void BM_GenieTrialInteger(benchmark::State& state) {
  genie_trial(state, Arithmetic::integer_of(6, 8));
}
void BM_GenieTrialExact(benchmark::State& state) { genie_trial(state, Arithmetic::exact()); }
BENCHMARK(BM_GenieTrialPlanes)
    ->Arg(10)
    ->Arg(16)
    ->Arg(20)
    ->Unit(benchmark::kMillisecond)
    ->UseRealTime();
BENCHMARK(BM_GenieTrialInteger)->Arg(10)->Arg(16)->Unit(benchmark::kMillisecond)->UseRealTime();
BENCHMARK(BM_GenieTrialExact)->Arg(10)->Arg(16)->Unit(benchmark::kMillisecond)->UseRealTime();

}  // namespace
}  // namespace frostline
