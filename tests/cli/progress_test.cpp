#include "cli/progress.h"

#include <gtest/gtest.h>

namespace lagscape {
namespace {

TEST(Progress, TellsCellsPerSecondAndTheTimeLeft) {
  EXPECT_EQ(progress_words(0, 64800, 0), "0 of 64 800 cells");
  EXPECT_EQ(progress_words(16200, 64800, 5), "16 200 of 64 800 cells, 3 240 cells/s, 15 s left");
  EXPECT_EQ(progress_words(64800, 64800, 20), "64 800 of 64 800 cells, 3 240 cells/s");
}

TEST(Progress, IsSilentUnlessShown) {
  testing::internal::CaptureStderr();
  {
    ProgressLine line(false);
    line.update(1, 2, 1);
    line.clear();
  }
  EXPECT_EQ(testing::internal::GetCapturedStderr(), "");
}

TEST(Progress, WipesItsLineBeforeAnythingElseIsPrinted) {
  testing::internal::CaptureStderr();
  {
    ProgressLine line(true);
    line.update(1, 2, 1);
  }
  const std::string words = progress_words(1, 2, 1);
  EXPECT_EQ(testing::internal::GetCapturedStderr(), "\r" + words + "\r" + std::string(words.size(), ' ') + "\r");
}

}  // namespace
}  // namespace lagscape
