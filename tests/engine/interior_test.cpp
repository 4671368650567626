// Values far inside a spectrum: a range is bracketed with a factor among its values, not from 0 on.
#include <gtest/gtest.h>

#include <cmath>
#include <numbers>

#include "model_files.hpp"

namespace stanchion::test {
namespace {

/// Held chain of n unit springs: value k is 2 - 2 cos(k pi / (n + 1)), closed form.
double value(Index k, Index n) {
  return 2 - 2 * std::cos(k * std::numbers::pi / (n + 1));
}

double between(Index k, Index n) {
  return (value(k, n) + value(k + 1, n)) / 2;
}

/// `copies` chains that do not touch: every value `copies` times.
SymmetricMatrix chains(Index n, Index copies) {
  std::vector<Triplet> entries;
  for (Index c = 0; c < copies; ++c) {
    for (Index i = 0; i < n; ++i) {
      entries.push_back({c * n + i, c * n + i, 2});
      if (i > 0) entries.push_back({c * n + i, c * n + i - 1, -1});
    }
  }
  return from_triplets(n * copies, entries);
}

struct Interior {
  Index rows = 500, copies = 1, first = 100, last = 120;
  Pencil pencil = Pencil::kMass;
  double sign = 1;  ///< of the factors
};

void bracket_inside(const Interior& asked) {
  ModelFiles files;
  const Index n = asked.rows, all = n * asked.copies;
  Request request;
  request.pencil = asked.pencil;
  request.threads = 2;
  request.input.stiffness = files.matrix("K.mtx", chains(n, asked.copies));
  const bool factors = asked.pencil == Pencil::kGeometric;
  const std::string second = files.matrix(
      "B.mtx", diagonal(std::vector<double>(static_cast<std::size_t>(all), factors ? -asked.sign : 1.0)));
  (factors ? request.input.geometric : request.input.mass) = second;
  request.bracket.unit = factors ? ValueUnit::kFactor : ValueUnit::kOmega2;
  const double near = asked.sign * between(asked.first - 1, n), far = asked.sign * between(asked.last, n);
  request.bracket.from = std::min(near, far);
  request.bracket.to = std::max(near, far);
  const Outcome outcome = answer(run_bracket(request, {}));
  ASSERT_TRUE(outcome.bracket && outcome.bracket->complete);
  const Index many = asked.last - asked.first + 1;
  EXPECT_EQ(outcome.bracket->complete->count, many * asked.copies);
  ASSERT_EQ(outcome.bracket->critical.size(), static_cast<std::size_t>(many));
  for (Index k = 0; k < many; ++k) {
    const auto at = static_cast<std::size_t>(asked.sign > 0 ? k : many - 1 - k);
    const CriticalValue& found = outcome.bracket->critical[at];
    const double exact = asked.sign * value(asked.first + k, n);
    EXPECT_LE(found.low, exact + 1e-15) << k;
    EXPECT_GE(found.high, exact - 1e-15) << k;
    EXPECT_LE(found.high - found.low, 1e-8 * std::fabs(exact)) << k;
    EXPECT_EQ(found.multiplicity, asked.copies) << k;
    EXPECT_EQ(found.proof, "residual") << k;
  }
  EXPECT_LE(outcome.work.factorizations, 12);
  EXPECT_FALSE(warned(outcome, "residuals-not-enough"));
}

TEST(Interior, TheHundredthToTheHundredAndTwentiethCostAHandful) {
  bracket_inside({});
}

TEST(Interior, DoubleValuesKeepTheirMultiplicity) {
  bracket_inside({.rows = 300, .copies = 2, .first = 80, .last = 90});
}

TEST(Interior, FactorsOfEitherSign) {
  bracket_inside({.pencil = Pencil::kGeometric});
  bracket_inside({.pencil = Pencil::kGeometric, .sign = -1});
}

}  // namespace
}  // namespace stanchion::test
