#include "construct/designer.h"

#include <algorithm>
#include <cmath>
#include <string>

#include "construct/catalogue.h"
#include "construct/degrading_merge.h"
#include "construct/selection.h"
#include "polar/error.h"
#include "polar/limits.h"

namespace frostline {
namespace {

Judgement judge_by(const Construction& construction, BlockLength block_length, double qber,
                   const Arithmetic& arithmetic) {
  Judgement judgement{
      construction, run_construction(construction, block_length, qber, arithmetic), {}};
  if (construction.name == "degrading-merge") {
    judgement.lower = upgrading_merge(block_length, qber, merge_letters_of(construction));
  }
  return judgement;
}

// ln P - alpha log2(row weight); row i of G has weight 2^(ones of i).
Reliability preferring_heavy_rows(Reliability reliability, double alpha) {
  std::vector<double>& values = reliability.log_error_probability;
  for (std::size_t i = 0; i < values.size(); ++i) {
    values[i] -= alpha * __builtin_popcountll(i);
  }
  return reliability;
}

Construction recorded_with_judge(Construction construction, double order_alpha,
                                 const std::string& judge) {
  if (order_alpha != 0) construction.parameters.emplace_back("order_alpha", order_alpha);
  if (judge != construction.name) construction.parameters.emplace_back("judged_by", judge);
  return construction;
}

std::string number_text(double value) {
  std::string text = std::to_string(value);
  text.erase(text.find_last_not_of('0') + 1);
  if (!text.empty() && text.back() == '.') text.pop_back();
  return text;
}

void require_order_alpha(double order_alpha) {
  if (!(order_alpha >= 0 && order_alpha <= 10)) {
    throw InputError("order weight " + number_text(order_alpha) + " is not from 0 to 10");
  }
}

std::size_t frozen_for_efficiency(const Ranking& ranking, double efficiency, unsigned check_bits) {
  const auto length = static_cast<double>(ranking.block_length.bits());
  const double bits = efficiency * length * binary_entropy(ranking.qber);
  if (!(bits >= check_bits && bits <= length + check_bits)) {
    throw InputError("efficiency " + number_text(efficiency) + " asks for " + number_text(bits) +
                     " public bits a block, which a block of " +
                     std::to_string(ranking.block_length.bits()) + " with " +
                     std::to_string(check_bits) + " check bits cannot have");
  }
  return static_cast<std::size_t>(std::floor(bits)) - check_bits;
}

// failures: FER for every frozen count, a union or an estimate.
std::size_t choose_frozen_count(const Ranking& ranking, const std::vector<double>& failures,
                                const Goal& goal, unsigned check_bits,
                                std::optional<double>& net_key_rate) {
  switch (goal.kind) {
    case Goal::Kind::fer:
      require_probability(goal.value, "FER");
      return smallest_frozen_count(failures, goal.value);
    case Goal::Kind::frozen:
      if (goal.frozen_count > ranking.block_length.bits()) {
        throw InputError("frozen count " + std::to_string(goal.frozen_count) +
                         " is more than the block of " +
                         std::to_string(ranking.block_length.bits()));
      }
      return goal.frozen_count;
    case Goal::Kind::efficiency:
      return frozen_for_efficiency(ranking, goal.value, check_bits);
    case Goal::Kind::best_key: {
      if (!(goal.value >= 0 && goal.value <= 0.5)) {
        throw InputError("phase error " + number_text(goal.value) + " is not from 0 to 0.5");
      }
      const BestKey best = best_key(failures, goal.value, check_bits);
      net_key_rate = best.net_key_rate;
      return best.frozen_count;
    }
  }
  throw InputError("unknown goal");
}

double union_over_open(const FrozenSet& frozen, const Reliability& reliability) {
  // From the smallest probability up, so that nothing is lost and the order of indices is no
  // matter.
  std::vector<double> open;
  for (std::size_t i = 0; i < frozen.block_length().bits(); ++i) {
    if (!frozen.is_frozen(i)) open.push_back(reliability.log_error_probability[i]);
  }
  std::sort(open.begin(), open.end());
  double sum = 0;
  for (const double log_probability : open) sum += std::exp(log_probability);
  return sum;
}

Prediction list_prediction(std::optional<double> fer) {
  Prediction predicted;
  predicted.kind = fer ? "estimate" : "order-only";
  predicted.fer = fer;
  return predicted;
}

// Throws InputError where the goal asks for a FER that nobody can tell.
void require_estimate(const Goal& goal, const Arithmetic& arithmetic, unsigned list) {
  if (has_list_estimate(arithmetic, list)) return;
  if (goal.kind == Goal::Kind::frozen || goal.kind == Goal::Kind::efficiency) return;
  throw InputError("the FER of list size " + std::to_string(list) + " in " + to_string(arithmetic) +
                   " is not known: its path metric has no weights. Choose the frozen count or the "
                   "efficiency yourself");
}

Prediction prediction_of(double sum, std::optional<double> lower, ReliabilityKind kind) {
  Prediction predicted;
  predicted.kind = prediction_kind(kind);
  if (kind == ReliabilityKind::order_only) return predicted;
  predicted.fer = std::min(1.0, sum);
  if (lower) predicted.interval = std::make_pair(std::min(1.0, *lower), std::min(1.0, sum));
  return predicted;
}

}  // namespace

Construction default_construction(const Arithmetic& arithmetic) {
  return make_construction(
      arithmetic.kind == Arithmetic::Kind::exact ? "degrading-merge" : "density-evolution", {});
}

Construction recorded_construction(const Construction& construction, double order_alpha,
                                   const Arithmetic& arithmetic) {
  return recorded_with_judge(
      construction, order_alpha,
      is_order_only(construction) ? default_construction(arithmetic).name : construction.name);
}

Ranking rank_indices(BlockLength block_length, double qber, const Construction& construction,
                     double order_alpha, const Arithmetic& arithmetic) {
  require_error_rate(qber, "QBER");
  require_order_alpha(order_alpha);
  if (order_alpha != 0 && is_order_only(construction)) {
    throw InputError("construction '" + construction.name +
                     "' is an order without probabilities, which row weights cannot be mixed into");
  }
  return rank_by(block_length, qber, judge_by(construction, block_length, qber, arithmetic),
                 order_alpha, arithmetic);
}

Ranking rank_by(BlockLength block_length, double qber, Judgement own, double order_alpha,
                const Arithmetic& arithmetic) {
  require_error_rate(qber, "QBER");
  require_order_alpha(order_alpha);
  Ranking ranking{block_length, qber, own.by, order_alpha, arithmetic, {}, {}, {}, {}};
  ranking.order = freezing_order(
      order_alpha == 0 ? own.reliability : preferring_heavy_rows(own.reliability, order_alpha));
  ranking.judged = own.reliability.kind == ReliabilityKind::order_only
                       ? judge(block_length, qber, arithmetic)
                       : std::move(own);
  ranking.sums = union_sums(ranking.judged.reliability, ranking.order);
  if (ranking.judged.lower) {
    ranking.lower_sums = union_sums(*ranking.judged.lower, ranking.order);
  }
  return ranking;
}

Designed make_design(const Ranking& ranking, const Goal& goal, const CodeOptions& code,
                     Parameters options) {
  require_estimate(goal, ranking.arithmetic, code.list);
  const bool estimated = code.list > 1 && has_list_estimate(ranking.arithmetic, code.list);
  std::vector<double> estimates;
  if (estimated) {
    estimates = list_fer_estimates(
        {ranking.block_length, ranking.qber, code.list, code.precoding, ranking.arithmetic},
        ranking.sums);
  }
  std::optional<double> net_key_rate;
  const std::size_t frozen_count = choose_frozen_count(
      ranking, estimated ? estimates : ranking.sums, goal, code.check_bits, net_key_rate);
  Design design{
      {freeze_first(ranking.order, frozen_count), code.precoding, code.check_bits},
      ranking.qber,
      recorded_with_judge(ranking.construction, ranking.order_alpha, ranking.judged.by.name),
      code.list,
      ranking.arithmetic,
      {},
      {},
      std::move(options),
      {}};
  if (code.reveal_order) {
    // What the order would freeze next is what is most likely to fail.
    design.reveal_order.emplace(ranking.order.begin() + static_cast<std::ptrdiff_t>(frozen_count),
                                ranking.order.end());
  }
  if (code.list > 1) {
    design.predicted =
        list_prediction(estimated ? std::optional<double>(estimates[frozen_count]) : std::nullopt);
    return {std::move(design), net_key_rate};
  }
  std::optional<double> lower;
  if (!ranking.lower_sums.empty()) lower = ranking.lower_sums[frozen_count];
  design.predicted =
      prediction_of(ranking.sums[frozen_count], lower, ranking.judged.reliability.kind);
  return {std::move(design), net_key_rate};
}

Design design_from_mask(const FrozenSet& mask, double qber, const Arithmetic& arithmetic,
                        const CodeOptions& code, Parameters options) {
  require_error_rate(qber, "QBER");
  const Judgement judgement = judge(mask.block_length(), qber, arithmetic);
  Design design{
      {mask, code.precoding, code.check_bits},
      qber,
      {"user-mask", {{"judged_by", judgement.by.name}}},
      code.list,
      arithmetic,
      {},
      predict(mask, judgement, {mask.block_length(), qber, code.list, code.precoding, arithmetic}),
      std::move(options),
      {}};
  if (code.reveal_order) {
    std::vector<std::uint32_t> open;
    for (const std::uint32_t index : freezing_order(judgement.reliability)) {
      if (!mask.is_frozen(index)) open.push_back(index);
    }
    design.reveal_order = std::move(open);
  }
  return design;
}

Judgement judge(BlockLength block_length, double qber, const Arithmetic& arithmetic) {
  return judge_by(default_construction(arithmetic), block_length, qber, arithmetic);
}

Prediction predict(const FrozenSet& frozen, const Judgement& judgement,
                   const ListSetting& setting) {
  const double sum = union_over_open(frozen, judgement.reliability);
  if (setting.list == 1) {
    std::optional<double> lower;
    if (judgement.lower) lower = union_over_open(frozen, *judgement.lower);
    return prediction_of(sum, lower, judgement.reliability.kind);
  }
  if (!has_list_estimate(setting.arithmetic, setting.list)) return list_prediction(std::nullopt);
  const std::vector<double> sums =
      union_sums(judgement.reliability, freezing_order(judgement.reliability));
  // The two sums of one set differ in the order of summation.
  const auto same = std::partition_point(sums.begin(), sums.end() - 1,
                                         [&](double other) { return other > sum * (1 + 1e-9); });
  return list_prediction(
      list_fer_estimates(setting, sums)[static_cast<std::size_t>(same - sums.begin())]);
}

ListSetting list_setting(const Design& design, double qber, unsigned list) {
  return {design.code.block_length(), qber, list, design.code.precoding, design.arithmetic};
}

}  // namespace frostline
