#include "diagnose/node_motions.hpp"

#include <algorithm>
#include <cmath>
#include <iterator>

#include "base/ranges.hpp"
#include "diagnose/small_eigen.hpp"

namespace stanchion {
namespace {

constexpr Offset kColumnsAPiece = 8192, kNodesAPiece = 2048;

class Finder {
 public:
  Finder(const Structure& structure, const ShiftedMatrix& matrix, ThreadPool& pool)
      : s_(structure), matrix_(matrix), pool_(pool) {}

  std::vector<NodeMotion> run() {
    place_rows();
    gather_blocks();
    propose_all();
    return confirmed();
  }

 private:
  Index rows_of(Index node) const {
    return s_.first_row[static_cast<std::size_t>(node) + 1] - s_.first_row[static_cast<std::size_t>(node)];
  }

  void place_rows() {
    local_.resize(static_cast<std::size_t>(s_.rows));
    block_start_.resize(static_cast<std::size_t>(s_.nodes) + 1, 0);
    for (Index node = 0; node < s_.nodes; ++node) {
      const auto a = static_cast<std::size_t>(node);
      const Index m = rows_of(node);
      for (Index r = 0; r < m; ++r)
        local_[static_cast<std::size_t>(s_.rows_of_node[static_cast<std::size_t>(s_.first_row[a] + r)])] = r;
      block_start_[a + 1] = block_start_[a] + (m <= kMostRows ? Offset{m} * m : 0);
    }
  }

  void gather_blocks() {
    blocks_.assign(static_cast<std::size_t>(block_start_.back()), 0.0);
    // An entry has its own two places in a block, whichever thread takes its column.
    for_ranges(pool_, s_.rows, kColumnsAPiece, [&](Offset begin, Offset end) {
      for (auto j = static_cast<Index>(begin); j < end; ++j) gather_column(j);
    });
  }

  void gather_column(Index j) {
    const MatrixFamily& family = *matrix_.family;
    const Index node = s_.node_of[static_cast<std::size_t>(j)];
    const Index m = rows_of(node);
    if (m > kMostRows) return;
    for (Offset k = family.column_start[j]; k < family.column_start[Offset{j} + 1]; ++k) {
      const Index i = family.row[k];
      if (s_.node_of[static_cast<std::size_t>(i)] != node) continue;
      const Index p = local_[static_cast<std::size_t>(i)], q = local_[static_cast<std::size_t>(j)];
      double* block = blocks_.data() + block_start_[static_cast<std::size_t>(node)];
      block[p * m + q] = block[q * m + p] = matrix_.entry(k, i, j);
    }
  }

  /// Candidates in the order of their nodes.
  void propose_all() {
    std::vector<std::vector<NodeMotion>> pieces(static_cast<std::size_t>(s_.nodes / kNodesAPiece) + 1);
    for_ranges(pool_, s_.nodes, kNodesAPiece, [&](Offset begin, Offset end) {
      std::vector<NodeMotion>& found = pieces[static_cast<std::size_t>(begin / kNodesAPiece)];
      for (auto node = static_cast<Index>(begin); node < end; ++node) propose(node, found);
    });
    for (std::vector<NodeMotion>& piece : pieces)
      std::move(piece.begin(), piece.end(), std::back_inserter(found_));
  }

  /// Null vectors of the node's own block: all candidates there are, if A is semidefinite.
  void propose(Index node, std::vector<NodeMotion>& found) const {
    const Index m = rows_of(node);
    const auto a = static_cast<std::size_t>(node);
    if (m > kMostRows) return;
    std::vector<double> block(blocks_.begin() + block_start_[a], blocks_.begin() + block_start_[a + 1]);
    const auto n = static_cast<std::size_t>(m);
    std::vector<char> done(n, 0);
    for (std::size_t r = 0; r < n; ++r) {
      const auto position =
          static_cast<std::size_t>(s_.rows_of_node[static_cast<std::size_t>(s_.first_row[a]) + r]);
      if (s_.kind[position] == DofKind::kMultiplier) {
        done[r] = 1;
        block[r * n + r] = 1;
      } else if (s_.empty[position]) {
        NodeMotion motion{node, std::vector<double>(n, 0.0), true};
        motion.entry[r] = 1;
        found.push_back(std::move(motion));
        block[r * n + r] = 1;
        done[r] = 1;
      }
    }
    if (std::all_of(done.begin(), done.end(), [](char d) { return d != 0; })) return;
    const SmallEigen eigen = small_eigen(block, m);
    for (std::size_t k = 0; k < n && std::fabs(eigen.values[k]) <= kLocalMotionLimit; ++k) {
      NodeMotion motion{node, std::vector<double>(n), false};
      for (std::size_t i = 0; i < n; ++i) motion.entry[i] = eigen.vectors[i * n + k];
      found.push_back(std::move(motion));
    }
  }

  /// Candidates with A v = 0 on every row, not only on the node's own.
  std::vector<NodeMotion> confirmed() {
    std::vector<Index> first(static_cast<std::size_t>(s_.nodes) + 1, 0);
    for (const NodeMotion& motion : found_) ++first[static_cast<std::size_t>(motion.node) + 1];
    for (std::size_t a = 0; a < static_cast<std::size_t>(s_.nodes); ++a) first[a + 1] += first[a];
    std::vector<double> worst(found_.size(), 0.0);
    const MatrixFamily& family = *matrix_.family;
    // For every row the sum over one node's columns must vanish; found_ is ordered by node.
    struct Term {
      Index motion, row;
      double value;
    };
    std::vector<Term> terms;
    const auto add = [&](Index row, Index column, double a) {
      const Index node = s_.node_of[static_cast<std::size_t>(column)];
      const auto n = static_cast<std::size_t>(node);
      for (Index c = first[n]; c < first[n + 1]; ++c) {
        const double v = found_[static_cast<std::size_t>(c)]
                             .entry[static_cast<std::size_t>(local_[static_cast<std::size_t>(column)])];
        if (v != 0) terms.push_back({c, row, a * v});
      }
    };
    if (!found_.empty()) {
      for (Index j = 0; j < family.rows; ++j) {
        for (Offset k = family.column_start[j]; k < family.column_start[Offset{j} + 1]; ++k) {
          const Index i = family.row[k];
          const double a = matrix_.entry(k, i, j);
          if (a == 0) continue;
          add(i, j, a);
          if (i != j) add(j, i, a);
        }
      }
    }
    std::sort(terms.begin(), terms.end(), [](const Term& x, const Term& y) {
      return x.motion != y.motion ? x.motion < y.motion : x.row < y.row;
    });
    for (std::size_t k = 0; k < terms.size();) {
      std::size_t end = k;
      double sum = 0;
      for (; end < terms.size() && terms[end].motion == terms[k].motion && terms[end].row == terms[k].row;
           ++end) {
        sum += terms[end].value;
      }
      double& most = worst[static_cast<std::size_t>(terms[k].motion)];
      most = std::max(most, std::fabs(sum));
      k = end;
    }
    std::vector<NodeMotion> kept;
    for (std::size_t c = 0; c < found_.size(); ++c) {
      if (worst[c] <= kLocalMotionLimit) kept.push_back(std::move(found_[c]));
    }
    return kept;
  }

  static constexpr Index kMostRows = 12;  ///< a node with more dofs is left to the iteration

  const Structure& s_;
  const ShiftedMatrix& matrix_;
  ThreadPool& pool_;
  std::vector<Index> local_;         ///< position -> row within its node
  std::vector<Offset> block_start_;  ///< node -> its block in blocks_
  std::vector<double> blocks_;
  std::vector<NodeMotion> found_;
};

}  // namespace

std::vector<NodeMotion> find_node_motions(const Structure& structure, const ShiftedMatrix& matrix,
                                          ThreadPool& pool) {
  return Finder(structure, matrix, pool).run();
}

}  // namespace stanchion
