// frostline sample: a pair of strings that differ with a given QBER, for demos and tests.
#include <algorithm>
#include <iostream>

#include "cli/account.h"
#include "cli/command.h"
#include "cli/options.h"
#include "cli/run_state.h"
#include "decode/exchange/key_files.h"
#include "polar/design_json.h"
#include "polar/error.h"
#include "polar/random.h"

namespace frostline::cli {
namespace {

// Bits that one random stream fills: streams follow each other, whatever the number of bits.
constexpr std::uint64_t kPieceBits = std::uint64_t{1} << 20;

Options make_options() {
  Options options("sample", "Makes a pair of strings that differ with a given QBER.", {});
  options.value("bits", "B", "length of each string")
      .value("qber", "P", "probability that one position differs, from 0 to 1")
      .value("seed", "S", "the same seed gives the same strings (1)")
      .values("output,o", "A B", "the two files")
      .value("key-format", "FORMAT", "packed or text (packed)")
      .flag("quiet", "no progress line and no account")
      .epilogue(
          "Example:\n"
          "  frostline sample --bits 16777216 --qber 0.023 --seed 7 -o hall-a.bin hall-b.bin\n"
          "The strings come from a seed: they are for demos and tests, never for a key.\n");
  return options;
}

std::uint64_t write_pair(std::uint64_t bits, double p, std::uint64_t seed, KeySink& a, KeySink& b,
                         const RunControl& control) {
  std::uint64_t differences = 0;
  for (std::uint64_t first = 0; first < bits; first += kPieceBits) {
    if (control.stopped()) throw Interrupted();
    const auto count = static_cast<std::size_t>(std::min(kPieceBits, bits - first));
    const std::uint64_t stream = first / kPieceBits;
    BitString key(count);
    BitString errors(count);
    RandomStream(seed, "sample key", stream).bernoulli(0.5, count, key.words());
    RandomStream(seed, "sample errors", stream).bernoulli(p, count, errors.words());
    differences += errors.count();
    a.write(key.words(), count);
    key ^= errors;
    b.write(key.words(), count);
  }
  a.finish();
  b.finish();
  return differences;
}

}  // namespace

int run_sample(const std::vector<std::string>& arguments) {
  Options options = make_options();
  if (!options.parse(arguments)) return kDone;
  const std::uint64_t bits = options.whole("bits");
  if (bits == 0) throw InputError("--bits: at least 1");
  const double p = options.number("qber");
  if (!(p >= 0 && p <= 1)) throw InputError("--qber: " + short_number(p) + " is not from 0 to 1");
  const std::uint64_t seed = options.optional_whole("seed").value_or(1);
  const KeyFormat format = parse_key_format(options.optional_text("key-format").value_or("packed"));
  const std::vector<std::string> paths = options.texts("output");
  if (paths.size() != 2) throw InputError("sample: -o takes two files");
  require_distinct_files({}, paths);
  RunState state("sample", 1, options.quiet());
  FileSink file_a(paths[0], FileAccess::secret);
  FileSink file_b(paths[1], FileAccess::secret);
  KeySink a(file_a, format);
  KeySink b(file_b, format);
  const std::uint64_t differences = write_pair(bits, p, seed, a, b, state.control());
  file_a.finish();
  file_b.finish();
  file_a.commit();
  file_b.commit();
  if (options.json()) {
    Json root;
    root["bits"] = bits;
    root["qber"] = p;
    root["seed"] = seed;
    root["differences"] = differences;
    root["files"] = paths;
    std::cout << root.dump(2) << '\n';
  } else if (!options.quiet()) {
    options.account() << "Two strings of " << counted(bits, "bit") << " in " << paths[0] << " and "
                      << paths[1] << " differ in " << counted(differences, "position") << " ("
                      << percent(static_cast<double>(differences) / static_cast<double>(bits), 3)
                      << ").\n";
  }
  return kDone;
}

}  // namespace frostline::cli
