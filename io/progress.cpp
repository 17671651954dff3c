#include "io/progress.h"

#include <fmt/format.h>

#include <algorithm>
#include <chrono>
#include <cstdio>
#include <cstring>

namespace io {
namespace {

using Clock = std::chrono::steady_clock;

constexpr int k_bar = 24;  // columns
constexpr std::chrono::milliseconds k_first{1000};
constexpr std::chrono::milliseconds k_again{200};

std::string duration(double seconds) {
  if (seconds < 90) return fmt::format("{:.0f} s", std::max(1.0, seconds));
  return fmt::format("{:.0f} min", seconds / 60);
}

}  // namespace

std::string progress_line(const netlists::Meter::State& state, double seconds, int width) {
  std::string text;
  if (state.total > 0) {
    const double share = static_cast<double>(state.done) / state.total;
    const auto full = static_cast<std::size_t>(share * k_bar);
    text = "[" + std::string(full, '#') + std::string(k_bar - full, '.') + "]  ";
  }
  text += *state.stage == '\0' ? "working" : state.stage;
  if (state.total > 0) text += fmt::format(", {} of {}", state.done, state.total);
  if (state.total > 0 && state.done > 0)
    text += fmt::format(", about {} left", duration(seconds * (state.total - state.done) / state.done));
  return text.substr(0, static_cast<std::size_t>(std::max(0, width)));
}

Progress::Progress(bool shown, int width) {
  if (shown) thread_ = std::thread([this, width] { show(width); });
}

Progress::~Progress() {
  if (!thread_.joinable()) return;
  {
    const std::lock_guard lock(mutex_);
    end_ = true;
  }
  ended_.notify_one();
  thread_.join();
}

void Progress::show(int width) {
  Clock::time_point since = Clock::now();
  const char* stage = "";
  bool drawn = false;
  std::unique_lock lock(mutex_);
  // The first wait is looked through in short steps too: a stage's beginning has to be seen when it happens.
  const Clock::time_point first = since + k_first;
  while (!ended_.wait_for(lock, k_again, [this] { return end_; })) {
    const netlists::Meter::State state = netlists::meter().state();
    if (std::strcmp(state.stage, stage) != 0) {
      stage = state.stage;
      since = Clock::now() - k_again;
    }
    if (Clock::now() < first) continue;
    const double seconds = std::chrono::duration<double>(Clock::now() - since).count();
    fmt::print(stderr, "\r{}\x1b[K", progress_line(state, seconds, width));
    std::fflush(stderr);
    drawn = true;
  }
  if (drawn) fmt::print(stderr, "\r\x1b[K");
}

}  // namespace io
