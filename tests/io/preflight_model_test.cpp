// Preflight findings about constraints, units, signs, nodes and places.
#include <gtest/gtest.h>

#include <cmath>

#include "io/coincident.hpp"
#include "io/preflight.hpp"
#include "io/preflight_nodes.hpp"
#include "matrices.hpp"

namespace stanchion {
namespace {

Preflight inspect(const SymmetricMatrix& matrix, const DofMap* dofs = nullptr) {
  auto result = preflight({matrix, "k.mtx", MatrixRole::kStiffness, dofs, nullptr});
  EXPECT_TRUE(result.ok());
  return std::move(*result);
}

bool found(const Warnings& warnings, const std::string& code) {
  return testing::find_warning(warnings, code) != nullptr;
}

/// A held chain of springs of the given stiffness, from equation `first`.
void add_chain(std::vector<Triplet>& entries, Index first, Index rows, double stiffness) {
  for (Index i = 0; i < rows; ++i) {
    entries.push_back({first + i, first + i, 2 * stiffness});
    if (i > 0) entries.push_back({first + i, first + i - 1, -stiffness});
  }
}

TEST(PreflightModel, StampedAndPenaltyRows) {
  std::vector<Triplet> entries;
  add_chain(entries, 0, 20, 1);
  EXPECT_TRUE(inspect(from_triplets(20, entries)).warnings.empty());
  entries.push_back({20, 20, 1e6});
  entries.push_back({21, 21, 1e6});
  EXPECT_TRUE(found(inspect(from_triplets(22, entries)).warnings, "stamped-rows"));
  entries.push_back({5, 5, 1e12});
  const auto report = inspect(from_triplets(22, entries));
  const Warning* penalty = testing::find_warning(report.warnings, "penalty-rows");
  ASSERT_NE(penalty, nullptr);
  EXPECT_EQ(penalty->place, "k.mtx, row 6");
}

TEST(PreflightModel, PartsInDifferentUnits) {
  std::vector<Triplet> entries;
  add_chain(entries, 0, 20, 1);
  add_chain(entries, 20, 20, 1e3);
  EXPECT_FALSE(found(inspect(from_triplets(40, entries)).warnings, "units-by-part"));
  add_chain(entries, 40, 20, 1e6);
  const auto report = inspect(from_triplets(60, entries));
  const Warning* units = testing::find_warning(report.warnings, "units-by-part");
  ASSERT_NE(units, nullptr);
  EXPECT_NE(units->message.find("row 1"), std::string::npos) << units->message;
  EXPECT_NE(units->message.find("row 41"), std::string::npos) << units->message;
}

TEST(PreflightModel, SignsAndExchangedMatrices) {
  std::vector<Triplet> plus, minus, soft;
  add_chain(plus, 0, 20, 1e6);
  add_chain(minus, 0, 20, -10);
  add_chain(soft, 0, 20, 1);
  const PreflightFacts k = inspect(from_triplets(20, plus)).facts,
                       g = inspect(from_triplets(20, minus)).facts,
                       m = inspect(from_triplets(20, soft)).facts;
  EXPECT_TRUE(found(inspect(from_triplets(20, minus)).warnings, "sign-of-stiffness"));
  EXPECT_TRUE(compare_matrices(k, "K", g, "G", MatrixRole::kSecond, false).empty());
  EXPECT_TRUE(found(compare_matrices(k, "K", g, "G", MatrixRole::kSecond, true), "sign-of-geometric"));
  EXPECT_TRUE(found(compare_matrices(k, "K", m, "G", MatrixRole::kSecond, false), "sign-of-geometric"));
  EXPECT_TRUE(compare_matrices(k, "K", m, "G", MatrixRole::kSecond, true).empty());
  EXPECT_TRUE(found(compare_matrices(g, "K", k, "G", MatrixRole::kSecond, false), "swapped-matrices"));
  EXPECT_TRUE(compare_matrices(k, "K", m, "M", MatrixRole::kMass, false).empty());
  EXPECT_TRUE(found(compare_matrices(m, "K", k, "M", MatrixRole::kMass, false), "swapped-matrices"));
}

/// A row of nodes one apart, ux and uy each, coupled to the next one.
struct Row {
  DofMap dofs;
  NodeTable nodes;
  std::vector<Triplet> entries;

  void add(NodeNumber node, double x) {
    const Index e = dofs.equations();
    dofs.append(node, "ux");
    dofs.append(node, "uy");
    nodes.append(node, {x, 0, 0});
    for (Index k : {e, e + 1}) entries.push_back({k, k, 2});
  }
  SymmetricMatrix matrix() const { return from_triplets(dofs.equations(), entries); }
};

TEST(PreflightNodes, FarAndCoincidentPlaces) {
  Row row;
  for (int i = 0; i < 50; ++i) row.add(i + 1, i);
  EXPECT_TRUE(inspect_nodes(row.matrix(), row.dofs, {}, row.nodes, "nodes.csv").empty());
  row.add(51, 7);        // at node 8
  row.add(52, 49000.0);  // millimetres among metres
  const auto warnings = inspect_nodes(row.matrix(), row.dofs, {}, row.nodes, "nodes.csv");
  const Warning* far = testing::find_warning(warnings, "far-coordinates");
  ASSERT_NE(far, nullptr);
  EXPECT_NE(far->message.find("52"), std::string::npos);
  const Warning* seam = testing::find_warning(warnings, "coincident-nodes");
  ASSERT_NE(seam, nullptr);
  EXPECT_NE(seam->message.find("8 with 51"), std::string::npos) << seam->message;
  // Tied by a multiplier, which lies at the same place itself: no seam.
  Row tied = row;
  tied.dofs.append(1000, "multiplier");
  tied.nodes.append(1000, {7, 0, 0});
  tied.entries.push_back({104, 14, 1});
  tied.entries.push_back({104, 100, -1});
  EXPECT_FALSE(found(inspect_nodes(tied.matrix(), tied.dofs, {104}, tied.nodes, "n"), "coincident-nodes"));
  tied.entries.back() = {104, 98, -1};  // another node
  EXPECT_TRUE(found(inspect_nodes(tied.matrix(), tied.dofs, {104}, tied.nodes, "n"), "coincident-nodes"));
  row.entries.push_back({100, 14, -1});  // connected: no seam
  EXPECT_FALSE(found(inspect_nodes(row.matrix(), row.dofs, {}, row.nodes, "nodes.csv"), "coincident-nodes"));
}

TEST(PreflightNodes, MissingPlacesAndPartners) {
  Row row;
  for (int i = 0; i < 50; ++i) row.add(i + 1, i);
  EXPECT_TRUE(inspect_partners(row.dofs, "dofs.csv").empty());
  row.dofs.append(60, "ux");
  row.entries.push_back({100, 100, 1});
  const auto partners = inspect_partners(row.dofs, "dofs.csv");
  ASSERT_EQ(partners.size(), 1U);
  EXPECT_EQ(partners[0].code, "missing-partners");
  EXPECT_NE(partners[0].message.find("60"), std::string::npos);
  EXPECT_TRUE(
      found(inspect_nodes(row.matrix(), row.dofs, {}, row.nodes, "nodes.csv"), "nodes-without-place"));
}

TEST(Coincident, PairsAgreeWithEveryPairTried) {
  std::vector<std::array<double, 3>> places;
  for (int i = 0; i < 300; ++i)
    places.push_back({std::floor(std::fmod(i * 7.3, 5)), std::floor(std::fmod(i * 3.7, 4)),
                      std::floor(std::fmod(i * 1.9, 31))});
  std::vector<std::pair<std::size_t, std::size_t>> expected;
  for (std::size_t a = 0; a < places.size(); ++a) {
    for (std::size_t b = a + 1; b < places.size(); ++b) {
      if (places[a] == places[b]) expected.emplace_back(a, b);
    }
  }
  ASSERT_FALSE(expected.empty());
  EXPECT_EQ(coincident_places(places, 1e-9), expected);
}

}  // namespace
}  // namespace stanchion
