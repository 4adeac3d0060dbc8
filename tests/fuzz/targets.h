// What the fuzzers and the tests of their fixed inputs call: each takes any bytes, and returns when
// all is as it should be. A broken promise is reported to stderr and ends the program.
#pragma once

#include <cstddef>
#include <cstdint>

namespace frostline::fuzz {

// A frozen set, lanes and difference bits: the lane decoder on every vector set gives what the
// scalar reference gives.
void lane_decoder(const std::uint8_t* data, std::size_t size);

// Text or bytes from the other end: design files, messages, receipts and verdicts are read or
// refused with InputError, and what was read reads the same when it is written again.
void design_file(const std::uint8_t* data, std::size_t size);
void message(const std::uint8_t* data, std::size_t size);
void receipt(const std::uint8_t* data, std::size_t size);
void verdict(const std::uint8_t* data, std::size_t size);

}  // namespace frostline::fuzz
