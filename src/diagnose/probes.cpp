#include "diagnose/probes.hpp"

#include <algorithm>
#include <cmath>

#include "base/ranges.hpp"
#include "diagnose/rigid_motion.hpp"
#include "numeric/block_columns.hpp"

namespace stanchion {
namespace {

constexpr double kPush = -1e-10;    ///< force over k_ii from which a push counts
constexpr double kIsolated = 1e-6;  ///< what neighbours may feel of it
constexpr std::size_t kMostCandidates = 32;
constexpr double kSwamps = 1e3;  ///< times the median diagonal: stiff enough to be a penalty

/// Centre of every part's placed nodes and their spread.
struct PartPlace {
  std::array<double, 3> centre{};
  double radius = 1;
  Index placed = 0;
};

std::vector<PartPlace> places_of_parts(const Structure& s) {
  std::vector<PartPlace> places(static_cast<std::size_t>(s.parts));
  if (!s.placed) return places;
  for (Index node = 0; node < s.nodes; ++node) {
    const auto a = static_cast<std::size_t>(node);
    if (!s.has_place[a]) continue;
    PartPlace& part = places[static_cast<std::size_t>(s.part_of[a])];
    ++part.placed;
    for (std::size_t d = 0; d < 3; ++d) part.centre[d] += s.place[a][d];
  }
  for (PartPlace& part : places) {
    for (double& c : part.centre) c /= std::max<Index>(1, part.placed);
    part.radius = 0;
  }
  for (Index node = 0; node < s.nodes; ++node) {
    const auto a = static_cast<std::size_t>(node);
    if (!s.has_place[a]) continue;
    PartPlace& part = places[static_cast<std::size_t>(s.part_of[a])];
    for (std::size_t d = 0; d < 3; ++d) part.radius += std::pow(s.place[a][d] - part.centre[d], 2);
  }
  for (PartPlace& part : places) {
    part.radius = part.placed > 0 && part.radius > 0 ? std::sqrt(part.radius / part.placed) : 1;
  }
  return places;
}

}  // namespace

RigidProbe probe_rigid_motions(const Structure& s, const ShiftedMatrix& matrix, ThreadPool& pool) {
  RigidProbe probe;
  probe.turns = s.placed;
  probe.motion = Columns(s.rows, kBlockVectors);
  const std::vector<PartPlace> places = places_of_parts(s);
  for_ranges(pool, s.rows, kBlockRowsAPiece, [&](Offset begin, Offset end) {
    for (auto row = static_cast<Index>(begin); row < end; ++row) {
      const auto node = static_cast<std::size_t>(s.node_of[static_cast<std::size_t>(row)]);
      const PartPlace& part = places[static_cast<std::size_t>(s.part_of[node])];
      const bool turns = s.placed && s.has_place[node];
      for (std::size_t k = 0; k < (turns ? 6 : 3); ++k) {
        RigidMotion motion;
        (k < 3 ? motion.t[k] : motion.w[k - 3]) = k < 3 ? 1 : 1 / part.radius;
        probe.motion.row(row)[k] = rigid_value(s, row, part.centre, motion) / (*matrix.scale)[row];
      }
    }
  });
  probe.force = times_extended(matrix, probe.motion, pool);
  return probe;
}

std::vector<std::array<double, 6>> rigid_energies(const Structure& s, const RigidProbe& probe) {
  const auto parts = static_cast<std::size_t>(s.parts);
  std::vector<std::array<double, 6>> work(parts), size(parts);
  for (Index row = 0; row < s.rows; ++row) {
    const auto p = static_cast<std::size_t>(row);
    const auto part = static_cast<std::size_t>(s.part_of[static_cast<std::size_t>(s.node_of[p])]);
    for (std::size_t k = 0; k < 6; ++k) {
      const double x = probe.motion.row(row)[k];
      work[part][k] += x * probe.force.row(row)[k];
      size[part][k] += std::fabs(s.diagonal[p]) * x * x;
    }
  }
  for (std::size_t part = 0; part < parts; ++part) {
    for (std::size_t k = 0; k < 6; ++k) work[part][k] = size[part][k] > 0 ? work[part][k] / size[part][k] : 0;
  }
  return work;
}

namespace {

/// Equations with a negative diagonal entry none of whose neighbours has one: no sum of sound elements gives
/// that. The spring is stronger than the entry, for what is sound adds to it; twice the entry stands for it.
std::vector<NegativeSpring> negative_diagonals(const Structure& s, const ShiftedMatrix& matrix) {
  std::vector<char> beside(static_cast<std::size_t>(s.rows), 0);
  const MatrixFamily& family = *matrix.family;
  for (Index j = 0; j < family.rows; ++j) {
    for (Offset k = family.column_start[j]; k < family.column_start[Offset{j} + 1]; ++k) {
      const Index i = family.row[k];
      if (i == j || s.node_of[static_cast<std::size_t>(i)] == s.node_of[static_cast<std::size_t>(j)])
        continue;
      if (s.diagonal[static_cast<std::size_t>(j)] < 0) beside[static_cast<std::size_t>(i)] = 1;
      if (s.diagonal[static_cast<std::size_t>(i)] < 0) beside[static_cast<std::size_t>(j)] = 1;
    }
  }
  std::vector<NegativeSpring> springs;
  for (Index row = 0; row < s.rows && springs.size() < kMostCandidates; ++row) {
    const auto p = static_cast<std::size_t>(row);
    if (s.kind[p] == DofKind::kMultiplier || !(s.diagonal[p] < 0) || beside[p]) continue;
    const double scale = (*matrix.scale)[row];
    springs.push_back({row, 2 * s.diagonal[p] / (scale * scale)});
  }
  return springs;
}

}  // namespace

std::vector<NegativeSpring> find_negative_springs(const Structure& s, const ShiftedMatrix& matrix,
                                                  const RigidProbe& probe, KeptFactor& factor) {
  struct Candidate {
    Index row;
    std::size_t column;
    double push;      ///< the force, against the motion that it should resist
    double felt = 0;  ///< by the neighbours
  };
  std::vector<Candidate> candidates;
  for (Index row = 0; s.named && row < s.rows; ++row) {
    const auto p = static_cast<std::size_t>(row);
    if (s.kind[p] > DofKind::kUz || s.axes[static_cast<std::size_t>(s.node_of[p])] != nullptr) continue;
    const auto k = static_cast<std::size_t>(s.kind[p]);
    const double x = probe.motion.row(row)[k], force = probe.force.row(row)[k];
    if (x == 0 || !(force / x < kPush * std::max(std::fabs(s.diagonal[p]), 1e-300))) continue;
    candidates.push_back({row, k, force});
  }
  // Those with the strongest pushes; each must stand alone among the rows it touches.
  std::sort(candidates.begin(), candidates.end(), [](const Candidate& a, const Candidate& b) {
    return a.push != b.push ? a.push < b.push : a.row < b.row;
  });
  if (candidates.size() > 4096) candidates.resize(4096);
  std::vector<Index> at(static_cast<std::size_t>(s.rows), -1);
  for (std::size_t c = 0; c < candidates.size(); ++c)
    at[static_cast<std::size_t>(candidates[c].row)] = static_cast<Index>(c);
  const MatrixFamily& family = *matrix.family;
  const auto feel = [&](Index row, Index neighbour) {
    const Index c = at[static_cast<std::size_t>(row)];
    if (c < 0) return;
    Candidate& candidate = candidates[static_cast<std::size_t>(c)];
    candidate.felt = std::max(candidate.felt, std::fabs(probe.force.row(neighbour)[candidate.column]));
  };
  for (Index j = 0; j < family.rows; ++j) {
    for (Offset k = family.column_start[j]; k < family.column_start[Offset{j} + 1]; ++k) {
      const Index i = family.row[k];
      if (i == j || matrix.entry(k, i, j) == 0) continue;
      feel(i, j);
      feel(j, i);
    }
  }
  std::vector<NegativeSpring> springs = negative_diagonals(s, matrix);
  for (const Candidate& candidate : candidates) {
    if (springs.size() == kMostCandidates) break;
    if (candidate.felt > kIsolated * std::fabs(candidate.push)) continue;
    std::erase_if(springs, [&](const NegativeSpring& spring) { return spring.row == candidate.row; });
    const double s_i = (*matrix.scale)[candidate.row];
    const double scaled = candidate.push / probe.motion.row(candidate.row)[candidate.column];
    springs.push_back({candidate.row, scaled / (s_i * s_i), true});
  }
  if (springs.empty()) return springs;
  // n-(A + t e e^T) = n-(A) - 1 exactly when 1 + t e^T A^-1 e < 0, t > 0.
  Columns unit(s.rows, whole_blocks(static_cast<Index>(springs.size())));
  for (std::size_t c = 0; c < springs.size(); ++c) unit.row(springs[c].row)[c] = 1;
  factor.solve(unit);
  for (std::size_t c = 0; c < springs.size(); ++c) {
    const double s_i = (*matrix.scale)[springs[c].row];
    springs[c].decisive = 1 - springs[c].stiffness * s_i * s_i * unit.row(springs[c].row)[c] < 0;
  }
  return springs;
}

std::vector<StiffCoupling> find_stiff_couplings(const Structure& s, const ShiftedMatrix& matrix,
                                                double digits) {
  const double limit = std::pow(10.0, -digits);
  const MatrixFamily& family = *matrix.family;
  const auto rows = static_cast<std::size_t>(s.rows);
  std::vector<double> physical(rows), neighbour_most(rows, 0.0);
  std::vector<Index> touched(rows, 0);
  for (Index row = 0; row < s.rows; ++row) {
    const double scale = (*matrix.scale)[row];
    physical[static_cast<std::size_t>(row)] = s.diagonal[static_cast<std::size_t>(row)] / (scale * scale);
  }
  std::vector<StiffCoupling> found;
  std::vector<double> positive;
  for (const double d : physical) {
    if (d > 0) positive.push_back(d);
  }
  if (positive.empty()) return found;
  std::nth_element(positive.begin(), positive.begin() + static_cast<std::ptrdiff_t>(positive.size() / 2),
                   positive.end());
  const double usual = positive[positive.size() / 2];
  const auto comparable = [&](Index i, Index j) {
    const auto a = static_cast<std::size_t>(i), b = static_cast<std::size_t>(j);
    return (!s.named || s.kind[a] == s.kind[b]) && physical[a] > 0 && physical[b] > 0;
  };
  for (Index j = 0; j < family.rows; ++j) {
    const auto jj = static_cast<std::size_t>(j);
    for (Offset k = family.column_start[j]; k < family.column_start[Offset{j} + 1]; ++k) {
      const Index i = family.row[k];
      const auto ii = static_cast<std::size_t>(i);
      if (i == j || matrix.entry(k, i, j) == 0) continue;
      if (!comparable(i, j)) continue;
      ++touched[ii], ++touched[jj];
      const double a = matrix.entry(k, i, j) / ((*matrix.scale)[i] * (*matrix.scale)[j]);
      neighbour_most[ii] = std::max(neighbour_most[ii], physical[jj]);
      neighbour_most[jj] = std::max(neighbour_most[jj], physical[ii]);
      const double together = physical[ii] + physical[jj] - 2 * std::fabs(a);
      const bool swamps = physical[ii] + physical[jj] > kSwamps * usual;
      if (swamps && std::fabs(together) < limit * (physical[ii] + physical[jj])) {
        const double ratio =
            std::max(together, 1e-17 * (physical[ii] + physical[jj])) / (physical[ii] + physical[jj]);
        found.push_back({i, j, -std::log10(ratio)});
      }
    }
  }
  // Two rows that touch nothing else are a bar without supports, not a coupling within something softer.
  std::erase_if(found, [&](const StiffCoupling& c) {
    return touched[static_cast<std::size_t>(c.row)] < 2 && touched[static_cast<std::size_t>(c.other)] < 2;
  });
  if (s.named) {
    for (Index row = 0; row < s.rows; ++row) {
      const auto p = static_cast<std::size_t>(row);
      if (neighbour_most[p] > 0 && neighbour_most[p] < limit * physical[p]) {
        found.push_back({row, -1, std::log10(physical[p] / neighbour_most[p])});
      }
    }
  }
  std::sort(found.begin(), found.end(), [](const StiffCoupling& a, const StiffCoupling& b) {
    return a.digits != b.digits ? a.digits > b.digits : a.row < b.row;
  });
  return found;
}

}  // namespace stanchion
