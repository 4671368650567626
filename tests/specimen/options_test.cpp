// The facts that specimens state for every choice of load, edges, ends, aspect and mass, and the words for
// them.
#include <gtest/gtest.h>

#include <algorithm>

#include "specimen/dense_spectrum.hpp"
#include "specimen/specimen.hpp"

namespace stanchion {
namespace {

using testing::dense;

/// Every stated count, against the signs of the dense eigenvalues of the shifted matrix.
int checked_counts(const std::string& name, Offset unknowns, const SpecimenOptions& options) {
  const auto specimen = make_specimen(name, unknowns, options);
  EXPECT_TRUE(specimen.ok());
  const Eigen::MatrixXd k = dense(specimen->stiffness);
  const auto found = testing::signs(k, 1e-12);
  EXPECT_EQ(found.negative, specimen->expected.inertia.negative);
  EXPECT_EQ(found.zero, specimen->expected.inertia.zero);
  for (const ExpectedCount& count : specimen->expected.counts) {
    const Eigen::MatrixXd shifted = count.pencil == Pencil::kGeometric
                                        ? Eigen::MatrixXd(k + count.shift * dense(*specimen->geometric))
                                        : Eigen::MatrixXd(k - count.shift * dense(*specimen->mass));
    EXPECT_EQ(testing::signs(shifted, 0).negative, count.below) << name << " " << count.shift;
  }
  return static_cast<int>(specimen->expected.counts.size());
}

TEST(Options, PlateFactsHoldForEveryLoadEdgeAndAspect) {
  int counts = 0;
  for (const PlateLoad load : {PlateLoad::kUniaxial, PlateLoad::kBiaxial, PlateLoad::kShear}) {
    for (const PlateEdges edges : {PlateEdges::kSimple, PlateEdges::kClamped}) {
      for (const double aspect : {0.7, 1.0, 3.0}) {
        SpecimenOptions options;
        options.load = load;
        options.edges = edges;
        options.aspect = aspect;
        counts += checked_counts("plate", 600, options);
      }
    }
  }
  EXPECT_GE(counts, 12);
}

TEST(Options, OffsetCouplesButChangesNoSign) {
  SpecimenOptions options;
  options.offset = 0.005;
  checked_counts("plate", 300, options);
  options.fault = Fault::kFree;
  checked_counts("plate", 300, options);
  options.fault = Fault::kLoosePart;
  checked_counts("plate", 300, options);
  const auto flat = make_specimen("plate", 300), lifted = make_specimen("plate", 300, options);
  EXPECT_GT(lifted->stiffness.entries(), flat->stiffness.entries());
}

TEST(Options, ColumnFactsHoldForEveryEnd) {
  int counts = 0;
  for (const char* ends : {"fixed-free", "pinned-pinned", "fixed-pinned", "fixed-fixed", "fixed-guided"}) {
    SpecimenOptions options;
    options.ends = *column_ends_from(ends);
    for (const Offset unknowns : {6, 60, 240}) counts += checked_counts("column", unknowns, options);
  }
  EXPECT_GE(counts, 50);
}

TEST(Options, ColumnEntriesHoldNoRounding) {
  // Lifting and turning the whole free column must give forces that vanish to the last bit.
  SpecimenOptions options;
  options.fault = Fault::kFree;
  const auto column = make_specimen("column", 9000, options);
  const SymmetricMatrix& k = column->stiffness;
  std::vector<double> motion(static_cast<std::size_t>(k.rows)), force(motion.size(), 0.0);
  for (std::size_t i = 0; i < motion.size(); ++i) {
    const double z = column->nodes[static_cast<std::size_t>(column->dofs[i].node - 1)].z;
    const specimen::Dof dof = column->dofs[i].dof;
    motion[i] = dof == specimen::Dof::kUx ? 3 + 2 * z : dof == specimen::Dof::kUz ? 5 : 2;
  }
  for (Index c = 0; c < k.rows; ++c) {
    for (Offset e = k.column_start[c]; e < k.column_start[Offset{c} + 1]; ++e) {
      const auto column_at = static_cast<std::size_t>(c), row_at = static_cast<std::size_t>(k.row[e]);
      force[row_at] += k.value[e] * motion[column_at];
      if (row_at != column_at) force[column_at] += k.value[e] * motion[row_at];
    }
  }
  EXPECT_TRUE(std::all_of(force.begin(), force.end(), [](double f) { return f == 0; }));
}

TEST(Options, LumpedMassIsDiagonalAndAsHeavy) {
  for (const char* name : {"solid", "plate", "cylinder", "frame", "lattice", "column", "saddle"}) {
    SpecimenOptions options;
    options.mass = MassKind::kLumped;
    const auto lumped = make_specimen(name, 300, options), consistent = make_specimen(name, 300);
    ASSERT_TRUE(lumped.ok() && consistent.ok());
    const Eigen::MatrixXd m = dense(*lumped->mass), c = dense(*consistent->mass);
    EXPECT_EQ((m - Eigen::MatrixXd(m.diagonal().asDiagonal())).norm(), 0) << name;
    EXPECT_GE(m.diagonal().minCoeff(), 0) << name;
    Eigen::VectorXd lift = Eigen::VectorXd::Zero(m.rows());
    for (Eigen::Index i = 0; i < m.rows(); ++i) {
      lift(i) = lumped->dofs[static_cast<std::size_t>(i)].dof == specimen::Dof::kUx ? 1 : 0;
    }
    EXPECT_NEAR(lift.dot(m * lift) / lift.dot(c * lift), 1, 0.25) << name;  // supports cut differently
  }
}

TEST(Options, EveryWordIsUnderstoodAndTheRestRefused) {
  EXPECT_EQ(*plate_load_from("shear"), PlateLoad::kShear);
  EXPECT_EQ(*plate_edges_from("clamped"), PlateEdges::kClamped);
  EXPECT_EQ(*mass_kind_from("lumped"), MassKind::kLumped);
  EXPECT_EQ(*fault_from("repeated-tie"), Fault::kRepeatedTie);
  for (const Status& status : {plate_load_from("x").status(), plate_edges_from("x").status(),
                               mass_kind_from("x").status(), column_ends_from("x").status()}) {
    EXPECT_EQ(status.kind(), StatusKind::kBadUsage);
    EXPECT_FALSE(status.remedy().empty());
  }
  SpecimenOptions options;
  options.aspect = 0;
  EXPECT_EQ(make_specimen("plate", 100, options).status().code(), "aspect-out-of-range");
  options = {};
  options.softness = 0;
  EXPECT_EQ(make_specimen("plate", 100, options).status().code(), "softness-out-of-range");
  options = {};
  options.offset = 7;
  EXPECT_EQ(make_specimen("plate", 100, options).status().code(), "offset-out-of-range");
}

}  // namespace
}  // namespace stanchion
