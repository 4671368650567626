#include "specimen/assembler.hpp"

#include <algorithm>
#include <bit>
#include <vector>

namespace stanchion::specimen {
namespace {

/// For each node, the elements that touch it, as numbers running through all groups.
struct Incidence {
  std::vector<Offset> start;
  std::vector<Offset> element;
  std::vector<Offset> group_start;  ///< first running number of each group, and the end
};

Incidence incidence_of(Index nodes, std::span<const ElementGroup> groups) {
  Incidence incidence{std::vector<Offset>(static_cast<std::size_t>(nodes) + 1, 0), {}, {0}};
  for (const ElementGroup& group : groups) {
    for (const Index node : group.nodes) ++incidence.start[static_cast<std::size_t>(node) + 1];
    incidence.group_start.push_back(incidence.group_start.back() + group.elements());
  }
  for (std::size_t i = 1; i < incidence.start.size(); ++i) incidence.start[i] += incidence.start[i - 1];
  incidence.element.resize(static_cast<std::size_t>(incidence.start.back()));
  std::vector<Offset> next(incidence.start.begin(), incidence.start.end() - 1);
  for (std::size_t g = 0; g < groups.size(); ++g) {
    const auto width = static_cast<std::size_t>(groups[g].nodes_per_element);
    for (std::size_t k = 0; k < groups[g].nodes.size(); ++k) {
      const auto node = static_cast<std::size_t>(groups[g].nodes[k]);
      incidence.element[static_cast<std::size_t>(next[node]++)] =
          incidence.group_start[g] + static_cast<Offset>(k / width);
    }
  }
  return incidence;
}

/// One node that meets the current one, with the union of the couplings of the elements they share.
struct Neighbour {
  Index node = 0;
  Coupling coupling{};
};

/// Lists, for one node after another, its neighbours of equal or higher number in ascending order.
class NeighbourFinder {
 public:
  NeighbourFinder(const DofTable& table, std::span<const ElementGroup> groups)
      : groups_(groups),
        incidence_(incidence_of(table.nodes(), groups)),
        slot_(static_cast<std::size_t>(table.nodes()), -1) {}

  const std::vector<Neighbour>& of(Index node) {
    found_.clear();
    const auto at = static_cast<std::size_t>(node);
    for (Offset k = incidence_.start[at]; k < incidence_.start[at + 1]; ++k) {
      visit(incidence_.element[static_cast<std::size_t>(k)], node);
    }
    for (const Neighbour& neighbour : found_) slot_[static_cast<std::size_t>(neighbour.node)] = -1;
    std::sort(found_.begin(), found_.end(),
              [](const Neighbour& a, const Neighbour& b) { return a.node < b.node; });
    return found_;
  }

 private:
  void visit(Offset element, Index node) {
    const auto after =
        std::upper_bound(incidence_.group_start.begin(), incidence_.group_start.end(), element) - 1;
    const ElementGroup& group = groups_[static_cast<std::size_t>(after - incidence_.group_start.begin())];
    const auto width = static_cast<std::size_t>(group.nodes_per_element);
    const Index* member = group.nodes.data() + static_cast<std::size_t>(element - *after) * width;
    for (std::size_t m = 0; m < width; ++m) {
      if (member[m] < node) continue;
      Index& slot = slot_[static_cast<std::size_t>(member[m])];
      if (slot < 0) {
        slot = static_cast<Index>(found_.size());
        found_.push_back({member[m], {}});
      }
      for (std::size_t c = 0; c < kDofKinds; ++c) {
        found_[static_cast<std::size_t>(slot)].coupling[c] |= group.coupling[c];
      }
    }
  }

  std::span<const ElementGroup> groups_;
  Incidence incidence_;
  std::vector<Index> slot_;  ///< place in found_ of a node, -1 when not there
  std::vector<Neighbour> found_;
};

/// The unknowns of `neighbour` that have an entry in the column of unknown `dof` of `node`.
DofSet rows_below(const DofTable& table, Index node, int dof, const Neighbour& neighbour) {
  unsigned rows = neighbour.coupling[static_cast<std::size_t>(dof)] & table.dofs(neighbour.node);
  if (neighbour.node == node) rows &= ~((1U << dof) - 1U);
  return static_cast<DofSet>(rows);
}

/// Calls `visit(column, neighbours)` for every equation in order.
template <class Visit>
void for_each_column(const DofTable& table, NeighbourFinder& finder, const Visit& visit) {
  for (Index node = 0; node < table.nodes(); ++node) {
    if (table.dofs(node) == 0) continue;
    const std::vector<Neighbour>& neighbours = finder.of(node);
    for (int dof = 0; dof < kDofKinds; ++dof) {
      const Index column = table.equation(node, dof);
      if (column >= 0) visit(column, node, dof, neighbours);
    }
  }
}

SymmetricMatrix pattern_of(const DofTable& table, std::span<const ElementGroup> groups) {
  NeighbourFinder finder(table, groups);
  const Index n = table.equations();
  SymmetricMatrix matrix{n, Buffer<Offset>(Offset{n} + 1, 0), {}, {}};
  for_each_column(table, finder, [&](Index column, Index node, int dof, const auto& neighbours) {
    Offset count = 0;
    for (const Neighbour& neighbour : neighbours) {
      count += std::popcount(static_cast<unsigned>(rows_below(table, node, dof, neighbour)));
    }
    matrix.column_start[Offset{column} + 1] = matrix.column_start[column] + count;
  });
  matrix.row = Buffer<Index>(matrix.column_start[n]);
  matrix.value = Buffer<double>(matrix.column_start[n], 0.0);
  for_each_column(table, finder, [&](Index column, Index node, int dof, const auto& neighbours) {
    Offset place = matrix.column_start[column];
    for (const Neighbour& neighbour : neighbours) {
      const DofSet rows = rows_below(table, node, dof, neighbour);
      for (int d = 0; d < kDofKinds; ++d) {
        if (rows >> d & 1U) matrix.row[place++] = table.equation(neighbour.node, d);
      }
    }
  });
  return matrix;
}

/// Adds element matrices of one group into the matrix.
class Scatter {
 public:
  Scatter(const DofTable& table, const ElementGroup& group, SymmetricMatrix& matrix)
      : table_(table), group_(group), matrix_(matrix) {
    for (int d = 0; d < kDofKinds; ++d) {
      if (group.dofs >> d & 1U) dof_.push_back(d);
    }
    order_ = dof_.size() * static_cast<std::size_t>(group.nodes_per_element);
    equation_.resize(order_);
    local_.resize(order_ * order_);
  }

  void add_all() {
    for (Offset element = 0; element < group_.elements(); ++element) add(element);
  }

 private:
  void add(Offset element) {
    std::fill(local_.begin(), local_.end(), 0.0);
    group_.fill(element, local_);
    const auto width = static_cast<std::size_t>(group_.nodes_per_element);
    const Index* nodes = group_.nodes.data() + static_cast<std::size_t>(element) * width;
    for (std::size_t i = 0; i < order_; ++i) {
      equation_[i] = table_.equation(nodes[i / dof_.size()], dof_[i % dof_.size()]);
    }
    for (std::size_t j = 0; j < order_; ++j) {
      if (equation_[j] < 0) continue;
      for (std::size_t block = 0; block < order_; block += dof_.size()) {
        if (nodes[block / dof_.size()] >= nodes[j / dof_.size()]) add_block(j, block);
      }
    }
  }

  /// Adds the entries of local column `column` in the rows of one node, which begin at local row `block`.
  void add_block(std::size_t column, std::size_t block) {
    const DofSet coupled = group_.coupling[static_cast<std::size_t>(dof_[column % dof_.size()])];
    const Index at = equation_[column];
    const Index* const rows = matrix_.row.data();
    const Index* const end = rows + matrix_.column_start[Offset{at} + 1];
    const Index* row = nullptr;
    for (std::size_t k = 0; k < dof_.size(); ++k) {
      const Index equation = equation_[block + k];
      if (equation < at || (coupled >> dof_[k] & 1U) == 0) continue;
      if (row == nullptr) row = std::lower_bound(rows + matrix_.column_start[at], end, equation);
      while (*row != equation) ++row;
      matrix_.value[row - rows] += local_[(block + k) * order_ + column];
    }
  }

  const DofTable& table_;
  const ElementGroup& group_;
  SymmetricMatrix& matrix_;
  std::vector<int> dof_;
  std::size_t order_ = 0;
  std::vector<Index> equation_;
  std::vector<double> local_;
};

}  // namespace

Coupling full_coupling(DofSet dofs) {
  Coupling coupling{};
  for (std::size_t c = 0; c < kDofKinds; ++c) {
    if (dofs >> c & 1U) coupling[c] = dofs;
  }
  return coupling;
}

SymmetricMatrix assemble(const DofTable& table, std::span<const ElementGroup> groups) {
  SymmetricMatrix matrix = pattern_of(table, groups);
  for (const ElementGroup& group : groups) Scatter(table, group, matrix).add_all();
  return matrix;
}

}  // namespace stanchion::specimen
