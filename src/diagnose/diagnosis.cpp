#include "diagnose/diagnosis.hpp"

#include <algorithm>
#include <cmath>
#include <map>
#include <numeric>

#include "base/clock.hpp"
#include "base/counter_random.hpp"
#include "diagnose/local_accuracy.hpp"
#include "diagnose/negative.hpp"
#include "diagnose/picture.hpp"
#include "diagnose/probes.hpp"
#include "diagnose/purify.hpp"
#include "diagnose/seams.hpp"
#include "diagnose/shares.hpp"
#include "diagnose/words.hpp"

namespace stanchion {
namespace {

constexpr std::size_t kShown = 24;  ///< ranked equations of a direction
constexpr std::size_t kPartsShown = 200;
constexpr Index kMostColumns = 64;  ///< vectors of one part that are looked at together
constexpr Index kSpareColumns = 2;  ///< to see what lies behind the wanted ones
/// A direction is told from the rest of the spectrum when the next one is so many times larger.
constexpr double kGap = 100;
constexpr double kSharpenAbove = 8;    ///< a resolution this many times its bound can be made smaller
constexpr double kCouplingDigits = 9;  ///< lost in one coupling: worth an entry
constexpr Index kAccuracyVectors = 32;
constexpr double kHalfShare = 0.9;  ///< of the energy that names the nodes of a patch
constexpr double kZeroActive = 1e-6, kWeakActive = 1e-4, kZeroRigid = 1e-4, kWeakRigid = 1e-2;

/// Which Ritz pairs of a part are zero and which are weak, and whether they stand apart from the rest.
struct PartChoice {
  std::vector<Index> zero, weak;
  bool zero_certain = true;
};

class Diagnostician {
 public:
  Diagnostician(const DiagnosisInput& input, ThreadPool& pool)
      : in_(input),
        pool_(pool),
        s_(describe_structure(input.analysis, input.matrix, input.names)),
        factor_(input.analysis, *input.kept.factorization.factor, pool),
        inertia_(input.certified.inertia),
        resolution_(input.kept.offset) {}

  Diagnosis run() {
    const Stopwatch watch;
    Diagnosis diagnosis;
    if (inertia_.zero > 0) motions_ = find_node_motions(s_, in_.matrix);
    look_near_zero();
    if (wants_sharper()) {
      diagnosis.sharper_resolution = std::max(4 * bound(), 0x1p-46 * resolution_);
      return diagnosis;
    }
    picture_ = make_picture(s_, in_.matrix);
    seams_ = find_seams(s_, in_.matrix);
    couplings_ = find_stiff_couplings(s_, in_.matrix, kCouplingDigits);
    choose();
    add_node_motions();
    add_bundles(false);
    add_bundles(true);
    add_negative();
    add_stiff_couplings();
    account();
    add_accuracy();
    diagnosis.outcome = std::move(out_);
    diagnosis.outcome.picture = std::move(picture_.picture);
    diagnosis.outcome.weak_below = in_.options.weak_below;
    diagnosis.outcome.seconds = watch.seconds();
    return diagnosis;
  }

 private:
  double bound() const { return in_.certified.certificate.error_bound.value_or(0); }
  bool has_multipliers() const { return in_.names.multipliers != nullptr && !in_.names.multipliers->empty(); }

  void look_near_zero() {
    const Index left = inertia_.zero - static_cast<Index>(motions_.size());
    Index columns = whole_blocks(std::min(std::max<Index>(left, 0) + kSpareColumns, kMostColumns));
    for (;;) {
      near_ = find_near_zero(s_, in_.matrix, factor_, motions_,
                             {columns, std::max(in_.options.weak_below, 2 * resolution_), in_.seed}, pool_);
      // Weak directions that fill all columns of a part hide whether they stand apart.
      if (columns >= 3 * kBlockVectors || !full_of_weak()) return;
      columns += kBlockVectors;
    }
  }

  bool full_of_weak() const {
    for (const PartPairs& pairs : near_.parts) {
      if (pairs.used < near_.x.count || pairs.used == 0) continue;
      if (std::fabs(pairs.ritz.value.back()) < in_.options.weak_below) return true;
    }
    return false;
  }

  /// Small, but not zero: another offset would tell.
  bool wants_sharper() const {
    if (inertia_.zero == 0 || resolution_ <= kSharpenAbove * bound()) return false;
    for (const PartPairs& pairs : near_.parts) {
      for (std::size_t k = 0; k < pairs.ritz.value.size(); ++k) {
        const double size = std::fabs(pairs.ritz.value[k]);
        if (size <= resolution_ && size - pairs.ritz.residual[k] > kSharpenAbove * bound()) return true;
      }
    }
    return false;
  }

  void choose() {
    choice_.resize(static_cast<std::size_t>(s_.parts));
    for (const PartPairs& pairs : near_.parts) {
      PartChoice& choice = choice_[static_cast<std::size_t>(pairs.part)];
      const Ritz& ritz = pairs.ritz;
      const std::size_t n = ritz.value.size();
      std::size_t k = 0;
      double most = 0;
      for (; k < n && std::fabs(ritz.value[k]) <= resolution_; ++k) {
        choice.zero.push_back(static_cast<Index>(k));
        most = std::max(most, std::fabs(ritz.value[k]) + ritz.residual[k]);
      }
      // Membership is certain when the next eigenvalue is far away, or there is none.
      const bool exhausted = n < static_cast<std::size_t>(near_.x.count);
      if (!choice.zero.empty()) {
        choice.zero_certain = k < n ? std::fabs(ritz.value[k]) - ritz.residual[k] > kGap * most : exhausted;
      }
      choose_weak(ritz, k, exhausted, choice);
    }
  }

  /// Positive values below the level, up to the last gap behind which the rest begins.
  void choose_weak(const Ritz& ritz, std::size_t begin, bool exhausted, PartChoice& choice) const {
    std::size_t last = begin;
    for (std::size_t k = begin; k < ritz.value.size(); ++k) {
      const double value = ritz.value[k];
      if (!(value < in_.options.weak_below) || value < 0) break;
      const bool settled = ritz.residual[k] < 0.1 * value;
      if (!settled) break;
      const bool gap =
          k + 1 < ritz.value.size() ? std::fabs(ritz.value[k + 1]) > kGap * value : exhausted && begin == 0;
      if (gap) last = k + 1;
    }
    for (std::size_t k = begin; k < last; ++k) choice.weak.push_back(static_cast<Index>(k));
  }

  std::string at_place(Index row) const { return s_.describe(row); }

  Index part_of_row(Index row) const {
    return s_.part_of[static_cast<std::size_t>(s_.node_of[static_cast<std::size_t>(row)])];
  }

  void add(Direction direction, CauseFacts facts) {
    facts.cause = direction.cause;
    facts.count = direction.count;
    facts.nodes = direction.moving_nodes;
    facts.energy = direction.energy;
    facts.motions = direction.motions;
    facts.placed = s_.placed;
    direction.explanation = explanation_of(facts);
    direction.remedy = remedy_of(facts);
    out_.directions.push_back(std::move(direction));
  }

  /// Motions of single nodes, gathered by what they are.
  void add_node_motions() {
    std::map<std::string, std::vector<const NodeMotion*>> groups;
    for (const NodeMotion& motion : motions_) groups[group_of(motion)].push_back(&motion);
    for (const auto& [name, members] : groups) add_node_group(name, members);
  }

  std::string group_of(const NodeMotion& motion) const {
    bool turns = true;
    Index only = -1;
    const auto rows = s_.rows_of(motion.node);
    for (std::size_t r = 0; r < motion.entry.size(); ++r) {
      if (std::fabs(motion.entry[r]) < 1e-6) continue;
      only = rows[r];
      turns = turns && is_rotation(s_.kind[static_cast<std::size_t>(rows[r])]);
    }
    if (turns && s_.named) return "rotation";
    return motion.empty_row ? "unattached " + (s_.named ? s_.dof_name(only) : std::string()) : "pinned";
  }

  void add_node_group(const std::string& name, const std::vector<const NodeMotion*>& members) {
    Direction direction;
    direction.count = static_cast<Index>(members.size());
    std::vector<Index> rows, nodes;
    std::vector<double> share;
    bool empty = true;
    for (const NodeMotion* motion : members) {
      empty = empty && motion->empty_row;
      nodes.push_back(motion->node);
      const auto of_node = s_.rows_of(motion->node);
      for (std::size_t r = 0; r < motion->entry.size(); ++r) {
        if (std::fabs(motion->entry[r]) < 1e-6) continue;
        rows.push_back(of_node[r]);
        share.push_back(motion->entry[r] * motion->entry[r] / direction.count);
      }
    }
    std::sort(nodes.begin(), nodes.end());
    nodes.erase(std::unique(nodes.begin(), nodes.end()), nodes.end());
    direction.moving_nodes = static_cast<Index>(nodes.size());
    direction.moving_rows = static_cast<Index>(rows.size());
    direction.residual = 0;
    if (name == "rotation") {
      direction.cause = empty && direction.count == 1 ? Cause::kUnattachedDof : Cause::kMissingRotation;
    } else {
      direction.cause = empty ? Cause::kUnattachedDof : Cause::kMechanism;
    }
    direction.nodes = ranked(s_, rows, share, kShown);
    const Index part = part_of_row(rows.front());
    const bool one_part =
        std::all_of(rows.begin(), rows.end(), [&](Index row) { return part_of_row(row) == part; });
    if (one_part) direction.component = part;
    for (const NodeMotion* motion : members) ++nullity_[s_.part_of[static_cast<std::size_t>(motion->node)]];
    CauseFacts facts;
    facts.place = at_place(rows.front());
    facts.dof = s_.named ? s_.dof_name(rows.front()) : "no dof map";
    add(std::move(direction), std::move(facts));
  }

  void add_bundles(bool weak) {
    std::vector<std::pair<Index, std::vector<Index>>> wanted;
    for (Index part = 0; part < s_.parts; ++part) {
      const PartChoice& choice = choice_[static_cast<std::size_t>(part)];
      if (weak && !choice.weak.empty()) wanted.emplace_back(part, choice.weak);
      if (weak || choice.zero.empty()) continue;
      nullity_[part] += static_cast<Index>(choice.zero.size());
      if (choice.zero_certain && settled(part, choice.zero)) {
        wanted.emplace_back(part, choice.zero);
      } else {
        add_unresolved(part, static_cast<Index>(choice.zero.size()));
      }
    }
    const PurifyOptions options{weak ? kWeakActive : kZeroActive, weak ? kWeakRigid : kZeroRigid};
    auto bundles = purify(s_, in_.matrix, near_.x, wanted, options);
    std::vector<char> redundant;
    for (const Bundle& bundle : bundles)
      redundant.push_back(of_multipliers(bundle.x, row_shares(s_, bundle.x)) > 0.99);
    if (!weak) merge_redundant(bundles, redundant);
    judge(bundles);
    for (const Bundle& bundle : bundles) add_bundle(bundle, weak);
  }

  /// The vectors found are null vectors as far as double precision can tell.
  bool settled(Index part, const std::vector<Index>& columns) const {
    const Ritz& ritz = near_.parts[static_cast<std::size_t>(part)].ritz;
    return std::all_of(columns.begin(), columns.end(),
                       [&](Index k) { return ritz.residual[static_cast<std::size_t>(k)] <= resolution_; });
  }

  void add_unresolved(Index part, Index count) {
    Direction direction;
    direction.count = count;
    direction.component = part;
    direction.moving_nodes = s_.part_nodes[static_cast<std::size_t>(part)];
    direction.moving_rows = s_.part_rows[static_cast<std::size_t>(part)];
    const Ritz& ritz = near_.parts[static_cast<std::size_t>(part)].ritz;
    direction.energy = ritz.value.empty() ? 0 : ritz.value[0];
    direction.sign = 0;
    CauseFacts facts;
    facts.unresolved_because =
        "The eigenvalues of this part run down to the resolution without a gap, so that what is called zero "
        "cannot be "
        "told from what is merely soft; no cause is named.";
    add(std::move(direction), std::move(facts));
  }

  /// Energy and residual of every bundle's vectors against the matrix itself, by one product in double-double
  /// a pass: bundles of different parts share columns.
  void judge(const std::vector<Bundle>& bundles) {
    judged_.assign(bundles.size(), {});
    std::vector<Index> used(static_cast<std::size_t>(s_.parts), 0), at(bundles.size());
    Index most = 0;
    for (std::size_t b = 0; b < bundles.size(); ++b) {
      Index& next = used[static_cast<std::size_t>(bundles[b].part)];
      at[b] = next;
      next += static_cast<Index>(bundles[b].x.count);
      most = std::max(most, next);
    }
    if (most == 0) return;
    Columns x(s_.rows, whole_blocks(most));
    for (std::size_t b = 0; b < bundles.size(); ++b) {
      const LocalVectors& v = bundles[b].x;
      for (std::size_t i = 0; i < v.rows.size(); ++i)
        std::copy_n(v.row(i), v.count, x.row(v.rows[i]) + at[b]);
    }
    const Columns ax = times_extended(in_.matrix, x, pool_);
    std::vector<double> residual(static_cast<std::size_t>(s_.parts) * static_cast<std::size_t>(most), 0.0);
    for (Index i = 0; i < s_.rows; ++i) {
      const auto part = static_cast<std::size_t>(part_of_row(i));
      for (Index c = 0; c < most; ++c) {
        residual[part * static_cast<std::size_t>(most) + static_cast<std::size_t>(c)] +=
            ax.row(i)[c] * ax.row(i)[c];
      }
    }
    for (std::size_t b = 0; b < bundles.size(); ++b) {
      const LocalVectors& v = bundles[b].x;
      for (std::size_t c = 0; c < v.count; ++c) {
        const auto column = static_cast<std::size_t>(at[b]) + c;
        double work = 0, size = 0;
        for (std::size_t i = 0; i < v.rows.size(); ++i) {
          const double y = v.row(i)[c];
          const double d = std::fabs(s_.diagonal[static_cast<std::size_t>(v.rows[i])]);
          work += y * ax.row(v.rows[i])[column];
          size += (d > 0 ? d : 1) * y * y;
        }
        const double energy = size > 0 ? work / size : 0;
        if (std::fabs(energy) >= std::fabs(judged_[b].energy)) judged_[b].energy = energy;
        const auto part = static_cast<std::size_t>(bundles[b].part);
        judged_[b].residual = std::max(judged_[b].residual,
                                       std::sqrt(residual[part * static_cast<std::size_t>(most) + column]));
      }
    }
    next_judged_ = 0;
  }

  void add_bundle(const Bundle& bundle, bool weak) {
    const Judged judged = judged_[next_judged_++];
    Direction direction;
    direction.count = static_cast<Index>(bundle.x.count);
    direction.sign = weak ? 1 : 0;
    direction.energy = judged.energy;
    direction.residual = judged.residual;
    direction.component = bundle.part;
    direction.moving_nodes = static_cast<Index>(bundle.nodes.size());
    const LocalVectors moving = restricted(bundle.x, bundle.nodes);
    direction.moving_rows = static_cast<Index>(moving.rows.size());
    const std::vector<double> share = row_shares(s_, moving);
    if (weak && of_couplings(moving, share) > 0.9)
      return;  // the common motion of what is coupled: named as that
    direction.nodes = ranked(s_, moving.rows, share, kShown);
    direction.motions = motions_in_words(bundle.rigid);
    direction.shape = shape_of(s_, *in_.matrix.scale, moving, moving.count - 1, picture_.at_node,
                               picture_.picture.node.size());
    CauseFacts facts;
    facts.place = place_of(direction);
    facts.rigid = !bundle.rigid.motions.empty();
    facts.whole_part = bundle.whole_part;
    facts.only_part = s_.parts == 1;
    facts.separated = bundle.separated;
    facts.seam = seams_.in_words(s_, bundle.nodes);
    const bool residual_small = judged.residual <= std::max(resolution_, 1e-9);
    if (!weak && (!residual_small || std::fabs(judged.energy) > resolution_)) {
      facts.unresolved_because =
          "The motion found does not satisfy K x = 0 to the resolution; no cause is named.";
      direction.motions.clear();
    } else if (weak) {
      direction.cause = Cause::kNearMechanism;
    } else {
      direction.cause = cause_of(bundle, share, moving, facts);
    }
    add(std::move(direction), std::move(facts));
  }

  std::string place_of(const Direction& direction) const {
    if (direction.nodes.empty()) return "no node";
    const DofShare& first = direction.nodes.front();
    return first.node ? "node " + std::to_string(*first.node) + ", " + first.dof
                      : "equation " + std::to_string(first.equation);
  }

  /// The share of equations that an over-stiff coupling holds.
  double of_couplings(const LocalVectors& moving, const std::vector<double>& share) const {
    double sum = 0;
    for (std::size_t i = 0; i < moving.rows.size(); ++i) {
      const bool coupled = std::any_of(couplings_.begin(), couplings_.end(), [&](const StiffCoupling& c) {
        return c.row == moving.rows[i] || c.other == moving.rows[i];
      });
      if (coupled) sum += share[i];
    }
    return sum;
  }

  double of_multipliers(const LocalVectors& moving, const std::vector<double>& share) const {
    double sum = 0;
    for (std::size_t i = 0; i < moving.rows.size(); ++i) {
      if (s_.kind[static_cast<std::size_t>(moving.rows[i])] == DofKind::kMultiplier) sum += share[i];
    }
    return sum;
  }

  Cause cause_of(const Bundle& bundle, const std::vector<double>& share, const LocalVectors& moving,
                 CauseFacts& facts) const {
    if (of_multipliers(moving, share) > 0.99) return Cause::kRedundantConstraint;
    const auto count = static_cast<Index>(bundle.x.count);
    if (facts.rigid) {
      const bool single_turn =
          count == 1 && !bundle.whole_part && s_.placed && turns(bundle.rigid.motions.front());
      return single_turn ? Cause::kMechanism : Cause::kLoosePart;
    }
    // Without coordinates (or a dof map) a part that moves everywhere, in no more ways than a rigid body has.
    const bool everywhere =
        static_cast<Index>(bundle.nodes.size()) == s_.part_nodes[static_cast<std::size_t>(bundle.part)];
    if ((!s_.placed || !has_displacements(bundle)) && everywhere && count <= 6) {
      facts.by_connectivity = facts.whole_part = true;
      return Cause::kLoosePart;
    }
    return Cause::kMechanism;
  }

  bool has_displacements(const Bundle& bundle) const {
    return std::any_of(bundle.x.rows.begin(), bundle.x.rows.end(),
                       [&](Index row) { return s_.kind[static_cast<std::size_t>(row)] <= DofKind::kRz; });
  }

  static bool turns(const RigidMotion& motion) {
    return motion.w[0] != 0 || motion.w[1] != 0 || motion.w[2] != 0;
  }

  void add_negative() {
    if (inertia_.negative == 0) return;
    if (has_multipliers()) {
      negative_left_ = std::max<Index>(0, in_.certified.inertia.negative - in_.rightly_negative);
      if (negative_left_ > 0) {
        add_negative_unresolved(
            negative_left_,
            "Negative directions of the structure on its constraints are counted here, not located.");
      }
      return;
    }
    if (2 * inertia_.negative > s_.rows) return add_negated();
    NegativePairs pairs = find_negative(s_, in_.matrix, factor_, motions_, near_, resolution_,
                                        inertia_.negative, in_.options.most, pool_);
    const auto found = static_cast<Index>(pairs.ritz.value.size());
    separate_degenerate(pairs);
    const std::vector<NegativeSpring> springs = find_negative_springs(s_, in_.matrix, probe(), factor_);
    std::vector<char> taken(springs.size(), 0);
    for (Index k = 0; k < found; ++k) add_negative_pair(pairs, k, springs, taken);
    merge_unstable();
    const Index asked = std::min(inertia_.negative, in_.options.most);
    if (found < asked) {
      add_negative_unresolved(
          asked - found, "The iteration did not settle on these negative directions; no cause is named.");
    }
  }

  const RigidProbe& probe() {
    if (!probe_) probe_ = probe_rigid_motions(s_, in_.matrix, pool_);
    return *probe_;
  }

  void add_negative_unresolved(Index count, const char* because) {
    Direction direction;
    direction.sign = -1;
    direction.count = count;
    CauseFacts facts;
    facts.unresolved_because = because;
    add(std::move(direction), std::move(facts));
  }

  /// More than half of all directions negative: no place is at fault.
  void add_negated() {
    Direction direction;
    direction.sign = -1;
    direction.count = inertia_.negative;
    direction.cause = Cause::kUnstableWhole;
    direction.energy = -1;
    direction.moving_nodes = s_.nodes;
    direction.moving_rows = s_.rows;
    add(std::move(direction), {});
    out_.directions.back().explanation =
        "Most directions are negative: the matrix as a whole has the wrong sign, or is not a stiffness "
        "matrix.";
    out_.directions.back().remedy =
        "Check that K and G are not exchanged, and the sign with which K was written.";
  }

  /// Equal eigenvalues mix their vectors: turn each such pair until its nodes stand apart the most.
  void separate_degenerate(NegativePairs& pairs) {
    constexpr double kDegenerate = 0.02;
    constexpr int kAngles = 64;
    const std::size_t n = pairs.ritz.value.size();
    for (int sweep = 0; sweep < 2; ++sweep) {
      for (std::size_t a = 0; a + 1 < n; ++a) {
        for (std::size_t b = a + 1; b < n; ++b) {
          if (pairs.ritz.value[b] - pairs.ritz.value[a] > kDegenerate * std::fabs(pairs.ritz.value[a]))
            continue;
          double best = -1, cosine = 1, sine = 0;
          for (int k = 0; k < kAngles; ++k) {
            const double angle = 3.14159265358979 * k / kAngles, c = std::cos(angle), d = std::sin(angle);
            double sum = 0;
            for (Index i = 0; i < s_.rows; ++i) {
              const double x = pairs.x.row(i)[a], y = pairs.x.row(i)[b];
              const double u = c * x - d * y, v = d * x + c * y;
              sum += u * u * u * u + v * v * v * v;
            }
            if (sum > best * (1 + 1e-12)) best = sum, cosine = c, sine = d;
          }
          for (Index i = 0; i < s_.rows; ++i) {
            double *x = pairs.x.row(i) + a, *y = pairs.x.row(i) + b;
            const double u = cosine * *x - sine * *y, v = sine * *x + cosine * *y;
            *x = u;
            *y = v;
          }
        }
      }
    }
  }

  void add_negative_pair(const NegativePairs& pairs, Index k, const std::vector<NegativeSpring>& springs,
                         std::vector<char>& taken) {
    std::vector<Index> all(static_cast<std::size_t>(s_.nodes));
    std::iota(all.begin(), all.end(), 0);
    const std::vector<Index> column{k};
    const LocalVectors whole = gather(s_, std::move(all), pairs.x, column);
    const LocalVectors moving = restricted(whole, moving_nodes(whole, 1e-3));
    const std::vector<double> share = row_shares(s_, moving);
    Direction direction;
    direction.sign = -1;
    double size = 0;
    for (Index i = 0; i < s_.rows; ++i) {
      const double d = std::fabs(s_.diagonal[static_cast<std::size_t>(i)]), y = pairs.x.row(i)[k];
      size += (d > 0 ? d : 1) * y * y;
    }
    direction.energy = pairs.ritz.value[static_cast<std::size_t>(k)] / size;
    direction.residual = pairs.ritz.residual[static_cast<std::size_t>(k)];
    direction.moving_nodes = nodes_holding(moving, share, kHalfShare);
    direction.moving_rows = static_cast<Index>(moving.rows.size());
    direction.nodes = ranked(s_, moving.rows, share, kShown);
    direction.shape =
        shape_of(s_, *in_.matrix.scale, moving, 0, picture_.at_node, picture_.picture.node.size());
    direction.component = part_of_row(
        moving.rows[static_cast<std::size_t>(std::max_element(share.begin(), share.end()) - share.begin())]);
    CauseFacts facts;
    facts.place = place_of(direction);
    name_negative(direction, facts, moving, share, springs, taken, k, pairs);
    add(std::move(direction), std::move(facts));
  }

  void name_negative(Direction& direction, CauseFacts& facts, const LocalVectors& moving,
                     const std::vector<double>& share, const std::vector<NegativeSpring>& springs,
                     std::vector<char>& taken, Index k, const NegativePairs& pairs) {
    // The decisive spring with the largest share in this direction.
    std::size_t best = springs.size();
    double most = 0, largest = 0;
    for (const double v : share) largest = std::max(largest, v);
    for (std::size_t c = 0; c < springs.size(); ++c) {
      if (taken[c] || !springs[c].decisive) continue;
      const double y = pairs.x.row(springs[c].row)[k];
      const double d = std::fabs(s_.diagonal[static_cast<std::size_t>(springs[c].row)]);
      if ((d > 0 ? d : 1) * y * y > most) most = (d > 0 ? d : 1) * y * y, best = c;
    }
    if (best < springs.size() && most > 1e-3 * largest) {
      taken[best] = 1;
      direction.cause = Cause::kNegativeSpring;
      facts.place = at_place(springs[best].row);
      facts.stiffness = springs[best].stiffness;
      lead_with(direction, springs[best].row, moving, share);
      return;
    }
    const double energy_bare = in_.bare != nullptr ? bare_energy(pairs, k) : -1;
    if (energy_bare > 0) {
      facts.stiffness = -1;
      direction.cause = Cause::kUnstableWhole;
      return;
    }
    const Index nodes = s_.part_nodes[static_cast<std::size_t>(*direction.component)];
    const bool local =
        direction.moving_nodes <= std::max<Index>(12, nodes / 20) && 2 * direction.moving_nodes < nodes;
    direction.cause = local ? Cause::kNegativePatch : Cause::kUnstableWhole;
  }

  /// The culprit's equation comes first, whatever else moves along.
  void lead_with(Direction& direction, Index row, const LocalVectors& moving,
                 const std::vector<double>& share) const {
    const Index equation = s_.file_equation(row);
    std::erase_if(direction.nodes, [&](const DofShare& d) { return d.equation == equation; });
    double own = 0;
    for (std::size_t i = 0; i < moving.rows.size(); ++i) {
      if (moving.rows[i] == row) own = share[i];
    }
    auto first = ranked(s_, {row}, {1.0}, 1);
    first.front().share = own;
    direction.nodes.insert(direction.nodes.begin(), first.front());
    if (direction.nodes.size() > kShown) direction.nodes.pop_back();
  }

  double bare_energy(const NegativePairs& pairs, Index k) const {
    Columns x(s_.rows, kBlockVectors);
    for (Index i = 0; i < s_.rows; ++i) x.row(i)[0] = pairs.x.row(i)[k];
    const Columns ax = times_extended(*in_.bare, x, pool_);
    double work = 0;
    for (Index i = 0; i < s_.rows; ++i) work += x.row(i)[0] * ax.row(i)[0];
    return work;
  }

  /// Buckling shapes of one part are one cause.
  void merge_unstable() {
    std::vector<Direction> kept;
    for (Direction& direction : out_.directions) {
      auto same = std::find_if(kept.begin(), kept.end(), [&](const Direction& d) {
        return d.cause == Cause::kUnstableWhole && direction.cause == d.cause &&
               d.component == direction.component;
      });
      if (same == kept.end()) {
        kept.push_back(std::move(direction));
      } else {
        ++same->count;
      }
    }
    out_.directions = std::move(kept);
  }

  /// Constraints of one part that repeat others are one cause, with all their multipliers.
  static void merge_redundant(std::vector<Bundle>& bundles, const std::vector<char>& redundant) {
    std::map<Index, std::size_t> first;
    std::vector<Bundle> kept;
    for (std::size_t b = 0; b < bundles.size(); ++b) {
      if (!redundant[b]) {
        kept.push_back(std::move(bundles[b]));
        continue;
      }
      const auto [at, added] = first.try_emplace(bundles[b].part, kept.size());
      if (added) {
        kept.push_back(std::move(bundles[b]));
      } else {
        kept[at->second] = together(kept[at->second], bundles[b]);
      }
    }
    bundles = std::move(kept);
  }

  /// The vectors of both, on the nodes of either.
  static Bundle together(const Bundle& a, const Bundle& b) {
    Bundle sum = a;
    std::map<Index, std::vector<std::pair<Index, std::vector<double>>>> of_node;  // node -> (row, values)
    const std::size_t count = a.x.count + b.x.count;
    const auto put = [&](const LocalVectors& x, std::size_t from) {
      for (std::size_t n = 0; n < x.nodes.size(); ++n) {
        auto& rows = of_node[x.nodes[n]];
        for (std::size_t i = x.first[n]; i < x.first[n + 1]; ++i) {
          auto at =
              std::find_if(rows.begin(), rows.end(), [&](const auto& r) { return r.first == x.rows[i]; });
          if (at == rows.end()) at = rows.insert(rows.end(), {x.rows[i], std::vector<double>(count, 0.0)});
          std::copy_n(x.row(i), x.count, at->second.begin() + static_cast<std::ptrdiff_t>(from));
        }
      }
    };
    put(a.x, 0);
    put(b.x, a.x.count);
    sum.x = LocalVectors{};
    sum.x.count = count;
    for (const auto& [node, rows] : of_node) {
      sum.x.nodes.push_back(node);
      sum.x.first.push_back(sum.x.rows.size());
      for (const auto& [row, values] : rows) {
        sum.x.rows.push_back(row);
        sum.x.value.insert(sum.x.value.end(), values.begin(), values.end());
      }
    }
    sum.x.first.push_back(sum.x.rows.size());
    sum.nodes = moving_nodes(sum.x, kZeroActive);
    sum.separated = a.separated && b.separated;
    return sum;
  }

  void add_stiff_couplings() {
    const auto& couplings = couplings_;
    if (couplings.empty()) return;
    Direction direction;
    direction.cause = Cause::kOverStiffCoupling;
    direction.sign = 1;
    direction.count = static_cast<Index>(couplings.size());
    std::vector<Index> nodes;
    CauseFacts facts;
    facts.digits = couplings.front().digits;
    facts.place = at_place(couplings.front().row);
    if (couplings.front().other >= 0) facts.place += " with " + at_place(couplings.front().other);
    for (const StiffCoupling& c : couplings) {
      for (const Index row : {c.row, c.other}) {
        if (row < 0) continue;
        nodes.push_back(s_.node_of[static_cast<std::size_t>(row)]);
        if (direction.nodes.size() >= kShown) continue;
        auto entry = ranked(s_, {row}, {1.0}, 1).front();
        entry.share = 1.0 / direction.count / (c.other < 0 ? 1 : 2);
        direction.nodes.push_back(std::move(entry));
      }
    }
    std::sort(nodes.begin(), nodes.end());
    nodes.erase(std::unique(nodes.begin(), nodes.end()), nodes.end());
    direction.moving_nodes = static_cast<Index>(nodes.size());
    direction.moving_rows = static_cast<Index>(couplings.size());
    direction.energy = 1;
    direction.component = part_of_row(couplings.front().row);
    add(std::move(direction), std::move(facts));
  }

  /// What is stated by the inertia and has no entry; the order of the entries; the parts.
  void account() {
    out_.negative = has_multipliers() ? negative_left_ : inertia_.negative;
    out_.zero = inertia_.zero;
    std::stable_sort(
        out_.directions.begin(), out_.directions.end(), [](const Direction& a, const Direction& b) {
          const auto rank = [](const Direction& d) { return d.cause == Cause::kUnresolved ? 3 : d.sign + 1; };
          return rank(a) < rank(b);
        });
    const auto most = static_cast<std::size_t>(in_.options.most);
    if (out_.directions.size() > most) out_.directions.resize(most);
    Index zero = 0, negative = 0;
    for (const Direction& d : out_.directions)
      (d.sign == 0 ? zero : d.sign < 0 ? negative : zero) += d.sign == 1 ? 0 : d.count;
    Index found = static_cast<Index>(motions_.size());
    for (const PartChoice& choice : choice_) found += static_cast<Index>(choice.zero.size());
    if (found < inertia_.zero && found == zero) {
      Direction rest;
      rest.count = inertia_.zero - found;
      CauseFacts facts;
      facts.unresolved_because =
          "These zero directions were counted but not reached by the vectors at hand; no cause is named.";
      add(std::move(rest), std::move(facts));
      zero = inertia_.zero;
    }
    out_.not_located = std::max<Index>(0, out_.zero - zero) + std::max<Index>(0, out_.negative - negative);
    add_parts();
  }

  void add_parts() {
    const auto shown = std::min(kPartsShown, static_cast<std::size_t>(s_.parts));
    std::vector<std::array<double, 6>> energies;
    if (s_.named) energies = rigid_energies(s_, probe());
    for (std::size_t part = 0; part < shown; ++part) {
      ComponentRecord record;
      record.rows = s_.part_rows[part];
      record.nodes = s_.part_nodes[part];
      const auto at = nullity_.find(static_cast<Index>(part));
      record.nullity = at == nullity_.end() ? 0 : at->second;
      if (s_.named && s_.placed) record.rigid_energy = energies[part];
      out_.components.push_back(record);
    }
    out_.components_left_out = s_.parts - static_cast<Index>(shown);
    for (Direction& direction : out_.directions) {
      if (direction.component && static_cast<std::size_t>(*direction.component) >= shown)
        direction.component.reset();
    }
  }

  void add_accuracy() {
    if (inertia_.zero > 0 || inertia_.negative > 0) return;  // no digits are left along a zero direction
    const std::vector<double> digits = estimate_digits_lost(s_, factor_, kAccuracyVectors, in_.seed);
    LocalAccuracy accuracy;
    accuracy.method = "Estimate from Gaussian vectors";
    accuracy.vectors = kAccuracyVectors;
    accuracy.attention = in_.options.attention_digits;
    accuracy.alarm = in_.options.alarm_digits;
    std::vector<double> sorted = digits;
    std::sort(sorted.begin(), sorted.end());
    if (sorted.empty()) return;
    accuracy.typical = sorted[sorted.size() / 2];
    accuracy.largest = sorted.back();
    const auto bins = static_cast<std::size_t>(std::floor(2 * accuracy.largest)) + 1;
    for (std::size_t b = 0; b < bins; ++b) accuracy.histogram.emplace_back(0.5 * static_cast<double>(b), 0);
    for (const double d : digits) ++accuracy.histogram[static_cast<std::size_t>(std::floor(2 * d))].second;
    std::vector<Index> rows(digits.size());
    std::iota(rows.begin(), rows.end(), 0);
    accuracy.worst = ranked(s_, rows, digits, kShown);
    accuracy.by_node.assign(picture_.picture.node.size(), 0);
    for (Index row = 0; row < s_.rows; ++row) {
      const Index at = picture_.at_node[static_cast<std::size_t>(s_.node_of[static_cast<std::size_t>(row)])];
      if (at < 0) continue;
      float& most = accuracy.by_node[static_cast<std::size_t>(at)];
      most = std::max(most, static_cast<float>(digits[static_cast<std::size_t>(row)]));
    }
    out_.accuracy = std::move(accuracy);
  }

  struct Judged {
    double energy = 0, residual = 0;
  };

  const DiagnosisInput& in_;
  ThreadPool& pool_;
  Structure s_;
  KeptFactor factor_;
  Inertia inertia_;
  double resolution_;
  std::vector<NodeMotion> motions_;
  NearZero near_;
  std::vector<PartChoice> choice_;
  std::map<Index, Index> nullity_;
  std::vector<Judged> judged_;
  std::size_t next_judged_ = 0;
  std::optional<RigidProbe> probe_;
  Index negative_left_ = 0;
  std::vector<StiffCoupling> couplings_;
  ModelPicture picture_;
  Seams seams_;
  LocateOutcome out_;
};

}  // namespace

Diagnosis diagnose(const DiagnosisInput& input, ThreadPool& pool) {
  return Diagnostician(input, pool).run();
}

}  // namespace stanchion
