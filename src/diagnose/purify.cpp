#include "diagnose/purify.hpp"

#include <algorithm>
#include <cmath>
#include <numeric>
#include <optional>
#include <unordered_map>

#include "diagnose/distinct.hpp"
#include "diagnose/small_eigen.hpp"

namespace stanchion {
namespace {

constexpr std::size_t kSampledNodes = 3000;  ///< of a cluster, for the reweighting
constexpr int kReweightings = 30;

void axpy(std::vector<double>& y, double a, const std::vector<double>& x) {
  for (std::size_t k = 0; k < y.size(); ++k) y[k] += a * x[k];
}

double inner(const std::vector<double>& x, const std::vector<double>& y) {
  return std::inner_product(x.begin(), x.end(), y.begin(), 0.0);
}

/// Adds `v` to the orthonormal `basis` unless it depends on it; what is left of v's length decides.
bool extend(std::vector<std::vector<double>>& basis, std::vector<double> v, double independent) {
  const double before = std::sqrt(inner(v, v));
  if (!(before > 0)) return false;
  for (int pass = 0; pass < 2; ++pass) {
    for (const auto& b : basis) axpy(v, -inner(b, v), b);
  }
  const double left = std::sqrt(inner(v, v));
  if (!(left > independent * before)) return false;
  for (double& e : v) e /= left;
  basis.push_back(std::move(v));
  return true;
}

/// Orthonormal coefficient vectors that complete `basis` to all of R^size.
std::vector<std::vector<double>> complement(std::vector<std::vector<double>> basis, std::size_t size) {
  std::vector<std::vector<double>> rest;
  for (std::size_t c = 0; c < size; ++c) {
    std::vector<double> unit(size, 0.0);
    unit[c] = 1;
    if (extend(basis, unit, 1e-6)) rest.push_back(basis.back());
  }
  return rest;
}

class SparseSearch {
 public:
  SparseSearch(const Structure& s, const ShiftedMatrix& matrix, const LocalVectors& local, double active)
      : s_(s), matrix_(matrix), local_(local), active_(active), n_(local.count) {
    const std::size_t nodes = local.nodes.size();
    const std::size_t step = std::max<std::size_t>(1, nodes / kSampledNodes);
    for (std::size_t a = 0; a < nodes; a += step) sample_.push_back(a);
  }

  struct Candidate {
    std::vector<double> coefficient;
    std::vector<Index> nodes;
  };

  /// Vectors that leave many of the nodes at rest, those with the fewest moving nodes first.
  std::vector<Candidate> run() {
    std::vector<Candidate> found;
    std::vector<std::vector<double>> covered;
    for (std::size_t start = 0; start < 2 * n_; ++start) {
      std::vector<double> v = start_vector(covered);
      if (v.empty()) break;
      extend(covered, v, 1e-3);
      offer(reweighted(std::move(v)), found);
      if (covered.size() == n_) break;
    }
    for (Candidate& more : from_patches()) found.push_back(std::move(more));
    std::stable_sort(found.begin(), found.end(),
                     [](const Candidate& a, const Candidate& b) { return a.nodes.size() < b.nodes.size(); });
    return found;
  }

 private:
  /// The way the node moves that is least covered so far.
  std::vector<double> start_vector(const std::vector<std::vector<double>>& covered) const {
    double most = 0;
    std::vector<double> best;
    for (const std::size_t a : sample_) {
      for (std::size_t i = local_.first[a]; i < local_.first[a + 1]; ++i) {
        std::vector<double> v(local_.value.begin() + static_cast<std::ptrdiff_t>(i * n_),
                              local_.value.begin() + static_cast<std::ptrdiff_t>((i + 1) * n_));
        for (const auto& c : covered) axpy(v, -inner(c, v), c);
        const double size = inner(v, v);
        if (size > most) {
          most = size;
          best = std::move(v);
        }
      }
    }
    if (most < 1e-20) return {};
    const double size = std::sqrt(most);
    for (double& e : best) e /= size;
    return best;
  }

  /// Some nodes, each with the nodes it touches: indices into local_.nodes.
  std::vector<std::vector<std::size_t>> patches() const {
    constexpr std::size_t kPatches = 24;
    const std::size_t step = std::max<std::size_t>(1, sample_.size() / kPatches);
    std::unordered_map<Index, std::size_t> patch_of, index_of;
    std::vector<std::vector<std::size_t>> list;
    for (std::size_t a = 0; a < local_.nodes.size(); ++a) index_of[local_.nodes[a]] = a;
    for (std::size_t k = 0; k < sample_.size(); k += step) {
      patch_of[local_.nodes[sample_[k]]] = list.size();
      list.push_back({sample_[k]});
    }
    const MatrixFamily& family = *matrix_.family;
    for (const Index j : local_.rows) {
      const Index node = s_.node_of[static_cast<std::size_t>(j)];
      const auto own = patch_of.find(node);
      for (Offset k = family.column_start[j]; k < family.column_start[Offset{j} + 1]; ++k) {
        const Index other = s_.node_of[static_cast<std::size_t>(family.row[k])];
        if (other == node || matrix_.entry(k, family.row[k], j) == 0) continue;
        const auto there = index_of.find(other);
        if (there == index_of.end()) continue;
        if (own != patch_of.end()) list[own->second].push_back(there->second);
        const auto reverse = patch_of.find(other);
        if (reverse != patch_of.end()) list[reverse->second].push_back(index_of[node]);
      }
    }
    for (auto& patch : list) {
      make_distinct(patch);
    }
    return list;
  }

  /// Vectors that leave one patch, and so the rigid body that it belongs to, at rest.
  std::vector<Candidate> from_patches() const {
    std::vector<Candidate> found;
    for (const auto& patch : patches()) {
      std::vector<double> gram(n_ * n_, 0.0);
      for (const std::size_t a : patch) {
        for (std::size_t i = local_.first[a]; i < local_.first[a + 1]; ++i) {
          for (std::size_t p = 0; p < n_; ++p) {
            for (std::size_t q = 0; q < n_; ++q) gram[p * n_ + q] += local_.row(i)[p] * local_.row(i)[q];
          }
        }
      }
      const SmallEigen eigen = small_eigen(gram, static_cast<Index>(n_));
      std::size_t zeros = 0;
      while (zeros < n_ && eigen.values[zeros] < 1e-10 * eigen.values[n_ - 1]) ++zeros;
      if (zeros != 1) continue;  // more of them are mixtures again
      std::vector<double> v(n_);
      for (std::size_t c = 0; c < n_; ++c) v[c] = eigen.vectors[c * n_];
      offer(std::move(v), found);
    }
    return found;
  }

  /// Makes v exact: what leaves at rest all nodes that v leaves nearly at rest. Few moving nodes make a
  /// candidate.
  void offer(std::vector<double> v, std::vector<Candidate>& found) const {
    constexpr double kNearlyAtRest = 1e-3;
    const std::vector<Index> moving = moving_nodes(combined(local_, {v}), kNearlyAtRest);
    if (10 * moving.size() >= 9 * local_.nodes.size()) return;
    std::vector<double> gram(n_ * n_, 0.0);
    std::size_t next = 0;
    for (std::size_t a = 0; a < local_.nodes.size(); ++a) {
      if (next < moving.size() && moving[next] == local_.nodes[a]) {
        ++next;
        continue;
      }
      for (std::size_t i = local_.first[a]; i < local_.first[a + 1]; ++i) {
        for (std::size_t p = 0; p < n_; ++p) {
          for (std::size_t q = 0; q < n_; ++q) gram[p * n_ + q] += local_.row(i)[p] * local_.row(i)[q];
        }
      }
    }
    const SmallEigen eigen = small_eigen(gram, static_cast<Index>(n_));
    for (std::size_t k = 0; k < n_ && eigen.values[k] < 1e-10 * eigen.values[n_ - 1]; ++k) {
      for (std::size_t c = 0; c < n_; ++c) v[c] = eigen.vectors[c * n_ + k];
      Candidate candidate{v, moving_nodes(combined(local_, {v}), active_)};
      if (10 * candidate.nodes.size() < 9 * local_.nodes.size()) found.push_back(std::move(candidate));
    }
  }

  std::vector<double> reweighted(std::vector<double> v) const {
    double smoothing = 0.3;
    for (int step = 0; step < kReweightings; ++step) {
      std::vector<double> weighted(n_ * n_, 0.0), size(sample_.size(), 0.0);
      double most = 0;
      for (std::size_t k = 0; k < sample_.size(); ++k) {
        const std::size_t a = sample_[k];
        for (std::size_t i = local_.first[a]; i < local_.first[a + 1]; ++i) {
          double along = 0;
          for (std::size_t c = 0; c < n_; ++c) along += local_.value[i * n_ + c] * v[c];
          size[k] += along * along;
        }
        most = std::max(most, size[k]);
      }
      for (std::size_t k = 0; k < sample_.size(); ++k) {
        const double weight = 1 / std::sqrt(size[k] + smoothing * smoothing * most);
        const std::size_t a = sample_[k];
        for (std::size_t i = local_.first[a]; i < local_.first[a + 1]; ++i) {
          const double* row = local_.value.data() + i * n_;
          for (std::size_t p = 0; p < n_; ++p) {
            for (std::size_t q = 0; q < n_; ++q) weighted[p * n_ + q] += weight * row[p] * row[q];
          }
        }
      }
      const SmallEigen eigen = small_eigen(weighted, static_cast<Index>(n_));
      for (std::size_t c = 0; c < n_; ++c) v[c] = eigen.vectors[c * n_];
      smoothing = std::max(1e-7, smoothing * 0.5);
    }
    return v;
  }

  const Structure& s_;
  const ShiftedMatrix& matrix_;
  const LocalVectors& local_;
  double active_;
  std::size_t n_;
  std::vector<std::size_t> sample_;
};

class Purifier {
 public:
  Purifier(const Structure& s, const ShiftedMatrix& matrix, const Columns& x, const PurifyOptions& options)
      : s_(s), matrix_(matrix), x_(x), options_(options) {}

  std::vector<Bundle> run(const std::vector<std::pair<Index, std::vector<Index>>>& wanted) {
    std::vector<std::vector<Index>> nodes_of_part(static_cast<std::size_t>(s_.parts));
    for (const auto& [part, columns] : wanted) nodes_of_part[static_cast<std::size_t>(part)].reserve(8);
    std::vector<char> asked(static_cast<std::size_t>(s_.parts), 0);
    for (const auto& [part, columns] : wanted) asked[static_cast<std::size_t>(part)] = 1;
    for (Index node = 0; node < s_.nodes; ++node) {
      const auto part = static_cast<std::size_t>(s_.part_of[static_cast<std::size_t>(node)]);
      if (asked[part]) nodes_of_part[part].push_back(node);
    }
    std::vector<LocalVectors> loose;  // in parts that do not move as a whole
    std::vector<Index> part_of_loose;
    for (const auto& [part, columns] : wanted) {
      if (columns.empty()) continue;
      LocalVectors local = gather(s_, nodes_of_part[static_cast<std::size_t>(part)], x_, columns);
      if (!s_.named && local.count <= 6 && moves_everywhere(local)) {  // connectivity is all that is known
        keep(part, std::move(local), true);
        continue;
      }
      const auto rest = take_rigid(part, local, true);
      if (rest.empty()) continue;
      if (!s_.placed && rest.size() < local.count && local.count <= 6 && moves_everywhere(local)) {
        bundles_.back().x = std::move(local);  // turns cannot be told from places that are not known
        continue;
      }
      if (rest.size() < local.count) {
        take_apart(part, local, complement(rest, local.count));
        continue;
      }
      loose.push_back(restricted(local, moving_nodes(local, options_.active)));
      part_of_loose.push_back(part);
    }
    join_moving(loose);
    for (std::size_t k = 0; k < loose.size(); ++k) split(part_of_loose[k], loose[k]);
    return std::move(bundles_);
  }

 private:
  bool moves_everywhere(const LocalVectors& local) const {
    return moving_nodes(local, options_.active).size() == local.nodes.size();
  }

  /// Makes a bundle of the rigid motions that the orthonormal vectors hold; the coefficients of what remains.
  std::vector<std::vector<double>> take_rigid(Index part, const LocalVectors& local, bool whole_part) {
    const RigidFit fit = fit_rigid_motions(s_, local, *matrix_.scale, options_.rigid);
    if (fit.motions.empty()) return identity(local.count);
    Bundle rigid;
    rigid.part = part;
    rigid.x = combined(local, fit.of_columns);
    rigid.rigid = fit;
    rigid.whole_part = whole_part;
    rigid.nodes = moving_nodes(rigid.x, options_.active);
    bundles_.push_back(std::move(rigid));
    return complement(fit.of_columns, local.count);
  }

  static std::vector<std::vector<double>> identity(std::size_t size) {
    std::vector<std::vector<double>> basis(size, std::vector<double>(size, 0.0));
    for (std::size_t c = 0; c < size; ++c) basis[c][c] = 1;
    return basis;
  }

  /// Which moving nodes touch, over all parts in one pass.
  void join_moving(const std::vector<LocalVectors>& loose) {
    std::vector<char> moving(static_cast<std::size_t>(s_.nodes), 0);
    for (const LocalVectors& local : loose) {
      for (const Index node : local.nodes) moving[static_cast<std::size_t>(node)] = 1;
    }
    clusters_.emplace(s_.nodes);
    if (loose.empty()) return;
    const MatrixFamily& family = *matrix_.family;
    for (Index j = 0; j < family.rows; ++j) {
      const Index node = s_.node_of[static_cast<std::size_t>(j)];
      if (!moving[static_cast<std::size_t>(node)]) continue;
      for (Offset k = family.column_start[j]; k < family.column_start[Offset{j} + 1]; ++k) {
        const Index other = s_.node_of[static_cast<std::size_t>(family.row[k])];
        if (other == node || !moving[static_cast<std::size_t>(other)]) continue;
        if (matrix_.entry(k, family.row[k], j) != 0) clusters_->join(node, other);
      }
    }
  }

  /// Clusters that do not touch, each with the vectors that live on it alone, if that is all there is.
  void split(Index part, const LocalVectors& local) {
    std::unordered_map<Index, std::vector<Index>> of_root;
    std::vector<Index> roots;
    for (const Index node : local.nodes) {
      auto& nodes = of_root[clusters_->root(node)];
      if (nodes.empty()) roots.push_back(clusters_->root(node));
      nodes.push_back(node);
    }
    if (roots.size() == 1) return separate(part, local);
    std::vector<LocalVectors> pieces;
    std::size_t rank = 0;
    for (const Index root : roots) {
      const LocalVectors cluster = restricted(local, of_root[root]);
      std::vector<double> gram(local.count * local.count, 0.0);
      for (std::size_t i = 0; i < cluster.rows.size(); ++i) {
        const double* row = cluster.value.data() + i * local.count;
        for (std::size_t p = 0; p < local.count; ++p) {
          for (std::size_t q = 0; q < local.count; ++q) gram[p * local.count + q] += row[p] * row[q];
        }
      }
      const SmallEigen eigen = small_eigen(gram, static_cast<Index>(local.count));
      std::vector<std::vector<double>> basis;
      for (std::size_t k = 0; k < local.count; ++k) {
        if (eigen.values[k] < 1e-6) continue;
        std::vector<double> v(local.count);
        for (std::size_t c = 0; c < local.count; ++c) v[c] = eigen.vectors[c * local.count + k];
        basis.push_back(std::move(v));
      }
      rank += basis.size();
      if (!basis.empty()) pieces.push_back(combined(cluster, basis));
    }
    if (rank != local.count) return separate(part, local);  // a motion lives on several clusters at once
    for (const LocalVectors& piece : pieces) separate(part, piece);
  }

  /// One cluster: rigid as a whole, or taken apart by sparsity.
  void separate(Index part, LocalVectors local) {
    orthonormalise(local);
    if (local.count == 1) return take_rigid_or_keep(part, local, true);
    const auto rest = take_rigid(part, local, false);
    if (rest.empty()) return;
    std::vector<std::vector<double>> rigid;
    if (rest.size() < local.count) rigid = complement(rest, local.count);
    take_apart(part, local, std::move(rigid));
  }

  /// Vectors beyond the rigid ones (coefficients `basis`), by sparsity; what has no sparse vector stays
  /// together.
  void take_apart(Index part, const LocalVectors& local, std::vector<std::vector<double>> basis) {
    std::vector<SparseSearch::Candidate> chosen;
    for (const auto& candidate : SparseSearch(s_, matrix_, local, options_.active).run()) {
      if (basis.size() == local.count) break;
      if (extend(basis, candidate.coefficient, 0.05)) chosen.push_back(candidate);
    }
    group(part, local, chosen);
    const auto left = complement(basis, local.count);
    if (left.empty()) return;
    const LocalVectors mixed = combined(local, left);
    take_rigid_or_keep(part, restricted(mixed, moving_nodes(mixed, options_.active)),
                       left.size() == 1 || chosen.empty());
  }

  /// Sparse vectors on about the same nodes belong to one cause.
  void group(Index part, const LocalVectors& local, const std::vector<SparseSearch::Candidate>& chosen) {
    std::vector<char> used(chosen.size(), 0);
    for (std::size_t k = 0; k < chosen.size(); ++k) {
      if (used[k]) continue;
      std::vector<std::vector<double>> together{chosen[k].coefficient};
      for (std::size_t j = k + 1; j < chosen.size(); ++j) {
        if (used[j] || !same_place(chosen[k].nodes, chosen[j].nodes)) continue;
        used[j] = 1;
        together.push_back(chosen[j].coefficient);
      }
      const LocalVectors mixed = combined(local, together);
      const LocalVectors moving = restricted(mixed, moving_nodes(mixed, options_.active));
      take_rigid_or_keep(part, moving, true);
    }
  }

  static bool same_place(const std::vector<Index>& a, const std::vector<Index>& b) {
    std::vector<Index> both;
    std::set_intersection(a.begin(), a.end(), b.begin(), b.end(), std::back_inserter(both));
    return 5 * both.size() > 4 * (a.size() + b.size() - both.size());
  }

  void take_rigid_or_keep(Index part, LocalVectors local, bool separated) {
    orthonormalise(local);
    const auto rest = take_rigid(part, local, false);
    if (!rest.empty()) keep(part, combined(local, rest), separated);
  }

  void keep(Index part, LocalVectors local, bool separated) {
    Bundle bundle;
    bundle.part = part;
    bundle.nodes = moving_nodes(local, options_.active);
    bundle.x = std::move(local);
    bundle.separated = separated;
    bundles_.push_back(std::move(bundle));
  }

  const Structure& s_;
  const ShiftedMatrix& matrix_;
  const Columns& x_;
  PurifyOptions options_;
  std::optional<DisjointSets> clusters_;
  std::vector<Bundle> bundles_;
};

}  // namespace

std::vector<Bundle> purify(const Structure& structure, const ShiftedMatrix& matrix, const Columns& x,
                           const std::vector<std::pair<Index, std::vector<Index>>>& wanted,
                           const PurifyOptions& options) {
  return Purifier(structure, matrix, x, options).run(wanted);
}

}  // namespace stanchion
