// Columns and plane frames against published critical loads and frequencies, with the order of convergence.
#include <gtest/gtest.h>

#include <numbers>

#include "specimen/assembler.hpp"
#include "specimen/beam.hpp"
#include "specimen/dense_spectrum.hpp"
#include "specimen/line_element.hpp"
#include "specimen/member_part.hpp"
#include "specimen/specimen.hpp"

namespace stanchion {
namespace {

using specimen::line_bending;
using specimen::line_geometric;
using specimen::line_mass;
using testing::critical_factors;
using testing::dense;

constexpr double kFlexural = 8388608, kForce = 122880;  // as the column specimen is loaded

/// P L^2 / (E I) of the lowest critical loads of the column specimen with `elements` elements.
std::vector<double> euler_numbers(ColumnEnds ends, Index elements) {
  SpecimenOptions options;
  options.ends = ends;
  const auto column = make_specimen("column", 3 * elements, options);
  double length = 0;
  for (const auto& place : column->nodes) length = std::max(length, place.z);
  EXPECT_EQ(static_cast<Index>(column->nodes.size()), elements + 1);
  std::vector<double> numbers = critical_factors(dense(column->stiffness), dense(*column->geometric));
  for (double& number : numbers) number *= kForce * length * length / kFlexural;
  return numbers;
}

struct EulerCase {
  const char* name;
  ColumnEnds ends;
  std::vector<double> published;  ///< P L^2 / (E I), ascending
};

// Timoshenko and Gere, Theory of Elastic Stability, 2nd ed. 1961, ch. 2 (from memory); the roots recomputed
// from tan x = x to the digits shown.
const EulerCase kEuler[] = {
    {"fixed-free", ColumnEnds::kFixedFree, {2.46740110027233965, 22.2066099024510569}},
    {"pinned-pinned", ColumnEnds::kPinnedPinned, {9.86960440108935862, 39.4784176043574345}},
    {"fixed-pinned", ColumnEnds::kFixedPinned, {20.19072855642663, 59.6795159441094189}},
    {"fixed-fixed", ColumnEnds::kFixedFixed, {39.4784176043574345, 80.7629142257065199, 157.913670417429738}},
    {"fixed-guided", ColumnEnds::kFixedGuided, {9.86960440108935862, 39.4784176043574345}},
};

TEST(EulerColumn, CriticalLoadsConvergeFromAboveWithOrderFour) {
  for (const EulerCase& c : kEuler) {
    const auto coarse = euler_numbers(c.ends, 8), fine = euler_numbers(c.ends, 16),
               finest = euler_numbers(c.ends, 32);
    for (std::size_t i = 0; i < c.published.size(); ++i) {
      const double exact = c.published[i], e1 = coarse[i] / exact - 1, e2 = fine[i] / exact - 1;
      const double order = std::log2(e1 / e2);
      EXPECT_GT(e2, 0) << c.name << ", load " << i + 1;
      EXPECT_NEAR(order, 4, 0.15) << c.name << ", load " << i + 1;
      // (k h)^4 / 720 to leading order
      const double kh = std::sqrt(exact) / 32;
      EXPECT_NEAR((finest[i] / exact - 1) / (std::pow(kh, 4) / 720), 1, 0.05) << c.name << ", load " << i + 1;
    }
  }
}

TEST(EulerColumn, PinnedVibrationConvergesToTheClosedForm) {
  // omega^2 = (n pi / L)^4 E I / (rho A): pinned beam, common textbook closed form.
  const auto column = make_specimen("column", 3 * 24);
  double length = 0;
  for (const auto& place : column->nodes) length = std::max(length, place.z);
  const auto found = testing::pencil_values(dense(column->stiffness), dense(*column->mass));
  for (int n = 1; n <= 3; ++n) {
    const double exact = std::pow(n * std::numbers::pi / length, 4) * kFlexural / 105;
    EXPECT_NEAR(found[static_cast<std::size_t>(n - 1)] / exact, 1, 1e-4);
    EXPECT_GT(found[static_cast<std::size_t>(n - 1)], exact);
  }
}

/// A chain of line elements from 0 to 1, E I = 1: unknowns v, v' of each node; `of(i, h)` gives element i.
template <class ElementOf>
Eigen::MatrixXd chain(int elements, const ElementOf& of) {
  Eigen::MatrixXd sum = Eigen::MatrixXd::Zero(2 * elements + 2, 2 * elements + 2);
  for (int i = 0; i < elements; ++i) sum.block<4, 4>(2 * i, 2 * i) += dense(of(i, 1.0 / elements));
  return sum;
}

/// The matrix without the given rows and columns.
Eigen::MatrixXd without(const Eigen::MatrixXd& a, const std::vector<Eigen::Index>& struck) {
  std::vector<Eigen::Index> kept;
  for (Eigen::Index i = 0; i < a.rows(); ++i) {
    if (std::find(struck.begin(), struck.end(), i) == struck.end()) kept.push_back(i);
  }
  return a(kept, kept);
}

TEST(BeamVibration, CantileverAndClampedBeams) {
  // beta L of the classical beams: roots of cos cosh = -1, +1 and tan = tanh (from memory,
  // recomputed).
  const int n = 20;
  const Eigen::MatrixXd k = chain(n, [](int, double h) { return line_bending(1, h); });
  const Eigen::MatrixXd m = chain(n, [](int, double h) { return line_mass(1, h); });
  struct {
    std::vector<Eigen::Index> struck;
    std::vector<double> beta;
  } const cases[] = {
      {{0, 1}, {1.87510406871196117, 4.69409113297417458, 7.85475743823761256}},
      {{0, 1, 2 * n, 2 * n + 1}, {4.73004074486270403, 7.85320462409583756, 10.9956078380016709}},
      {{0, 1, 2 * n}, {3.92660231204791878, 7.06858274562873209, 10.2101761228130305}},
  };
  for (const auto& c : cases) {
    const auto values = testing::pencil_values(without(k, c.struck), without(m, c.struck));
    for (std::size_t i = 0; i < 3; ++i) {
      EXPECT_NEAR(values[i] / std::pow(c.beta[i], 4), 1, std::pow(c.beta[i] / n, 4) / 500);
      EXPECT_GT(values[i], std::pow(c.beta[i], 4) * (1 - 1e-9));
    }
  }
}

TEST(ColumnUnderItsOwnWeight, ApproachesGreenhillsLoad) {
  // q L^3 / (E I) = 7.83734743894348389: Greenhill 1881; Timoshenko and Gere 1961, art. 2.12 (from memory).
  // The axial force is constant within an element here, so the order is 2.
  double errors[2];
  for (int pass = 0; pass < 2; ++pass) {
    const int n = pass == 0 ? 16 : 32;
    const Eigen::MatrixXd k = chain(n, [](int, double h) { return line_bending(1, h); });
    const Eigen::MatrixXd g =
        chain(n, [](int i, double h) { return line_geometric(-(1 - (i + 0.5) * h), h); });
    errors[pass] = critical_factors(without(k, {0, 1}), without(g, {0, 1}))[0] / 7.83734743894348389 - 1;
  }
  EXPECT_LT(std::abs(errors[1]), 1e-3);
  EXPECT_NEAR(std::log2(errors[0] / errors[1]), 2, 0.1);
}

TEST(ColumnOnElasticFoundation, MeetsHetenyi) {
  // P L^2 / (E I) for the pinned column, by k L^4 / (E I) = 0, 100, 1000, 10000: Hetenyi, Beams on Elastic
  // Foundation, 1946; Timoshenko and Gere 1961, art. 2.10 (from memory); recomputed from the closed form.
  const double foundation[] = {0, 100, 1000, 10000};
  const double published[] = {9.86960440108935862, 20.0017227653231358, 64.8087135149418773,
                              201.405532545735085};
  const int n = 40;
  const std::vector<Eigen::Index> pins{0, 2 * n};
  const Eigen::MatrixXd g = chain(n, [](int, double h) { return line_geometric(-1, h); });
  for (int c = 0; c < 4; ++c) {
    const Eigen::MatrixXd k = chain(n, [](int, double h) { return line_bending(1, h); }) +
                              foundation[c] * chain(n, [](int, double h) { return line_mass(1, h); });
    EXPECT_NEAR(critical_factors(without(k, pins), without(g, pins))[0] / published[c], 1, 5e-6);
  }
}

/// A portal of equal span and height 1, E I = 1 throughout, practically inextensible, in the x-z plane; the
/// columns carry the load. Returns P h^2 / (E I) of the lowest (sway) mode.
double portal_sway(bool fixed_feet, int pieces) {
  using namespace specimen;
  DofTable table;
  std::vector<Index> nodes;
  std::vector<PlacedMember> members;
  const Point corners[4] = {{0, 0, 0}, {0, 0, 1}, {1, 0, 1}, {1, 0, 0}};
  const DofSet plane = dof_bit(Dof::kUx) | dof_bit(Dof::kUz) | dof_bit(Dof::kRy);
  const DofSet foot = fixed_feet ? DofSet{0} : dof_bit(Dof::kRy);
  Index last = table.add_node(corners[0], foot);
  for (int side = 0; side < 3; ++side) {
    for (int piece = 1; piece <= pieces; ++piece) {
      const double r = static_cast<double>(piece) / pieces;
      const Point &a = corners[side], &b = corners[side + 1];
      const bool end = side == 2 && piece == pieces;
      const Index next =
          table.add_node({a.x + r * (b.x - a.x), 0, a.z + r * (b.z - a.z)}, end ? foot : plane);
      const Member line{table.place(last), table.place(next),
                        natural_up(table.place(last), table.place(next))};
      members.push_back({last, next, line, side == 1 ? 0.0 : -1.0});
      last = next;
    }
  }
  table.number();
  const Part part = member_part(members, {{1, 0, 1}, {1e8, 1, 1, 1}, false, MassKind::kConsistent});
  const ElementGroup k{2, part.dofs, part.stiffness->coupling, part.nodes, part.stiffness->fill};
  const ElementGroup g{2, part.dofs, part.geometric->coupling, part.nodes, part.geometric->fill};
  return critical_factors(dense(assemble(table, {&k, 1})), dense(assemble(table, {&g, 1})))[0];
}

TEST(PortalFrame, SwayLoadsMeetTheTextbook) {
  // Square portal, equal members, loads on the columns: k h tan(k h) = 6 (pinned feet, P h^2 / (E I) =
  // 1.82129282400148671) and tan(k h) = -k h / 6 (fixed feet, 7.37915356079897853): Timoshenko and Gere 1961,
  // art. 2.4 (from memory).
  EXPECT_NEAR(portal_sway(false, 12), 1.82129282400148671, 1e-5);
  EXPECT_NEAR(portal_sway(true, 12), 7.37915356079897853, 5e-5);
}

}  // namespace
}  // namespace stanchion
