#include "decode/hardware/golden_vectors.h"

#include <algorithm>
#include <cmath>
#include <optional>
#include <stdexcept>

#include "decode/reference/list_decoder.h"
#include "decode/reference/successive_cancellation.h"
#include "polar/check_bits.h"
#include "polar/error.h"
#include "polar/random.h"
#include "polar/syndrome.h"
#include "polar/transform.h"

namespace frostline::internal {
namespace {

// Patterns that are drawn for one case at most; on long blocks fewer.
constexpr std::uint64_t kMostAttempts = 512;
constexpr std::uint64_t kLeastAttempts = 32;
constexpr std::uint64_t kAttemptedBits = std::uint64_t{1} << 18;
// Error rates over the design's that the attempts take in turn. Those of cases that are to fail
// grow from round to round.
constexpr double kFailingRates[] = {1, 1.5, 2, 3};
constexpr double kFailingGrowth = 1.25;
constexpr double kRecoveredRates[] = {1, 1.25, 0.75, 0.5};

std::uint64_t attempts_for(std::uint64_t bits) {
  return std::min(kMostAttempts, std::max(kLeastAttempts, kAttemptedBits / bits));
}

// Streams of one case do not meet those of the next.
std::uint64_t stream_of(std::uint64_t number, std::uint64_t attempt) {
  return number * kMostAttempts + attempt;
}

BitString random_bits(const GoldenSetup& setup, const char* purpose, std::uint64_t stream,
                      double p) {
  BitString bits(setup.code.block_length().bits());
  RandomStream(setup.seed, purpose, stream).bernoulli(p, bits.size(), bits.words());
  return bits;
}

// What the decoder makes of an error pattern.
GoldenCase decoded(const GoldenSetup& setup, const BitString& errors) {
  const Code& code = setup.code;
  const SyndromeFormer former(code.frozen, code.precoding);
  GoldenCase golden;
  golden.errors = errors;
  golden.difference = BitString(errors.size());
  former.scatter(former.syndrome(errors), 1, golden.difference.words());
  const std::uint32_t check = check_bits(errors, code.check_bits);
  if (setup.list > 1) {
    const ListDecision decision = decode_list(code, setup.arithmetic, setup.qber, setup.list,
                                              setup.weights, golden.difference, check);
    golden.output = decision.errors();
    golden.decisions = polar_transform(golden.output);
    golden.chosen = decision.chosen;
    for (const ListPath& path : decision.paths) golden.path_metrics.push_back(path.metric);
  } else {
    ScDecision decision = decode_sc(code, setup.arithmetic, setup.qber, golden.difference);
    golden.output = std::move(decision.errors);
    golden.decisions = std::move(decision.u);
  }
  golden.recovered = golden.output == errors;
  golden.check_agrees = check_bits(golden.output, code.check_bits) == check;
  return golden;
}

double failing_rate(double p, std::uint64_t attempt) {
  return std::min(0.5, p * kFailingRates[attempt % 4] *
                           std::pow(kFailingGrowth, static_cast<double>(attempt / 4)));
}

double recovered_rate(double p, std::uint64_t attempt) { return p * kRecoveredRates[attempt % 4]; }

// Which faults would change the output of a case.
std::vector<Fault> shown_faults(const GoldenSetup& setup, const GoldenCase& golden) {
  std::vector<Fault> shown;
  if (setup.list > 1 || setup.code.precoding != Precoding::none) return shown;
  for (const Fault fault : possible_faults(setup.arithmetic)) {
    if (decode_with_fault(setup.code.frozen, setup.arithmetic, fault, golden.difference) !=
        golden.output) {
      shown.push_back(fault);
    }
  }
  return shown;
}

// Draws error patterns until the outcome is as asked and the fault whose turn it is shows; where no
// pattern shows it, the first with that outcome.
std::optional<GoldenCase> drawn_case(const GoldenSetup& setup, std::uint64_t number,
                                     bool must_fail) {
  const std::vector<Fault> faults = possible_faults(setup.arithmetic);
  const Fault wanted = faults[number / 2 % faults.size()];
  const bool searches = setup.list == 1 && setup.code.precoding == Precoding::none;
  std::optional<GoldenCase> first;
  const std::uint64_t attempts = attempts_for(setup.code.block_length().bits());
  for (std::uint64_t attempt = 0; attempt < attempts; ++attempt) {
    const double rate =
        must_fail ? failing_rate(setup.qber, attempt) : recovered_rate(setup.qber, attempt);
    const BitString errors = random_bits(setup, "vectors errors", stream_of(number, attempt), rate);
    if (errors.count() == 0) continue;
    GoldenCase golden = decoded(setup, errors);
    if (golden.recovered == must_fail) continue;
    golden.shows = shown_faults(setup, golden);
    const bool shows =
        std::find(golden.shows.begin(), golden.shows.end(), wanted) != golden.shows.end();
    if (shows || !searches) return golden;
    if (!first) first = std::move(golden);
  }
  return first;
}

GoldenCase failing_case(const GoldenSetup& setup, std::uint64_t number) {
  if (auto golden = drawn_case(setup, number, true)) return *std::move(golden);
  throw InputError("case " + std::to_string(number) + ": no error pattern was found that this " +
                   "design fails on (" + std::to_string(setup.code.frozen.frozen_count()) + " of " +
                   std::to_string(setup.code.block_length().bits()) + " indices are frozen)");
}

GoldenCase recovered_case(const GoldenSetup& setup, std::uint64_t number) {
  if (auto golden = drawn_case(setup, number, false)) return *std::move(golden);
  // Codes that correct next to nothing; no errors are always recovered.
  return decoded(setup, BitString(setup.code.block_length().bits()));
}

BitString all_ones(std::size_t bits) {
  BitString ones(bits);
  for (std::size_t i = 0; i < bits; ++i) ones.set(i, true);
  return ones;
}

}  // namespace

void require_golden_setup(const GoldenSetup& setup, std::uint64_t count) {
  if (count < kLeastGoldenCases || count > kMostGoldenCases) {
    throw std::invalid_argument("number of golden cases out of range");
  }
  if (setup.arithmetic.kind == Arithmetic::Kind::exact) {
    throw std::invalid_argument("golden vectors of exact arithmetic");
  }
  // SC needs no weights.
  if (setup.list != 1) {
    require_list_arguments(setup.code, setup.arithmetic, setup.list, setup.weights);
  }
}

GoldenCase golden_case(const GoldenSetup& setup, std::uint64_t number, bool must_fail) {
  const std::size_t length = setup.code.block_length().bits();
  GoldenCase golden = number == 0   ? decoded(setup, BitString(length))
                      : number == 1 ? decoded(setup, all_ones(length))
                      : must_fail   ? failing_case(setup, number)
                                    : recovered_case(setup, number);
  if (number < 2) golden.shows = shown_faults(setup, golden);
  golden.sender_key = random_bits(setup, "vectors key", number, 0.5);
  golden.receiver_key = golden.sender_key;
  golden.receiver_key ^= golden.errors;
  const SyndromeFormer former(setup.code.frozen, setup.code.precoding);
  golden.syndrome = former.syndrome(golden.sender_key);
  golden.check = check_bits(golden.sender_key, setup.code.check_bits);
  return golden;
}

}  // namespace frostline::internal
