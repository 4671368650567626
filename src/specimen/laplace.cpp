// The 7-point Laplacian of a box: every eigenvalue is known in closed form.
#include <algorithm>
#include <cmath>
#include <numbers>

#include "specimen/closed_form.hpp"
#include "specimen/faults.hpp"
#include "specimen/models.hpp"

namespace stanchion::specimen {
namespace {

struct Grid {
  Index nx = 1, ny = 1, nz = 1;

  Index rows() const { return nx * ny * nz; }
};

Grid grid_for(Offset unknowns) {
  const double target = static_cast<double>(unknowns);
  const auto side = std::max<Index>(1, static_cast<Index>(std::lround(std::cbrt(target))));
  return {std::max<Index>(1, static_cast<Index>(std::lround(target / (static_cast<double>(side) * side)))),
          side, side};
}

/// Diagonal 6 everywhere, or, insulated, the number of neighbours.
SymmetricMatrix laplacian(const Grid& grid, bool insulated) {
  const Index n = grid.rows(), layer = grid.ny * grid.nz;
  SymmetricMatrix matrix{n, Buffer<Offset>(Offset{n} + 1, 0), Buffer<Index>(Offset{4} * n),
                         Buffer<double>(Offset{4} * n)};
  Offset used = 0;
  for (Index column = 0; column < n; ++column) {
    const Index k = column % grid.nz, j = column / grid.nz % grid.ny, i = column / layer;
    const bool has[6] = {k + 1 < grid.nz, j + 1 < grid.ny, i + 1 < grid.nx, k > 0, j > 0, i > 0};
    const auto put = [&](Index row, double value) {
      matrix.row[used] = row;
      matrix.value[used++] = value;
    };
    put(column, insulated ? static_cast<double>(std::count(has, has + 6, true)) : 6.0);
    if (has[0]) put(column + 1, -1);
    if (has[1] && grid.ny > 1) put(column + grid.nz, -1);
    if (has[2]) put(column + layer, -1);
    matrix.column_start[Offset{column} + 1] = used;
  }
  matrix.row.shrink(used);
  matrix.value.shrink(used);
  return matrix;
}

/// Eigenvalues of the path of n points: 2 - 2 cos, ends held at zero or insulated.
std::vector<double> path_spectrum(Index n, bool insulated) {
  std::vector<double> values;
  for (Index k = 1; k <= n; ++k) {
    const double angle = insulated ? (k - 1) * std::numbers::pi / n : k * std::numbers::pi / (n + 1);
    const double s = std::sin(angle / 2);
    values.push_back(4 * s * s);
  }
  return values;
}

std::vector<SpectrumValue> box_spectrum(const Grid& grid, bool insulated) {
  std::vector<SpectrumValue> spectrum;
  spectrum.reserve(static_cast<std::size_t>(grid.rows()));
  const auto z = path_spectrum(grid.nz, insulated), y = path_spectrum(grid.ny, insulated);
  for (const double a : path_spectrum(grid.nx, insulated)) {
    for (const double b : y) {
      for (const double c : z) spectrum.push_back({a + b + c, 0});
    }
  }
  return spectrum;
}

void add_closed_form(Specimen& specimen, const Grid& grid, bool insulated) {
  const std::string why =
      "closed form: sums of 2 - 2 cos over the three directions; each shift lies in a gap of the spectrum";
  auto spectrum = box_spectrum(grid, insulated);
  specimen.expected.counts = counts_in_gaps(Pencil::kStiffness, spectrum, 1e-2, 4, why);
  for (const double part : {0.1, 0.5}) {
    const auto from = static_cast<std::size_t>(part * static_cast<double>(spectrum.size()));
    std::size_t best = 0;
    double widest = 1e-9;
    for (std::size_t i = from; i + 1 < std::min(spectrum.size(), from + spectrum.size() / 20 + 200); ++i) {
      const double gap = spectrum[i + 1].value - spectrum[i].value;
      if (gap > widest) {
        widest = gap;
        best = i + 1;
      }
    }
    if (best == 0) continue;
    const double middle = (spectrum[best - 1].value + spectrum[best].value) / 2;
    specimen.expected.counts.push_back({Pencil::kStiffness, middle, static_cast<Index>(best), why});
  }
  specimen.expected.values = lowest_values(Pencil::kStiffness, spectrum, 3, why);
  for (auto& value : specimen.expected.values) value.tolerance = 1e-12;
}

}  // namespace

Result<Specimen> make_laplace(Offset unknowns, const SpecimenOptions& options) {
  const Grid grid = grid_for(unknowns);
  const bool insulated = options.fault == Fault::kFree;
  Specimen specimen;
  specimen.name = "laplace";
  specimen.scenario = "Steady heat in a box of " + std::to_string(grid.nx) + " x " + std::to_string(grid.ny) +
                      " x " + std::to_string(grid.nz) + " points, " +
                      (insulated ? "insulated all around." : "held at zero all around.");
  specimen.stiffness = laplacian(grid, insulated);
  for (Index row = 0; row < grid.rows(); ++row) {
    const Index k = row % grid.nz, j = row / grid.nz % grid.ny, i = row / (grid.ny * grid.nz);
    specimen.dofs.push_back({row + 1, Dof::kTemperature});
    specimen.nodes.push_back({i + 1.0, j + 1.0, k + 1.0});
  }
  specimen.expected.inertia =
      insulated
          ? inertia_of(specimen, 0, 1, "the graph Laplacian of a connected grid: only the constant vanishes")
          : inertia_of(specimen, 0, 0, "closed form: the lowest eigenvalue is positive");
  add_closed_form(specimen, grid, insulated);
  return specimen;
}

}  // namespace stanchion::specimen
