// Ranges whose ends lie on a value, or closer to one than residual intervals tell. K = T^T D T and G = -T^T T
// with T of integers: the values are the integers of D, whatever T is, and both matrices are exact in double
// precision.
#include <gtest/gtest.h>

#include <cmath>

#include "model_files.hpp"

namespace stanchion::test {
namespace {

/// T^T D T for D = diag(values) and T = I + 20 on the diagonal below.
SymmetricMatrix congruent(const std::vector<double>& values) {
  std::vector<Triplet> entries;
  for (std::size_t row = 0; row < values.size(); ++row) {
    const auto i = static_cast<Index>(row);
    entries.push_back({i, i, values[row]});
    if (i == 0) continue;
    entries.push_back({i - 1, i - 1, 400 * values[row]});
    entries.push_back({i, i - 1, 20 * values[row]});
  }
  return from_triplets(static_cast<Index>(values.size()), entries);
}

/// Factors 1000, 2000, 3000, each with the multiplicity given.
struct Model {
  ModelFiles files;
  Request request;

  explicit Model(Index multiplicity) {
    std::vector<double> values;
    for (Index k = 0; k < 3 * multiplicity; ++k) values.push_back(1000.0 * (1 + k / multiplicity));
    request.pencil = Pencil::kGeometric;
    request.threads = 1;
    request.input.stiffness = files.matrix("K.mtx", congruent(values));
    request.input.geometric = files.matrix("G.mtx", congruent(std::vector<double>(values.size(), -1.0)));
    request.bracket.unit = ValueUnit::kFactor;
  }
};

void expect_range(double from, double to, Index multiplicity, Index count) {
  Model model(multiplicity);
  model.request.bracket.from = from;
  model.request.bracket.to = to;
  const Outcome outcome = answer(run_bracket(model.request, {}));
  ASSERT_TRUE(outcome.bracket && outcome.bracket->complete);
  EXPECT_EQ(outcome.bracket->complete->from, from);
  EXPECT_EQ(outcome.bracket->complete->to, to);
  EXPECT_EQ(outcome.bracket->complete->count, count);
  EXPECT_FALSE(warned(outcome, "end-on-value"));
  Index sum = 0;
  for (const CriticalValue& found : outcome.bracket->critical) {
    sum += found.multiplicity;
    const double value = 1000 * std::round(found.value / 1000);
    EXPECT_STREQ(found.proof.c_str(), "residual");
    EXPECT_LE(found.low, value);
    EXPECT_GE(found.high, value);
    EXPECT_GE(found.low, from);
    EXPECT_LE(found.high, to);
  }
  EXPECT_EQ(sum, count);
  EXPECT_LE(outcome.work.factorizations, 30);  // bisection takes 170 and more
}

TEST(RangeEnds, JustBehindAValueItIsIn) {
  expect_range(0, 2000 * (1 + 1e-11), 1, 2);
}

TEST(RangeEnds, JustBeforeAValueItIsOut) {
  expect_range(0, 2000 * (1 - 1e-11), 1, 1);
}

TEST(RangeEnds, ADoubleValueIsOnOneSideAsAWhole) {
  expect_range(0, 2000 * (1 + 1e-7), 2, 4);
  expect_range(0, 2000 * (1 - 1e-7), 2, 2);
}

TEST(RangeEnds, TheSameFromBelow) {
  expect_range(2000 * (1 - 1e-11), 3500, 1, 2);
  expect_range(2000 * (1 + 1e-11), 3500, 1, 1);
}

TEST(RangeEnds, BothEndsBesideTheSameValue) {
  expect_range(2000 * (1 - 1e-11), 2000 * (1 + 1e-11), 1, 1);
}

Outcome first_of_mass(Index first, const std::vector<double>& stiffness, const std::vector<double>& mass) {
  const ModelFiles files;
  Request request;
  request.pencil = Pencil::kMass;
  request.threads = 1;
  request.input.stiffness = files.matrix("K.mtx", diagonal(stiffness));
  request.input.mass = files.matrix("M.mtx", diagonal(mass));
  request.bracket.unit = ValueUnit::kOmega2;
  request.bracket.first = first;
  return answer(run_bracket(request, {}));
}

TEST(RangeEnds, TheLowestOfAnIndefiniteStiffnessEndBelowZero) {
  const Outcome outcome = first_of_mass(1, {-3, -1, 2, 7}, {1, 1, 1, 1});
  ASSERT_TRUE(outcome.bracket && outcome.bracket->complete);
  EXPECT_EQ(outcome.bracket->complete->count, 1);
  EXPECT_GT(outcome.bracket->complete->to, -3);
  EXPECT_LT(outcome.bracket->complete->to, -1);
  EXPECT_LT(outcome.bracket->complete->from, -3);
  EXPECT_NEAR(outcome.bracket->critical.at(0).value, -3, 1e-7);
}

TEST(RangeEnds, WithAnIndefiniteMassTheFirstBeginAtZero) {
  const Outcome outcome = first_of_mass(4, {3, 1, 2, 7}, {-1, 1, 1, -1});  // values -7, -3, 1, 2
  ASSERT_TRUE(outcome.bracket && outcome.bracket->complete);
  EXPECT_EQ(outcome.bracket->complete->from, 0);
  EXPECT_EQ(outcome.bracket->complete->count, 2);
  EXPECT_TRUE(warned(outcome, "fewer-than-asked"));
}

}  // namespace
}  // namespace stanchion::test
