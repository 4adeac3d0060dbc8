// How long choosing a frozen set takes.
#include <benchmark/benchmark.h>

#include "construct/bhattacharyya.h"
#include "construct/gaussian.h"
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

}  // namespace
}  // namespace frostline
