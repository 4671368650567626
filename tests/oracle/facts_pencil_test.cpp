// Source: facts.json, pairs: counts below shifts from dense generalised eigenvalues of SuiteSparse stiffness
// and mass matrices, agreeing with the inertia of the scaled K - s M by another method.
#include <gtest/gtest.h>

#include <map>

#include "engine/pipeline.hpp"
#include "oracle/shared_facts.hpp"

namespace stanchion {
namespace {

/// bcsstm10 is indefinite: its pair is a pencil K - s G of buckling kind.
Request request_for(const test::PencilFact& fact) {
  Request request;
  request.input.stiffness = fact.stiffness_path;
  request.threads = 2;
  if (fact.second_definite_or_semidefinite) {
    request.pencil = Pencil::kMass;
    request.input.mass = fact.second_path;
  } else {
    request.pencil = Pencil::kGeometric;
    request.input.geometric = fact.second_path;
    request.input.load_sign_minus = true;
  }
  return request;
}

TEST(FactsOfPencils, CountsMatchDenseGeneralisedEigenvalues) {
  if (!test::shared_data_present()) GTEST_SKIP() << "no shared data beside the project";
  std::map<std::string, std::vector<test::PencilFact>> pairs;
  for (const auto& fact : test::pencil_facts()) pairs[fact.stiffness_path + fact.second_path].push_back(fact);
  EXPECT_GE(pairs.size(), 9U);
  std::vector<std::string> not_exact;
  int shifts = 0;
  for (const auto& [name, facts] : pairs) {
    Request request = request_for(facts.front());
    for (const auto& fact : facts) request.shifts.push_back(fact.shift);
    const auto outcome = run_count(request, {});
    ASSERT_TRUE(outcome.ok()) << outcome.status().to_string();
    const auto& counts = outcome->count->counts;
    ASSERT_EQ(counts.size(), facts.size());
    for (std::size_t i = 0; i < facts.size(); ++i) {
      SCOPED_TRACE(facts[i].name());
      ++shifts;
      EXPECT_EQ(counts[i].shift, facts[i].shift);
      EXPECT_LE(counts[i].below_range.first, facts[i].below);
      EXPECT_GE(counts[i].below_range.second, facts[i].below);
      EXPECT_EQ(counts[i].below.value_or(facts[i].below), facts[i].below);
      if (!counts[i].below || counts[i].level != Level::kProved) not_exact.push_back(facts[i].name());
    }
  }
  EXPECT_GE(shifts, 60);
  // Shifts so close to an eigenvalue that only a range can be proved; none at present.
  EXPECT_EQ(not_exact, std::vector<std::string>{});
}

}  // namespace
}  // namespace stanchion
