// Crowds of values: many close together, which from 0 look alike and from nearby do not. Diagonal pencils, so
// that every value is known.
#include <gtest/gtest.h>

#include <algorithm>
#include <cmath>

#include "model_files.hpp"

namespace stanchion::test {
namespace {

constexpr Index kRows = 4000;

/// Values of a diagonal pencil: a crowd at `start`, the first 20 of it 1.5 % wide, more of it behind them,
/// and as many as are left up to fifty times as far out.
std::vector<double> crowd(double start, Index many) {
  std::vector<double> values;
  for (Index k = 0; k < many; ++k) {
    const double along = static_cast<double>(k) / many;
    values.push_back(start * (k < many / 4 ? 1 + 0.00075 * k : 1.2 + 50 * along * along));
  }
  return values;
}

struct Asked {
  Pencil pencil = Pencil::kGeometric;
  Side side = Side::kPositive;
  std::optional<Index> first = std::nullopt;
  double from = 0, to = 0;
  std::optional<Offset> memory_cap = std::nullopt;
};

Outcome bracket(const Asked& asked, const std::vector<double>& values) {
  const ModelFiles files;
  const auto rows = values.size();
  std::vector<double> second(rows);
  for (std::size_t k = 0; k < rows; ++k)
    second[k] = (asked.pencil == Pencil::kGeometric ? -2 : 2) / values[(k * 1237) % rows];
  Request request;
  request.pencil = asked.pencil;
  request.threads = 2;
  request.input.stiffness = files.matrix("K.mtx", diagonal(std::vector<double>(rows, 2.0)));
  (asked.pencil == Pencil::kGeometric ? request.input.geometric : request.input.mass) =
      files.matrix("second.mtx", diagonal(second));
  request.bracket.unit = asked.pencil == Pencil::kGeometric ? ValueUnit::kFactor : ValueUnit::kOmega2;
  request.bracket.side = asked.side;
  request.bracket.first = asked.first;
  if (!asked.first) {
    request.bracket.from = asked.from;
    request.bracket.to = asked.to;
  }
  request.memory_cap_bytes = asked.memory_cap;
  return answer(run_bracket(request, {}));
}

/// One bracket for each of `expected`, ascending, narrow, from few factorizations.
void expect_values(const Outcome& outcome, std::vector<double> expected, Index most = 11) {
  std::sort(expected.begin(), expected.end());
  ASSERT_TRUE(outcome.bracket && outcome.bracket->complete);
  EXPECT_EQ(outcome.bracket->complete->count, static_cast<Index>(expected.size()));
  ASSERT_EQ(outcome.bracket->critical.size(), expected.size());
  for (std::size_t k = 0; k < expected.size(); ++k) {
    const CriticalValue& found = outcome.bracket->critical[k];
    const double room = 1e-14 * std::fabs(expected[k]);
    EXPECT_LE(found.low, expected[k] + room);
    EXPECT_GE(found.high, expected[k] - room);
    EXPECT_LT(found.high - found.low, 1e-8 * std::fabs(expected[k]));
    EXPECT_EQ(found.multiplicity, 1);
    EXPECT_STREQ(found.proof.data(), "residual");
  }
  EXPECT_LE(outcome.work.factorizations, most);
}

std::vector<double> first_of(std::vector<double> values, Index many) {
  std::sort(values.begin(), values.end(), [](double a, double b) { return std::fabs(a) < std::fabs(b); });
  values.resize(static_cast<std::size_t>(many));
  return values;
}

/// A crowd on either side of 0, the other one a little farther out.
std::vector<double> two_crowds() {
  std::vector<double> values = crowd(40, kRows / 2);
  for (const double value : crowd(-40.07, kRows / 2)) values.push_back(value);
  return values;
}

TEST(Crowd, EigenvaluesOfAMassTakeFewFactorizations) {
  const std::vector<double> values = crowd(40, kRows);
  const Outcome outcome = bracket({.pencil = Pencil::kMass, .first = 20}, values);
  expect_values(outcome, first_of(values, 20));
  EXPECT_EQ(outcome.bracket->complete->from, 0);
}

TEST(Crowd, OnBothSidesTheNearestAreFound) {
  const std::vector<double> values = two_crowds();
  const Outcome outcome = bracket({.side = Side::kBoth, .first = 20}, values);
  expect_values(outcome, first_of(values, 20));
  EXPECT_EQ(outcome.bracket->complete->from, -outcome.bracket->complete->to);
}

TEST(Crowd, ARangeAroundZeroTakesEachSideFromItsOwnBase) {
  const std::vector<double> values = two_crowds();
  const Outcome outcome = bracket({.from = -40.295, .to = 40.285}, values);
  std::vector<double> inside;
  for (const double value : values) {
    if (value > -40.295 && value < 40.285) inside.push_back(value);
  }
  ASSERT_EQ(inside.size(), 18u);
  expect_values(outcome, inside, 12);  // two offsets at either end, two bases with a proof each
}

TEST(Crowd, OnTheOtherSideFewAndNoCrowd) {
  std::vector<double> values = crowd(-40, kRows);
  for (const int k : {1, 2, 3}) values[static_cast<std::size_t>(k)] = 39.5 + k;
  const Outcome outcome = bracket({.side = Side::kBoth, .first = 20}, values);
  expect_values(outcome, first_of(values, 20));
}

}  // namespace
}  // namespace stanchion::test
