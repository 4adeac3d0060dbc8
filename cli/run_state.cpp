#include "cli/run_state.h"

#include <unistd.h>

#include <csignal>
#include <cstdio>

namespace frostline::cli {
namespace {

std::atomic<bool> stop_requested{false};
static_assert(std::atomic<bool>::is_always_lock_free, "a signal handler writes it");

void request_stop(int) { stop_requested.store(true, std::memory_order_relaxed); }

constexpr int kStopSignals[] = {SIGINT, SIGTERM, SIGHUP};

using Seconds = std::chrono::duration<double>;

}  // namespace

RunState::RunState(std::string label, double bits_per_block, bool quiet, std::string unit)
    : label_(std::move(label)),
      bits_per_block_(bits_per_block),
      unit_(std::move(unit)),
      shows_(!quiet && isatty(STDERR_FILENO) != 0),
      start_(std::chrono::steady_clock::now()),
      last_(start_) {
  stop_requested = false;
  for (const int each : kStopSignals) std::signal(each, request_stop);
}

RunState::~RunState() {
  for (const int each : kStopSignals) std::signal(each, SIG_DFL);
  if (shown_) std::fputs("\r\033[K", stderr);
}

RunControl RunState::control() {
  RunControl control;
  control.stop = &stop_requested;
  if (shows_) {
    control.progress = [this](std::uint64_t done, std::uint64_t total) { show(done, total); };
  }
  return control;
}

double RunState::seconds() const {
  return Seconds(std::chrono::steady_clock::now() - start_).count();
}

void RunState::show(std::uint64_t done, std::uint64_t total) {
  const auto now = std::chrono::steady_clock::now();
  if (Seconds(now - last_).count() < 0.2 && done != total) return;
  last_ = now;
  shown_ = true;
  const double elapsed = Seconds(now - start_).count();
  const double rate = elapsed > 0 ? static_cast<double>(done) / elapsed : 0;
  const double left = rate > 0 ? static_cast<double>(total - done) / rate : 0;
  const bool of_key = bits_per_block_ > 0;
  const std::string detail = detail_ ? ", " + detail_() : "";
  std::fprintf(stderr, "\r%s: %llu of %llu %s%s, %.1f %s, %.0f s left\033[K", label_.c_str(),
               static_cast<unsigned long long>(done), static_cast<unsigned long long>(total),
               unit_.c_str(), detail.c_str(), of_key ? rate * bits_per_block_ / 1e6 : rate,
               of_key ? "Mbit/s" : "a second", left);
  std::fflush(stderr);
}

}  // namespace frostline::cli
