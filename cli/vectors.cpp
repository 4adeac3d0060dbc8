// frostline vectors: golden test vectors for hardware and firmware.
#include <algorithm>
#include <iostream>

#include "cli/account.h"
#include "cli/command.h"
#include "cli/design_file.h"
#include "cli/options.h"
#include "cli/run_state.h"
#include "cli/vector_files.h"
#include "construct/metric_weights.h"
#include "polar/error.h"

namespace frostline::cli {
namespace {

// Messages of all levels are written by default up to this block length.
constexpr std::size_t kShortBlock = 256;
// The reference list decoder's largest list.
constexpr std::uint64_t kLargestList = 128;

Options make_options() {
  Options options("vectors", "Makes golden test vectors for hardware and firmware.", {"FILE"});
  options.value("output,o", "DIR", "the folder to write; made where it is missing")
      .value("count", "K", "cases, at least 3 (16)")
      .value("seed", "S", "the same seed gives the same vectors (1)")
      .value("arithmetic", "A", "planes:W or integer:Q:A (the design's)")
      .value("list", "L", "list size, a power of two from 1 to 128 (the design's)")
      .flag("messages", "write the messages of all levels for blocks above 256 bits too; SC only")
      .value("check", "DIR", "in place of FILE: compare answers with the vectors in DIR")
      .value("answers", "FILE", "with --check: a word a case, as $writememh writes them")
      .value("answer-messages", "DIR", "with --check: messages-level-K.hex that hardware made")
      .computing()
      .epilogue(
          "Examples:\n"
          "  frostline vectors link.design.json --count 32 --seed 7 -o vectors\n"
          "  frostline vectors --check vectors --answers answers.hex\n"
          "Case 0 has no errors, case 1 errors everywhere; at least a third of the cases fail to\n"
          "decode, and must fail in hardware bit for bit alike. The keys come from a seed: they "
          "are\n"
          "for tests, never for a key.\n");
  return options;
}

Arithmetic chosen_arithmetic(const Options& options, const Design& design) {
  const Arithmetic arithmetic =
      options.has("arithmetic") ? parse_arithmetic(options.text("arithmetic")) : design.arithmetic;
  if (arithmetic.kind == Arithmetic::Kind::exact) {
    throw InputError("--arithmetic: golden vectors are of planes:W or integer:Q:A");
  }
  return arithmetic;
}

std::uint64_t chosen_count(const Options& options) {
  const std::uint64_t count = options.optional_whole("count").value_or(16);
  if (count < kLeastGoldenCases || count > kMostGoldenCases) {
    throw InputError("--count: " + std::to_string(count) + " is not from " +
                     std::to_string(kLeastGoldenCases) + " to " + std::to_string(kMostGoldenCases));
  }
  return count;
}

unsigned chosen_list(const Options& options, const Design& design) {
  const std::uint64_t list = options.optional_whole("list").value_or(design.list);
  if (list == 0 || list > kLargestList || (list & (list - 1)) != 0) {
    throw InputError("--list: " + std::to_string(list) + " is not a power of two from 1 to 128");
  }
  if (list > 1 && options.has("messages")) {
    throw InputError("--messages: the messages of a list are not written; use --list 1");
  }
  return static_cast<unsigned>(list);
}

// Faults that no case shows in the output, for a sentence; empty where all are shown or none was
// looked for.
std::string hidden_faults(const VectorSet& set) {
  if (set.list > 1 || set.design.code.precoding != Precoding::none) return "";
  std::string hidden;
  for (const Fault fault : possible_faults(set.arithmetic)) {
    const bool shown =
        std::any_of(set.cases.begin(), set.cases.end(), [&](const GoldenCase& golden) {
          return std::find(golden.shows.begin(), golden.shows.end(), fault) != golden.shows.end();
        });
    if (!shown) hidden += (hidden.empty() ? "" : ", ") + std::string(fault_name(fault));
  }
  return hidden;
}

}  // namespace

int run_vectors(const std::vector<std::string>& arguments) {
  const auto asks = [&](const char* word) {
    return std::any_of(arguments.begin(), arguments.end(),
                       [&](const std::string& argument) { return argument.rfind(word, 0) == 0; });
  };
  if (asks("--check")) return run_vectors_check(arguments);
  Options options = make_options();
  if (!options.parse(arguments)) return kDone;
  for (const char* option : {"answers", "answer-messages"}) {
    if (options.has(option)) throw InputError("--" + std::string(option) + " goes with --check");
  }
  const std::uint64_t count = chosen_count(options);
  const std::string folder = options.text("output");
  const Design design = read_design(options.text("FILE"));
  const std::size_t length = design.code.block_length().bits();
  VectorSet set{design,
                chosen_arithmetic(options, design),
                chosen_list(options, design),
                options.optional_whole("seed").value_or(1),
                {},
                nullptr,
                false};
  set.messages = set.list == 1 && (length <= kShortBlock || options.has("messages"));
  std::optional<MetricWeights> weights;
  if (set.list > 1 && set.arithmetic.kind == Arithmetic::Kind::planes) {
    weights = metric_weights(design.code.frozen, design.qber, set.arithmetic);
    set.weights = &*weights;
  }
  RunState state("vectors", static_cast<double>(length), options.quiet());
  const RunControl control = state.control();
  const GoldenSetup setup{design.code, set.arithmetic, design.qber,
                          set.list,    set.weights,    set.seed};
  set.cases = golden_cases(setup, count, [&](std::uint64_t done) {
    if (control.stopped()) throw Interrupted();
    if (control.progress) control.progress(done, count);
  });
  write_vectors(set, folder);
  const auto recovered = static_cast<std::uint64_t>(
      std::count_if(set.cases.begin(), set.cases.end(),
                    [](const GoldenCase& golden) { return golden.recovered; }));
  if (options.json()) {
    Json root;
    root["folder"] = folder;
    root["count"] = count;
    root["recovered"] = recovered;
    root["arithmetic"] = to_string(set.arithmetic);
    root["list"] = set.list;
    root["seed"] = set.seed;
    root["messages"] = set.messages;
    std::cout << root.dump(2) << '\n';
  } else if (!options.quiet()) {
    options.account() << counted(count, "case") << " of " << grouped(length) << " bits in "
                      << to_string(set.arithmetic) << ", list size " << set.list << ", written to "
                      << folder << ": " << recovered << " are recovered, " << count - recovered
                      << " fail on purpose" << (set.messages ? "; messages of all levels" : "")
                      << ".\n";
    if (const std::string hidden = hidden_faults(set); !hidden.empty()) {
      options.account() << "No case shows by its output alone that hardware has the fault "
                        << hidden << "; compare the messages of all levels too"
                        << (set.messages ? ".\n" : " (--messages).\n");
    }
  }
  return kDone;
}

}  // namespace frostline::cli
