// The ledger: what leaked, by kind, and what it means for the key.
#include "decode/exchange/ledger.h"

#include <gtest/gtest.h>

#include <cmath>

#include "polar/tag.h"
#include "tests/support/random_bits.h"

namespace frostline {
namespace {

Code code_of(std::size_t frozen_count, unsigned check_bits) {
  return {testing::weight_frozen_set(BlockLength(1024), frozen_count), Precoding::none, check_bits};
}

TEST(Ledger, CountsEveryPublicBitOnce) {
  // 10 blocks of 300 + 11 public bits, 7 of them kept; 3 groups, 2 of them kept.
  const Ledger ledger = book_leakage(code_of(300, 11), 10, 7, 3, 2);
  EXPECT_EQ(ledger.disclosed.syndrome, 3000U);
  EXPECT_EQ(ledger.disclosed.check, 110U);
  EXPECT_EQ(ledger.disclosed.tag, 384U);
  EXPECT_EQ(ledger.disclosed.accept, 10U);
  EXPECT_EQ(ledger.disclosed.total(), 3504U);
  EXPECT_EQ(ledger.accepted.syndrome, 2100U);
  EXPECT_EQ(ledger.accepted.check, 77U);
  EXPECT_EQ(ledger.accepted.tag, 256U);
  EXPECT_EQ(ledger.accepted.accept, 7U);
  EXPECT_EQ(ledger.accepted.total(), 2440U);
}

TEST(Ledger, HoldsNothingOfAKeyThatIsGone) {
  const Ledger ledger = book_leakage(code_of(300, 11), 10, 0, 0, 0);
  EXPECT_EQ(ledger.accepted.total(), 0U);
  EXPECT_EQ(ledger.disclosed.total(), 3120U);
}

TEST(Ledger, TotalAddsEveryKind) {
  LeakedBits bits;
  bits.syndrome = 1;
  bits.check = 20;
  bits.tag = 300;
  bits.revealed = 4000;
  bits.accept = 50000;
  EXPECT_EQ(bits.total(), 54321U);
}

TEST(Ledger, EfficiencyIsWhatWasSaidOverWhatHadToBeSaid) {
  // h2(0.11) = 0.499916 (value from memory, one bit for two to four digits): half a bit a bit.
  const Ledger ledger = book_leakage(code_of(512, 0), 4, 4, 0, 0);
  EXPECT_NEAR(efficiency(ledger.accepted, 4096, 0.11), 2048 / (4096 * 0.499916), 1e-5);
  // Accept bits stay apart; tags count.
  LeakedBits bits;
  bits.tag = 128;
  bits.accept = 1000;
  EXPECT_NEAR(efficiency(bits, 1024, 0.11), 128 / (1024 * 0.499916), 1e-5);
  EXPECT_EQ(efficiency(bits, 0, 0.11), 0.0);
  EXPECT_EQ(efficiency(bits, 1024, 0), 0.0);
}

TEST(Ledger, NetKeyPaysForFailedBlocksInTwoWays) {
  // Worked by hand with h2(1/2) = 1 and h2(0) = 0.
  const NetKey free_phase = net_key(0.25, 0.5, 0);
  EXPECT_DOUBLE_EQ(free_phase.plain, 0.375);
  EXPECT_DOUBLE_EQ(free_phase.conservative, 0.375);
  const NetKey no_phase = net_key(0.25, 0.5, 0.5);
  EXPECT_DOUBLE_EQ(no_phase.plain, 0.75 * -0.5);
  EXPECT_DOUBLE_EQ(no_phase.conservative, 0.375 - 1);
  // Where blocks fail, the conservative figure is the smaller one by FER h2(e_phase).
  const NetKey both = net_key(0.1, 0.2, 0.11);
  EXPECT_NEAR(both.plain - both.conservative, 0.1 * 0.499916, 1e-6);
}

}  // namespace
}  // namespace frostline
