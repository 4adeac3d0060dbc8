#include "polar/arithmetic.h"

#include <gtest/gtest.h>

#include <string>

#include "polar/error.h"

namespace frostline {
namespace {

TEST(Arithmetic, EveryWordReadsBackAsWritten) {
  EXPECT_EQ(parse_arithmetic("exact"), Arithmetic::exact());
  EXPECT_EQ(to_string(Arithmetic::exact()), "exact");
  for (unsigned w = 2; w <= 7; ++w) {
    const Arithmetic planes = Arithmetic::planes_of(w);
    EXPECT_EQ(to_string(planes), "planes:" + std::to_string(w));
    EXPECT_EQ(parse_arithmetic(to_string(planes)), planes);
  }
  for (unsigned q = 3; q <= 15; ++q) {
    for (unsigned a = 1; a < (1U << (q - 1)); ++a) {
      const Arithmetic integer = Arithmetic::integer_of(q, a);
      ASSERT_EQ(to_string(integer), "integer:" + std::to_string(q) + ":" + std::to_string(a));
      ASSERT_EQ(parse_arithmetic(to_string(integer)), integer);
    }
  }
}

TEST(Arithmetic, OtherWordsAreRejectedInOneLine) {
  for (const char* word : {"",
                           "Exact",
                           "exact ",
                           "planes",
                           "planes:",
                           "planes:1",
                           "planes:8",
                           "planes:03",
                           "planes:3 ",
                           "planes:+3",
                           "planes:2+3",
                           "planes:99999999999",
                           "integer",
                           "integer:6",
                           "integer:6:",
                           "integer::8",
                           "integer:2:1",
                           "integer:16:1",
                           "integer:6:0",
                           "integer:6:32",
                           "integer:6:-1",
                           "integer:6:8:1",
                           "integer:15:16384",
                           "float"}) {
    try {
      parse_arithmetic(word);
      ADD_FAILURE() << "accepted '" << word << "'";
    } catch (const InputError& error) {
      EXPECT_EQ(std::string(error.what()).find('\n'), std::string::npos);
      EXPECT_NE(std::string(error.what()).find("'" + std::string(word) + "'"), std::string::npos);
    }
  }
}

}  // namespace
}  // namespace frostline
