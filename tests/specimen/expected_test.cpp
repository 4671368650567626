// Every specimen at small size, with every fault it knows: the stated facts against dense eigenvalues.
#include <gtest/gtest.h>

#include <algorithm>
#include <sstream>

#include "specimen/dense_spectrum.hpp"
#include "specimen/specimen.hpp"

namespace stanchion {
namespace {

using testing::critical_factors;
using testing::dense;
using testing::SignCount;

struct Case {
  std::string model, fault;
  Offset unknowns;
};

std::vector<Case> all_cases() {
  std::vector<Case> cases;
  for (const SpecimenEntry& entry : specimen_list()) {
    std::istringstream faults(entry.faults);
    for (std::string fault; faults >> fault;) {
      for (const Offset unknowns : {1, 60, 200, 390}) cases.push_back({entry.name, fault, unknowns});
      if (std::string(entry.name) == "lattice" && fault == "none") cases.push_back({entry.name, fault, 900});
    }
  }
  return cases;
}

Specimen made(const Case& which) {
  SpecimenOptions options;
  options.fault = *fault_from(which.fault);
  options.softness = 1e-6;
  auto specimen = make_specimen(which.model, which.unknowns, options);
  EXPECT_TRUE(specimen.ok()) << specimen.status().to_string();
  return std::move(specimen).value();
}

void PrintTo(const Case& which, std::ostream* out) {
  *out << which.model << " " << which.fault << " " << which.unknowns;
}

class EverySpecimen : public ::testing::TestWithParam<Case> {};

TEST_P(EverySpecimen, MatricesAreWellFormedAndOfOneOrder) {
  const Specimen specimen = made(GetParam());
  EXPECT_TRUE(check_invariants(specimen.stiffness));
  const Index rows = specimen.stiffness.rows;
  EXPECT_GT(rows, 0);
  for (const auto* matrix : {&specimen.geometric, &specimen.mass}) {
    if (!*matrix) continue;
    EXPECT_TRUE(check_invariants(**matrix));
    EXPECT_EQ((*matrix)->rows, rows);
  }
  EXPECT_EQ(specimen.dofs.size(), static_cast<std::size_t>(rows));
  for (const SpecimenDof& dof : specimen.dofs) {
    EXPECT_GE(dof.node, 1);
    EXPECT_LE(dof.node, static_cast<Index>(specimen.nodes.size()));
  }
  for (std::size_t k = 0; k < specimen.multipliers.size(); ++k) {
    EXPECT_EQ(specimen.multipliers[k], rows - static_cast<Index>(specimen.multipliers.size() - k));
  }
  EXPECT_EQ(specimen.name, GetParam().model);
  EXPECT_FALSE(specimen.scenario.empty());
}

TEST_P(EverySpecimen, InertiaIsTheStatedOne) {
  const Specimen specimen = made(GetParam());
  const ExpectedInertia& expected = specimen.expected.inertia;
  ASSERT_LE(specimen.stiffness.rows, 1000);
  EXPECT_EQ(expected.negative + expected.zero + expected.positive, specimen.stiffness.rows);
  const SignCount found = testing::signs(dense(specimen.stiffness), 1e-12);
  EXPECT_EQ(found.negative, expected.negative) << expected.why;
  EXPECT_EQ(found.zero, expected.zero) << expected.why;
  EXPECT_FALSE(expected.why.empty());
}

TEST_P(EverySpecimen, CountsAreTheStatedOnes) {
  const Specimen specimen = made(GetParam());
  for (const ExpectedCount& count : specimen.expected.counts) {
    const Eigen::MatrixXd k = dense(specimen.stiffness);
    Eigen::MatrixXd shifted = k - count.shift * Eigen::MatrixXd::Identity(k.rows(), k.rows());
    if (count.pencil == Pencil::kGeometric) shifted = k + count.shift * dense(*specimen.geometric);
    if (count.pencil == Pencil::kMass) shifted = k - count.shift * dense(*specimen.mass);
    EXPECT_EQ(testing::signs(shifted, 0).negative, count.below) << count.shift << ": " << count.why;
  }
}

TEST_P(EverySpecimen, ValuesAreTheStatedOnes) {
  const Specimen specimen = made(GetParam());
  for (const ExpectedValue& value : specimen.expected.values) {
    const Eigen::MatrixXd k = dense(specimen.stiffness);
    std::vector<double> found;
    if (value.pencil == Pencil::kGeometric) found = critical_factors(k, dense(*specimen.geometric));
    if (value.pencil == Pencil::kMass) found = testing::pencil_values(k, dense(*specimen.mass));
    if (value.pencil == Pencil::kStiffness) {
      const Eigen::VectorXd all = testing::eigenvalues(k);
      found.assign(all.begin(), all.end());
    }
    const double slack = value.tolerance * std::abs(value.value) + 1e-12;
    EXPECT_EQ(std::count_if(found.begin(), found.end(),
                            [&](double f) { return std::abs(f - value.value) <= slack; }),
              value.multiplicity)
        << value.value << " within " << slack << ": " << value.why;
  }
}

std::string label(const ::testing::TestParamInfo<Case>& info) {
  std::string text = info.param.model + "_" + info.param.fault + "_" + std::to_string(info.param.unknowns);
  std::replace(text.begin(), text.end(), '-', '_');
  return text;
}

INSTANTIATE_TEST_SUITE_P(All, EverySpecimen, ::testing::ValuesIn(all_cases()), label);

TEST(MakeSpecimen, SaysWhatItKnowsWhenItIsAskedForSomethingElse) {
  const auto unknown = make_specimen("cathedral", 100);
  ASSERT_FALSE(unknown.ok());
  EXPECT_EQ(unknown.status().kind(), StatusKind::kBadUsage);
  EXPECT_NE(unknown.status().remedy().find("solid"), std::string::npos);
  EXPECT_FALSE(make_specimen("solid", 0).ok());
  EXPECT_FALSE(make_specimen("solid", 1'000'000'000'000).ok());
  SpecimenOptions hinged;
  hinged.fault = Fault::kHinge;
  EXPECT_EQ(make_specimen("laplace", 10, hinged).status().code(), "fault-not-known-here");
  EXPECT_FALSE(fault_from("wobbly").ok());
}

TEST(MakeSpecimen, ComesNearTheUnknownsAsked) {
  for (const SpecimenEntry& entry : specimen_list()) {
    for (const Offset unknowns : {1000, 5000, 20000}) {
      const auto specimen = make_specimen(entry.name, unknowns);
      ASSERT_TRUE(specimen.ok());
      EXPECT_NEAR(specimen->stiffness.rows, static_cast<double>(unknowns),
                  0.15 * static_cast<double>(unknowns))
          << entry.name;
    }
  }
}

TEST(MakeSpecimen, GivesTheSameBitsAgain) {
  for (const SpecimenEntry& entry : specimen_list()) {
    const auto first = make_specimen(entry.name, 300), second = make_specimen(entry.name, 300);
    EXPECT_TRUE(std::equal(first->stiffness.value.begin(), first->stiffness.value.end(),
                           second->stiffness.value.begin(), second->stiffness.value.end()))
        << entry.name;
  }
}

}  // namespace
}  // namespace stanchion
