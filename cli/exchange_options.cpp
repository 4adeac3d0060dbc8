#include "cli/exchange_options.h"

#include "cli/account.h"

namespace frostline::cli {

const char* const kTestOnlySentence =
    "TEST ONLY: session number or hash keys came from a seed; do not use these bits as a key.\n";

void add_key_options(Options& options) {
  options.value("key-format", "FORMAT", "packed or text, of all keys read and written (packed)")
      .value("bits", "B", "bits that KEY holds, where that is no multiple of 8");
}

KeyFormat key_format(const Options& options) {
  return parse_key_format(options.optional_text("key-format").value_or("packed"));
}

std::unique_ptr<KeySource> open_key_argument(const Options& options) {
  return open_key(options.text("KEY"), key_format(options), options.optional_whole("bits"));
}

void add_test_seed(Options& options) {
  options.value("test-only-seed", "S",
                "reproducible session number and hash keys; marks the files, never for keys");
}

Json to_json(const LeakedBits& bits) {
  Json object;
  object["syndrome"] = bits.syndrome;
  object["check"] = bits.check;
  object["tag"] = bits.tag;
  object["revealed"] = bits.revealed;
  object["accept"] = bits.accept;
  object["total"] = bits.total();
  return object;
}

std::string leaked_by_kind(const LeakedBits& bits) {
  std::string text = grouped(bits.total()) + " bits: syndrome " + grouped(bits.syndrome) +
                     ", check " + grouped(bits.check);
  if (bits.tag > 0) text += ", tag " + grouped(bits.tag);
  if (bits.revealed > 0) text += ", revealed " + grouped(bits.revealed);
  if (bits.accept > 0) text += ", accept " + grouped(bits.accept);
  return text;
}

}  // namespace frostline::cli
