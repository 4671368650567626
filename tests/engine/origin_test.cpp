// Free bodies whose mass has null vectors of its own: sweeps, brackets and audits from an origin below zero,
// as counts have it.
#include <gtest/gtest.h>

#include <cmath>
#include <numbers>

#include "model_files.hpp"

namespace stanchion::test {
namespace {

/// A free chain of 2 m dofs, unit springs; mass j moves with u_2j + u_(2j+1), so that M has m null vectors
/// and no empty row. With w = u_2j + u_(2j+1) and the differences d_j = u_(2j+1) - u_2j without mass
/// (condensed by hand; for m = 2 on the pairs (0, 1) and (2, 3)): see each test.
SymmetricMatrix pair_masses(Index pairs) {
  std::vector<Triplet> entries;
  for (Index j = 0; j < pairs; ++j)
    entries.insert(entries.end(), {{2 * j, 2 * j, 1}, {2 * j + 1, 2 * j, 1}, {2 * j + 1, 2 * j + 1, 1}});
  return from_triplets(2 * pairs, entries);
}

Request free_pairs(const ModelFiles& files, Index pairs) {
  Request request;
  request.input.stiffness = files.matrix("K.mtx", spring_chain(2 * pairs, 0));
  request.input.mass = files.matrix("M.mtx", pair_masses(pairs));
  request.pencil = Pencil::kMass;
  request.bracket.unit = request.audit.unit = ValueUnit::kOmega2;
  return request;
}

// Two pairs: w1 = u0 + u1, w2 = u2 + u3, d1 = u1 - u0, d2 = u3 - u2. Energy 2 V = d1^2 + d2^2 + (u2 - u1)^2
// with u1 = (w1 + d1) / 2, u2 = (w2 - d2) / 2. Stationary in d1, d2: d = d1 = d2 = (w2 - w1 - 2 d) / 4, so
// d = (w2 - w1) / 6, u2 - u1 = (w2 - w1) / 3, 2 V = (w2 - w1)^2 / 6. Masses 1: values 0 and 1/3 (by hand).
constexpr double kElastic = 1.0 / 3;

TEST(Origin, ABracketTellsTheZeroApart) {
  ModelFiles files;
  Request request = free_pairs(files, 2);
  request.bracket.first = 1;
  for (const BracketMethod method : {BracketMethod::kResidual, BracketMethod::kCounts}) {
    request.bracket.method = method;
    const Outcome outcome = answer(run_bracket(request, {}));
    ASSERT_EQ(outcome.bracket->critical.size(), 2U);
    EXPECT_TRUE(outcome.bracket->critical[0].rigid_body);
    const CriticalValue& elastic = outcome.bracket->critical[1];
    EXPECT_LE(elastic.low, kElastic + 1e-15);
    EXPECT_GE(elastic.high, kElastic - 1e-15);
    EXPECT_LT(elastic.high - elastic.low, 1e-6);
    ASSERT_TRUE(outcome.bracket->complete);
    EXPECT_LT(outcome.bracket->complete->from, 0);
    EXPECT_EQ(outcome.bracket->complete->count, 2);
  }
}

TEST(Origin, ARangeAndASweepCountFromIt) {
  ModelFiles files;
  Request request = free_pairs(files, 2);
  request.bracket.from = 0.1;
  request.bracket.to = 1;
  const Outcome range = answer(run_bracket(request, {}));
  ASSERT_EQ(range.bracket->critical.size(), 1U);
  EXPECT_EQ(range.bracket->complete->count, 1);
  request.sweep = {.from = 0.1, .to = 1, .points = 2, .geometric = false, .refine = false, .width = 1e-3};
  const Outcome sweep = answer(run_sweep(request, {}));
  ASSERT_EQ(sweep.sweep->jumps.size(), 1U);
  EXPECT_EQ(sweep.sweep->jumps[0].count, 1);
  EXPECT_EQ(sweep.count->counts[0].below, 1);
  EXPECT_NE(sweep.count->counts[0].meaning.find("above -1e-0"), std::string::npos);
}

TEST(Origin, AnAuditJudgesAListFromIt) {
  ModelFiles files;
  Request request = free_pairs(files, 2);
  request.audit.values = files.text("list.csv", "value,tolerance\n0,1e-4\n0.333333333,1e-6\n");
  EXPECT_EQ(answer(run_audit(request, {})).audit->verdict, AuditVerdict::kComplete);
  request.digits = 15;  // by counts
  EXPECT_EQ(answer(run_audit(request, {})).audit->verdict, AuditVerdict::kComplete);
  request.audit.values = files.text("short.csv", "value,tolerance\n0.333333333,1e-6\n");
  EXPECT_EQ(answer(run_audit(request, {})).audit->verdict, AuditVerdict::kMissing);
  request.digits.reset();
  EXPECT_EQ(answer(run_audit(request, {})).audit->verdict, AuditVerdict::kMissing);
}

/// The first two values of a diagonal pencil.
void expect_first(const std::vector<double>& stiffness, const std::vector<double>& mass,
                  const std::vector<double>& values) {
  ModelFiles files;
  Request request = diagonal_pencil(files, stiffness, mass);
  request.bracket.first = 2;
  const Outcome outcome = answer(run_bracket(request, {}));
  ASSERT_EQ(outcome.bracket->critical.size(), values.size());
  for (std::size_t k = 0; k < values.size(); ++k) {
    const CriticalValue& found = outcome.bracket->critical[k];
    EXPECT_LE(found.low, values[k]);
    EXPECT_GE(found.high, values[k]);
    EXPECT_LT(found.high - found.low, 1e-6);
    EXPECT_EQ(found.rigid_body, values[k] == 0);
  }
}

// Nothing follows the values below and at zero: looking farther out for what does must not leave the base
// there, where they are not told apart.
TEST(Origin, WithoutElasticValuesTheOthersStayNarrow) {
  expect_first({-3, -1, 5, 7}, {1, 1, 0, 0}, {-3, -1});
  expect_first({-3, 0, 5, 7}, {1, 1, 0, 0}, {-3, 0});
}

/// The values of K = (1, 1 - d; 1 - d, 1), -1, 3, 5 and M = I are d and 2 - d, -1, 3, 5, exactly as the
/// numbers are stored (by hand).
Outcome lowest_beside(double d, BracketMethod method) {
  ModelFiles files;
  Request request = diagonal_pencil(files, {1}, std::vector<double>(5, 1.0));
  request.input.stiffness = files.matrix(
      "K.mtx", from_triplets(5, {{0, 0, 1}, {1, 0, 1 - d}, {1, 1, 1}, {2, 2, -1}, {3, 3, 3}, {4, 4, 5}}));
  request.bracket.first = 3;
  request.bracket.method = method;
  return answer(run_bracket(request, {}));
}

// Where K is counted not to be singular no value is a rigid body, however near to 0 its interval reaches.
TEST(Origin, NoValueIsARigidBodyWhereTheCountAtZeroIsExact) {
  int touching = 0;
  for (const BracketMethod method : {BracketMethod::kResidual, BracketMethod::kCounts}) {
    for (const double power : {-30, -34, -38, -42, -44}) {
      const double d = std::exp2(power);
      const Outcome outcome = lowest_beside(d, method);
      ASSERT_EQ(outcome.bracket->critical.size(), 3U);
      const CriticalValue& found = outcome.bracket->critical[1];
      EXPECT_LE(found.low, d);
      EXPECT_GE(found.high, d);
      EXPECT_FALSE(found.rigid_body) << power;
      EXPECT_NE(found.value, 0) << power;
      touching += found.low <= 0 && found.high >= 0;
    }
    EXPECT_TRUE(lowest_beside(0, method).bracket->critical[1].rigid_body);
  }
  EXPECT_GT(touching, 0);  // else nothing was tried
}

}  // namespace
}  // namespace stanchion::test
