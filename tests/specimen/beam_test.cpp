// The space beam and the bar: rigid motions in any direction, the cantilever, geometric stiffness, mass.
#include "specimen/beam.hpp"

#include <gtest/gtest.h>

#include <Eigen/Geometry>

#include "specimen/dense_spectrum.hpp"

namespace stanchion::specimen {
namespace {

using testing::dense;
using testing::eigenvalues;

const Material kUnit{4.0, 0.25, 2.0};
const Section kSection{0.5, 0.03, 0.02, 0.04};
const Member kAlongX{{0, 0, 0}, {2, 0, 0}, {0, 0, 1}};
const Member kAnywhere{{0.3, -0.2, 0.5}, {1.5, 1.1, 2.0}, {0.1, 0.2, 1}};

/// Translation t and rotation r of the whole member.
Eigen::VectorXd rigid(const Member& member, const Eigen::Vector3d& t, const Eigen::Vector3d& r) {
  Eigen::VectorXd u(12);
  for (int end = 0; end < 2; ++end) {
    const Point& p = end == 0 ? member.start : member.end;
    u.segment<3>(6 * end) = t + r.cross(Eigen::Vector3d(p.x, p.y, p.z));
    u.segment<3>(6 * end + 3) = r;
  }
  return u;
}

TEST(Beam, HasExactlySixZeroEigenvaluesAndCostsNothingToMove) {
  for (const Member& member : {kAlongX, kAnywhere}) {
    const Eigen::MatrixXd k = dense(beam_stiffness(member, kUnit, kSection));
    EXPECT_EQ((k - k.transpose()).cwiseAbs().maxCoeff(), 0);
    EXPECT_LT(std::abs(eigenvalues(k)(5)), 1e-14);
    EXPECT_GT(eigenvalues(k)(6), 1e-3);
    EXPECT_LT((k * rigid(member, {0.3, 0.5, -0.7}, {0.2, -0.4, 0.6})).norm(), 1e-14);
  }
}

TEST(Beam, CantileverTipMovesByPL3Over3EI) {
  const Eigen::MatrixXd k = dense(beam_stiffness(kAlongX, kUnit, kSection)).bottomRightCorner(6, 6);
  const Eigen::MatrixXd flexibility = k.inverse();
  const double length = 2, e = kUnit.youngs_modulus;
  EXPECT_NEAR(flexibility(0, 0), length / (e * kSection.area), 1e-13);
  EXPECT_NEAR(flexibility(1, 1), std::pow(length, 3) / (3 * e * kSection.inertia_z), 1e-10);
  EXPECT_NEAR(flexibility(2, 2), std::pow(length, 3) / (3 * e * kSection.inertia_y), 1e-10);
  EXPECT_NEAR(flexibility(3, 3), length / (e / 2.5 * kSection.torsion), 1e-10);
  // A load up turns the tip about -y, a load along y about +z.
  EXPECT_NEAR(flexibility(4, 2), -std::pow(length, 2) / (2 * e * kSection.inertia_y), 1e-10);
  EXPECT_NEAR(flexibility(5, 1), std::pow(length, 2) / (2 * e * kSection.inertia_z), 1e-10);
}

TEST(Beam, GeometricStiffnessActsOnRotationAcrossTheAxisOnly) {
  for (const Member& member : {kAlongX, kAnywhere}) {
    const double force = -3, length = length_of(member);
    const Eigen::Vector3d axis(member.end.x - member.start.x, member.end.y - member.start.y,
                               member.end.z - member.start.z);
    const Eigen::Vector3d across = axis.cross(Eigen::Vector3d(0.3, -1, 0.2)).normalized();
    for (const Eigen::MatrixXd& g :
         {dense(beam_geometric(member, force)), dense(bar_geometric(member, force))}) {
      const Eigen::VectorXd turn = rigid(member, {0, 0, 0}, 0.1 * across);
      EXPECT_NEAR(turn.dot(g * turn), force * length * 0.01, 1e-13);
      EXPECT_LT((g * rigid(member, {1, 2, 3}, {0, 0, 0})).norm(), 1e-13);
      const Eigen::VectorXd spin = rigid(member, {0, 0, 0}, axis);
      EXPECT_NEAR(spin.dot(g * spin), 0, 1e-12);
    }
  }
}

TEST(Beam, MassIsPositiveDefiniteAndWhole) {
  const double whole = 2.0 * 0.5 * length_of(kAnywhere);
  const Eigen::MatrixXd m = dense(beam_mass(kAnywhere, kUnit, kSection));
  EXPECT_GT(eigenvalues(m)(0), 0);
  const Eigen::VectorXd lift = rigid(kAnywhere, {0, 0.6, 0.8}, {0, 0, 0});
  EXPECT_NEAR(lift.dot(m * lift), whole, 1e-13);
  EXPECT_NEAR(lift.dot(dense(beam_lumped_mass(kAnywhere, kUnit, kSection)) * lift), whole, 1e-13);
}

TEST(Bar, ResistsStretchingOnly) {
  const Eigen::VectorXd values = eigenvalues(dense(bar_stiffness(kAnywhere, kUnit, kSection)));
  EXPECT_LT(values.head(11).cwiseAbs().maxCoeff(), 1e-14);
  EXPECT_NEAR(values(11), 2 * kUnit.youngs_modulus * kSection.area / length_of(kAnywhere), 1e-13);
}

TEST(Beam, NaturalUpIsNeverAlongTheMember) {
  EXPECT_EQ(natural_up({0, 0, 0}, {0, 0, 5}).x, 1);
  EXPECT_EQ(natural_up({0, 0, 0}, {1, 0, 5}).z, 1);
}

}  // namespace
}  // namespace stanchion::specimen
