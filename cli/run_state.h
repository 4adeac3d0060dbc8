// A command while it runs: the progress line, the clock, and interruption by the user.
#pragma once

#include <chrono>
#include <functional>
#include <string>

#include "decode/exchange/run_control.h"

namespace frostline::cli {

// Turns SIGINT, SIGTERM and SIGHUP into a stop flag while it lives, and shows one progress line
// with rate and time left on stderr where that is a terminal and quiet is false.
class RunState {
 public:
  // Work in blocks of key: the progress line tells the rate in Mbit/s. Without bits_per_block work
  // in units of another kind, told as units a second.
  RunState(std::string label, double bits_per_block, bool quiet, std::string unit = "blocks");
  ~RunState();
  RunState(const RunState&) = delete;
  RunState& operator=(const RunState&) = delete;

  RunControl control();
  double seconds() const;
  // What the progress line tells besides, asked for anew each time it is shown.
  void tell(std::function<std::string()> detail) { detail_ = std::move(detail); }

 private:
  void show(std::uint64_t done, std::uint64_t total);

  std::string label_;
  double bits_per_block_;
  std::string unit_;
  std::function<std::string()> detail_;
  bool shows_;
  bool shown_ = false;
  std::chrono::steady_clock::time_point start_;
  std::chrono::steady_clock::time_point last_;
};

}  // namespace frostline::cli
