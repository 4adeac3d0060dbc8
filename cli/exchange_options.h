// Options that the four commands of the exchange share.
#pragma once

#include <memory>
#include <optional>
#include <string>

#include "cli/options.h"
#include "decode/exchange/key_files.h"
#include "decode/exchange/ledger.h"
#include "polar/design_json.h"

namespace frostline::cli {

// --key-format, --bits.
void add_key_options(Options& options);
KeyFormat key_format(const Options& options);
std::unique_ptr<KeySource> open_key_argument(const Options& options);

// --test-only-seed, and the sentence that tells that it was used.
void add_test_seed(Options& options);
extern const char* const kTestOnlySentence;

// Leaked bits by kind, as rows of a report.
Json to_json(const LeakedBits& bits);
std::string leaked_by_kind(const LeakedBits& bits);

}  // namespace frostline::cli
