// Long measurements of list decoding, one line of result a run. The scripts beside this file say
// which runs make up a table; DEVELOPERS.md and README.md here say what came out.
//
//   frostline_list_campaign fer N P M LISTS PRECODING BLOCKS [reference]
//       failures of the frozen set of M indices, decoded by LISTS (8, or 8,32)
//   frostline_list_campaign efficiency N P LISTS PRECODING FER BLOCKS [reference]
//       the frozen count that a FER takes, from two runs of BLOCKS blocks on either side of it
//
// All sets are of exact density evolution for planes:3; check bits are the default ones. The errors
// depend on N and P alone, so that runs can be compared block by block. "reference" decodes with
// the plain scalar decoder.
#include <algorithm>
#include <cmath>
#include <cstdio>
#include <cstdlib>
#include <exception>
#include <memory>
#include <sstream>
#include <stdexcept>
#include <string>
#include <vector>

#include "construct/designer.h"
#include "construct/metric_weights.h"
#include "construct/selection.h"
#include "decode/reference/reference_list_batch_decoder.h"
#include "decode/trial/trial.h"
#include "polar/check_bits.h"
#include "polar/limits.h"

namespace frostline {
namespace {

const Arithmetic kArithmetic = Arithmetic::planes_of(3);

struct Setting {
  BlockLength block_length;
  double p;
  std::vector<unsigned> lists;
  std::string lists_text;
  Precoding precoding;
  bool reference;
};

std::vector<unsigned> parse_lists(const std::string& text) {
  std::vector<unsigned> lists;
  std::istringstream words(text);
  for (std::string word; std::getline(words, word, ',');) {
    lists.push_back(static_cast<unsigned>(std::stoul(word)));
  }
  return lists;
}

// Frozen sets along one ranking, decoded one way.
class Campaign {
 public:
  explicit Campaign(Setting setting)
      : setting_(std::move(setting)),
        ranking_(rank_indices(setting_.block_length, setting_.p, default_construction(kArithmetic),
                              0, kArithmetic)) {}

  const std::vector<double>& sums() const { return ranking_.sums; }
  double entropy() const {
    return static_cast<double>(setting_.block_length.bits()) * binary_entropy(setting_.p);
  }

  TrialSummary run(std::size_t frozen_count, std::uint64_t blocks) const {
    const CodeOptions code{default_check_bits(setting_.block_length), setting_.precoding, false,
                           setting_.lists.back()};
    const Design design =
        make_design(ranking_, {Goal::Kind::frozen, 0, frozen_count}, code, {}).design;
    const auto weights = std::make_shared<const MetricWeights>(
        metric_weights(design.code.frozen, setting_.p, kArithmetic));
    std::unique_ptr<BatchDecoder> decoder;
    if (setting_.reference) {
      decoder = std::make_unique<ReferenceListBatchDecoder>(design.code, kArithmetic, setting_.p,
                                                            setting_.lists.back(), weights);
    } else {
      decoder = make_batch_decoder(design, {setting_.lists, weights});
    }
    return run_trial(design.code, *decoder, setting_.p, {blocks, {}, 1});
  }

 private:
  Setting setting_;
  Ranking ranking_;
};

void print_setting(const Setting& setting) {
  std::printf("%llu\t%g\t%s\t%s\t%s\t",
              static_cast<unsigned long long>(setting.block_length.bits()), setting.p,
              setting.lists_text.c_str(), precoding_name(setting.precoding).data(),
              setting.reference ? "reference" : "fast");
}

void measure_fer(const Setting& setting, std::size_t frozen_count, std::uint64_t blocks) {
  const Campaign campaign(setting);
  const TrialSummary summary = campaign.run(frozen_count, blocks);
  print_setting(setting);
  std::printf("%zu\t%.4f\t%llu\t%llu\t%llu\t%.5f\t%.5f\t%.5f\t%.1f\n", frozen_count,
              static_cast<double>(frozen_count) / campaign.entropy(),
              static_cast<unsigned long long>(summary.blocks),
              static_cast<unsigned long long>(summary.failures),
              static_cast<unsigned long long>(summary.undetected), summary.fer(),
              summary.fer_interval.low, summary.fer_interval.high, summary.throughput_mbit_s);
}

// Frozen count at which the FER is wanted, from two runs: ln FER is nearly straight in M.
class CrossingPoint {
 public:
  CrossingPoint(const Campaign& campaign, const Setting& setting, double fer)
      : campaign_(campaign), fer_(fer) {
    const ListSetting list{setting.block_length, setting.p, setting.lists.back(), setting.precoding,
                           kArithmetic};
    const std::vector<double> estimates = list_fer_estimates(list, campaign.sums());
    at_ = static_cast<double>(smallest_frozen_count(estimates, fer));
    const auto half = static_cast<double>(smallest_frozen_count(estimates, fer / 2));
    slope_ = -std::log(2) / std::max(1.0, half - at_);
  }

  // Short runs until the FER is within a factor of 1.6 of the wanted one.
  void approach(std::uint64_t blocks) {
    for (int step = 0; step < 8; ++step) {
      const double off = log_ratio(campaign_.run(count(at_), blocks));
      at_ -= std::clamp(off, -1.5, 1.5) / slope_;
      if (std::abs(off) < 0.45) return;
    }
    throw std::runtime_error("no frozen count near the FER was found");
  }

  // One run with about 1.3 times the FER, one with a 1.3th of it; again further out where they lie
  // on one side.
  void bracket(std::uint64_t blocks) {
    double reach = std::log(1.3) / -slope_;
    for (int step = 0; step < 4; ++step, reach *= 2) {
      few_ = count(at_ - reach);
      many_ = std::max(count(at_ + reach), few_ + 1);
      with_few_ = campaign_.run(few_, blocks);
      with_many_ = campaign_.run(many_, blocks);
      if (with_few_.fer() > fer_ && with_many_.fer() < fer_) return;
    }
    throw std::runtime_error("the FER was not bracketed");
  }

  void print(const Setting& setting) const {
    const double high = log_ratio(with_few_);
    const double low = log_ratio(with_many_);
    const double slope = (low - high) / static_cast<double>(many_ - few_);
    const double crossing = static_cast<double>(few_) - high / slope;
    const auto failures = static_cast<double>(with_few_.failures + with_many_.failures);
    const double margin = 1.96 / std::sqrt(failures / 2) / -slope;  // the errors are the same ones
    const double entropy = campaign_.entropy();
    const auto of_union = static_cast<double>(smallest_frozen_count(campaign_.sums(), fer_));
    print_setting(setting);
    std::printf("%g\t%.1f\t%.4f\t%.4f\t%.4f\t%llu\t%llu\t%llu\t%.5f\t%.1f\n", fer_, crossing,
                crossing / entropy, (crossing - margin) / entropy, (crossing + margin) / entropy,
                static_cast<unsigned long long>(with_few_.blocks),
                static_cast<unsigned long long>(with_few_.failures),
                static_cast<unsigned long long>(with_many_.failures), 1 - crossing / of_union,
                with_many_.throughput_mbit_s);
  }

 private:
  std::size_t count(double m) const {
    return static_cast<std::size_t>(
        std::clamp(std::round(m), 0.0, static_cast<double>(campaign_.sums().size() - 1)));
  }
  // ln of FER over the wanted one; half a failure where there was none.
  double log_ratio(const TrialSummary& summary) const {
    const double failures = std::max(0.5, static_cast<double>(summary.failures));
    return std::log(failures / static_cast<double>(summary.blocks) / fer_);
  }

  const Campaign& campaign_;
  double fer_;
  double at_ = 0;
  double slope_ = 0;  // of ln FER in M
  std::size_t few_ = 0;
  std::size_t many_ = 0;
  TrialSummary with_few_;
  TrialSummary with_many_;
};

void measure_efficiency(const Setting& setting, double fer, std::uint64_t blocks) {
  const Campaign campaign(setting);
  CrossingPoint crossing(campaign, setting, fer);
  crossing.approach(std::max<std::uint64_t>(blocks / 8, 300));
  crossing.bracket(blocks);
  crossing.print(setting);
}

int run(const std::vector<std::string>& words) {
  const bool reference = !words.empty() && words.back() == "reference";
  const std::size_t count = words.size() - (reference ? 1 : 0);
  if (count != 7) throw std::invalid_argument("see the top of list_campaign.cpp for the arguments");
  const bool fer = words[0] == "fer";
  const std::size_t lists = fer ? 4 : 3;
  const Setting setting{BlockLength(std::stoull(words[1])), std::stod(words[2]),
                        parse_lists(words[lists]),          words[lists],
                        parse_precoding(words[lists + 1]),  reference};
  if (fer) {
    measure_fer(setting, std::stoull(words[3]), std::stoull(words[6]));
  } else if (words[0] == "efficiency") {
    measure_efficiency(setting, std::stod(words[5]), std::stoull(words[6]));
  } else {
    throw std::invalid_argument("neither fer nor efficiency");
  }
  return EXIT_SUCCESS;
}

}  // namespace
}  // namespace frostline

int main(int argc, char** argv) {
  try {
    return frostline::run(std::vector<std::string>(argv + 1, argv + argc));
  } catch (const std::exception& error) {
    std::fprintf(stderr, "frostline_list_campaign: %s\n", error.what());
    return EXIT_FAILURE;
  }
}
