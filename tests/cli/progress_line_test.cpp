#include "cli/progress_line.hpp"

#include <gtest/gtest.h>

namespace stanchion::cli {
namespace {

TEST(ProgressLine, SaysStageShareElapsedAndExpectedTime) {
  EXPECT_EQ(progress_text("factor", 0.25, 14, 4), "factor 25 %, 14 s elapsed, about 12.0 s to go");
}

TEST(ProgressLine, ExpectsNothingBeforeItCan) {
  EXPECT_EQ(progress_text("factor", 0.01, 2, 2), "factor 1 %, 2 s elapsed");
  EXPECT_EQ(progress_text("factor", 0.5, 0, 0.1), "factor 50 %, 0 s elapsed");
}

TEST(ProgressLine, FractionsBeyondTheirRangeAreCut) {
  EXPECT_EQ(progress_text("read", 1.5, 3, 0), "read 100 %, 3 s elapsed");
  EXPECT_EQ(progress_text("read", -1, 3, 0), "read 0 %, 3 s elapsed");
}

}  // namespace
}  // namespace stanchion::cli
