// What is known of a matrix before its directions are named, and what has been named so far.
#pragma once

#include <cmath>
#include <map>
#include <optional>
#include <string>
#include <vector>

#include "diagnose/diagnosis.hpp"
#include "diagnose/kept_factor.hpp"
#include "diagnose/local_motions.hpp"
#include "diagnose/local_vectors.hpp"
#include "diagnose/near_zero.hpp"
#include "diagnose/picture.hpp"
#include "diagnose/probes.hpp"
#include "diagnose/seams.hpp"
#include "diagnose/structure.hpp"
#include "diagnose/words.hpp"

namespace stanchion {

inline constexpr std::size_t kShownShares = 24;  ///< ranked equations of a direction

/// Which Ritz pairs of a part are zero and which are weak, and whether they stand apart from the rest.
struct PartChoice {
  std::vector<Index> zero, weak;
  bool zero_certain = true;
};

/// Gathered once, step by step in the order of the members; the naming functions read it and add to `out`.
struct Evidence {
  Evidence(const DiagnosisInput& input, ThreadPool& workers);

  const DiagnosisInput& in;
  ThreadPool& pool;
  Structure s;
  KeptFactor factor;
  Inertia inertia;    ///< of the whole matrix
  double resolution;  ///< offset of the kept factor
  LocalMotions motions;
  NearZero near;
  std::vector<PartChoice> choice;  ///< by part
  ModelPicture picture;
  Seams seams;
  std::vector<StiffCoupling> couplings;
  std::map<Index, Index> nullity;  ///< zero directions named, by part
  LocateOutcome out;

  /// Proved bound on the rounding errors of the inertia.
  double bound() const { return in.certified.certificate.error_bound.value_or(0); }
  bool has_multipliers() const { return in.names.multipliers != nullptr && !in.names.multipliers->empty(); }
  bool is_multiplier(Index row) const {
    return s.kind[static_cast<std::size_t>(row)] == DofKind::kMultiplier;
  }
  /// No diagonal, but acting on others: what a multiplier that nobody listed looks like.
  bool looks_like_multiplier(Index row) const {
    const auto i = static_cast<std::size_t>(row);
    return !is_multiplier(row) && s.diagonal[i] == 0 && s.empty[i] == 0;
  }
  Index part_of_row(Index row) const {
    return s.part_of[static_cast<std::size_t>(s.node_of[static_cast<std::size_t>(row)])];
  }
  /// a_ii in size, or 1 where it is zero: what an amplitude is weighed with.
  double weight(Index row) const {
    const double d = std::fabs(s.diagonal[static_cast<std::size_t>(row)]);
    return d > 0 ? d : 1;
  }

  /// Energies and forces of the parts' rigid motions; formed when first asked for.
  const RigidProbe& rigid_probe();

  /// Puts the sentence and the remedy that follow from `facts` into words and keeps the direction.
  void add(Direction direction, CauseFacts facts);

 private:
  std::optional<RigidProbe> probe_;
};

/// "node 12, ux": the equation ranked first.
std::string place_of(const Direction& direction);

/// The share of the whole that equations of one kind hold; `holds` judges a position.
template <class Holds>
double share_of(const LocalVectors& moving, const std::vector<double>& share, const Holds& holds) {
  double sum = 0;
  for (std::size_t i = 0; i < moving.rows.size(); ++i) {
    if (holds(moving.rows[i])) sum += share[i];
  }
  return sum;
}

}  // namespace stanchion
