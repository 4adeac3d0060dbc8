#include "construct/list_estimate.h"

#include <algorithm>
#include <array>
#include <cmath>
#include <stdexcept>

#include "construct/list_saving_table.h"
#include "construct/selection.h"

namespace frostline {
namespace {

// Where x lies among ascending or descending knots: between knot and knot + 1, at share of the way,
// which is outside 0..1 beyond the first and the last.
struct Place {
  std::size_t knot;
  double share;
};

template <typename Knots>
Place place_among(const Knots& knots, double x) {
  const double direction = knots.back() > knots.front() ? 1 : -1;
  std::size_t knot = 0;
  while (knot + 2 < knots.size() && direction * (x - knots[knot + 1]) > 0) ++knot;
  return {knot, (x - knots[knot]) / (knots[knot + 1] - knots[knot])};
}

template <typename Values>
std::array<double, std::tuple_size<Values>::value> logarithms(const Values& values) {
  std::array<double, std::tuple_size<Values>::value> logs{};
  std::transform(values.begin(), values.end(), logs.begin(), [](double v) { return std::log(v); });
  return logs;
}

Place clamped(Place place) { return {place.knot, std::clamp(place.share, 0.0, 1.0)}; }

double mix(double a, double b, double share) { return a + share * (b - a); }

// ln of the saving of L = 2^(k + 1) at the table's list sizes, for FER 0.1.
double log_table_saving(const Place& length, const Place& qber, unsigned k) {
  const auto along_qber = [&](std::size_t n) {
    return mix(std::log(saving_table::kSaving[n][qber.knot][k]),
               std::log(saving_table::kSaving[n][qber.knot + 1][k]), qber.share);
  };
  return mix(along_qber(length.knot), along_qber(length.knot + 1), length.share);
}

void require_setting(const ListSetting& setting) {
  if (!(setting.qber > 0 && setting.qber < 0.5)) {
    throw std::invalid_argument("list estimate: QBER outside 0 .. 0.5");
  }
  const unsigned list = setting.list;
  if (list == 0 || list > 128 || (list & (list - 1)) != 0) {
    throw std::invalid_argument("list estimate: list size is not a power of two from 1 to 128");
  }
  if (!has_list_estimate(setting.arithmetic, list)) {
    throw std::invalid_argument("list estimate: not measured in integer arithmetic");
  }
}

}  // namespace

bool has_list_estimate(const Arithmetic& arithmetic, unsigned list) {
  return list == 1 || arithmetic.kind != Arithmetic::Kind::integer;
}

double list_saving(const ListSetting& setting, double fer) {
  require_setting(setting);
  if (!(fer > 0 && fer < 1)) throw std::invalid_argument("list estimate: FER outside 0 .. 1");
  unsigned log2_list = 0;
  while ((1U << log2_list) < setting.list) ++log2_list;
  if (log2_list == 0) return 0;
  static const auto log_qbers = logarithms(saving_table::kQbers);
  const Place at_qber = clamped(place_among(log_qbers, std::log(setting.qber)));
  // Short blocks stay at the table's edge: there is no more to save than all of the loss.
  Place at_length = place_among(saving_table::kLog2Lengths, setting.block_length.log2());
  at_length.share = std::max(0.0, at_length.share);
  const auto log_saving = [&](unsigned k) { return log_table_saving(at_length, at_qber, k); };
  const unsigned last = saving_table::kLog2Lists - 1;
  double value = log_saving(std::min(log2_list - 1, last));
  double step = log_saving(last) - log_saving(last - 1);
  for (unsigned k = last + 1; k < log2_list; ++k) value += step *= 0.75;
  // The growth from FER 0.1 to 0.01, as far as 0.001 on one side and 1 on the other.
  const Place on_growth = clamped(at_length);
  const double growth = mix(saving_table::kGrowth[on_growth.knot],
                            saving_table::kGrowth[on_growth.knot + 1], on_growth.share);
  const double decades = std::clamp(-1 - std::log10(fer), -1.0, 2.0);
  value += decades * std::log(growth);
  const double share =
      setting.precoding == Precoding::none ? saving_table::kShareWithoutPrecoding : 1;
  return std::min(0.9, share * std::exp(value));
}

std::vector<double> list_fer_estimates(const ListSetting& setting,
                                       const std::vector<double>& sums) {
  require_setting(setting);
  const std::size_t length = setting.block_length.bits();
  if (sums.size() != length + 1) throw std::invalid_argument("list estimate: not N + 1 sums");
  std::vector<double> estimates(length + 1, 1.0);
  if (setting.list == 1) {
    for (std::size_t m = 0; m <= length; ++m) estimates[m] = std::min(1.0, sums[m]);
    return estimates;
  }
  // M as a function of ln FER, in steps of half a percent, then the other way round.
  constexpr double kStep = -0.005;
  constexpr double kLeastLogFer = -30;
  double last_m = 0;
  double last_log = 0;
  std::size_t m = 0;
  for (double log_fer = kStep; log_fer > kLeastLogFer && m <= length; log_fer += kStep) {
    const double fer = std::exp(log_fer);
    const double at =
        (1 - list_saving(setting, fer)) * static_cast<double>(smallest_frozen_count(sums, fer));
    for (; m <= length && static_cast<double>(m) <= at; ++m) {
      const double share = (static_cast<double>(m) - last_m) / std::max(at - last_m, 1e-9);
      estimates[m] = log_fer == kStep ? 1 : std::exp(mix(last_log, log_fer, share));
    }
    if (at > last_m) {
      last_m = at;
      last_log = log_fer;
    }
  }
  // What is left needs fewer failures than were gone through: the union bound is still one.
  for (; m <= length; ++m) estimates[m] = std::min(std::exp(last_log), sums[m]);
  for (std::size_t k = 1; k <= length; ++k) {
    estimates[k] = std::min(estimates[k], estimates[k - 1]);
  }
  return estimates;
}

}  // namespace frostline
