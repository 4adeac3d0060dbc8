#include "construct/list_estimate.h"

#include <gtest/gtest.h>

#include <cmath>
#include <fstream>
#include <sstream>
#include <stdexcept>
#include <string>

#include "construct/designer.h"
#include "construct/selection.h"
#include "polar/error.h"

namespace frostline {
namespace {

const Arithmetic kPlanes = Arithmetic::planes_of(3);

Ranking ranking_of(std::size_t bits, double p, const Arithmetic& arithmetic = kPlanes) {
  return rank_indices(BlockLength(bits), p, default_construction(arithmetic), 0, arithmetic);
}

ListSetting setting_of(std::size_t bits, double p, unsigned list) {
  return {BlockLength(bits), p, list, Precoding::state8, kPlanes};
}

CodeOptions with_list(unsigned list) { return {16, Precoding::state8, false, list}; }

TEST(ListEstimate, SavesMoreWithLongerListsAndLessWithLongerBlocks) {
  for (const double p : {0.01, 0.02, 0.05, 0.11, 0.2}) {
    for (const double fer : {0.5, 0.1, 0.01, 1e-4}) {
      for (unsigned log2 = 3; log2 <= 24; ++log2) {
        const std::size_t bits = std::size_t{1} << log2;
        EXPECT_EQ(list_saving(setting_of(bits, p, 1), fer), 0);
        double last = 0;
        for (unsigned list = 2; list <= 128; list *= 2) {
          const double saving = list_saving(setting_of(bits, p, list), fer);
          EXPECT_GT(saving, last) << "N 2^" << log2 << " p " << p << " L " << list;
          EXPECT_LT(saving, 0.9);
          if (log2 < 24 && fer == 0.1) {
            EXPECT_GE(saving, list_saving(setting_of(2 * bits, p, list), fer));
          }
          last = saving;
        }
      }
    }
  }
}

// tests/bench/list_efficiency.txt has what was measured; the command is at the top of the script of
// that name.
TEST(ListEstimate, IsWhatWasMeasured) {
  std::ifstream file(std::string(FROSTLINE_SOURCE_DIR) + "/tests/bench/list_efficiency.txt");
  std::string line;
  ASSERT_TRUE(std::getline(file, line));
  int compared = 0;
  while (std::getline(file, line)) {
    std::istringstream fields(line);
    std::size_t bits = 0;
    double p = 0;
    unsigned list = 0;
    std::string precoding;
    std::string decoder;
    double fer = 0;
    std::string skipped;
    double saving = 0;
    fields >> bits >> p >> list >> precoding >> decoder >> fer;
    for (int k = 0; k < 7; ++k) fields >> skipped;
    ASSERT_TRUE(fields >> saving) << line;
    ASSERT_EQ(precoding, "state8");
    // The table is for FER 0.1; the change with the FER is a mean over lists. Beyond 2^16 not every
    // row of the table is from here.
    const double allowed = fer != 0.1 ? 0.02 : bits > 65536 ? 0.01 : 1e-4;
    EXPECT_NEAR(list_saving(setting_of(bits, p, list), fer), saving, allowed) << line;
    ++compared;
  }
  EXPECT_GT(compared, 60);
}

TEST(ListEstimate, SavesLessWithoutPrecoding) {
  ListSetting setting = setting_of(4096, 0.05, 8);
  const double precoded = list_saving(setting, 0.1);
  setting.precoding = Precoding::none;
  EXPECT_LT(list_saving(setting, 0.1), precoded);
  EXPECT_GT(list_saving(setting, 0.1), 0.5 * precoded);
}

TEST(ListEstimate, OfListOneIsTheUnionBound) {
  const Ranking ranking = ranking_of(256, 0.05);
  const std::vector<double> estimates = list_fer_estimates(setting_of(256, 0.05, 1), ranking.sums);
  for (std::size_t m = 0; m <= 256; ++m) EXPECT_EQ(estimates[m], std::min(1.0, ranking.sums[m]));
}

TEST(ListEstimate, TurnsSavingsIntoFailureRatesThatNeverRise) {
  for (const std::size_t bits : {64, 1024, 65536}) {
    const Ranking ranking = ranking_of(bits, 0.05);
    for (const unsigned list : {2U, 8U, 32U, 128U}) {
      const ListSetting setting = setting_of(bits, 0.05, list);
      const std::vector<double> estimates = list_fer_estimates(setting, ranking.sums);
      ASSERT_EQ(estimates.size(), bits + 1);
      EXPECT_EQ(estimates[0], 1);
      EXPECT_EQ(estimates[bits], 0);
      for (std::size_t m = 1; m <= bits; ++m) ASSERT_LE(estimates[m], estimates[m - 1]);
      // M for a FER is the union bound's M without the saving, to the integer above.
      for (const double fer : {0.5, 0.1, 0.02, 1e-3}) {
        const auto wanted = static_cast<double>(smallest_frozen_count(estimates, fer));
        const auto of_union = static_cast<double>(smallest_frozen_count(ranking.sums, fer));
        const double expected = of_union * (1 - list_saving(setting, fer));
        // One step of M moves the FER by up to a few per cent in short blocks.
        EXPECT_NEAR(wanted, expected, 2 + 1e-3 * expected) << "N " << bits << " L " << list;
      }
    }
  }
}

TEST(ListEstimate, ChoosesTheFrozenCountOfListDesigns) {
  const Ranking ranking = ranking_of(4096, 0.05);
  std::size_t last = 4096;
  for (unsigned list = 1; list <= 32; list *= 2) {
    const Design design =
        make_design(ranking, {Goal::Kind::fer, 0.1, 0}, with_list(list), {}).design;
    EXPECT_EQ(design.list, list);
    EXPECT_EQ(design.predicted.kind, list == 1 ? "exact-union" : "estimate");
    EXPECT_LE(*design.predicted.fer, 0.1);
    EXPECT_GT(*design.predicted.fer, 0.09);
    EXPECT_FALSE(design.predicted.interval.has_value());
    EXPECT_LT(design.code.frozen.frozen_count(), last);
    last = design.code.frozen.frozen_count();
    // The same set, told by its mask alone.
    const Prediction again =
        predict(design.code.frozen, ranking.judged, list_setting(design, 0.05, list));
    EXPECT_NEAR(*again.fer, *design.predicted.fer, 1e-9);
    EXPECT_EQ(again.kind, design.predicted.kind);
    const Design own = design_from_mask(design.code.frozen, 0.05, kPlanes, with_list(list), {});
    EXPECT_EQ(own.list, list);
    EXPECT_NEAR(*own.predicted.fer, *design.predicted.fer, 1e-9);
  }
}

TEST(ListEstimate, ServesEveryGoal) {
  const Ranking ranking = ranking_of(4096, 0.02);
  const Design frozen = make_design(ranking, {Goal::Kind::frozen, 0, 800}, with_list(8), {}).design;
  EXPECT_EQ(frozen.code.frozen.frozen_count(), 800U);
  EXPECT_GT(*frozen.predicted.fer, 0);
  EXPECT_LT(*frozen.predicted.fer, 1);
  const Design efficient =
      make_design(ranking, {Goal::Kind::efficiency, 1.4, 0}, with_list(8), {}).design;
  EXPECT_LE(design_leakage(efficient).efficiency, 1.4);
  const Designed of_one = make_design(ranking, {Goal::Kind::best_key, 0.02, 0}, with_list(1), {});
  const Designed of_eight = make_design(ranking, {Goal::Kind::best_key, 0.02, 0}, with_list(8), {});
  EXPECT_GT(*of_eight.net_key_rate, *of_one.net_key_rate);
}

TEST(ListEstimate, IsNoneForListsOfIntegers) {
  const Arithmetic integer = Arithmetic::integer_of(6, 4);
  const Ranking ranking = ranking_of(256, 0.05, integer);
  EXPECT_FALSE(has_list_estimate(integer, 8));
  EXPECT_TRUE(has_list_estimate(integer, 1));
  EXPECT_THROW(make_design(ranking, {Goal::Kind::fer, 0.1, 0}, with_list(8), {}), InputError);
  EXPECT_THROW(make_design(ranking, {Goal::Kind::best_key, 0.05, 0}, with_list(8), {}), InputError);
  const Design design = make_design(ranking, {Goal::Kind::frozen, 0, 120}, with_list(8), {}).design;
  EXPECT_FALSE(design.predicted.fer.has_value());
  EXPECT_EQ(design.predicted.kind, "order-only");
}

TEST(ListEstimate, RejectsWhatIsOutOfRange) {
  EXPECT_THROW(list_saving(setting_of(64, 0.05, 3), 0.1), std::invalid_argument);
  EXPECT_THROW(list_saving(setting_of(64, 0.05, 256), 0.1), std::invalid_argument);
  EXPECT_THROW(list_saving(setting_of(64, 0.5, 8), 0.1), std::invalid_argument);
  EXPECT_THROW(list_saving(setting_of(64, 0.05, 8), 1), std::invalid_argument);
  EXPECT_THROW(list_fer_estimates(setting_of(64, 0.05, 8), {1, 0}), std::invalid_argument);
}

}  // namespace
}  // namespace frostline
