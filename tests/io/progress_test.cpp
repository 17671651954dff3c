#include "io/progress.h"

#include <gtest/gtest.h>

namespace {

TEST(ProgressLine, TellsStageStepsAndWhatIsLeft) {
  // A quarter took 2 s, so three quarters take 6 s.
  EXPECT_EQ(io::progress_line({"cross-sections", 6, 24}, 2.0, 80),
            "[######..................]  cross-sections, 6 of 24, about 6 s left");
  EXPECT_EQ(io::progress_line({"draws", 1, 200}, 3.0, 80),
            "[........................]  draws, 1 of 200, about 10 min left");
}

TEST(ProgressLine, SaysNothingOfWhatItCannotKnow) {
  EXPECT_EQ(io::progress_line({"draws", 0, 200}, 3.0, 80), "[........................]  draws, 0 of 200");
  EXPECT_EQ(io::progress_line({"judging", 0, 0}, 3.0, 80), "judging");
  EXPECT_EQ(io::progress_line({}, 3.0, 80), "working");
}

TEST(ProgressLine, KeepsItsWidth) {
  EXPECT_EQ(io::progress_line({"cross-sections", 6, 24}, 2.0, 40).size(), 40u);
}

TEST(Meter, CountsNoFurtherThanItsTotal) {
  netlists::Meter meter;
  meter.begin("draws", 2);
  for (int k = 0; k < 5; ++k) meter.step();
  EXPECT_EQ(meter.state().done, 2);
  meter.begin("judging", 0);
  EXPECT_EQ(meter.state().done, 0);
}

}  // namespace
