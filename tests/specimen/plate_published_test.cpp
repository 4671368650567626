// Thin plates against published buckling coefficients and frequencies, with the order of convergence.
#include <gtest/gtest.h>

#include <numbers>

#include "specimen/dense_spectrum.hpp"
#include "specimen/specimen.hpp"

namespace stanchion {
namespace {

const double kRigidity = 210e9 * std::pow(0.010, 3) / (12 * (1 - 0.09));  // N m
constexpr double kWidth = 2, kForce = 100e3, kMassPerArea = 7850 * 0.010;

struct PlateCase {
  PlateLoad load = PlateLoad::kUniaxial;
  PlateEdges edges = PlateEdges::kSimple;
  double aspect = 1;
};

/// The plate specimen with exactly `divisions` elements over its width and square elements.
Specimen plate(const PlateCase& c, int divisions) {
  SpecimenOptions options;
  options.load = c.load;
  options.edges = c.edges;
  options.aspect = c.aspect;
  auto specimen =
      make_specimen("plate", static_cast<Offset>(std::lround(5 * c.aspect * divisions * divisions)), options);
  EXPECT_EQ(specimen->nodes.size(),
            static_cast<std::size_t>((divisions + 1) * std::lround(c.aspect * divisions + 1)));
  return std::move(specimen).value();
}

/// k = N b^2 / (pi^2 D) of the lowest critical force N.
double coefficient(const PlateCase& c, int divisions) {
  const Specimen specimen = plate(c, divisions);
  const double pi = std::numbers::pi;
  const auto factors = testing::lowest_values_of(specimen.stiffness, *specimen.geometric, 2, -1);
  return std::abs(factors[0]) * kForce * kWidth * kWidth / (pi * pi * kRigidity);
}

/// Checks second order towards `published` and the finest error.
void expect_convergence(const PlateCase& c, double published, double finest_error, double spread = 0.25) {
  const double e1 = coefficient(c, 8) / published - 1, e2 = coefficient(c, 16) / published - 1,
               e3 = coefficient(c, 32) / published - 1;
  EXPECT_LT(std::abs(e3), finest_error) << "errors " << e1 << " " << e2 << " " << e3;
  EXPECT_NEAR(std::log2(std::abs(e2 / e3)), 2, spread) << "errors " << e1 << " " << e2 << " " << e3;
  EXPECT_LT(std::abs(e2), std::abs(e1));
}

// Simply supported, uniaxial: k = (m b/a + a/(m b))^2; k = 4 at a/b = 1, 2, 3. Timoshenko and Gere, Theory of
// Elastic Stability, 2nd ed. 1961, ch. 9 (from memory); Megson, Aircraft Structures, eq. 6.55-6.56.
TEST(PlateBuckling, SimplySupportedUniaxial) {
  expect_convergence({PlateLoad::kUniaxial, PlateEdges::kSimple, 1}, 4.0, 3e-3);
  expect_convergence({PlateLoad::kUniaxial, PlateEdges::kSimple, 1.5}, 4.34027777777777778, 3e-3);
  expect_convergence({PlateLoad::kUniaxial, PlateEdges::kSimple, 2}, 4.0, 3e-3);
}

// Simply supported, equal biaxial: k = 1 + (b/a)^2 (same source): 2 at a/b = 1, 1.25 at 2.
TEST(PlateBuckling, SimplySupportedBiaxial) {
  expect_convergence({PlateLoad::kBiaxial, PlateEdges::kSimple, 1}, 2.0, 3e-3);
  expect_convergence({PlateLoad::kBiaxial, PlateEdges::kSimple, 2}, 1.25, 3e-3);
}

// Shear, simply supported: k = 9.34 (a/b = 1) and 6.6 (a/b = 2) in Timoshenko and Gere 1961, table 9-10 (from
// memory); the digits here are a Ritz solution with 12 x 12 sine terms, converged to 1e-6.
TEST(PlateBuckling, SimplySupportedShear) {
  expect_convergence({PlateLoad::kShear, PlateEdges::kSimple, 1}, 9.32452, 8e-3);
  expect_convergence({PlateLoad::kShear, PlateEdges::kSimple, 2}, 6.54603, 8e-3);
}

// Clamped: uniaxial 10.07, shear 14.71, biaxial 5.33 in handbooks (from memory); the digits are a Ritz
// solution with 12 x 12 terms.
TEST(PlateBuckling, Clamped) {
  expect_convergence({PlateLoad::kUniaxial, PlateEdges::kClamped, 1}, 10.0739481, 8e-3);
  expect_convergence({PlateLoad::kBiaxial, PlateEdges::kClamped, 1}, 5.3036261, 8e-3);
  expect_convergence({PlateLoad::kShear, PlateEdges::kClamped, 1}, 14.642014, 1.2e-2);
}

// omega a^2 sqrt(rho h / D) of the square plate: simply supported 2 pi^2, 5 pi^2, 5 pi^2, 8 pi^2;
// clamped 35.985, 73.394, 73.394, 108.22: Leissa, The free vibration of rectangular plates, J. Sound Vib. 31
// (1973) 257-293 (abstract seen; clamped digits from a Ritz solution with 12 x 12 terms).
TEST(PlateVibration, SquarePlates) {
  const struct {
    PlateEdges edges;
    double numbers[4];
  } cases[] = {{PlateEdges::kSimple,
                {19.7392088021787172, 49.3480220054467931, 49.3480220054467931, 78.956835208714869}},
               {PlateEdges::kClamped, {35.9851913, 73.3938472, 73.3938472, 108.2165072}}};
  for (const auto& c : cases) {
    std::array<double, 4> errors[2];
    for (int pass = 0; pass < 2; ++pass) {
      const Specimen specimen = plate({PlateLoad::kUniaxial, c.edges, 1}, pass == 0 ? 16 : 32);
      const auto values = testing::lowest_values_of(specimen.stiffness, *specimen.mass, 4, 1);
      for (std::size_t i = 0; i < 4; ++i) {
        const double number = std::sqrt(values[i] * kMassPerArea / kRigidity) * kWidth * kWidth;
        errors[pass][i] = number / c.numbers[i] - 1;
      }
    }
    for (std::size_t i = 0; i < 4; ++i) {
      EXPECT_LT(std::abs(errors[1][i]), 6e-3);
      EXPECT_NEAR(std::log2(errors[0][i] / errors[1][i]), 2, 0.2) << errors[0][i] << " " << errors[1][i];
    }
  }
}

// The clamped plate is stiffer than the simple one in every pencil (Rayleigh).
TEST(PlateBuckling, ClampingOnlyRaisesTheLoad) {
  for (const PlateLoad load : {PlateLoad::kUniaxial, PlateLoad::kBiaxial, PlateLoad::kShear}) {
    EXPECT_GT(coefficient({load, PlateEdges::kClamped, 1.5}, 12),
              coefficient({load, PlateEdges::kSimple, 1.5}, 12));
  }
}

}  // namespace
}  // namespace stanchion
