// A construction that is called inside a parallel run finishes its work though that run is
// cancelled (by an exception in another cell of a grid): half a reliability would make a wrong
// frozen set.
#include <gtest/gtest.h>
#include <tbb/parallel_for.h>

#include <algorithm>
#include <string>

#include "construct/catalogue.h"
#include "construct/selection.h"

namespace frostline {
namespace {

class CancelledRun : public ::testing::TestWithParam<const char*> {};

TEST_P(CancelledRun, LeavesNoConstructionHalfDone) {
  const BlockLength block_length(1 << 14);
  const Arithmetic arithmetic = Arithmetic::planes_of(3);
  const Construction construction = make_construction(GetParam(), {});
  const Reliability whole = run_construction(construction, block_length, 0.02, arithmetic);
  Reliability cancelled = whole;
  cancelled.log_error_probability.clear();
  tbb::task_group_context context;
  tbb::parallel_for(
      0, 1,
      [&](int) {
        context.cancel_group_execution();
        cancelled = run_construction(construction, block_length, 0.02, arithmetic);
      },
      context);
  EXPECT_EQ(cancelled.log_error_probability, whole.log_error_probability);
}

TEST(CancelledOrder, LeavesNoFreezingOrderHalfSorted) {
  Reliability reliability;
  for (std::size_t i = 0; i < 20000; ++i) {
    reliability.log_error_probability.push_back(-static_cast<double>(i * 7919 % 20011));
  }
  const std::vector<std::uint32_t> whole = freezing_order(reliability);
  std::vector<std::uint32_t> cancelled;
  tbb::task_group_context context;
  tbb::parallel_for(
      0, 1,
      [&](int) {
        context.cancel_group_execution();
        cancelled = freezing_order(reliability);
      },
      context);
  EXPECT_EQ(cancelled, whole);
}

INSTANTIATE_TEST_SUITE_P(Constructions, CancelledRun,
                         ::testing::Values("density-evolution", "degrading-merge", "gaussian",
                                           "bhattacharyya"),
                         [](const auto& one) {
                           std::string name = one.param;
                           name.erase(std::remove(name.begin(), name.end(), '-'), name.end());
                           return name;
                         });

}  // namespace
}  // namespace frostline
