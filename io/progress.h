// A bar on the terminal for work that takes long.
#pragma once

#include <condition_variable>
#include <mutex>
#include <string>
#include <thread>

#include "netlists/meter.h"

namespace io {

/// "[######......]  cross-sections, 12 of 24, about 3 s left", at most `width` columns. `seconds` is what the
/// stage has taken so far; without a step done yet, or a number of them, nothing is said of what is left.
std::string progress_line(const netlists::Meter::State& state, double seconds, int width);

/// While it lives, shows the process's meter on standard error, from the first second on. Takes its line
/// back at the end. Does nothing where `shown` is false.
class Progress {
 public:
  Progress(bool shown, int width);
  ~Progress();
  Progress(const Progress&) = delete;
  Progress& operator=(const Progress&) = delete;

 private:
  void show(int width);

  std::mutex mutex_;
  std::condition_variable ended_;
  bool end_ = false;
  std::thread thread_;
};

}  // namespace io
