// libFuzzer's entry to the target that the build names.
#include "tests/fuzz/targets.h"

extern "C" int LLVMFuzzerTestOneInput(const std::uint8_t* data, std::size_t size) {
  frostline::fuzz::FROSTLINE_FUZZ_TARGET(data, size);
  return 0;
}
