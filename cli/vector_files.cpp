#include "cli/vector_files.h"

#include <filesystem>
#include <functional>
#include <memory>

#include "cli/grid.h"
#include "decode/exchange/streams.h"
#include "decode/hardware/hex_words.h"
#include "polar/error.h"

namespace frostline::cli {
namespace {

// A file with one word a case.
struct CaseFile {
  const char* name;
  const char* meaning;
  std::size_t bits;
  std::function<BitString(const GoldenCase&)> word;
};

BitString check_word(std::uint32_t check, unsigned width) {
  BitString bits(width);
  for (unsigned t = 0; t < width; ++t) bits.set(t, (check >> (width - 1 - t) & 1U) != 0);
  return bits;
}

std::vector<CaseFile> case_files(const Code& code) {
  const std::size_t length = code.block_length().bits();
  const unsigned width = code.check_bits;
  std::vector<CaseFile> files = {
      {"sender-key.hex", "x_A, the sender's block", length,
       [](const GoldenCase& golden) { return golden.sender_key; }},
      {"receiver-key.hex", "x_B, the receiver's block", length,
       [](const GoldenCase& golden) { return golden.receiver_key; }},
      {"error-pattern.hex", "s = x_A + x_B", length,
       [](const GoldenCase& golden) { return golden.errors; }},
      {"difference.hex",
       "sum of both ends' public bits, at their indices; 0 at open indices: what the decoder gets",
       length, [](const GoldenCase& golden) { return golden.difference; }},
      {kOutputName, "what the decoder must give: an error pattern, s where it is recovered", length,
       [](const GoldenCase& golden) { return golden.output; }},
      {kDecisionsName, "u at each index: the output times G", length,
       [](const GoldenCase& golden) { return golden.decisions; }}};
  // No memory has words without bits.
  if (code.frozen.frozen_count() > 0) {
    files.push_back({"syndrome.hex", "public bits of x_A, in increasing index",
                     code.frozen.frozen_count(),
                     [](const GoldenCase& golden) { return golden.syndrome; }});
  }
  if (width > 0) {
    files.push_back(
        {"check-bits.hex", "CRC over x_A, the first bit sent first", width,
         [width](const GoldenCase& golden) { return check_word(golden.check, width); }});
  }
  return files;
}

std::string opening(const VectorSet& set, const std::string& meaning) {
  const Code& code = set.design.code;
  return "// Golden vectors by frostline: " + meaning +
         ".\n// N = " + std::to_string(code.block_length().bits()) +
         ", QBER p = " + shortest(set.design.qber) +
         ", M = " + std::to_string(code.frozen.frozen_count()) + ", " + to_string(set.arithmetic) +
         ", list size " + std::to_string(set.list) + ", seed " + std::to_string(set.seed) +
         ", natural index order.\n// code_sha256 " + to_hex(code_sha256(code)) + "\n";
}

std::string message_hex(std::uint16_t message, unsigned bits, bool constant) {
  const std::size_t digits = (bits + 3) / 4;
  if (constant) return std::string(digits, 'x');
  BitString word(bits);
  for (unsigned t = 0; t < bits; ++t) word.set(t, (message >> (bits - 1 - t) & 1U) != 0);
  return hex_word(word);
}

// The messages of all levels, case by case, and what the manifest tells about them.
class MessageFiles {
 public:
  MessageFiles(const VectorSet& set, const std::string& folder)
      : set_(set), bits_(stored_message_bits(set.arithmetic)) {
    if (!set.messages) return;
    const BlockLength block_length = set.design.code.block_length();
    for (unsigned level = 0; level <= block_length.log2(); ++level) {
      files_.push_back(std::make_unique<FileSink>(folder + "/" + message_file_name(level)));
      std::string text = opening(set, "messages of level " + std::to_string(level) + ", nodes of " +
                                          std::to_string(std::size_t{1} << level) + " indices");
      const std::string words = std::to_string(block_length.bits() * set.cases.size());
      text += "// " + words + " words of " + std::to_string(bits_) +
              " bits: message i of case k is word k N + i. " +
              (set.arithmetic.kind == Arithmetic::Kind::planes
                   ? "Sign above magnitude; x marks the constant nodes.\n"
                   : "Two's complement.\n");
      files_.back()->write(text);
    }
  }

  void write(std::size_t number, const MessageDump& dump) {
    for (std::size_t level = 0; level < files_.size(); ++level) {
      files_[level]->write("// case " + std::to_string(number) + "\n");
      const std::vector<std::uint16_t>& messages = dump.levels[level];
      for (std::size_t i = 0; i < messages.size(); ++i) {
        const bool constant =
            set_.arithmetic.kind == Arithmetic::Kind::planes && messages[i] == kConstantMessage;
        files_[level]->write(message_hex(messages[i], bits_, constant) +
                             (i % 32 == 31 || i + 1 == messages.size() ? "\n" : " "));
      }
    }
  }

  std::vector<std::unique_ptr<FileSink>>& files() { return files_; }

 private:
  const VectorSet& set_;
  unsigned bits_;
  std::vector<std::unique_ptr<FileSink>> files_;
};

Json case_json(const VectorSet& set, std::size_t number, const std::optional<MessageDump>& dump) {
  const GoldenCase& golden = set.cases[number];
  Json object;
  object["case"] = number;
  object["errors"] = golden.errors.count();
  object["recovered"] = golden.recovered;
  object["check_agrees"] = golden.check_agrees;
  if (dump) {
    object["zero_messages"] = dump->zero_messages;
    object["zero_decisions"] = dump->zero_decisions;
    object["saturated_sums"] = dump->saturated_sums;
  }
  object["shows"] = Json::array();
  for (const Fault fault : golden.shows) object["shows"].push_back(fault_name(fault));
  if (set.list > 1) {
    object["path_metrics"] = golden.path_metrics;
    object["chosen_path"] = golden.chosen;
  }
  return object;
}

Json manifest_head(const VectorSet& set) {
  const Code& code = set.design.code;
  Json root;
  root["format"] = "frostline-vectors";
  root["version"] = 1;
  root["code_sha256"] = to_hex(code_sha256(code));
  root["block_length"] = code.block_length().bits();
  root["frozen_count"] = code.frozen.frozen_count();
  root["frozen_hex"] = code.frozen.to_hex();
  root["precoding"] = precoding_name(code.precoding);
  root["check_bits"] = code.check_bits;
  root["qber"] = set.design.qber;
  root["arithmetic"] = to_string(set.arithmetic);
  root["list"] = set.list;
  root["seed"] = set.seed;
  root["count"] = set.cases.size();
  return root;
}

Json weights_json(const MetricWeights& weights) {
  Json object;
  object["unit_nats"] = kMetricUnitNats;
  object["nodes"] = weights.nodes;
  object["never_forks_hex"] = bits_to_hex(weights.never_forks);
  return object;
}

void make_folder(const std::string& folder) {
  std::error_code error;
  std::filesystem::create_directories(folder, error);
  if (error) throw InputError("cannot make folder '" + folder + "': " + error.message());
}

}  // namespace

std::string message_file_name(unsigned level) {
  return "messages-level-" + std::to_string(level) + ".hex";
}

void write_vectors(const VectorSet& set, const std::string& folder) {
  make_folder(folder);
  const Code& code = set.design.code;
  Json root = manifest_head(set);
  std::vector<std::unique_ptr<FileSink>> files;
  Json listed = Json::array();
  for (const CaseFile& file : case_files(code)) {
    files.push_back(std::make_unique<FileSink>(folder + "/" + file.name));
    const std::string count = std::to_string(set.cases.size());
    files.back()->write(opening(set, file.meaning) + "// " + count + " words of " +
                        std::to_string(file.bits) +
                        " bits, word k of case k, bit 0 leftmost: reg "
                        "[0:" +
                        std::to_string(file.bits - 1) +
                        "] words [0:" + std::to_string(set.cases.size() - 1) + "]\n");
    for (const GoldenCase& golden : set.cases)
      files.back()->write(hex_word(file.word(golden)) + "\n");
    listed.push_back({{"name", file.name},
                      {"meaning", file.meaning},
                      {"words", set.cases.size()},
                      {"word_bits", file.bits}});
  }
  MessageFiles messages(set, folder);
  Json cases = Json::array();
  for (std::size_t number = 0; number < set.cases.size(); ++number) {
    std::optional<MessageDump> dump;
    if (set.list == 1) {
      dump = dump_messages(code.frozen, set.arithmetic, set.cases[number].decisions);
      messages.write(number, *dump);
    }
    cases.push_back(case_json(set, number, dump));
  }
  for (unsigned level = 0; level < messages.files().size(); ++level) {
    listed.push_back({{"name", message_file_name(level)},
                      {"meaning", "messages of level " + std::to_string(level)},
                      {"words", set.cases.size() * code.block_length().bits()},
                      {"word_bits", stored_message_bits(set.arithmetic)}});
    files.push_back(std::move(messages.files()[level]));
  }
  root["files"] = listed;
  root["cases"] = cases;
  if (set.weights != nullptr) root["metric_weights"] = weights_json(*set.weights);
  files.push_back(std::make_unique<FileSink>(folder + "/" + kManifestName));
  files.back()->write(root.dump(1) + "\n");
  for (const auto& file : files) file->finish();
  for (const auto& file : files) file->commit();
}

}  // namespace frostline::cli
