// Counts, sweeps, brackets and audits of structures on constraints, and of what --digits, --resolution and
// --precision ask for.
#include <gtest/gtest.h>

#include "model_files.hpp"

namespace stanchion::test {
namespace {

/// diag(k1, 3, 5) with u1 = u2 held by multiplier 4 (`times` times over). On u1 = u2 = w, u3 (by hand):
/// diag((k1 + 3) / 2, 5) in unit vectors, so with G = -I or M = I the values are (k1 + 3) / 2 and 5.
SymmetricMatrix tied(double first, Index times = 1) {
  std::vector<Triplet> entries{{0, 0, first}, {1, 1, 3}, {2, 2, 5}};
  for (Index m = 0; m < times; ++m) entries.insert(entries.end(), {{3 + m, 0, 1}, {3 + m, 1, -1}});
  return from_triplets(3 + times, entries);
}

Request tied_request(const ModelFiles& files, Pencil pencil, double first, Index times = 1) {
  Request request;
  request.input.stiffness = files.matrix("K.mtx", tied(first, times));
  request.pencil = pencil;
  std::vector<double> second(static_cast<std::size_t>(3 + times), 0.0);
  std::fill(second.begin(), second.begin() + 3, pencil == Pencil::kMass ? 1.0 : -1.0);
  const std::string path = files.matrix("B.mtx", diagonal(second));
  (pencil == Pencil::kMass ? request.input.mass : request.input.geometric) = path;
  request.input.multipliers = files.text("m.csv", times == 1 ? "4\n" : "4\n5\n");
  const ValueUnit unit = pencil == Pencil::kMass ? ValueUnit::kOmega2 : ValueUnit::kFactor;
  request.bracket.unit = request.audit.unit = unit;
  return request;
}

void expect_value(const CriticalValue& found, double exact) {
  EXPECT_LE(found.low, exact);
  EXPECT_GE(found.high, exact);
  EXPECT_LT(found.high - found.low, 1e-6);
  EXPECT_EQ(found.multiplicity, 1);
}

TEST(Constrained, CountsAreOfTheStructureOnItsConstraints) {
  for (const Pencil pencil : {Pencil::kGeometric, Pencil::kMass}) {
    for (const double first : {2.0, -1.0}) {  // K itself not definite, but on the constraints
      ModelFiles files;
      Request request = tied_request(files, pencil, first);
      const double low = (first + 3) / 2;
      request.shifts = {low * 0.99, low * 1.01, 5.01};
      const Outcome outcome = answer(run_count(request, {}));
      for (Index k = 0; k < 3; ++k) {
        const ShiftCount& count = outcome.count->counts[static_cast<std::size_t>(k)];
        EXPECT_EQ(count.below, k);
        EXPECT_NE(count.meaning.find("on its constraints"), std::string::npos) << count.meaning;
      }
      for (const std::string& sentence : outcome.count->sentences)
        EXPECT_EQ(sentence.find("K + f G is positive definite"),
                  sentence.find("On its") == 0 ? 19U : std::string::npos);
    }
  }
}

TEST(Constrained, SweepsBracketsAndAuditsToo) {
  for (const Pencil pencil : {Pencil::kGeometric, Pencil::kMass}) {
    ModelFiles files;
    Request request = tied_request(files, pencil, 2);
    request.bracket.first = 2;
    const Outcome bracket = answer(run_bracket(request, {}));
    ASSERT_EQ(bracket.bracket->critical.size(), 2U);
    expect_value(bracket.bracket->critical[0], 2.5);
    expect_value(bracket.bracket->critical[1], 5);
    request.sweep = {.from = 1, .to = 6, .points = 3, .geometric = false, .refine = true, .width = 1e-3};
    EXPECT_EQ(answer(run_sweep(request, {})).sweep->jumps.size(), 2U);
    request.audit.values = files.text("l.csv", "value\n2.5\n5\n");
    EXPECT_EQ(answer(run_audit(request, {})).audit->verdict, AuditVerdict::kComplete);
    request.audit.values = files.text("s.csv", "value\n5\n");
    EXPECT_EQ(answer(run_audit(request, {})).audit->verdict, AuditVerdict::kMissing);
  }
}

TEST(Constrained, ARepeatedConstraintLeavesARange) {
  // The second constraint repeats the first: K + f G is singular at every f, K - s M at every s.
  ModelFiles files;
  Request request = tied_request(files, Pencil::kGeometric, 2, 2);
  request.shifts = {3};
  const Outcome outcome = answer(run_count(request, {}));
  EXPECT_NE(outcome.count->counts[0].meaning.find("negative directions"), std::string::npos);
  ModelFiles more;
  request = tied_request(more, Pencil::kMass, 2, 2);
  request.shifts = {3};
  const Outcome mass = answer(run_count(request, {}));
  EXPECT_FALSE(mass.count->counts[0].below);
  const auto [least, most] = mass.count->counts[0].below_range;
  EXPECT_LE(least, 1);
  EXPECT_GE(most, 1);
}

TEST(Constrained, AMassOnTheMultipliersIsSaid) {
  ModelFiles files;
  Request request = tied_request(files, Pencil::kMass, 2);
  request.input.mass = files.matrix("C.mtx", diagonal({1, 1, 1, 1}));
  request.shifts = {3};
  EXPECT_TRUE(warned(answer(run_count(request, {})), "multipliers-coupled"));
}

/// Options that bear on counts reach every command: the same answers, with what the option adds.
TEST(CountOptions, DigitsResolutionAndPrecisionReachSweepBracketAndAudit) {
  ModelFiles files;
  Request request;
  request.input.stiffness = files.matrix("K.mtx", spring_chain(12, 2));
  request.input.geometric = files.matrix("G.mtx", diagonal(std::vector<double>(12, -1.0)));
  request.pencil = Pencil::kGeometric;
  request.bracket.first = 1;
  request.bracket.width = 1e-4;
  request.audit.values = files.text("l.csv", "value,tolerance\n0.058116365,1e-4\n");
  request.sweep = {.from = 0.01, .to = 0.1, .points = 2, .geometric = false, .refine = false, .width = 1e-3};
  const double exact = 0.058116365147896;  // 2 - 2 cos(pi / 13), closed form
  const auto ask = [&](const Request& asked, bool extended) {
    const Outcome bracket = answer(run_bracket(asked, {}));
    ASSERT_EQ(bracket.bracket->critical.size(), 1U);
    EXPECT_LE(bracket.bracket->critical[0].low, exact + 1e-11);
    EXPECT_GE(bracket.bracket->critical[0].high, exact - 1e-11);
    EXPECT_EQ(bracket.bracket->critical[0].proof, "counts");
    EXPECT_EQ(answer(run_audit(asked, {})).audit->verdict, AuditVerdict::kComplete);
    const Outcome sweep = answer(run_sweep(asked, {}));
    ASSERT_EQ(sweep.count->counts.size(), 2U);
    EXPECT_EQ(sweep.count->counts[1].below, 1);
    for (const ShiftCount& count : sweep.count->counts)
      EXPECT_EQ(count.certificate.precision == "extended", extended);
  };
  Request digits = request, resolution = request, precision = request;
  digits.digits = 6;
  resolution.resolution = 1e-7;
  precision.precision = Precision::kExtended;
  ask(digits, false);
  ask(resolution, false);
  ask(precision, true);
  const CriticalValue rounded = answer(run_bracket(digits, {})).bracket->critical[0];
  digits.digits = 3;  // half a unit of the third digit moves a value of 0.06 by far more than 1e-4
  const CriticalValue coarse = answer(run_bracket(digits, {})).bracket->critical[0];
  EXPECT_GT(coarse.high - coarse.low, 10 * (rounded.high - rounded.low));
}

}  // namespace
}  // namespace stanchion::test
