// Crowds of values: many close together, which from 0 look alike and from nearby do not. Diagonal pencils, so
// that every value is known.
#include <gtest/gtest.h>

#include <algorithm>
#include <cmath>
#include <string_view>

#include "engine/host.hpp"
#include "engine/spectral_base.hpp"
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

Outcome bracket(const Asked& asked, const std::vector<double>& values, const RunContext& context = {}) {
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
  return answer(run_bracket(request, context));
}

/// One bracket for each of `expected`, ascending and narrow.
void expect_brackets(const Outcome& outcome, std::vector<double> expected) {
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
  }
}

/// The same from few factorizations.
void expect_values(const Outcome& outcome, const std::vector<double>& expected, Index most = 11) {
  expect_brackets(outcome, expected);
  for (const CriticalValue& found : outcome.bracket->critical) EXPECT_STREQ(found.proof.data(), "residual");
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

/// Memory that is filled beyond a cap while modes are sought, at every step anew: what others have freed may
/// go back to the machine at any time.
class Ballast {
 public:
  explicit Ballast(Offset cap) : cap_(cap) {}
  RunContext context() {
    RunContext context;
    context.progress = [this](const char* stage, double) {
      if (std::string_view(stage) == "modes") fill();
      return true;
    };
    return context;
  }
  void fill() {
    constexpr Offset kBeyond = Offset{64} << 20;  // more than the vectors that make room for a base
    const Offset lacking = cap_ + kBeyond - resident_bytes();
    if (lacking > 0) pieces_.emplace_back(static_cast<std::size_t>(lacking), 1);
  }
  bool taken() const { return !pieces_.empty(); }

 private:
  Offset cap_;
  std::vector<std::vector<char>> pieces_;
};

TEST(Crowd, WithoutRoomForABaseNearItTheAnswerComesFromTheFirst) {
  const std::vector<double> values = crowd(40, 1100);
  const Offset cap = peak_resident_bytes() + (Offset{64} << 20);
  Ballast ballast(cap);
  const Outcome outcome = bracket({.first = 6, .memory_cap = cap}, values, ballast.context());
  ASSERT_TRUE(ballast.taken());
  expect_brackets(outcome, first_of(values, 6));
  EXPECT_GT(outcome.work.factorizations, 7);  // not from near it, which takes 5
}

TEST(Crowd, ABaseIsRefusedWhereWhatIsInUseLeavesNoRoom) {
  const ModelFiles files;
  Request request;
  request.pencil = Pencil::kGeometric;
  request.input.stiffness = files.matrix("K.mtx", diagonal({2, 2, 2}));
  request.input.geometric = files.matrix("G.mtx", diagonal({-1, -0.5, -0.25}));
  request.memory_cap_bytes = peak_resident_bytes() + (Offset{64} << 20);
  ThreadPool pool(1);
  const RunContext context;
  Outcome outcome = begin_outcome("bracket", request, Question::kBracket);
  auto model = read_model(request, context, pool, outcome);
  ASSERT_TRUE(model.ok());
  PencilCounter counter(request, context, pool, outcome);
  ASSERT_TRUE(counter.prepare(std::move(*model)).ok());
  ASSERT_TRUE(counter.judge().ok());
  auto roomy = base_at(counter, 1.5, pool, outcome);
  ASSERT_TRUE(roomy.ok());
  EXPECT_TRUE(roomy->has_value());
  Ballast ballast(*request.memory_cap_bytes);
  ballast.fill();
  auto refused = base_at(counter, 1.5, pool, outcome);
  ASSERT_TRUE(refused.ok());
  EXPECT_FALSE(refused->has_value());
}

}  // namespace
}  // namespace stanchion::test
