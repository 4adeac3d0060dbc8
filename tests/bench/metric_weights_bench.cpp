// How long the metric weights and the never-fork set of a list decoder take, and how many of the
// open indices are left to fork. Pin to one core (taskset -c 0) for figures of one.
#include <benchmark/benchmark.h>

#include <cmath>

#include "construct/density_evolution.h"
#include "construct/metric_weights.h"
#include "construct/selection.h"
#include "polar/limits.h"

namespace frostline {
namespace {

// Arguments: log2 N, p in 1/1000, planes, f in 1/1000. The frozen count is f N h2(p), about what a
// list of 8 with FER 0.1 takes.
void BM_MetricWeights(benchmark::State& state) {
  const BlockLength block_length = BlockLength::from_log2(static_cast<unsigned>(state.range(0)));
  const double p = static_cast<double>(state.range(1)) / 1000;
  const Arithmetic arithmetic = Arithmetic::planes_of(static_cast<unsigned>(state.range(2)));
  const double share = static_cast<double>(state.range(3)) / 1000 * binary_entropy(p);
  const auto frozen_count =
      static_cast<std::size_t>(std::floor(share * static_cast<double>(block_length.bits())));
  const FrozenSet frozen =
      freeze_first(freezing_order(density_evolution(block_length, p, arithmetic)), frozen_count);
  std::size_t never = 0;
  for (auto _ : state) never = metric_weights(frozen, p, arithmetic).never_forks.count();
  const std::size_t open = block_length.bits() - frozen_count;
  state.counters["open"] = static_cast<double>(open);
  state.counters["forking"] = static_cast<double>(open - never);
}
BENCHMARK(BM_MetricWeights)
    ->Args({10, 50, 3, 1248})
    ->Args({12, 50, 3, 1219})
    ->Args({16, 20, 3, 1211})
    ->Args({16, 50, 2, 1148})
    ->Args({16, 50, 3, 1148})
    ->Args({16, 50, 7, 1148})
    ->Args({16, 110, 3, 1095})
    ->Args({20, 20, 3, 1134})
    ->Args({20, 50, 3, 1097})
    ->Args({20, 110, 3, 1068})
    ->Args({24, 20, 3, 1090})
    ->Unit(benchmark::kMillisecond);

}  // namespace
}  // namespace frostline
