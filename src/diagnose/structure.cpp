#include "diagnose/structure.hpp"

#include <numeric>
#include <string_view>
#include <unordered_map>

namespace stanchion {
namespace {

DofKind kind_of(std::string_view name) {
  constexpr std::string_view kNames[] = {"ux", "uy", "uz", "rx", "ry", "rz", "multiplier"};
  for (std::size_t k = 0; k < std::size(kNames); ++k) {
    if (name == kNames[k]) return static_cast<DofKind>(k);
  }
  return DofKind::kOther;
}

void number_nodes(Structure& s) {
  const DofMap* dofs = s.names->dofs;
  std::vector<Index> position_of(static_cast<std::size_t>(s.rows));
  for (Index p = 0; p < s.rows; ++p)
    position_of[static_cast<std::size_t>(s.equation[static_cast<std::size_t>(p)])] = p;
  std::unordered_map<NodeNumber, Index> known;
  for (Index e = 0; e < s.rows; ++e) {  // nodes come in the order of the equations
    const auto p = static_cast<std::size_t>(position_of[static_cast<std::size_t>(e)]);
    const NodeNumber number = s.named ? dofs->node(e) : kNoNode;
    Index node = s.nodes;
    if (number != kNoNode) node = known.try_emplace(number, s.nodes).first->second;
    if (node == s.nodes) {
      ++s.nodes;
      s.number.push_back(number);
    }
    s.node_of[p] = node;
    s.kind[p] = s.named ? kind_of(dofs->dof(e)) : DofKind::kOther;
  }
  if (s.names->multipliers != nullptr) {
    for (const Index e : *s.names->multipliers) {
      s.kind[static_cast<std::size_t>(position_of[static_cast<std::size_t>(e)])] = DofKind::kMultiplier;
    }
  }
  s.first_row.assign(static_cast<std::size_t>(s.nodes) + 1, 0);
  for (const Index node : s.node_of) ++s.first_row[static_cast<std::size_t>(node) + 1];
  std::partial_sum(s.first_row.begin(), s.first_row.end(), s.first_row.begin());
  s.rows_of_node.resize(static_cast<std::size_t>(s.rows));
  std::vector<Index> next(s.first_row.begin(), s.first_row.end() - 1);
  for (Index e = 0; e < s.rows; ++e) {
    const Index p = position_of[static_cast<std::size_t>(e)];
    s.rows_of_node[static_cast<std::size_t>(
        next[static_cast<std::size_t>(s.node_of[static_cast<std::size_t>(p)])]++)] = p;
  }
}

void find_places(Structure& s) {
  const auto nodes = static_cast<std::size_t>(s.nodes);
  s.axes.assign(nodes, nullptr);
  s.has_place.assign(nodes, 0);
  if (!s.named) return;
  s.place.resize(nodes);
  Index found = 0;
  for (std::size_t a = 0; a < nodes; ++a) {
    if (s.number[a] == kNoNode) continue;
    if (s.names->axes != nullptr) s.axes[a] = s.names->axes->find(s.number[a]);
    const auto* place = s.names->nodes != nullptr ? s.names->nodes->find(s.number[a]) : nullptr;
    if (place == nullptr) continue;
    s.place[a] = *place;
    s.has_place[a] = 1;
    ++found;
  }
  s.placed = found > 0 && 2 * found > s.nodes;
}

void find_parts(Structure& s, const ShiftedMatrix& matrix) {
  const MatrixFamily& family = *matrix.family;
  DisjointSets sets(s.nodes);
  s.diagonal.assign(static_cast<std::size_t>(s.rows), 0.0);
  s.empty.assign(static_cast<std::size_t>(s.rows), 1);
  for (Index j = 0; j < family.rows; ++j) {
    const auto jj = static_cast<std::size_t>(j);
    for (Offset k = family.column_start[j]; k < family.column_start[Offset{j} + 1]; ++k) {
      const Index i = family.row[k];
      const double a = matrix.entry(k, i, j);
      if (i == j) s.diagonal[jj] = a;
      if (a == 0) continue;
      s.empty[jj] = s.empty[static_cast<std::size_t>(i)] = 0;
      if (i != j) sets.join(s.node_of[static_cast<std::size_t>(i)], s.node_of[jj]);
    }
  }
  s.part_of.assign(static_cast<std::size_t>(s.nodes), -1);
  std::vector<Index> number(static_cast<std::size_t>(s.nodes), -1);
  for (Index node = 0; node < s.nodes; ++node) {
    Index& part = number[static_cast<std::size_t>(sets.root(node))];
    if (part < 0) {
      part = s.parts++;
      s.part_rows.push_back(0);
      s.part_nodes.push_back(0);
    }
    const auto a = static_cast<std::size_t>(node);
    s.part_of[a] = part;
    ++s.part_nodes[static_cast<std::size_t>(part)];
    s.part_rows[static_cast<std::size_t>(part)] += s.first_row[a + 1] - s.first_row[a];
  }
  s.first_of_part.assign(static_cast<std::size_t>(s.parts) + 1, 0);
  std::partial_sum(s.part_rows.begin(), s.part_rows.end(), s.first_of_part.begin() + 1);
  s.rows_of_part.resize(static_cast<std::size_t>(s.rows));
  std::vector<Index> next(s.first_of_part.begin(), s.first_of_part.end() - 1);
  for (Index p = 0; p < s.rows; ++p) {
    const Index part = s.part_of[static_cast<std::size_t>(s.node_of[static_cast<std::size_t>(p)])];
    s.rows_of_part[static_cast<std::size_t>(next[static_cast<std::size_t>(part)]++)] = p;
  }
}

}  // namespace

DisjointSets::DisjointSets(Index members) : parent_(static_cast<std::size_t>(members)) {
  std::iota(parent_.begin(), parent_.end(), 0);
}

Index DisjointSets::root(Index member) {
  const auto at = [this](Index m) -> Index& { return parent_[static_cast<std::size_t>(m)]; };
  while (at(member) != member) member = at(member) = at(at(member));
  return member;
}

void DisjointSets::join(Index a, Index b) {
  a = root(a);
  b = root(b);
  if (a < b) {
    parent_[static_cast<std::size_t>(b)] = a;
  } else {
    parent_[static_cast<std::size_t>(a)] = b;
  }
}

Index Structure::file_equation(Index position) const {
  const Index e = equation[static_cast<std::size_t>(position)];
  const bool same = names->original == nullptr || names->original->empty();
  return (same ? e : (*names->original)[static_cast<std::size_t>(e)]) + 1;
}

std::string Structure::dof_name(Index position) const {
  if (named) return names->dofs->dof(equation[static_cast<std::size_t>(position)]);
  return "equation " + std::to_string(file_equation(position));
}

std::string Structure::describe(Index position) const {
  const NodeNumber node = number[static_cast<std::size_t>(node_of[static_cast<std::size_t>(position)])];
  if (node == kNoNode) {
    return (named ? dof_name(position) + " of " : std::string()) + "equation " +
           std::to_string(file_equation(position));
  }
  return "node " + std::to_string(node) + ", " + dof_name(position);
}

Structure describe_structure(const Analysis& analysis, const ShiftedMatrix& matrix, const ModelNames& names) {
  Structure s;
  s.rows = analysis.tree.rows;
  s.names = &names;
  s.named = names.dofs != nullptr && names.dofs->equations() == s.rows;
  const auto rows = static_cast<std::size_t>(s.rows);
  s.equation.resize(rows);
  for (Index p = 0; p < s.rows; ++p) s.equation[static_cast<std::size_t>(p)] = analysis.tree.equation_at[p];
  s.node_of.resize(rows);
  s.kind.resize(rows);
  number_nodes(s);
  find_places(s);
  find_parts(s, matrix);
  return s;
}

}  // namespace stanchion
