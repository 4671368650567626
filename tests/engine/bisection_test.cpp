// Brackets by counts alone: negative stiffness without mass leaves K + tau M definite for no tau, so that
// there is nothing to take residuals from.
#include <gtest/gtest.h>

#include <cmath>

#include "model_files.hpp"

namespace stanchion::test {
namespace {

/// One value of a diagonal pencil lies between `from` and `to`.
void expect_one(const std::vector<double>& stiffness, const std::vector<double>& mass, double from, double to,
                double value) {
  ModelFiles files;
  Request request = diagonal_pencil(files, stiffness, mass);
  request.bracket.from = from;
  request.bracket.to = to;
  const Outcome outcome = answer(run_bracket(request, {}));
  ASSERT_EQ(outcome.bracket->critical.size(), 1U);
  const CriticalValue& found = outcome.bracket->critical[0];
  EXPECT_EQ(found.multiplicity, 1);
  EXPECT_LE(found.low, value);
  EXPECT_GE(found.high, value);
  EXPECT_LT(found.high - found.low, 1e-7 * std::abs(value));
  EXPECT_LE(outcome.work.factorizations, 200);
}

TEST(Bisection, AValueBehindTheGeometricMiddleIsNarrowed) {
  expect_one({7102, -375758, 100, 0}, {1, 0, 1, 1}, 0.125, 7101, 100);
  expect_one({-7102, -375758, -100, 0}, {1, 0, 1, 1}, -7101, -0.125, -100);
}

TEST(Bisection, AValueInTheMiddleIsNarrowed) {
  expect_one({2, 5, -3, 5}, {0, 2, 0, 0}, 2.25, 2.75, 2.5);
}

}  // namespace
}  // namespace stanchion::test
