// Source: the specimens' own construction: rigid motions, planted faults, closed forms of the discrete
// models, as stated beside every expected figure in src/specimen.
#include <gtest/gtest.h>

#include <sstream>

#include "oracle/certified.hpp"
#include "specimen/specimen.hpp"

namespace stanchion {
namespace {

/// Every model with every fault it knows.
std::vector<std::pair<std::string, Fault>> all_kinds() {
  std::vector<std::pair<std::string, Fault>> kinds;
  for (const SpecimenEntry& entry : specimen_list()) {
    std::istringstream words(entry.faults);
    for (std::string word; words >> word;) {
      const auto fault = fault_from(word);
      EXPECT_TRUE(fault.ok()) << word;
      if (fault.ok()) kinds.emplace_back(entry.name, *fault);
    }
  }
  return kinds;
}

class ExpectedSpecimen : public ::testing::TestWithParam<int> {};

TEST_P(ExpectedSpecimen, CertifiedInertiaIsTheOneBuiltIn) {
  int compared = 0;
  for (const auto& [name, fault] : all_kinds()) {
    SpecimenOptions options;
    options.fault = fault;
    const auto specimen = make_specimen(name, GetParam(), options);
    ASSERT_TRUE(specimen.ok()) << specimen.status().to_string();
    SCOPED_TRACE(name + ", fault " + std::to_string(static_cast<int>(fault)) + ": " +
                 specimen->expected.inertia.why);
    const auto found = test::certify(test::prepare(specimen->stiffness, 2));
    const ExpectedInertia& expected = specimen->expected.inertia;
    EXPECT_EQ(found.certificate.level, Level::kProved);
    // What is certain may never exceed the truth.
    EXPECT_LE(found.inertia.negative, expected.negative);
    EXPECT_LE(found.inertia.positive, expected.positive);
    if (fault == Fault::kSoftSpring) continue;  // may be zero at the resolution: definite, but barely
    ++compared;
    EXPECT_EQ(found.inertia.negative, expected.negative);
    EXPECT_EQ(found.inertia.zero, expected.zero);
    EXPECT_EQ(found.inertia.positive, expected.positive);
  }
  EXPECT_GE(compared, 20);
}

INSTANTIATE_TEST_SUITE_P(AtSizes, ExpectedSpecimen, ::testing::Values(600, 6000));

/// K + coefficient S as a family of two, certified.
Inertia inertia_of_pencil(const SymmetricMatrix& first, const SymmetricMatrix& second, double coefficient) {
  const std::array<const SymmetricMatrix*, 2> members{&first, &second};
  MatrixFamily family = unite(members);
  const SymmetricMatrix pattern{family.rows, family.column_start.clone(), family.row.clone(),
                                family.values[0].clone()};
  ThreadPool pool(2);
  auto analysis = analyse({&pattern, {}, true}, 2);
  EXPECT_TRUE(analysis.ok());
  family = permute(family, analysis->tree.position_of);
  const std::vector<double> coefficients{1.0, coefficient};
  auto scale = power_of_two_scaling(family, coefficients);
  EXPECT_TRUE(scale.ok());
  auto found = certify_by_offsets(*analysis, {&family, coefficients, &*scale, 0}, {}, pool);
  EXPECT_TRUE(found.ok());
  EXPECT_EQ(found->certificate.level, Level::kProved);
  return found->inertia;
}

/// A column of 8,000 unknowns is too slender a chain for double precision: its lowest eigenvalues, relative
/// to the largest, lie below any bound.
Offset size_of(const std::string& model) {
  return model == "column" ? 600 : 8000;
}

TEST(ExpectedSpecimenCounts, PencilsHaveTheirClosedFormCounts) {
  int compared = 0;
  for (const SpecimenEntry& entry : specimen_list()) {
    const auto specimen = make_specimen(entry.name, size_of(entry.name));
    ASSERT_TRUE(specimen.ok());
    for (const ExpectedCount& count : specimen->expected.counts) {
      if (count.pencil == Pencil::kStiffness) continue;  // closed_form_test.cpp
      SCOPED_TRACE(std::string(entry.name) + " at " + std::to_string(count.shift) + ": " + count.why);
      const bool geometric = count.pencil == Pencil::kGeometric;
      const Inertia inertia =
          inertia_of_pencil(specimen->stiffness, geometric ? *specimen->geometric : *specimen->mass,
                            geometric ? count.shift : -count.shift);
      ++compared;
      EXPECT_LE(inertia.negative, count.below);
      EXPECT_GE(inertia.negative + inertia.zero, count.below);
      EXPECT_EQ(inertia.zero, 0);
    }
  }
  EXPECT_GE(compared, 6);
}

}  // namespace
}  // namespace stanchion
