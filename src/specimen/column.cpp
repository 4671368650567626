// A straight column of many plane beam elements: closed-form answers, and conditioning as bad as one likes.
// Every entry is an exact multiple of a power of two, so the matrices hold no rounding at all and the stated
// counts stay true however many elements there are.
#include <algorithm>
#include <cmath>
#include <numbers>

#include "specimen/closed_form.hpp"
#include "specimen/faults.hpp"
#include "specimen/line_element.hpp"
#include "specimen/models.hpp"

namespace stanchion::specimen {
namespace {

constexpr DofSet kAxial = dof_bit(Dof::kUz), kBending = dof_bit(Dof::kUx) | dof_bit(Dof::kRy);
constexpr double kFlexural = 8388608;       // E I, N m^2, 2^23
constexpr double kStretching = 2147483648;  // E A, N, 2^31
constexpr double kReferenceForce = 122880;  // N, 30 * 2^12
constexpr double kMassPerLength = 105;      // kg/m, 420 / 4

/// Elements of a length that is a power of two, together 8 to 16 m.
struct ColumnMesh {
  Index elements = 1;
  double element_length = 8;

  double length() const { return elements * element_length; }
};

ColumnMesh mesh_for(Offset unknowns) {
  ColumnMesh mesh;
  mesh.elements = std::max<Index>(2, static_cast<Index>((unknowns + 1) / 3));
  while (mesh.length() >= 16) mesh.element_length /= 2;
  return mesh;
}

/// Unknowns ux (lateral), uz (along), ry = d ux / dz of either end.
ElementMatrix<6> placed(double axial_same, double axial_other, const ElementMatrix<4>& line) {
  constexpr std::array kPlace{0, 2, 3, 5};
  ElementMatrix<6> m;
  m(1, 1) = m(4, 4) = axial_same;
  m(1, 4) = m(4, 1) = axial_other;
  for (std::size_t i = 0; i < 4; ++i) {
    for (std::size_t j = 0; j < 4; ++j) {
      m(kPlace[i], kPlace[j]) = line(static_cast<int>(i), static_cast<int>(j));
    }
  }
  return m;
}

void add_elements(Model& model, const ColumnMesh& mesh, MassKind mass) {
  const double h = mesh.element_length, axial = kStretching / h;
  Part part{2, kAxial | kBending, {}, {}, {}, {}};
  for (Index i = 0; i <= mesh.elements; ++i) model.table.add_node({0, 0, i * h}, kAxial | kBending);
  for (Index i = 0; i < mesh.elements; ++i) part.nodes.insert(part.nodes.end(), {i, i + 1});
  Coupling coupling = full_coupling(kBending);
  coupling[static_cast<std::size_t>(Dof::kUz)] = kAxial;
  part.stiffness = PartMatrix{coupling, same_for_all(placed(axial, -axial, line_bending(kFlexural, h)))};
  part.geometric =
      PartMatrix{full_coupling(kBending), same_for_all(placed(0, 0, line_geometric(-kReferenceForce, h)))};
  if (mass == MassKind::kConsistent) {
    const double third = kMassPerLength * h / 3;
    part.mass = PartMatrix{coupling, same_for_all(placed(third, third / 2, line_mass(kMassPerLength, h)))};
  } else {
    ElementMatrix<6> lumped;
    for (const int i : {0, 1, 3, 4}) lumped(i, i) = kMassPerLength * h / 2;
    Coupling diagonal{};
    for (const Dof dof : {Dof::kUx, Dof::kUz, Dof::kRy})
      diagonal[static_cast<std::size_t>(dof)] = dof_bit(dof);
    part.mass = PartMatrix{diagonal, same_for_all(lumped)};
  }
  model.parts.push_back(std::move(part));
}

void support(DofTable& table, Index top, ColumnEnds ends) {
  const DofSet lateral = dof_bit(Dof::kUx), turning = dof_bit(Dof::kRy);
  const bool pinned_foot = ends == ColumnEnds::kPinnedPinned;
  table.strike(0, static_cast<DofSet>(kAxial | lateral | (pinned_foot ? 0 : turning)));
  if (ends == ColumnEnds::kPinnedPinned || ends == ColumnEnds::kFixedPinned) table.strike(top, lateral);
  if (ends == ColumnEnds::kFixedFixed) table.strike(top, lateral | turning);
  if (ends == ColumnEnds::kFixedGuided) table.strike(top, turning);
}

/// The n-th positive root of tan x = x, n from 1.
double tangent_root(Index n) {
  double low = n * std::numbers::pi, high = low + std::numbers::pi / 2;
  const double sign = n % 2 == 0 ? 1 : -1;
  for (int step = 0; step < 200; ++step) {
    const double middle = (low + high) / 2;
    (sign * (std::sin(middle) - middle * std::cos(middle)) < 0 ? low : high) = middle;
  }
  return low;
}

/// sqrt(P / E I) times the length, for the n-th critical load P, n from 1.
double critical_number(ColumnEnds ends, Index n) {
  const double pi = std::numbers::pi;
  switch (ends) {
    case ColumnEnds::kFixedFree:
      return (n - 0.5) * pi;
    case ColumnEnds::kFixedPinned:
      return tangent_root(n);
    case ColumnEnds::kFixedFixed:
      return n % 2 == 1 ? (n + 1) * pi : 2 * tangent_root(n / 2);
    default:
      return n * pi;
  }
}

/// The cubic element overestimates a critical load by (k h)^4 / 720, to leading order.
double excess(double kh) {
  return std::pow(kh, 4) / 600;
}

void add_buckling(Expected& expected, const ColumnMesh& mesh, ColumnEnds ends) {
  const std::string why =
      "Euler's closed form, Timoshenko and Gere, Theory of Elastic Stability, 2nd ed. 1961, ch. 2 (from "
      "memory); "
      "cubic elements meet it from above";
  std::vector<SpectrumValue> spectrum;
  for (Index n = 1; n <= 24 && critical_number(ends, n) <= mesh.elements; ++n) {
    const double number = critical_number(ends, n);
    spectrum.push_back({number * number * kFlexural / (kReferenceForce * mesh.length() * mesh.length()),
                        excess(number / mesh.elements)});
  }
  auto counts = counts_in_gaps(Pencil::kGeometric, spectrum, 0.02, 5, why);
  expected.counts.insert(expected.counts.end(), counts.begin(), counts.end());
  for (ExpectedValue& value : lowest_values(Pencil::kGeometric, spectrum, 3, why)) {
    value.tolerance += 1e-12;
    expected.values.push_back(std::move(value));
  }
}

/// Bending and, the foot held and the head free along the axis, stretching vibration of the pinned column.
void add_vibration(Expected& expected, const ColumnMesh& mesh) {
  const std::string why =
      "closed forms of the pinned beam in bending and the fixed-free bar in stretching (omega squared); the "
      "mesh "
      "meets them from above";
  const double pi = std::numbers::pi, length = mesh.length();
  std::vector<SpectrumValue> spectrum;
  const double top = std::pow(0.5 * mesh.elements, 2);
  for (Index n = 1; n * pi <= 0.5 * mesh.elements && n <= 40; ++n) {
    const double k = n * pi / length;
    spectrum.push_back({std::pow(k, 4) * kFlexural / kMassPerLength, excess(n * pi / mesh.elements)});
  }
  const double complete = spectrum.empty() ? 0 : spectrum.back().value;
  for (Index n = 1; n <= 40; ++n) {
    const double number = (n - 0.5) * pi, kh = number / mesh.elements;
    const double value = number * number / (length * length) * kStretching / kMassPerLength;
    if (value < complete && number * number < top) spectrum.push_back({value, kh * kh / 10});
  }
  auto counts = counts_in_gaps(Pencil::kMass, spectrum, 0.02, 4, why);
  expected.counts.insert(expected.counts.end(), counts.begin(), counts.end());
}

const char* words_of(ColumnEnds ends) {
  switch (ends) {
    case ColumnEnds::kFixedFree:
      return "fixed foot, free head";
    case ColumnEnds::kFixedPinned:
      return "fixed foot, pinned head";
    case ColumnEnds::kFixedFixed:
      return "fixed foot and head";
    case ColumnEnds::kFixedGuided:
      return "fixed foot, head free to slide sideways but not to turn";
    default:
      return "pinned foot and head";
  }
}

}  // namespace

Result<Specimen> make_column(Offset unknowns, const SpecimenOptions& options) {
  const ColumnMesh mesh = mesh_for(unknowns);
  const bool free = options.fault == Fault::kFree;
  Model model;
  add_elements(model, mesh, options.mass);
  if (!free) support(model.table, mesh.elements, options.ends);
  Specimen specimen = finish(std::move(model));
  specimen.name = "column";
  specimen.scenario = "Steel leading-light mast of " + std::to_string(mesh.elements) +
                      " plane beam elements, " + (free ? "without supports" : words_of(options.ends)) +
                      ", under 122.88 kN at its head.";
  if (free) {
    specimen.expected.inertia =
        inertia_of(specimen, 0, 3, "a plane beam without supports: three rigid motions");
    return specimen;
  }
  specimen.expected.inertia =
      inertia_of(specimen, 0, 0, "a supported column; every entry is exact, so no rounding can spoil it");
  add_buckling(specimen.expected, mesh, options.ends);
  if (options.ends == ColumnEnds::kPinnedPinned && options.mass == MassKind::kConsistent) {
    add_vibration(specimen.expected, mesh);
  }
  return specimen;
}

}  // namespace stanchion::specimen
