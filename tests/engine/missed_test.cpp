// Values that a block of eight vectors misses: more of them in one place than the block has vectors. Diagonal
// pencils, so that every value is known.
#include <gtest/gtest.h>

#include "model_files.hpp"

namespace stanchion::test {
namespace {

/// The first five values of K = 1 and M diagonal: `together` values of 1, the others from 2 on.
Outcome first_five(Index rows, Index together) {
  ModelFiles files;
  std::vector<double> mass(static_cast<std::size_t>(together), 1.0);
  for (Index k = together; k < rows; ++k) mass.push_back(1 / (2 + 0.1 * (k - together)));
  Request request = diagonal_pencil(files, std::vector<double>(mass.size(), 1.0), mass);
  request.threads = 2;
  request.bracket.first = 5;
  return answer(run_bracket(request, {}));
}

/// One bracket around 1 with its multiplicity.
void expect_all_at_one(const Outcome& outcome, Index together) {
  ASSERT_TRUE(outcome.bracket && outcome.bracket->complete);
  ASSERT_EQ(outcome.bracket->critical.size(), 1U);
  const CriticalValue& lowest = outcome.bracket->critical.front();
  EXPECT_LE(lowest.low, 1);
  EXPECT_GE(lowest.high, 1);
  EXPECT_LT(lowest.high - lowest.low, 1e-6);
  EXPECT_EQ(lowest.multiplicity, together);
}

// Of up to 1,024 rows the whole space is taken: 6 factorizations, by counts alone 70.
TEST(Missed, InASmallModelTheWholeSpaceShowsThem) {
  for (const Index together : {18, 22, 30}) {
    const Outcome outcome = first_five(700, together);
    expect_all_at_one(outcome, together);
    EXPECT_EQ(outcome.bracket->critical.front().proof, "residual");
    EXPECT_LE(outcome.work.factorizations, 12);
  }
}

// The end behind them was counted, and fresh random vectors find more of them each time: how many depends on
// rounding, so not all need do. By counts alone some 75 factorizations; without the second search four of
// five are counted.
TEST(Missed, BeforeACountedEndTheyAreSoughtAgain) {
  int by_residuals = 0;
  for (const Index together : {14, 18, 26, 30, 38}) {
    const Outcome outcome = first_five(1100, together);
    expect_all_at_one(outcome, together);
    by_residuals += outcome.bracket->critical.front().proof == "residual" && outcome.work.factorizations < 30;
  }
  EXPECT_GE(by_residuals, 3);
}

}  // namespace
}  // namespace stanchion::test
