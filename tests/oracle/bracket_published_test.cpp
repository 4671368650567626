// Brackets against published critical loads and frequencies: published.json of the shared data, whose values
// are Euler columns, columns on elastic foundation (Hetenyi, Beams on Elastic Foundation, 1946), portals
// (Timoshenko and Gere, Theory of Elastic Stability, 1961), plates (Timoshenko and Gere; Leissa, Vibration of
// Plates, 1969) recomputed from their equations; the file names its sources. A mesh converges: its error must
// fall, by the order of the element, not only be small.
#include <array>
#include <cmath>
#include <fstream>
#include <nlohmann/json.hpp>
#include <numbers>

#include "engine/model_files.hpp"
#include "oracle/beam_model.hpp"
#include "oracle/shared_facts.hpp"
#include "specimen/specimen.hpp"

namespace stanchion {
namespace {

using namespace test;

const nlohmann::json& published() {
  static const nlohmann::json file =
      nlohmann::json::parse(std::ifstream(STANCHION_SHARED_DATA "/published.json"));
  return file;
}

double real(const nlohmann::json& value) {
  return value.is_string() ? std::stod(value.get<std::string>()) : value.get<double>();
}

/// The first `many` values of K + f G, or of K - s M.
std::vector<CriticalValue> first_values(const SymmetricMatrix& stiffness, const SymmetricMatrix& second,
                                        bool mass, Index many) {
  ModelFiles files;
  Request request;
  request.input.stiffness = files.matrix("K.mtx", stiffness);
  (mass ? request.input.mass : request.input.geometric) = files.matrix("S.mtx", second);
  request.pencil = mass ? Pencil::kMass : Pencil::kGeometric;
  request.bracket.unit = mass ? ValueUnit::kOmega2 : ValueUnit::kFactor;
  request.bracket.first = many;
  const Outcome outcome = answer(run_bracket(request, {}));
  EXPECT_TRUE(outcome.bracket->complete);
  for (const CriticalValue& value : outcome.bracket->critical) EXPECT_LE(value.low, value.high);
  return outcome.bracket->critical;
}

/// Errors of a coarse and a fine mesh relative to `exact`: small, and falling by at least `fall`.
void expect_convergence(double coarse, double fine, double exact, double fall, double small) {
  const double before = std::fabs(coarse / exact - 1), after = std::fabs(fine / exact - 1);
  EXPECT_LT(after, small) << fine << " against " << exact;
  EXPECT_LT(after, before / fall + 1e-9) << coarse << " then " << fine << " against " << exact;
}

class Published : public testing::Test {
 protected:
  void SetUp() override {
    if (!shared_data_present()) GTEST_SKIP() << "no shared data beside the project";
  }
};

constexpr EndSupport kFixed{true, true}, kPinned{true, false}, kFree{false, false}, kGuided{false, true};
constexpr std::tuple<const char*, EndSupport, EndSupport> kEndConditions[] = {
    {"fixed-free", kFixed, kFree},     {"pinned-pinned", kPinned, kPinned},
    {"fixed-pinned", kFixed, kPinned}, {"fixed-fixed", kFixed, kFixed},
    {"fixed-guided", kFixed, kGuided}, {"pinned-guided", kPinned, kGuided}};

TEST_F(Published, EulerColumnsForAllSixEndConditions) {
  const auto& euler = published()["closed_form"]["euler_P_L2_over_EI"];
  for (const auto& [name, low, high] : kEndConditions) {
    SCOPED_TRACE(name);
    double found[2];
    for (const Index elements : {12, 24}) {
      const BeamModel column = straight_member(elements, low, high, 0);
      found[elements == 24] = first_values(column.stiffness(), column.geometric(), false, 1).front().value;
    }
    expect_convergence(found[0], found[1], real(euler[name]), 12, 1e-5);  // cubic elements: fourth order
  }
}

/// The k-th root of tan x = x: every (k + 1/2) pi is just above one; x = k pi + atan x contracts there.
double root_of_tangent(int k) {
  double x = (k + 0.5) * std::numbers::pi;
  for (int step = 0; step < 60; ++step) x = k * std::numbers::pi + std::atan(x);
  return x;
}

/// P L^2 / (E I) of the three lowest loads. The published file has all of them for fixed ends, two for a
/// pinned one; the rest are the closed forms that its first loads come from (Timoshenko and Gere, ch. 2; from
/// memory).
std::vector<double> three_loads(const std::string& ends) {
  const auto& closed = published()["closed_form"];
  const auto square = [](double x) { return x * x; };
  std::vector<double> loads;
  for (int k = 1; k <= 3; ++k) {
    if (ends == "fixed-fixed") {
      loads.push_back(real(closed["euler_fixed_fixed_first3"][static_cast<std::size_t>(k - 1)]));
    } else if (ends == "fixed-pinned") {
      loads.push_back(square(root_of_tangent(k)));
    } else if (ends == "pinned-pinned" || ends == "fixed-guided") {
      loads.push_back(square(k * std::numbers::pi));
    } else {  // quarter waves: fixed-free, pinned-guided
      loads.push_back(square((k - 0.5) * std::numbers::pi));
    }
  }
  EXPECT_NEAR(loads[0] / real(closed["euler_P_L2_over_EI"][ends]), 1, 1e-14);
  if (ends == "fixed-pinned") {
    EXPECT_NEAR(loads[1] / real(closed["euler_fixed_pinned_first2"][1]), 1, 1e-14);
  }
  return loads;
}

TEST_F(Published, SecondAndThirdLoadsOfColumnsConvergeWithOrderFour) {
  for (const auto& [name, low, high] : kEndConditions) {
    const std::vector<double> exact = three_loads(name);
    std::array<std::vector<double>, 3> errors;
    std::size_t mesh = 0;
    for (const Index elements : {12, 24, 48}) {
      const BeamModel column = straight_member(elements, low, high, 0);
      const auto found = first_values(column.stiffness(), column.geometric(), false, 3);
      ASSERT_EQ(found.size(), 3u) << name;
      for (std::size_t k = 0; k < 3; ++k) errors[mesh].push_back(found[k].value / exact[k] - 1);
      ++mesh;
    }
    for (std::size_t k = 1; k < 3; ++k) {
      SCOPED_TRACE(testing::Message() << name << ", load " << k + 1);
      EXPECT_GT(errors[2][k], 0);  // shapes of the mesh are shapes of the column: from above
      EXPECT_NEAR(std::log2(errors[0][k] / errors[1][k]), 4, 0.15);
      EXPECT_NEAR(std::log2(errors[1][k] / errors[2][k]), 4, 0.05);
      // (k h)^4 / 720 to leading order, found from the stencil of the cubic element
      EXPECT_NEAR(errors[2][k] / (std::pow(std::sqrt(exact[k]) / 48, 4) / 720), 1, 0.02);
    }
  }
}

TEST_F(Published, ColumnsOnElasticFoundation) {
  for (const auto& [key, exact] :
       published()["closed_form"]["beam_on_elastic_foundation_pinned_P_L2_over_EI"].items()) {
    SCOPED_TRACE("foundation " + key);
    double found[2];
    for (const Index elements : {10, 20}) {
      const BeamModel column = straight_member(elements, kPinned, kPinned, std::stod(key));
      found[elements == 20] = first_values(column.stiffness(), column.geometric(), false, 1).front().value;
    }
    expect_convergence(found[0], found[1], real(exact[0]), 12, 1e-4);
  }
}

TEST_F(Published, PortalsThatSway) {
  const auto& closed = published()["closed_form"];
  for (const bool fixed : {false, true}) {
    SCOPED_TRACE(fixed ? "fixed" : "pinned");
    const double exact = real(closed[fixed ? "portal_fixed_sway_P_h2_EI" : "portal_pinned_sway_P_h2_EI"]);
    double found[2];
    for (const Index elements : {3, 6}) {
      const BeamModel frame = portal(elements, fixed);
      found[elements == 6] = first_values(frame.stiffness(), frame.geometric(), false, 1).front().value;
    }
    expect_convergence(found[0], found[1], exact, 12, 1e-4);
  }
}

TEST_F(Published, FrequenciesOfBeams) {
  const auto& closed = published()["closed_form"]["beam_beta_L"];
  const std::tuple<const char*, EndSupport, EndSupport, Index> cases[] = {
      {"clamped-clamped = free-free", kFixed, kFixed, 0},
      {"clamped-clamped = free-free", kFree, kFree, 2},
      {"cantilever", kFixed, kFree, 0},
      {"clamped-pinned", kFixed, kPinned, 0},
      {"pinned", kPinned, kPinned, 0}};
  for (const auto& [name, low, high, rigid] : cases) {
    SCOPED_TRACE(testing::Message() << name << ", rigid motions " << rigid);
    double beta[2][3];
    for (const Index elements : {12, 24}) {
      const BeamModel beam = straight_member(elements, low, high, 0);
      auto found = first_values(beam.stiffness(), beam.mass(), true, 3);
      if (rigid > 0) {  // zeros apart
        ASSERT_TRUE(found.front().rigid_body);
        EXPECT_EQ(found.front().multiplicity, rigid);
        found.erase(found.begin());
      }
      ASSERT_EQ(found.size(), 3u);
      for (std::size_t k = 0; k < 3; ++k) beta[elements == 24][k] = std::sqrt(std::sqrt(found[k].value));
    }
    for (std::size_t k = 0; k < 3; ++k)  // cubic elements: fourth order
      expect_convergence(beta[0][k], beta[1][k], real(closed[name][k]), 12, 2e-5);
  }
}

/// Values of a plate specimen in the usual dimensionless form: k = N b^2 / (pi^2 D), or omega a^2 sqrt(rho h
/// / D).
std::vector<double> plate_values(PlateLoad load, PlateEdges edges, double aspect, Offset unknowns, bool mass,
                                 Index many) {
  SpecimenOptions options;
  options.load = load;
  options.edges = edges;
  options.aspect = aspect;
  const auto plate = make_specimen("plate", unknowns, options);
  EXPECT_TRUE(plate.ok());
  const double width = 2, thickness = 0.01, rigidity = 210e9 * std::pow(thickness, 3) / (12 * (1 - 0.09));
  std::vector<double> values;
  for (const CriticalValue& found :
       first_values(plate->stiffness, mass ? *plate->mass : *plate->geometric, mass, many)) {
    const double value =
        mass ? std::sqrt(found.value * 7850 * thickness / rigidity) * std::pow(aspect * width, 2)
             : found.value * 100e3 * width * width / (std::numbers::pi * std::numbers::pi * rigidity);
    values.insert(values.end(), static_cast<std::size_t>(found.multiplicity), value);
  }
  return values;
}

TEST_F(Published, PlatesUnderCompressionForSeveralAspects) {
  for (const auto& [key, exact] : published()["closed_form"]["plate_SSSS_uniaxial_k"].items()) {
    const double aspect = std::stod(key);
    if (aspect != 0.5 && aspect != 1.0 && aspect != 1.5 && aspect != 2.0 && aspect != 3.0) continue;
    SCOPED_TRACE("aspect " + key);
    const double coarse = plate_values(PlateLoad::kUniaxial, PlateEdges::kSimple, aspect, 2000, false, 1)[0];
    const double fine = plate_values(PlateLoad::kUniaxial, PlateEdges::kSimple, aspect, 8000, false, 1)[0];
    expect_convergence(coarse, fine, real(exact[0]), 2.5, 0.01);
  }
}

/// Equal compression both ways: closed forms for three aspects, from 2 down towards 1.
TEST_F(Published, PlatesUnderEqualCompressionBothWaysForSeveralAspects) {
  const auto& biaxial = published()["closed_form"]["plate_SSSS_biaxial_k"];
  for (const double aspect : {1.0, 2.0, 3.0}) {
    SCOPED_TRACE(testing::Message() << "aspect " << aspect);
    const auto& exact = biaxial[std::to_string(static_cast<int>(aspect)) + ",beta=1"];
    const double coarse = plate_values(PlateLoad::kBiaxial, PlateEdges::kSimple, aspect, 2000, false, 1)[0];
    const double fine = plate_values(PlateLoad::kBiaxial, PlateEdges::kSimple, aspect, 8000, false, 1)[0];
    expect_convergence(coarse, fine, real(exact[0]), 2.5, 0.005);
  }
}

TEST_F(Published, PlatesUnderBiaxialAndShearLoadAndClamped) {
  const auto& ritz = published()["plate_ritz_converged"]["N=12"];
  const std::tuple<const char*, PlateLoad, PlateEdges, double> cases[] = {
      {"SSSS biaxial 1", PlateLoad::kBiaxial, PlateEdges::kSimple, 1},
      {"CCCC biaxial 1", PlateLoad::kBiaxial, PlateEdges::kClamped, 1},
      {"CCCC uniaxial 1", PlateLoad::kUniaxial, PlateEdges::kClamped, 1},
      {"CCCC uniaxial 2", PlateLoad::kUniaxial, PlateEdges::kClamped, 2},
      {"SSSS shear 1", PlateLoad::kShear, PlateEdges::kSimple, 1},
      {"SSSS shear 1.5", PlateLoad::kShear, PlateEdges::kSimple, 1.5},
      {"SSSS shear 2", PlateLoad::kShear, PlateEdges::kSimple, 2},
      {"CCCC shear 1", PlateLoad::kShear, PlateEdges::kClamped, 1}};
  for (const auto& [name, load, edges, aspect] : cases) {
    SCOPED_TRACE(name);
    const double coarse = plate_values(load, edges, aspect, 2000, false, 1)[0];
    const double fine = plate_values(load, edges, aspect, 8000, false, 1)[0];
    expect_convergence(coarse, fine, real(ritz[name]), 2.5, 0.015);
  }
}

TEST_F(Published, FrequenciesOfPlates) {
  const auto& ritz = published()["plate_ritz_converged"]["N=12"];
  for (const auto& [name, edges] :
       {std::pair{"SSSS vib", PlateEdges::kSimple}, std::pair{"CCCC vib 1", PlateEdges::kClamped}}) {
    SCOPED_TRACE(name);
    const auto coarse = plate_values(PlateLoad::kUniaxial, edges, 1, 2000, true, 4);
    const auto fine = plate_values(PlateLoad::kUniaxial, edges, 1, 8000, true, 4);
    ASSERT_GE(fine.size(), 4u);
    for (std::size_t k = 0; k < 4; ++k)
      expect_convergence(coarse[k], fine[k], real(ritz[name][k]), 2.5, 0.02);
  }
}

TEST_F(Published, PairsOfTheCollectionWithBothSigns) {
  const auto facts = nlohmann::json::parse(std::ifstream(STANCHION_SHARED_DATA "/facts.json"));
  const std::string folder = STANCHION_SHARED_DATA "/";
  for (const auto& [name, fact] : facts["pairs"].items()) {
    SCOPED_TRACE(name);
    const auto slash = name.find('/');
    Request request;
    request.input.stiffness = folder + name.substr(0, slash) + ".mtx";
    const std::string second = folder + name.substr(slash + 1) + ".mtx";
    const bool indefinite = !fact["closest_negative"].empty();
    (indefinite ? request.input.geometric : request.input.mass) = second;
    request.pencil = indefinite ? Pencil::kGeometric : Pencil::kMass;
    request.input.load_sign_minus = indefinite;  // K - s M
    request.bracket.unit = indefinite ? ValueUnit::kFactor : ValueUnit::kOmega2;
    for (const char* side : {"lowest_positive", "closest_negative"}) {
      const auto& values = fact[side];
      if (values.empty()) continue;
      const bool negative = std::string(side) == "closest_negative";
      request.bracket.first = static_cast<Index>(std::min<std::size_t>(values.size(), 6));
      request.bracket.side = negative ? Side::kNegative : Side::kPositive;
      const Outcome outcome = answer(run_bracket(request, {}));
      ASSERT_TRUE(outcome.bracket->complete);
      std::vector<CriticalValue> found = outcome.bracket->critical;
      if (negative) std::reverse(found.begin(), found.end());
      std::size_t k = 0;
      for (const CriticalValue& value : found) {
        for (Index times = 0; times < value.multiplicity && k < values.size(); ++times, ++k) {
          // Dense generalised eigenvalues carry rounding of their own, relative to the largest of the inverse
          // pencil.
          EXPECT_NEAR(real(values[k]) / value.value, 1, 1e-6) << k;
        }
      }
      EXPECT_GE(k, static_cast<std::size_t>(*request.bracket.first));
      if (negative) {  // the positive ones are far nearer to 0
        EXPECT_TRUE(warned(outcome, "factors-on-the-other-side"));
      }
    }
  }
}

}  // namespace
}  // namespace stanchion
