#include "netlists/parallel.h"

#include <algorithm>
#include <atomic>
#include <exception>
#include <limits>
#include <mutex>
#include <thread>
#include <vector>

namespace netlists {

void in_parallel(int count, int threads, const std::function<void(int)>& work) {
  std::atomic<int> next{0};
  std::mutex guard;
  int failed = std::numeric_limits<int>::max();
  std::exception_ptr error;
  const auto run = [&] {
    for (int i = next++; i < count; i = next++) {
      try {
        work(i);
      } catch (...) {
        const std::lock_guard lock(guard);
        if (i < failed) {
          failed = i;
          error = std::current_exception();
        }
      }
    }
  };
  std::vector<std::thread> others;
  for (int t = 1; t < std::min(threads, count); ++t) others.emplace_back(run);
  run();
  for (std::thread& other : others) other.join();
  if (error) std::rethrow_exception(error);
}

int machine_threads() { return std::max(1, static_cast<int>(std::thread::hardware_concurrency())); }

}  // namespace netlists
