// How a caller follows long work, and stops it.
#pragma once

#include <atomic>
#include <cstdint>
#include <functional>

namespace frostline {

// How the caller follows and stops long work.
struct RunControl {
  std::function<void(std::uint64_t done, std::uint64_t total)> progress;  // in blocks
  const std::atomic<bool>* stop = nullptr;  // when true: Interrupted is thrown soon after

  bool stopped() const { return stop != nullptr && stop->load(std::memory_order_relaxed); }
};

}  // namespace frostline
