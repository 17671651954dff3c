#include "netlists/parallel.h"

#include <gtest/gtest.h>

#include <stdexcept>
#include <string>
#include <vector>

namespace netlists {
namespace {

TEST(InParallel, DoesEachPieceOnce) {
  for (const int threads : {1, 2, 7}) {
    std::vector<int> done(1000, 0);
    in_parallel(1000, threads, [&](int i) { ++done[i]; });
    EXPECT_EQ(done, std::vector<int>(1000, 1)) << threads;
  }
  in_parallel(0, 4, [](int) { FAIL() << "nothing to do"; });
}

TEST(InParallel, ThrowsWhatTheFirstPieceThrew) {
  for (const int threads : {1, 3}) {
    try {
      in_parallel(100, threads, [](int i) {
        if (i >= 20) throw std::runtime_error(std::to_string(i));
      });
      FAIL() << "nothing thrown";
    } catch (const std::runtime_error& error) {
      EXPECT_STREQ(error.what(), "20");
    }
  }
}

}  // namespace
}  // namespace netlists
