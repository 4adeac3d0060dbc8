// The fuzzers' targets on fixed inputs, so that every run of the tests does what a fuzzer does.
#include <gtest/gtest.h>

#include <string>
#include <vector>

#include "polar/random.h"
#include "tests/fuzz/targets.h"

namespace frostline {
namespace {

std::vector<std::uint8_t> random_input(RandomStream& random, std::size_t longest) {
  std::vector<std::uint8_t> bytes(random.below(longest + 1));
  for (std::uint8_t& byte : bytes) byte = static_cast<std::uint8_t>(random.next());
  return bytes;
}

TEST(FuzzTargets, LaneDecoderKeepsItsPromiseOnRandomInput) {
  RandomStream random(1, "fuzz targets", 0);
  for (int k = 0; k < 150; ++k) {
    const auto input = random_input(random, 4000);
    fuzz::lane_decoder(input.data(), input.size());
  }
}

TEST(FuzzTargets, MessagesKeepTheirsOnRandomInput) {
  RandomStream random(2, "fuzz targets", 0);
  for (int k = 0; k < 2000; ++k) {
    const auto input = random_input(random, k % 2 == 0 ? 12 : 300);
    fuzz::message(input.data(), input.size());
  }
}

TEST(FuzzTargets, TextsKeepTheirsOnRandomInput) {
  RandomStream random(3, "fuzz targets", 0);
  for (int k = 0; k < 500; ++k) {
    auto input = random_input(random, 100);
    // Something that looks a little like JSON.
    static const char kLetters[] = "{}[]\",:0123456789.eE-+ truefalsenull\\u";
    for (std::uint8_t& byte : input) byte = static_cast<std::uint8_t>(kLetters[byte % 38]);
    fuzz::design_file(input.data(), input.size());
    fuzz::receipt(input.data(), input.size());
    fuzz::verdict(input.data(), input.size());
  }
}

}  // namespace
}  // namespace frostline
