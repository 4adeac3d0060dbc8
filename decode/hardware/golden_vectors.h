// Golden vectors: cases with all that a decoder in hardware or firmware takes in, and what it must
// give, bit for bit, chosen so that they catch the usual mistakes.
//
// Case 0 has no errors, case 1 errors everywhere. Of the others every other one is drawn until it
// decodes wrongly, at error rates from the design's upwards, and the rest until it is recovered, so
// that wrong paths are compared as well as right ones: at least a third of the cases fail. Without
// a list and precoding the drawing goes on, within limits, until a fault of
// decode/hardware/faults.h shows in the output, each fault in turn. Short or very reliable codes
// may hide one altogether.
#pragma once

#include <cstdint>
#include <vector>

#include "decode/hardware/faults.h"
#include "decode/hardware/message_dump.h"
#include "polar/code.h"
#include "polar/metric_weights.h"

namespace frostline {

constexpr std::uint64_t kLeastGoldenCases = 3;
constexpr std::uint64_t kMostGoldenCases = 65536;

struct GoldenSetup {
  const Code& code;
  Arithmetic arithmetic;                   // planes or integer
  double qber;                             // the design's p
  unsigned list = 1;                       // a power of two from 1 to 128
  const MetricWeights* weights = nullptr;  // of a list in planes
  std::uint64_t seed = 1;
};

struct GoldenCase {
  BitString sender_key;      // x_A, N bits
  BitString receiver_key;    // x_B
  BitString syndrome;        // of x_A: M bits
  std::uint32_t check;       // the check bits of x_A, as check_bits() gives them
  BitString difference;      // N bits: d at frozen indices, 0 at open ones
  BitString errors;          // s = x_A + x_B
  BitString output;          // what the decoder makes of the difference
  BitString decisions;       // output G: u at each index
  bool recovered;            // output is s
  bool check_agrees;         // the check bits of the output are those of s
  std::vector<Fault> shows;  // faults that would change the output
  // With a list: metrics of all surviving paths, best first, and which of them is the output.
  std::vector<double> path_metrics;
  std::size_t chosen = 0;
};

// Cases 0 .. count - 1, the same for the same setup on every machine. progress: called with the
// number of cases done; throws what it throws. Throws InputError when no pattern can be found that
// this code fails on, std::invalid_argument on a count or setup out of range.
template <typename Progress>
std::vector<GoldenCase> golden_cases(const GoldenSetup& setup, std::uint64_t count,
                                     const Progress& progress);

namespace internal {

// Draws one case. must_fail: of no account for the patterns of cases 0 and 1.
GoldenCase golden_case(const GoldenSetup& setup, std::uint64_t number, bool must_fail);
void require_golden_setup(const GoldenSetup& setup, std::uint64_t count);

}  // namespace internal

template <typename Progress>
std::vector<GoldenCase> golden_cases(const GoldenSetup& setup, std::uint64_t count,
                                     const Progress& progress) {
  internal::require_golden_setup(setup, count);
  const std::uint64_t least_failures = (count + 2) / 3;
  std::uint64_t failures = 0;
  std::vector<GoldenCase> cases;
  for (std::uint64_t number = 0; number < count; ++number) {
    const bool must_fail = number % 2 == 1 || least_failures - failures >= count - number;
    cases.push_back(internal::golden_case(setup, number, must_fail));
    if (!cases.back().recovered && failures < least_failures) ++failures;
    progress(number + 1);
  }
  return cases;
}

}  // namespace frostline
