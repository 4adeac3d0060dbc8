// Transform, transposition and syndrome, beside memcpy of the same bytes in the same run.
#include <benchmark/benchmark.h>

#include <chrono>
#include <cstring>

#include "polar/lanes.h"
#include "polar/random.h"
#include "polar/syndrome.h"
#include "polar/transform.h"

namespace frostline {
namespace {

KeyWords random_words(std::size_t bits) {
  KeyWords words(words_for(bits));
  RandomStream(1, "bench", 0).bernoulli(0.5, bits, words);
  return words;
}

void report(benchmark::State& state, std::size_t bits) {
  state.SetBytesProcessed(state.iterations() * static_cast<std::int64_t>(bits / 8));
}

// The yardstick: range(0) is log2 of the number of bits.
void Memcpy(benchmark::State& state) {
  const std::size_t bits = std::size_t{1} << state.range(0);
  const KeyWords from = random_words(bits);
  KeyWords to(from.size());
  for (auto _ : state) {
    std::memcpy(to.data(), from.data(), bits / 8);
    benchmark::DoNotOptimize(to.data());
    benchmark::ClobberMemory();
  }
  report(state, bits);
}
BENCHMARK(Memcpy)->Arg(16)->Arg(20)->Arg(24);

// range(0): n, range(1): lanes.
void Transform(benchmark::State& state) {
  const BlockLength block_length = BlockLength::from_log2(static_cast<unsigned>(state.range(0)));
  const auto lanes = static_cast<unsigned>(state.range(1));
  KeyWords rows = random_words(block_length.bits() * lanes);
  for (auto _ : state) {
    polar_transform(rows, block_length, lanes);
    benchmark::ClobberMemory();
  }
  report(state, block_length.bits() * lanes);
}
BENCHMARK(Transform)->Args({16, 1})->Args({20, 1})->Args({24, 1})->Args({10, 512})->Args({16, 64});

// Transform and memcpy of the same bytes turn about in one run; the counter times_memcpy tells how
// many times longer the transform takes.
void TransformBesideMemcpy(benchmark::State& state) {
  using Clock = std::chrono::steady_clock;
  const BlockLength block_length = BlockLength::from_log2(static_cast<unsigned>(state.range(0)));
  KeyWords rows = random_words(block_length.bits());
  KeyWords copy(rows.size());
  Clock::duration transforming{};
  Clock::duration copying{};
  for (auto _ : state) {
    const auto begin = Clock::now();
    polar_transform(rows, block_length, 1);
    benchmark::ClobberMemory();
    const auto between = Clock::now();
    std::memcpy(copy.data(), rows.data(), rows.size() * 8);
    benchmark::ClobberMemory();
    transforming += between - begin;
    copying += Clock::now() - between;
  }
  state.counters["times_memcpy"] =
      static_cast<double>(transforming.count()) / static_cast<double>(copying.count());
}
BENCHMARK(TransformBesideMemcpy)->Arg(16)->Arg(20)->Arg(24);

void LanesToBlocks(benchmark::State& state) {
  const BlockLength block_length = BlockLength::from_log2(static_cast<unsigned>(state.range(0)));
  const auto lanes = static_cast<unsigned>(state.range(1));
  const KeyWords rows = random_words(block_length.bits() * lanes);
  KeyWords blocks(rows.size());
  for (auto _ : state) {
    lanes_to_blocks(rows, block_length, lanes, blocks);
    benchmark::ClobberMemory();
  }
  report(state, block_length.bits() * lanes);
}
BENCHMARK(LanesToBlocks)->Args({12, 512})->Args({16, 64})->Args({20, 16});

// Transform, precoding and gathering of a batch; every fourth index frozen stands for a design.
void SyndromeOfBatch(benchmark::State& state) {
  const BlockLength block_length = BlockLength::from_log2(static_cast<unsigned>(state.range(0)));
  const auto lanes = static_cast<unsigned>(state.range(1));
  BitString mask(block_length.bits());
  for (std::size_t i = 0; i < mask.size() / 4; ++i) mask.flip(i);
  const SyndromeFormer former(FrozenSet(block_length, mask), Precoding::state8);
  const KeyWords rows = random_words(block_length.bits() * lanes);
  KeyWords work(rows.size());
  for (auto _ : state) {
    std::memcpy(work.data(), rows.data(), rows.size() * 8);
    former.to_public_rows(work, lanes);
    benchmark::DoNotOptimize(former.gather(work, lanes));
  }
  report(state, block_length.bits() * lanes);
}
BENCHMARK(SyndromeOfBatch)->Args({12, 512})->Args({16, 64})->Args({20, 16});

}  // namespace
}  // namespace frostline
