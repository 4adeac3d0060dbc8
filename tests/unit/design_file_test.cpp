// The design's file: the same bytes for the same design, strict reading, and digests that cover
// what they should.
#include <gtest/gtest.h>

#include <functional>

#include "polar/design.h"
#include "polar/design_json.h"
#include "polar/digest.h"
#include "polar/error.h"
#include "tests/support/random_bits.h"

namespace frostline {
namespace {

std::string error_of(const std::function<void()>& act) {
  try {
    act();
  } catch (const InputError& error) {
    return error.what();
  }
  return "no error";
}

// A design with something in every place that a file has.
Design example() {
  Design design{{testing::weight_frozen_set(BlockLength(64), 20), Precoding::state8, 11},
                0.0213,
                {"gaussian", {{"exact_levels", std::int64_t{6}}, {"note", std::string("\"x\"\n")}}},
                8,
                Arithmetic::integer_of(6, 8),
                std::vector<std::uint32_t>{63, 61},
                {0.123456789012345, "trial", std::make_pair(0.11, 0.13), std::uint64_t{1000}},
                {{"fer", 0.1}, {"frozen", std::int64_t{20}}, {"mask", std::string("user")}},
                std::uint64_t{42}};
  const FrozenSet& frozen = design.code.frozen;
  EXPECT_FALSE(frozen.is_frozen(63) || frozen.is_frozen(61));
  return design;
}

// The file without white space between its tokens and without its last key: what sha256 covers.
// Done on the text, so that no JSON library judges itself.
std::string covered_text(const std::string& file) {
  std::string text;
  bool in_string = false;
  for (std::size_t i = 0; i < file.size(); ++i) {
    if (file[i] == '"' && (i == 0 || file[i - 1] != '\\')) in_string = !in_string;
    if (in_string || (file[i] != ' ' && file[i] != '\n')) text += file[i];
  }
  return text.substr(0, text.find(",\"sha256\":")) + "}";
}

// Changes one value and makes sha256 fit again, so that the check behind it is seen.
std::string error_after(const std::function<void(Json&)>& change) {
  Json root = Json::parse(design_to_json(example()));
  root.erase("sha256");
  change(root);
  root["sha256"] = to_hex(sha256(root.dump()));
  return error_of([&] { design_from_json(root.dump(2), "d"); });
}

TEST(DesignFile, IsReadBackAsItWasWritten) {
  const Design design = example();
  const std::string text = design_to_json(design);
  const Design again = design_from_json(text, "d");
  EXPECT_EQ(again.code.frozen, design.code.frozen);
  EXPECT_EQ(again.code.precoding, design.code.precoding);
  EXPECT_EQ(again.code.check_bits, design.code.check_bits);
  EXPECT_EQ(again.qber, design.qber);
  EXPECT_EQ(again.construction.name, design.construction.name);
  EXPECT_EQ(again.construction.parameters, design.construction.parameters);
  EXPECT_EQ(again.list, design.list);
  EXPECT_EQ(again.arithmetic, design.arithmetic);
  EXPECT_EQ(again.reveal_order, design.reveal_order);
  EXPECT_EQ(again.predicted.fer, design.predicted.fer);
  EXPECT_EQ(again.predicted.kind, design.predicted.kind);
  EXPECT_EQ(again.predicted.interval, design.predicted.interval);
  EXPECT_EQ(again.predicted.blocks, design.predicted.blocks);
  EXPECT_EQ(again.options, design.options);
  EXPECT_EQ(again.seed, design.seed);
  EXPECT_EQ(design_to_json(again), text);
}

TEST(DesignFile, OfLittleIsReadBackToo) {
  Design design = example();
  design.reveal_order.reset();
  design.predicted = {std::nullopt, "order-only", std::nullopt, std::nullopt};
  design.options.clear();
  design.seed.reset();
  const std::string text = design_to_json(design);
  EXPECT_EQ(design_to_json(design_from_json(text, "d")), text);
}

TEST(DesignFile, HasTheKeysOfTheFormatInItsOrder) {
  const std::string text = design_to_json(example());
  EXPECT_EQ(text.back(), '\n');
  const Json root = Json::parse(text);
  std::vector<std::string> keys;
  for (const auto& [key, value] : root.items()) keys.push_back(key);
  EXPECT_EQ(keys, (std::vector<std::string>{"format", "version", "block_length", "qber",
                                            "construction", "decoder", "frozen_count", "frozen_hex",
                                            "precoding", "check_bits", "reveal_order", "predicted",
                                            "leakage", "provenance", "code_sha256", "sha256"}));
  EXPECT_EQ(root.at("leakage").at("bits"), 20 + 11);
}

TEST(DesignFile, CodeDigestIsThatOfTheTextOfTheFormat) {
  const Design design = example();
  const std::string text = "frostline-code 1\nblock_length 64\nfrozen_hex " +
                           design.code.frozen.to_hex() + "\nprecoding state8\ncheck_bits 11\n";
  std::array<unsigned char, crypto_hash_sha256_BYTES> digest{};
  crypto_hash_sha256(digest.data(), reinterpret_cast<const unsigned char*>(text.data()),
                     text.size());
  EXPECT_EQ(code_sha256(design.code), digest);
  EXPECT_EQ(Json::parse(design_to_json(design)).at("code_sha256"), to_hex(digest));
}

TEST(DesignFile, CodeDigestCoversWhatBothEndsShareAndNothingElse) {
  const auto digest = [](const std::function<void(Design&)>& change) {
    Design design = example();
    change(design);
    return std::string(Json::parse(design_to_json(design)).at("code_sha256"));
  };
  const std::string same = digest([](Design&) {});
  EXPECT_EQ(digest([](Design& d) { d.qber = 0.03; }), same);
  EXPECT_EQ(digest([](Design& d) { d.construction = {"user-mask", {}}; }), same);
  EXPECT_EQ(digest([](Design& d) { d.list = 1; }), same);
  EXPECT_EQ(digest([](Design& d) { d.arithmetic = Arithmetic::exact(); }), same);
  EXPECT_EQ(digest([](Design& d) { d.reveal_order.reset(); }), same);
  EXPECT_EQ(digest([](Design& d) { d.predicted.fer = 0.5; }), same);
  EXPECT_EQ(digest([](Design& d) { d.options.clear(); }), same);
  EXPECT_EQ(digest([](Design& d) { d.seed = 43; }), same);

  EXPECT_NE(digest([](Design& d) { d.code.check_bits = 16; }), same);
  EXPECT_NE(digest([](Design& d) { d.code.precoding = Precoding::none; }), same);
  for (std::size_t i = 0; i < 64; ++i) {
    if (i == 61 || i == 63) continue;  // in the reveal order
    EXPECT_NE(digest([&](Design& d) {
                BitString mask = d.code.frozen.mask();
                mask.flip(i);
                d.code.frozen = FrozenSet(BlockLength(64), mask);
              }),
              same)
        << "index " << i;
  }
}

TEST(DesignFile, EditDigestIsThatOfTheRestOfTheFile) {
  const std::string text = design_to_json(example());
  const std::string digest = Json::parse(text).at("sha256");
  EXPECT_EQ(digest, to_hex(sha256(covered_text(text))));
}

TEST(DesignFile, AnyEditIsSeen) {
  const std::string text = design_to_json(example());
  std::size_t seen = 0;
  for (std::size_t i = 0; i < text.size(); ++i) {
    // Every digit and letter in turn; white space may change.
    if (std::isalnum(static_cast<unsigned char>(text[i])) == 0) continue;
    std::string edited = text;
    edited[i] = text[i] == '1' ? '2' : '1';
    EXPECT_NE(error_of([&] { design_from_json(edited, "d"); }), "no error") << "byte " << i;
    ++seen;
  }
  EXPECT_GT(seen, 500U);
  std::string spread = text;
  spread.insert(1, "\n\n   ");
  EXPECT_EQ(error_of([&] { design_from_json(spread, "d"); }), "no error");
}

TEST(DesignFile, WhatDoesNotFitIsRefusedEvenUnderAFittingDigest) {
  EXPECT_EQ(error_after([](Json&) {}), "no error");
  EXPECT_EQ(error_after([](Json& d) { d["format"] = "design"; }), "d: not a frostline design");
  EXPECT_EQ(error_after([](Json& d) { d["version"] = 2; }),
            "d: another version of the design format; this program reads version 1");
  EXPECT_EQ(error_after([](Json& d) { d["note"] = 1; }), "d: unknown key 'note'");
  EXPECT_EQ(error_after([](Json& d) { d.erase("qber"); }), "d: key 'qber' is missing");
  EXPECT_EQ(error_after([](Json& d) { d["frozen_count"] = 21; }),
            "d: frozen_count is 21 but the mask freezes 20 indices");
  EXPECT_EQ(error_after([](Json& d) { d["frozen_count"] = "20"; }),
            "d: 'frozen_count' is not a whole number from 0 up");
  EXPECT_EQ(error_after([](Json& d) { d["block_length"] = 60; }),
            "d: block length 60 is not a power of two from 8 to 16777216");
  EXPECT_NE(error_after([](Json& d) { d["block_length"] = 128; }).find("hexadecimal digits"),
            std::string::npos);
  EXPECT_NE(error_after([](Json& d) { d["check_bits"] = 16; }).find("code_sha256 does not fit"),
            std::string::npos);
  EXPECT_NE(error_after([](Json& d) { d["check_bits"] = 12; }).find("12"), std::string::npos);
  EXPECT_NE(error_after([](Json& d) { d["precoding"] = "state9"; }).find("state9"),
            std::string::npos);
  for (const double qber : {0.0, 0.5, 0.7, -0.1}) {
    EXPECT_NE(error_after([&](Json& d) { d["qber"] = qber; }).find("qber"), std::string::npos);
  }
  EXPECT_EQ(error_after([](Json& d) { d["qber"] = nullptr; }), "d: 'qber' is not a number");
  EXPECT_EQ(error_after([](Json& d) { d["leakage"]["bits"] = 30; }),
            "d: leakage: does not follow from the rest of the design");
  EXPECT_EQ(error_after([](Json& d) { d["leakage"]["efficiency"] = 1.5; }),
            "d: leakage: does not follow from the rest of the design");
  EXPECT_EQ(error_after([](Json& d) { d["leakage"].erase("bits"); }),
            "d: leakage: key 'bits' is missing");
  EXPECT_EQ(error_after([](Json& d) { d["decoder"]["list"] = 3; }),
            "d: decoder: list size 3 is not a power of two from 1 to 128");
  EXPECT_NE(error_after([](Json& d) { d["decoder"]["arithmetic"] = "planes:9"; }).find("planes:9"),
            std::string::npos);
  EXPECT_EQ(error_after([](Json& d) { d["predicted"]["kind"] = "guess"; }),
            "d: predicted: unknown kind 'guess'");
  EXPECT_EQ(error_after([](Json& d) { d["predicted"]["fer"] = 1.5; }),
            "d: predicted: a FER outside 0 .. 1");
  EXPECT_EQ(error_after([](Json& d) { d["predicted"]["interval"] = 1; }),
            "d: predicted: 'interval' is not a pair of numbers");
  EXPECT_NE(error_after([](Json& d) {
              d["reveal_order"] = {63, 63};
            }).find("index 63"),
            std::string::npos);
  EXPECT_NE(error_after([](Json& d) { d["reveal_order"] = {0}; }).find("index 0"),
            std::string::npos);
  EXPECT_NE(error_after([](Json& d) { d["reveal_order"] = {64}; }).find("no index"),
            std::string::npos);
  EXPECT_NE(error_after([](Json& d) { d["construction"] = "gaussian"; }).find("construction"),
            std::string::npos);
  EXPECT_NE(error_after([](Json& d) { d["provenance"]["options"] = 1; }).find("provenance"),
            std::string::npos);
}

TEST(DesignFile, WhatIsNoDesignIsToldByName) {
  for (const std::string text : {"", " ", "{", "{}", "[]", "null", "3", "{\"format\": 1}"}) {
    EXPECT_EQ(error_of([&] { design_from_json(text, "some.json"); }).rfind("some.json: ", 0), 0U)
        << text;
  }
  std::string text = design_to_json(example());
  EXPECT_NE(error_of([&] { design_from_json(text + "{}", "d"); }).find("d: not JSON"),
            std::string::npos);
  EXPECT_NE(
      error_of([&] { design_from_json(text.substr(0, text.size() - 3), "d"); }).find("d: not JSON"),
      std::string::npos);
  EXPECT_EQ(error_of([&] { design_from_json("{\"version\": 1e999}", "d"); }),
            "d: a number is too large");
  text.insert(text.find("\"qber\""), "\"qber\": 0.4,\n  ");
  EXPECT_EQ(error_of([&] { design_from_json(text, "d"); }), "d: key 'qber' stands twice");
}

// An error of a part that knows no files gets the name in front, however the name begins.
TEST(DesignFile, ErrorsCarryTheNameOfTheFile) {
  Json root = Json::parse(design_to_json(example()));
  root["block_length"] = 60;
  EXPECT_EQ(error_of([&] { design_from_json(root.dump(), "block"); }).rfind("block: block", 0), 0U);
}

}  // namespace
}  // namespace frostline
