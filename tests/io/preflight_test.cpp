#include "io/preflight.hpp"

#include <gtest/gtest.h>

#include "matrices.hpp"

namespace stanchion {
namespace {

Preflight inspect(const SymmetricMatrix& matrix, const DofMap* dofs = nullptr,
                  MatrixRole role = MatrixRole::kStiffness) {
  auto result = preflight({matrix, "k.mtx", role, dofs, nullptr});
  EXPECT_TRUE(result.ok());
  return std::move(*result);
}

TEST(Preflight, ASoundMatrixGivesNothing) {
  const auto report = inspect(from_triplets(3, {{0, 0, 4}, {1, 0, 1}, {1, 1, 5}, {2, 1, 2}, {2, 2, 6}}));
  EXPECT_TRUE(report.warnings.empty());
  EXPECT_EQ(report.facts.parts, 1);
  EXPECT_EQ(report.facts.least_diagonal, 4);
  EXPECT_EQ(report.facts.greatest_diagonal, 6);
}

TEST(Preflight, EachFindingHasItsCodePlaceAndRemedy) {
  // Row 1 empty (a stored zero counts as nothing), 2 identity, 3-4 coupled, 3 without diagonal, 5 negative
  // alone, 6 huge.
  const auto matrix =
      from_triplets(6, {{0, 0, 0}, {1, 0, 0}, {1, 1, 1}, {3, 2, 2}, {3, 3, 1e-3}, {4, 4, -5}, {5, 5, 1e12}});
  const auto report = inspect(matrix);
  const auto check = [&](const char* code, const char* place, const char* remedy) {
    const Warning* warning = testing::find_warning(report.warnings, code);
    ASSERT_NE(warning, nullptr) << code;
    EXPECT_EQ(warning->place, place);
    EXPECT_NE(warning->message.find(remedy), std::string::npos) << warning->message;
  };
  check("empty-rows", "k.mtx, row 1", "--fix");
  check("identity-rows", "k.mtx, row 2", "--strike-held");
  check("zero-diagonal", "k.mtx, row 3", "--multipliers");
  check("negative-diagonal", "k.mtx, row 5", "sign");
  check("diagonal-spread", "k.mtx, row 6", "penalt");
  check("disconnected-parts", "k.mtx, row 5", "supported");
  EXPECT_EQ(report.facts.parts, 3);
  EXPECT_EQ(report.warnings.size(), 6U);
}

TEST(Preflight, ASpreadBeyondTheLargestNumberIsSaidInWords) {
  const auto report =
      inspect(from_triplets(3, {{0, 0, 1e-200}, {1, 0, 1e-201}, {1, 1, 1e200}, {2, 1, 1}, {2, 2, 2}}));
  const Warning* warning = testing::find_warning(report.warnings, "diagonal-spread");
  ASSERT_NE(warning, nullptr);
  EXPECT_NE(warning->message.find("of more than 1e308"), std::string::npos) << warning->message;
  EXPECT_EQ(warning->message.find("inf"), std::string::npos) << warning->message;
}

TEST(Preflight, ManyPlacesAreSummarised) {
  const auto report = inspect(from_triplets(100000, {{0, 0, 2}}));
  ASSERT_EQ(report.warnings.size(), 1U);
  EXPECT_EQ(report.facts.empty_rows, 99999);
  EXPECT_NE(report.warnings[0].message.find("row 6; and 99,994 more"), std::string::npos)
      << report.warnings[0].message;
}

TEST(Preflight, TheMapNamesNodesExcusesMultipliersAndJoinsTheDofsOfANode) {
  DofMap map;
  map.append(10, "ux");
  map.append(10, "uy");
  map.append(10, "multiplier");
  map.append(20, "ux");
  const auto matrix = from_triplets(4, {{0, 0, 2}, {1, 1, 3}, {2, 0, 1}});
  const auto report = inspect(matrix, &map);
  ASSERT_EQ(report.warnings.size(), 1U);
  EXPECT_EQ(report.warnings[0].code, "empty-rows");
  EXPECT_NE(report.warnings[0].message.find("node 20, ux"), std::string::npos) << report.warnings[0].message;
  EXPECT_EQ(report.facts.parts, 1);
  EXPECT_EQ(inspect(matrix).facts.parts, 2);
}

TEST(Preflight, ASecondMatrixMayBeEmptyAndNegativeInPlaces) {
  const auto matrix = from_triplets(4, {{0, 0, -2}, {1, 1, 1}, {3, 2, 1}});
  EXPECT_TRUE(inspect(matrix, nullptr, MatrixRole::kSecond).warnings.empty());
  const auto mass = inspect(matrix, nullptr, MatrixRole::kMass);
  ASSERT_EQ(mass.warnings.size(), 1U);
  EXPECT_EQ(mass.warnings[0].code, "negative-diagonal");
}

TEST(Preflight, AStruckMatrixIsReportedInTheNumbersOfTheFile) {
  const std::vector<Index> original{0, 4, 7};
  const auto report = preflight({from_triplets(3, {{0, 0, 1.5}, {1, 1, -2}, {2, 0, 1}, {2, 2, 3}}), "k.mtx",
                                 MatrixRole::kStiffness, nullptr, nullptr, &original});
  ASSERT_TRUE(report.ok());
  const Warning* warning = testing::find_warning(report->warnings, "negative-diagonal");
  ASSERT_NE(warning, nullptr);
  EXPECT_EQ(warning->place, "k.mtx, row 5");
  EXPECT_NE(warning->message.find("row 5."), std::string::npos) << warning->message;
}

TEST(Preflight, SizesMustAgree) {
  const auto three = from_triplets(3, {{0, 0, 1}}), four = from_triplets(4, {{0, 0, 1}});
  EXPECT_TRUE(check_same_size(three, "k.mtx", three, "g.mtx").ok());
  const Status status = check_same_size(three, "k.mtx", four, "g.mtx");
  EXPECT_EQ(status.code(), "size-mismatch");
  EXPECT_EQ(status.kind(), StatusKind::kBadInput);
  EXPECT_EQ(status.place(), "g.mtx");
  DofMap map;
  for (int i = 0; i < 3; ++i) map.append(i, "ux");
  EXPECT_TRUE(check_dof_map_size(map, "d.csv", three, "k.mtx").ok());
  EXPECT_NE(check_dof_map_size(map, "d.csv", four, "k.mtx").message().find("short"), std::string::npos);
  map.append(3, "ux");
  map.append(4, "ux");
  EXPECT_NE(check_dof_map_size(map, "d.csv", four, "k.mtx").message().find("long"), std::string::npos);
  EXPECT_EQ(check_dof_map_size(map, "d.csv", four, "k.mtx").code(), "dof-map-size");
}

}  // namespace
}  // namespace stanchion
