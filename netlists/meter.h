// How far slow work has come, for whoever shows it.
#pragma once

#include <atomic>

namespace netlists {

/// Counts the steps of one stage of work after the other. The work writes it from any thread, a progress bar
/// reads it; nothing that is computed depends on it, so it is no argument of what computes. One a process.
class Meter {
 public:
  struct State {
    const char* stage = "";  // "" before the first
    int done = 0;
    int total = 0;  // 0: not known
  };

  /// `stage` must outlive the meter: a literal.
  void begin(const char* stage, int total);
  void step() { done_.fetch_add(1, std::memory_order_relaxed); }
  State state() const;

 private:
  std::atomic<const char*> stage_{""};
  std::atomic<int> done_{0};
  std::atomic<int> total_{0};
};

Meter& meter();

}  // namespace netlists
