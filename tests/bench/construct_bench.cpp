// How long choosing a frozen set takes. Wall clock; constructions that can use several threads do,
// so pin the program to one core (taskset -c 0) for figures of one.
#include <benchmark/benchmark.h>

#include "construct/bhattacharyya.h"
#include "construct/degrading_merge.h"
#include "construct/density_evolution.h"
#include "construct/gaussian.h"
#include "construct/orders.h"
#include "construct/selection.h"
#include "polar/limits.h"

namespace frostline {
namespace {

BlockLength block_length_of(const benchmark::State& state) {
  return BlockLength::from_log2(static_cast<unsigned>(state.range(0)));
}

void BM_FiniteLengthLimit(benchmark::State& state) {
  const std::uint64_t length = std::uint64_t{1} << state.range(0);
  for (auto _ : state) benchmark::DoNotOptimize(finite_length_limit(length, 0.02, 1e-3));
}
BENCHMARK(BM_FiniteLengthLimit)->Arg(10)->Arg(16)->Arg(20)->Arg(24)->Arg(32);

void BM_Bhattacharyya(benchmark::State& state) {
  for (auto _ : state) {
    benchmark::DoNotOptimize(bhattacharyya_bound(block_length_of(state), 0.02));
  }
}
BENCHMARK(BM_Bhattacharyya)->Arg(16)->Arg(20)->Unit(benchmark::kMillisecond);

void BM_Gaussian(benchmark::State& state) {
  for (auto _ : state) {
    benchmark::DoNotOptimize(gaussian_approximation(block_length_of(state), 0.02));
  }
}
BENCHMARK(BM_Gaussian)->Arg(16)->Arg(20)->Arg(24)->Unit(benchmark::kMillisecond);

void BM_FreezingOrder(benchmark::State& state) {
  const Reliability reliability = gaussian_approximation(block_length_of(state), 0.02);
  for (auto _ : state) benchmark::DoNotOptimize(freezing_order(reliability));
}
BENCHMARK(BM_FreezingOrder)->Arg(16)->Arg(20)->Arg(24)->Unit(benchmark::kMillisecond);

// Arguments: log2 N, planes. The counter is what SC at QBER 2 % and a FER bound of 0.1 leaks.
void BM_DensityEvolutionPlanes(benchmark::State& state) {
  const auto planes = static_cast<unsigned>(state.range(1));
  const BlockLength block_length = block_length_of(state);
  Reliability reliability;
  for (auto _ : state) {
    reliability = density_evolution(block_length, 0.02, Arithmetic::planes_of(planes));
  }
  const auto sums = union_sums(reliability, freezing_order(reliability));
  state.counters["syndrome_efficiency"] =
      static_cast<double>(smallest_frozen_count(sums, 0.1)) /
      (static_cast<double>(block_length.bits()) * binary_entropy(0.02));
}
BENCHMARK(BM_DensityEvolutionPlanes)
    ->Args({16, 2})
    ->Args({16, 3})
    ->Args({16, 4})
    ->Args({16, 7})
    ->Args({20, 3})
    ->Args({24, 3})
    ->Unit(benchmark::kMillisecond);

// Arguments: log2 N, Q, A.
void BM_DensityEvolutionInteger(benchmark::State& state) {
  const Arithmetic arithmetic = Arithmetic::integer_of(static_cast<unsigned>(state.range(1)),
                                                       static_cast<unsigned>(state.range(2)));
  for (auto _ : state) {
    benchmark::DoNotOptimize(density_evolution(block_length_of(state), 0.02, arithmetic));
  }
}
BENCHMARK(BM_DensityEvolutionInteger)
    ->Args({10, 6, 8})
    ->Args({16, 6, 8})
    ->Args({10, 8, 5})
    ->Unit(benchmark::kMillisecond);

// Table I of I. Tal and A. Vardy, IEEE Trans. IT 59(10), 2013: BSC(0.11), N = 2^20, the counter is
// the sum over the best 445340. Argument: mu. See tal_vardy_table.txt.
void tal_vardy_table(benchmark::State& state, Merging merging) {
  const auto letters = static_cast<unsigned>(state.range(0));
  Reliability reliability;
  for (auto _ : state) {
    reliability = degrading_merge(BlockLength::from_log2(20), 0.11, letters, merging);
  }
  const auto sums = union_sums(reliability, freezing_order(reliability));
  state.counters["sum_times_1e9"] = sums[sums.size() - 1 - 445340] * 1e9;
}
void BM_TalVardyTableGreedy(benchmark::State& state) { tal_vardy_table(state, Merging::greedy); }
void BM_TalVardyTableQuick(benchmark::State& state) { tal_vardy_table(state, Merging::quick); }
BENCHMARK(BM_TalVardyTableGreedy)
    ->Arg(8)
    ->Arg(16)
    ->Arg(64)
    ->Unit(benchmark::kSecond)
    ->Iterations(1)
    ->UseRealTime();
BENCHMARK(BM_TalVardyTableQuick)
    ->Arg(8)
    ->Arg(16)
    ->Arg(64)
    ->Unit(benchmark::kSecond)
    ->Iterations(1)
    ->UseRealTime();

void BM_UpgradingMerge(benchmark::State& state) {
  for (auto _ : state) {
    benchmark::DoNotOptimize(upgrading_merge(block_length_of(state), 0.02, 16));
  }
}
BENCHMARK(BM_UpgradingMerge)->Arg(16)->Unit(benchmark::kMillisecond);

void BM_PolarizationWeight(benchmark::State& state) {
  for (auto _ : state) {
    benchmark::DoNotOptimize(polarization_weight_order(block_length_of(state)));
  }
}
BENCHMARK(BM_PolarizationWeight)->Arg(20)->Unit(benchmark::kMillisecond);

}  // namespace
}  // namespace frostline
