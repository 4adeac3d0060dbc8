// frostline vectors --check: what hardware answered against the golden vectors.
#include <filesystem>
#include <iostream>

#include "cli/account.h"
#include "cli/command.h"
#include "cli/vector_files.h"
#include "decode/exchange/streams.h"
#include "decode/hardware/hex_words.h"
#include "polar/error.h"
#include "polar/transform.h"

namespace frostline::cli {
namespace {

Options make_options() {
  Options options("vectors", "Compares what hardware answered with golden vectors.", {});
  options.value("check", "DIR", "the folder of golden vectors")
      .value("answers", "FILE",
             "what hardware wrote: a word a case as in decoder-output.hex, the way $writememh does")
      .value("answer-messages", "DIR",
             "folder with the messages that hardware made, as messages-level-K.hex, of some or all "
             "levels; x where it made none")
      .flag("quiet", "no account")
      .epilogue(
          "Example:\n"
          "  frostline vectors --check vectors --answers answers.hex\n"
          "Exit status 1 where a case differs.\n");
  return options;
}

// The golden folder as its manifest tells.
struct Golden {
  BlockLength block_length;
  std::uint64_t count;
  std::string folder;
  std::string code_sha256;
  std::vector<std::string> output;  // a word a case
  std::vector<std::string> decisions;
  std::vector<unsigned> message_levels;
};

// The words of a file, as many as there must be, all of the same number of digits.
std::vector<std::string> read_words(const std::string& path, std::uint64_t count,
                                    std::size_t word_bits) {
  std::vector<std::string> words = parse_hex_words(read_file(path), path);
  if (words.size() != count) {
    throw InputError(path + ": " + counted(words.size(), "word") + " where there must be " +
                     std::to_string(count));
  }
  const std::size_t digits = (word_bits + 3) / 4;
  for (std::size_t k = 0; k < words.size(); ++k) {
    if (words[k].size() != digits) {
      throw InputError(path + ": word " + std::to_string(k) + " has " +
                       counted(words[k].size(), "digit") + " where there must be " +
                       std::to_string(digits) + ", for " + counted(word_bits, "bit"));
    }
  }
  return words;
}

Golden read_golden(const std::string& folder) {
  const std::string path = folder + "/" + kManifestName;
  const Json root = parse_json(read_file(path), path);
  require_keys(
      root,
      {"format", "version", "code_sha256", "block_length", "frozen_count", "frozen_hex",
       "precoding", "check_bits", "qber", "arithmetic", "list", "seed", "count", "files", "cases"},
      {"metric_weights"}, path);
  if (get_string(root, "format", path) != "frostline-vectors" ||
      get_unsigned(root, "version", path) != 1) {
    throw InputError(path + ": not a manifest of frostline-vectors, version 1");
  }
  Golden golden{BlockLength(get_unsigned(root, "block_length", path)),
                get_unsigned(root, "count", path),
                folder,
                get_string(root, "code_sha256", path),
                {},
                {},
                {}};
  if (!root["files"].is_array()) throw InputError(path + ": key 'files' is not a list");
  for (const Json& file : root["files"]) {
    require_keys(file, {"name", "meaning", "words", "word_bits"}, {}, path + ": files");
    const std::string name = get_string(file, "name", path);
    if (name.find('/') != std::string::npos || !std::filesystem::exists(folder + "/" + name)) {
      throw InputError(path + ": names the file '" + name + "', which is not in '" + folder + "'");
    }
    for (unsigned level = 0; level <= golden.block_length.log2(); ++level) {
      if (name == message_file_name(level)) golden.message_levels.push_back(level);
    }
  }
  const std::size_t length = golden.block_length.bits();
  golden.output = read_words(folder + "/" + kOutputName, golden.count, length);
  golden.decisions = read_words(folder + "/" + kDecisionsName, golden.count, length);
  return golden;
}

// How one case differs.
struct Differing {
  std::uint64_t number = 0;
  std::size_t wrong_bits = 0;
  std::size_t first_bit = 0;
  bool undefined = false;                     // some digits are x
  std::optional<std::size_t> first_decision;  // index of u; none where digits are undefined
  std::optional<MessagePlace> first_message;
};

std::optional<Differing> compare(std::uint64_t number, const std::string& expected,
                                 const std::string& answer, const std::string& decisions) {
  if (expected == answer) return std::nullopt;
  const std::size_t length = 4 * expected.size();
  Differing differing;
  differing.number = number;
  const BitString golden = bits_from_hex(expected, length, "golden word");
  BitString found(length);
  for (std::size_t digit = 0; digit < expected.size(); ++digit) {
    const bool undefined = answer[digit] == 'x';
    differing.undefined = differing.undefined || undefined;
    // A digit that is undefined is wrong in all its bits.
    const BitString bits =
        undefined ? BitString(4) : bits_from_hex(answer.substr(digit, 1), 4, "answer");
    for (std::size_t bit = 4 * digit; bit < 4 * digit + 4; ++bit) {
      found.set(bit, undefined ? !golden[bit] : bits[bit - 4 * digit]);
      if (found[bit] == golden[bit]) continue;
      if (differing.wrong_bits++ == 0) differing.first_bit = bit;
    }
  }
  if (!differing.undefined) {
    const BitString u = polar_transform(found);
    const BitString golden_u = bits_from_hex(decisions, length, "golden decisions");
    std::size_t i = 0;
    while (u[i] == golden_u[i]) ++i;  // the words differ, so their transforms do
    differing.first_decision = i;
  }
  return differing;
}

// The messages of some levels, golden and answered.
class Messages {
 public:
  Messages(const Golden& golden, const std::string& folder) : block_length_(golden.block_length) {
    for (const unsigned level : golden.message_levels) {
      const std::string name = message_file_name(level);
      if (!std::filesystem::exists(folder + "/" + name)) continue;
      Level& kept = levels_[level];
      const std::string path = golden.folder + "/" + name;
      kept.expected = parse_hex_words(read_file(path), path);
      const std::uint64_t count = golden.count * block_length_.bits();
      if (kept.expected.size() != count) {
        throw InputError(path + ": " + counted(kept.expected.size(), "word") +
                         " where there must be " + std::to_string(count));
      }
      kept.found = read_words(folder + "/" + name, count, 4 * kept.expected[0].size());
    }
    if (levels_.empty()) {
      throw InputError("--answer-messages: no level of '" + folder + "' is in '" + golden.folder +
                       "' too");
    }
  }

  // The first wrong message of a case, in the order in which a decoder makes them. Constant nodes,
  // and messages that hardware did not make, are left out.
  std::optional<MessagePlace> first_wrong(std::uint64_t number) const {
    std::optional<MessagePlace> place;
    const std::size_t base = number * block_length_.bits();
    visit_nodes(block_length_, [&](unsigned level, std::size_t first) {
      const auto at = levels_.find(level);
      if (at == levels_.end()) return false;
      for (std::size_t i = first; i < first + (std::size_t{1} << level); ++i) {
        const std::string& expected = at->second.expected[base + i];
        const std::string& found = at->second.found[base + i];
        if (expected[0] == 'x' || found[0] == 'x' || expected == found) continue;
        place = MessagePlace{level, i};
        return true;
      }
      return false;
    });
    return place;
  }

 private:
  struct Level {
    std::vector<std::string> expected;
    std::vector<std::string> found;
  };
  BlockLength block_length_;
  std::map<unsigned, Level> levels_;
};

std::string describe(const Differing& differing) {
  std::string text = "  block " + std::to_string(differing.number) + ": " +
                     counted(differing.wrong_bits, "wrong bit") + ", the first is bit " +
                     std::to_string(differing.first_bit);
  if (differing.undefined) text += "; some digits are undefined (x)";
  if (differing.first_decision) {
    text += "; the first wrong decision is u_" + std::to_string(*differing.first_decision);
  }
  if (differing.first_message) {
    const MessagePlace& place = *differing.first_message;
    const std::size_t first = place.index >> place.level << place.level;
    text += "; messages go wrong first at level " + std::to_string(place.level) +
            ", in the node from index " + std::to_string(first) + " on, message " +
            std::to_string(place.index - first);
  }
  return text + ".\n";
}

Json to_json(const Differing& differing) {
  Json object;
  object["case"] = differing.number;
  object["wrong_bits"] = differing.wrong_bits;
  object["first_bit"] = differing.first_bit;
  object["undefined"] = differing.undefined;
  object["first_decision"] =
      differing.first_decision ? Json(*differing.first_decision) : Json(nullptr);
  object["first_message"] = differing.first_message
                                ? Json{{"level", differing.first_message->level},
                                       {"index", differing.first_message->index}}
                                : Json(nullptr);
  return object;
}

}  // namespace

int run_vectors_check(const std::vector<std::string>& arguments) {
  Options options = make_options();
  if (!options.parse(arguments)) return kDone;
  const std::string answers_path = options.text("answers");
  const Golden golden = read_golden(options.text("check"));
  const std::vector<std::string> answers =
      read_words(answers_path, golden.count, golden.block_length.bits());
  std::optional<Messages> messages;
  if (options.has("answer-messages")) {
    if (golden.message_levels.empty()) {
      throw InputError("--answer-messages: '" + golden.folder +
                       "' holds no messages; make it with --messages");
    }
    messages.emplace(golden, options.text("answer-messages"));
  }
  std::vector<Differing> all;
  for (std::uint64_t number = 0; number < golden.count; ++number) {
    auto differing =
        compare(number, golden.output[number], answers[number], golden.decisions[number]);
    if (!differing) continue;
    if (messages) differing->first_message = messages->first_wrong(number);
    all.push_back(*differing);
  }
  if (options.json()) {
    Json root;
    root["count"] = golden.count;
    root["equal"] = golden.count - all.size();
    root["code_sha256"] = golden.code_sha256;
    root["differing"] = Json::array();
    for (const Differing& differing : all) root["differing"].push_back(to_json(differing));
    std::cout << root.dump(2) << '\n';
  } else if (!options.quiet()) {
    std::cout << golden.count - all.size() << " of " << counted(golden.count, "case")
              << " are equal to the golden vectors, bit for bit.\n";
    for (const Differing& differing : all) std::cout << describe(differing);
  }
  return all.empty() ? kDone : kNotAsAsked;
}

}  // namespace frostline::cli
