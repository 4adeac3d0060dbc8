// Designs a code, makes the two ends' syndromes of strings that differ in one position, and finds
// the position, with nothing but the installed package.
#include <frostline/construct/gaussian.h>
#include <frostline/construct/selection.h>
#include <frostline/decode/reference/successive_cancellation.h>
#include <frostline/polar/syndrome.h>

#include <cstdio>

int main() {
  using namespace frostline;
  const BlockLength block_length(1024);
  const double p = 0.02;
  const Reliability reliability = gaussian_approximation(block_length, p);
  const auto order = freezing_order(reliability);
  const std::size_t frozen_count = smallest_frozen_count(union_sums(reliability, order), 0.01);
  const Code code{freeze_first(order, frozen_count), Precoding::none, 0};
  const SyndromeFormer former(code.frozen, code.precoding);

  BitString sender(1024);
  for (std::size_t i = 0; i < 1024; i += 3) sender.flip(i);
  BitString receiver = sender;
  receiver.flip(517);

  BitString difference = former.syndrome(sender);
  difference ^= former.syndrome(receiver);
  BitString placed(1024);
  former.scatter(difference, 1, placed.words());
  receiver ^= decode_sc(code, Arithmetic::exact(), p, placed).errors;
  if (receiver != sender) return 1;
  std::printf("equal after %zu public bits\n", code.leakage_bits());
  return 0;
}
