// The folder of golden vectors: its files and its manifest. Layout: designs/FORMATS.md.
#pragma once

#include <map>
#include <optional>
#include <string>
#include <vector>

#include "cli/options.h"
#include "decode/hardware/golden_vectors.h"
#include "polar/design.h"
#include "polar/design_json.h"

namespace frostline::cli {

// What stands in a folder of golden vectors, or will.
struct VectorSet {
  const Design& design;
  Arithmetic arithmetic;
  unsigned list;
  std::uint64_t seed;
  std::vector<GoldenCase> cases;
  const MetricWeights* weights;  // of a list in planes
  bool messages;                 // whether the messages of all levels are written
};

// Makes the folder where it is missing and writes all files, the manifest last. Throws InputError.
void write_vectors(const VectorSet& set, const std::string& folder);

// "messages-level-3.hex".
std::string message_file_name(unsigned level);
constexpr const char* kManifestName = "manifest.json";
constexpr const char* kOutputName = "decoder-output.hex";
constexpr const char* kDecisionsName = "u-decisions.hex";

// vectors --check DIR --answers FILE. Returns the exit status.
int run_vectors_check(const std::vector<std::string>& arguments);

}  // namespace frostline::cli
