// Orders of indices against 3GPP TS 38.212 (ETSI TS 138 212).
#include "construct/orders.h"

#include <gtest/gtest.h>

#include <algorithm>
#include <set>
#include <string>

#include "construct/selection.h"
#include "polar/digest.h"
#include "polar/error.h"

namespace frostline {
namespace {

// Table 5.3.1.2-1: digest of its 1024 numbers joined by commas.
TEST(NrSequence, IsTheTableOfTheStandard) {
  std::string text;
  for (const std::uint16_t index : kNrSequence) {
    if (!text.empty()) text += ',';
    text += std::to_string(index);
  }
  EXPECT_EQ(to_hex(sha256(text)),
            "fbd7522273e81607ccc6eeaf2feb768ba13d4a14c46cf19bf1275e0714cee3f1");
}

// Clause 5.3.1.2: shorter blocks use the entries below N in the order of the table; read off there.
TEST(NrSequence, ServesShorterBlocksByItsSmallEntries) {
  const std::vector<std::uint32_t> shortest{0,  1,  2,  4,  8,  16, 3,  5,  9,  6,  17,
                                            10, 18, 12, 20, 24, 7,  11, 19, 13, 14, 21,
                                            26, 25, 22, 28, 15, 23, 27, 29, 30, 31};
  EXPECT_EQ(freezing_order(nr_sequence_order(BlockLength(32))), shortest);
  const auto order = freezing_order(nr_sequence_order(BlockLength(256)));
  const std::vector<std::uint32_t> best{243, 238, 245, 127, 191, 246, 249, 250,
                                        252, 223, 239, 251, 247, 253, 254, 255};
  EXPECT_EQ(std::vector<std::uint32_t>(order.end() - 16, order.end()), best);
  EXPECT_THROW(nr_sequence_order(BlockLength(2048)), InputError);
}

void expect_bit_subsets_first(const std::vector<std::uint32_t>& order) {
  std::vector<std::size_t> rank(order.size());
  for (std::size_t m = 0; m < order.size(); ++m) rank[order[m]] = m;
  for (std::uint32_t i = 0; i < order.size(); ++i) {
    for (std::uint32_t bit = 1; bit < order.size(); bit *= 2) {
      if ((i & bit) == 0) {
        EXPECT_LT(rank[i], rank[i | bit]) << i << " " << bit;
      }
    }
  }
}

// An index whose ones include another's is more reliable on every channel (R. Mori and T. Tanaka,
// IEEE Commun. Lett. 13(7), 2009).
TEST(Orders, FreezeBitSubsetsFirst) {
  expect_bit_subsets_first(freezing_order(nr_sequence_order(BlockLength(1024))));
  expect_bit_subsets_first(freezing_order(polarization_weight_order(BlockLength(4096))));
}

// Agreement of the 512 best at N = 1024: computed independently.
TEST(PolarizationWeight, AgreesWithTheNrSequenceIn507Of512) {
  const auto nr = freezing_order(nr_sequence_order(BlockLength(1024)));
  const auto weight = freezing_order(polarization_weight_order(BlockLength(1024)));
  const std::set<std::uint32_t> best(nr.begin() + 512, nr.end());
  const auto common = std::count_if(weight.begin() + 512, weight.end(),
                                    [&](std::uint32_t index) { return best.count(index) != 0; });
  EXPECT_EQ(common, 507);
}

// He et al., GLOBECOM 2017 (from memory): index 3 weighs 1 + 2^(1/4) = 2.189, index 4 2^(1/2) =
// 1.414, index 5 2.414, index 6 2.603.
TEST(PolarizationWeight, OrdersByTheSumOfPowers) {
  const auto order = freezing_order(polarization_weight_order(BlockLength(8)));
  EXPECT_EQ(order, (std::vector<std::uint32_t>{0, 1, 2, 4, 3, 5, 6, 7}));
  EXPECT_EQ(polarization_weight_order(BlockLength(8)).kind, ReliabilityKind::order_only);
  EXPECT_EQ(nr_sequence_order(BlockLength(8)).kind, ReliabilityKind::order_only);
}

}  // namespace
}  // namespace frostline
