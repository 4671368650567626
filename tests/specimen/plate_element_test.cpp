// The rectangle elements: rigid motions, constant strain and curvature, geometric stiffness, the offset
// shell.
#include <gtest/gtest.h>

#include "specimen/dense_spectrum.hpp"
#include "specimen/flat_shell.hpp"
#include "specimen/membrane.hpp"
#include "specimen/plate_bending.hpp"

namespace stanchion::specimen {
namespace {

using testing::dense;
using testing::eigenvalues;

const Rectangle kShape{1.6, 0.9, 0.2};
const Material kUnit{5.0, 0.3, 2.0};
const Rectangle kPieces[4] = {{1.6, 0.9, 0.2}, {0.7, 0.9, 0.2}, {0.7, 1.1, 0.2}, {1.6, 1.1, 0.2}};

double bending_rigidity() {
  return kUnit.youngs_modulus * std::pow(0.2, 3) / (12 * (1 - 0.09));
}

/// Nodal w, rx, ry of w = c0 + c1 x + c2 y + c3 x^2 + c4 x y + c5 y^2 on a rectangle whose first corner is
/// (x0, y0).
Eigen::VectorXd quadratic(const Rectangle& shape, double x0, double y0, const std::array<double, 6>& c) {
  const double xs[4] = {x0, x0 + shape.length, x0 + shape.length, x0};
  const double ys[4] = {y0, y0, y0 + shape.width, y0 + shape.width};
  Eigen::VectorXd u(12);
  for (int i = 0; i < 4; ++i) {
    const double x = xs[i], y = ys[i];
    u(3 * i) = c[0] + c[1] * x + c[2] * y + c[3] * x * x + c[4] * x * y + c[5] * y * y;
    u(3 * i + 1) = c[2] + c[4] * x + 2 * c[5] * y;
    u(3 * i + 2) = -(c[1] + 2 * c[3] * x + c[4] * y);
  }
  return u;
}

TEST(PlateBending, HasExactlyThreeZeroEigenvalues) {
  const Eigen::MatrixXd k = dense(bending_stiffness(kShape, kUnit));
  EXPECT_EQ((k - k.transpose()).cwiseAbs().maxCoeff(), 0);
  EXPECT_LT(std::abs(eigenvalues(k)(2)), 1e-15);
  EXPECT_GT(eigenvalues(k)(3), 1e-4);
  EXPECT_LT((k * quadratic(kShape, 0, 0, {1, 2, 3, 0, 0, 0})).norm(), 1e-14);
}

TEST(PlateBending, ConstantCurvatureHasTheExactEnergy) {
  const std::array<double, 6> c{0.1, 0.2, 0.3, 0.4, -0.5, 0.6};
  const double xx = 2 * c[3], yy = 2 * c[5], xy = c[4], nu = kUnit.poisson;
  const double density = bending_rigidity() * (xx * xx + yy * yy + 2 * nu * xx * yy + 2 * (1 - nu) * xy * xy);
  const Eigen::VectorXd u = quadratic(kShape, 0.3, -0.2, c);
  EXPECT_NEAR(u.dot(dense(bending_stiffness(kShape, kUnit)) * u), density * 1.6 * 0.9, 1e-13);
}

TEST(PlateBending, PatchTestPassesAroundAnInnerNode) {
  // Four different rectangles around the node (1.6, 0.9): no force and no moment on it under constant
  // curvature.
  const std::array<double, 6> c{0.1, 0.2, 0.3, 0.4, -0.5, 0.6};
  const double x0[4] = {0, 1.6, 1.6, 0}, y0[4] = {0, 0, 0.9, 0.9};
  const int inner[4] = {2, 3, 0, 1};
  Eigen::Vector3d force = Eigen::Vector3d::Zero();
  for (int e = 0; e < 4; ++e) {
    const Eigen::VectorXd f =
        dense(bending_stiffness(kPieces[e], kUnit)) * quadratic(kPieces[e], x0[e], y0[e], c);
    force += f.segment<3>(3 * inner[e]);
  }
  EXPECT_LT(force.norm(), 1e-14);
}

TEST(PlateBending, GeometricStiffnessOfAPlaneAndOfATwist) {
  const Eigen::MatrixXd g = dense(bending_geometric(kShape, {2, 3, 5}));
  const double area = 1.6 * 0.9;
  const Eigen::VectorXd tilt = quadratic(kShape, 0, 0, {0, 0.7, -0.4, 0, 0, 0});
  EXPECT_NEAR(tilt.dot(g * tilt), area * (2 * 0.49 + 3 * 0.16 + 2 * 5 * 0.7 * -0.4), 1e-13);
  // w = x y: dw/dx = y, dw/dy = x, integrals of y^2, x^2, x y over the rectangle.
  const Eigen::VectorXd twist = quadratic(kShape, 0, 0, {0, 0, 0, 0, 1, 0});
  const double l = 1.6, b = 0.9;
  EXPECT_NEAR(twist.dot(g * twist), 2 * l * b * b * b / 3 + 3 * b * l * l * l / 3 + 2 * 5 * l * l * b * b / 4,
              1e-13);
  EXPECT_LT((g * quadratic(kShape, 0, 0, {1, 0, 0, 0, 0, 0})).norm(), 1e-14);
}

TEST(PlateBending, MassIsPositiveDefiniteAndWhole) {
  const Eigen::MatrixXd m = dense(bending_mass(kShape, kUnit));
  EXPECT_GT(eigenvalues(m)(0), 0);
  const Eigen::VectorXd lift = quadratic(kShape, 0, 0, {1, 0, 0, 0, 0, 0});
  EXPECT_NEAR(lift.dot(m * lift), 2.0 * 0.2 * 1.6 * 0.9, 1e-14);
}

TEST(Membrane, ConstantStrainAndRigidMotion) {
  const Eigen::MatrixXd k = dense(membrane_stiffness(kShape, kUnit));
  EXPECT_LT(std::abs(eigenvalues(k)(2)), 1e-15);
  EXPECT_GT(eigenvalues(k)(3), 1e-3);
  const double exx = 0.3, eyy = -0.2, gxy = 0.5, nu = kUnit.poisson;
  Eigen::VectorXd u(8);
  const double xs[4] = {0, 1.6, 1.6, 0}, ys[4] = {0, 0, 0.9, 0.9};
  for (int i = 0; i < 4; ++i) u(2 * i) = exx * xs[i] + gxy * ys[i], u(2 * i + 1) = eyy * ys[i];
  const double c = kUnit.youngs_modulus * 0.2 / (1 - nu * nu);
  const double density = c * (exx * exx + eyy * eyy + 2 * nu * exx * eyy + (1 - nu) / 2 * gxy * gxy);
  EXPECT_NEAR(u.dot(k * u), density * 1.6 * 0.9, 1e-13);
}

TEST(FlatShell, HasSixZeroEigenvaluesWithAndWithoutOffset) {
  for (const double offset : {0.0, 0.3}) {
    const Eigen::VectorXd values = eigenvalues(dense(shell_stiffness(kShape, kUnit, offset)));
    EXPECT_LT(std::abs(values(5)), 1e-14);
    EXPECT_GT(values(6), 1e-5);
    EXPECT_GT(eigenvalues(dense(shell_mass(kShape, kUnit, offset)))(0), 0);
  }
}

TEST(FlatShell, OffsetIsTheRigidLinkToTheMiddleSurface) {
  // Pure bending of the middle surface w = x^2 / 2 seen from nodes 0.3 below it: ux(node) = -0.3 * ry.
  const double offset = 0.3;
  Eigen::VectorXd middle = Eigen::VectorXd::Zero(20), lowered = Eigen::VectorXd::Zero(20);
  const Eigen::VectorXd bent = quadratic(kShape, 0, 0, {0, 0, 0, 0.5, 0, 0});
  for (int i = 0; i < 4; ++i) {
    middle.segment<3>(5 * i + 2) = lowered.segment<3>(5 * i + 2) = bent.segment<3>(3 * i);
    lowered(5 * i) = -offset * bent(3 * i + 2);
    lowered(5 * i + 1) = offset * bent(3 * i + 1);
  }
  EXPECT_NEAR(lowered.dot(dense(shell_stiffness(kShape, kUnit, offset)) * lowered),
              middle.dot(dense(shell_stiffness(kShape, kUnit)) * middle), 1e-13);
}

TEST(FlatShell, LumpedMassIsWhole) {
  EXPECT_NEAR(dense(shell_lumped_mass(kShape, kUnit)).diagonal().sum(), 3 * 2.0 * 0.2 * 1.6 * 0.9, 1e-14);
}

}  // namespace
}  // namespace stanchion::specimen
