#include "engine/mass_totals.hpp"

#include <algorithm>
#include <vector>

namespace stanchion {
namespace {

/// Component `direction` of a unit translation at an equation, in the node's own axes.
double translation(const DofMap& dofs, const AxesTable* axes, Index equation, std::size_t direction) {
  const std::string& name = dofs.dof(equation);
  if (name.size() != 2 || name[0] != 'u' || name[1] < 'x' || name[1] > 'z') return 0;
  const auto own = static_cast<std::size_t>(name[1] - 'x');
  const auto* turned = axes != nullptr ? axes->find(dofs.node(equation)) : nullptr;
  if (turned == nullptr) return own == direction ? 1 : 0;
  return (*turned)[3 * own + direction];
}

std::vector<double> times(const SymmetricMatrix& mass, const std::vector<double>& x) {
  std::vector<double> y(x.size(), 0.0);
  for (Index j = 0; j < mass.rows; ++j) {
    for (Offset k = mass.column_start[j]; k < mass.column_start[Offset{j} + 1]; ++k) {
      const Index i = mass.row[k];
      y[static_cast<std::size_t>(i)] += mass.value[k] * x[static_cast<std::size_t>(j)];
      if (i != j) y[static_cast<std::size_t>(j)] += mass.value[k] * x[static_cast<std::size_t>(i)];
    }
  }
  return y;
}

}  // namespace

MassTotals mass_totals(const SymmetricMatrix& mass, const DofMap& dofs, const NodeTable* nodes,
                       const AxesTable* axes) {
  MassTotals totals;
  std::array<std::vector<double>, 3> weight;  // t_i (M t)_i: what each equation weighs
  for (std::size_t d = 0; d < 3; ++d) {
    std::vector<double> t(static_cast<std::size_t>(mass.rows));
    for (Index e = 0; e < mass.rows; ++e) t[static_cast<std::size_t>(e)] = translation(dofs, axes, e, d);
    weight[d] = times(mass, t);
    for (std::size_t e = 0; e < t.size(); ++e) {
      weight[d][e] *= t[e];
      totals.mass[d] += weight[d][e];
    }
  }
  const auto most = static_cast<std::size_t>(std::max_element(totals.mass.begin(), totals.mass.end()) -
                                             totals.mass.begin());
  if (nodes == nullptr || !(totals.mass[most] > 0)) return totals;
  std::array<double, 3> centre{};
  double placed = 0;
  for (Index e = 0; e < mass.rows; ++e) {
    const auto* place = nodes->find(dofs.node(e));
    if (place == nullptr) continue;
    placed += weight[most][static_cast<std::size_t>(e)];
    for (std::size_t d = 0; d < 3; ++d) centre[d] += weight[most][static_cast<std::size_t>(e)] * (*place)[d];
  }
  if (!(placed > 0)) return totals;
  for (double& c : centre) c /= placed;
  totals.centre = centre;
  return totals;
}

}  // namespace stanchion
