// The facet of a curved shell: rigid motions, turning, and the parts of which it consists.
#include "specimen/facet_shell.hpp"

#include <gtest/gtest.h>

#include <numbers>

#include "specimen/dense_spectrum.hpp"
#include "specimen/flat_shell.hpp"

namespace stanchion::specimen {
namespace {

using stanchion::testing::dense;

constexpr Rectangle kShape{0.4, 0.3, 0.02};
constexpr std::array<std::array<double, 2>, 4> kPlace{{{0, 0}, {0.4, 0}, {0.4, 0.3}, {0, 0.3}}};

/// The six rigid motions of the rectangle in its own axes, one a column.
Eigen::MatrixXd rigid_motions() {
  Eigen::MatrixXd motion = Eigen::MatrixXd::Zero(24, 6);
  for (int corner = 0; corner < 4; ++corner) {
    const double x = kPlace[static_cast<std::size_t>(corner)][0],
                 y = kPlace[static_cast<std::size_t>(corner)][1];
    const int at = 6 * corner;
    for (int i = 0; i < 6; ++i) motion(at + i, i) = 1;
    motion(at + 2, 3) = y;   // about x
    motion(at + 2, 4) = -x;  // about y
    motion(at, 5) = -y;      // about z
    motion(at + 1, 5) = x;
  }
  return motion;
}

TEST(FacetShell, NothingButSixRigidMotionsIsFree) {
  const Eigen::MatrixXd k = dense(facet_stiffness(kShape, kSteel)), motion = rigid_motions();
  EXPECT_LT((k * motion).cwiseAbs().maxCoeff(), 1e-14 * k.cwiseAbs().maxCoeff());
  const auto count = stanchion::testing::signs(k, 1e-12);
  EXPECT_EQ(count.negative, 0);
  EXPECT_EQ(count.zero, 6);
}

TEST(FacetShell, TurningKeepsEigenvaluesAndTurnsBack) {
  const ElementMatrix<24> own = facet_stiffness(kShape, kSteel);
  const ElementMatrix<24> turned = turned_about_x(own, 0.7);
  const Eigen::VectorXd before = stanchion::testing::eigenvalues(dense(own)),
                        after = stanchion::testing::eigenvalues(dense(turned));
  EXPECT_LT((before - after).cwiseAbs().maxCoeff(), 1e-13 * before.maxCoeff());
  EXPECT_LT((dense(turned_about_x(turned, -0.7)) - dense(own)).cwiseAbs().maxCoeff(),
            1e-14 * before.maxCoeff());
  // A quarter turn: what was along y is along z, and what was along z is along -y.
  const Eigen::MatrixXd quarter = dense(turned_about_x(own, std::numbers::pi / 2)), flat = dense(own);
  for (int a = 0; a < 24; a += 6) {
    EXPECT_NEAR(quarter(a + 2, a + 2), flat(a + 1, a + 1), 1e-14 * before.maxCoeff());
    EXPECT_NEAR(quarter(a, a + 2), flat(a, a + 1), 1e-14 * before.maxCoeff());
    EXPECT_NEAR(quarter(a + 1, a + 3), -flat(a + 2, a + 3), 1e-14 * before.maxCoeff());
  }
}

TEST(FacetShell, ForceWorksOnSlopesAlongXAlone) {
  // uz = x with its slope, or uy = x: each slope is 1 over the whole area.
  const double force = -5, area = kShape.length * kShape.width;
  const Eigen::MatrixXd g = dense(facet_geometric(kShape, force)), motion = rigid_motions();
  const Eigen::MatrixXd energy = motion.transpose() * g * motion;
  EXPECT_NEAR(energy(4, 4), force * area, 1e-12);
  EXPECT_NEAR(energy(5, 5), force * area, 1e-12);
  EXPECT_NEAR(energy(3, 3), 0, 1e-12);  // uz = y
  EXPECT_NEAR(energy(4, 5), 0, 1e-12);
  EXPECT_EQ(g.row(0).norm(), 0);  // ux
}

TEST(FacetShell, MassesWeighTheWholeFacet) {
  const double weight = kSteel.density * kShape.length * kShape.width * kShape.thickness;
  const Eigen::MatrixXd motion = rigid_motions();
  for (const auto& m : {facet_mass(kShape, kSteel), facet_lumped_mass(kShape, kSteel)}) {
    const Eigen::MatrixXd energy = motion.transpose() * dense(m) * motion;
    for (int i = 0; i < 3; ++i) EXPECT_NEAR(energy(i, i) / weight, 1, 1e-12);
  }
}

}  // namespace
}  // namespace stanchion::specimen
