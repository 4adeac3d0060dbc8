// Design files against their JSON Schema (draft 7), by valijson, a general-purpose validator.
#include <gtest/gtest.h>

#include <filesystem>
#include <fstream>
#include <nlohmann/json.hpp>
#include <sstream>
#include <valijson/adapters/nlohmann_json_adapter.hpp>
#include <valijson/schema.hpp>
#include <valijson/schema_parser.hpp>
#include <valijson/validator.hpp>

#include "construct/designer.h"
#include "polar/design.h"

namespace frostline {
namespace {

namespace fs = std::filesystem;
using Adapter = valijson::adapters::NlohmannJsonAdapter;

const fs::path kDesigns = fs::path(FROSTLINE_SOURCE_DIR) / "designs";

std::string contents(const fs::path& path) {
  std::ifstream file(path, std::ios::binary);
  std::ostringstream text;
  text << file.rdbuf();
  return text.str();
}

class SchemaValidator {
 public:
  SchemaValidator() : document_(nlohmann::json::parse(contents(kDesigns / "design.schema.json"))) {
    valijson::SchemaParser(valijson::SchemaParser::kDraft7)
        .populateSchema(Adapter(document_), schema_);
  }
  bool accepts(const std::string& text) const {
    const nlohmann::json value = nlohmann::json::parse(text);
    return valijson::Validator().validate(schema_, Adapter(value), nullptr);
  }

 private:
  nlohmann::json document_;
  valijson::Schema schema_;
};

std::vector<fs::path> shipped_designs() {
  std::vector<fs::path> paths;
  for (const auto& entry : fs::recursive_directory_iterator(kDesigns)) {
    const std::string name = entry.path().filename().string();
    if (name.size() > 12 && name.substr(name.size() - 12) == ".design.json") {
      paths.push_back(entry.path());
    }
  }
  return paths;
}

TEST(DesignSchema, AcceptsEveryShippedDesign) {
  const SchemaValidator validator;
  const std::vector<fs::path> paths = shipped_designs();
  EXPECT_EQ(paths.size(), 6U * 14U * 2U);
  for (const fs::path& path : paths) {
    const std::string text = contents(path);
    EXPECT_TRUE(validator.accepts(text)) << path;
    EXPECT_NO_THROW(design_from_json(text, path.string()));
  }
}

TEST(DesignSchema, AcceptsWhatTheProgramWrites) {
  const SchemaValidator validator;
  const BlockLength block_length(64);
  for (const Arithmetic& arithmetic :
       {Arithmetic::exact(), Arithmetic::planes_of(2), Arithmetic::integer_of(6, 8)}) {
    const Ranking ranking =
        rank_indices(block_length, 0.05, default_construction(arithmetic), 0.3, arithmetic);
    const Design design = make_design(ranking, {Goal::Kind::fer, 0.01, 0},
                                      {11, Precoding::state8, true}, {{"fer", 0.01}})
                              .design;
    EXPECT_TRUE(validator.accepts(design_to_json(design)));
  }
}

TEST(DesignSchema, RejectsOtherShapes) {
  const SchemaValidator validator;
  const Ranking ranking =
      rank_indices(BlockLength(64), 0.05, default_construction(Arithmetic::planes_of(3)), 0,
                   Arithmetic::planes_of(3));
  const std::string good = design_to_json(
      make_design(ranking, {Goal::Kind::frozen, 0, 32}, {11, Precoding::none, false}, {}).design);
  ASSERT_TRUE(validator.accepts(good));
  const auto with = [&](const char* key, const nlohmann::json& value) {
    nlohmann::json changed = nlohmann::json::parse(good);
    changed[key] = value;
    return changed.dump();
  };
  EXPECT_FALSE(validator.accepts(with("version", 2)));
  EXPECT_FALSE(validator.accepts(with("block_length", 1000)));
  EXPECT_FALSE(validator.accepts(with("qber", 0.5)));
  EXPECT_FALSE(validator.accepts(with("check_bits", 7)));
  EXPECT_FALSE(validator.accepts(with("frozen_hex", "f")));
  EXPECT_FALSE(validator.accepts(with("extra", 1)));
  nlohmann::json missing = nlohmann::json::parse(good);
  missing.erase("leakage");
  EXPECT_FALSE(validator.accepts(missing.dump()));
}

}  // namespace
}  // namespace frostline
