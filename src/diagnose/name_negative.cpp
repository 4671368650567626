#include <fmt/format.h>

#include <algorithm>
#include <cmath>
#include <numeric>
#include <optional>

#include "diagnose/distinct.hpp"
#include "diagnose/naming.hpp"
#include "diagnose/negative.hpp"
#include "diagnose/negative_links.hpp"
#include "diagnose/rigid_motion.hpp"
#include "diagnose/shares.hpp"
#include "diagnose/subspace.hpp"
#include "model/numbers.hpp"

namespace stanchion {
namespace {

constexpr double kHalfShare = 0.9;     ///< of the energy that names the nodes of a patch
constexpr double kSpringShare = 1e-3;  ///< of the largest: a spring below that is not what moves

class NegativeNamer {
 public:
  explicit NegativeNamer(Evidence& evidence) : e_(evidence), s_(evidence.s) {}

  void run() {
    if (e_.has_multipliers()) {
      if (!e_.in.constraints_apply) return add_uninterpreted();
      negative_ = std::max<Index>(0, e_.inertia.negative - e_.in.rightly_negative);
    } else {
      negative_ = e_.inertia.negative;
    }
    e_.out.negative = negative_;
    if (negative_ == 0) return;
    if (2 * negative_ > s_.rows) return add_negated();
    if (add_unlisted_multipliers()) return;
    std::optional<ConstraintSpace> space;
    if (e_.has_multipliers()) space.emplace(s_, e_.in.matrix);
    NegativePairs pairs = find_negative({s_, e_.in.matrix, e_.factor, e_.motions, e_.near, e_.resolution,
                                         space ? &*space : nullptr, e_.in.seed},
                                        negative_, e_.in.options.most, e_.pool);
    const auto found = static_cast<Index>(pairs.ritz.value.size());
    separate_degenerate(pairs);
    springs_ = find_negative_springs(s_, e_.in.matrix, e_.rigid_probe(), e_.factor);
    links_ = find_negative_links(s_, e_.in.matrix, pairs.x, pairs.ritz.value, e_.factor);
    spring_taken_.assign(springs_.size(), 0);
    link_taken_.assign(links_.size(), 0);
    for (Index k = 0; k < found; ++k) add_negative_pair(pairs, k);
    merge_unstable();
    const Index asked = std::min(negative_, e_.in.options.most);
    if (found < asked) {
      add_negative_unresolved(
          asked - found, e_.in.rank_known
                             ? "The iteration did not settle on these negative directions; no cause is named."
                             : "How many constraints are independent is known as a range only, so these may "
                               "be constraints and "
                               "not directions of the structure; no cause is named.");
    }
  }

 private:
  void add_uninterpreted() {
    e_.out.negative = e_.inertia.negative;
    if (e_.inertia.negative > 0) {
      add_negative_unresolved(
          e_.inertia.negative,
          "Multipliers act on each other, so that the negative directions of the matrix are not "
          "those of a structure on its constraints; no cause is named.");
    }
  }

  /// Multipliers that nobody listed bring negative directions along, which are none of the structure; no
  /// other one is told from them.
  bool add_unlisted_multipliers() {
    std::vector<Index> rows;
    for (Index row = 0; row < s_.rows; ++row) {
      if (e_.looks_like_multiplier(row)) rows.push_back(row);
    }
    if (rows.empty()) return false;
    const auto count = static_cast<Index>(rows.size());
    Direction direction;
    direction.sign = -1;
    direction.count = negative_;
    direction.moving_rows = count;
    std::vector<Index> nodes;
    for (const Index row : rows) nodes.push_back(s_.node_of[static_cast<std::size_t>(row)]);
    make_distinct(nodes);
    direction.moving_nodes = static_cast<Index>(nodes.size());
    direction.nodes =
        ranked(s_, rows, std::vector<double>(rows.size(), 1.0 / static_cast<double>(count)), kShownShares);
    CauseFacts facts;
    facts.unresolved_because = fmt::format(
        "{} no stiffness of {} own and {} on others, as the multipliers of constraints do{}; "
        "multipliers bring a negative direction each that is none of the structure. No cause is named before "
        "it is known which equations are multipliers.",
        count == 1 ? place_of(direction) + " has" : counted(count, "equation") + " have",
        count == 1 ? "its" : "their", count == 1 ? "acts" : "act",
        count == 1 ? "" : ", " + place_of(direction) + " among them");
    e_.add(std::move(direction), std::move(facts));
    e_.out.directions.back().remedy =
        "List the multipliers (--multipliers FILE, or dof \"multiplier\" in the dof map); if they are none, "
        "look "
        "for what took the stiffness of these equations away.";
    return true;
  }

  void add_negative_unresolved(Index count, const char* because) {
    Direction direction;
    direction.sign = -1;
    direction.count = count;
    CauseFacts facts;
    facts.unresolved_because = because;
    e_.add(std::move(direction), std::move(facts));
  }

  /// More than half of all directions negative: no place is at fault.
  void add_negated() {
    Direction direction;
    direction.sign = -1;
    direction.count = negative_;
    direction.cause = Cause::kUnstableWhole;
    direction.energy = -1;
    direction.moving_nodes = s_.nodes;
    direction.moving_rows = s_.rows;
    e_.add(std::move(direction), {});
    e_.out.directions.back().explanation =
        "Most directions are negative: the matrix as a whole has the wrong sign, or is not a stiffness "
        "matrix.";
    e_.out.directions.back().remedy =
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

  void add_negative_pair(const NegativePairs& pairs, Index k) {
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
      const double y = pairs.x.row(i)[k];
      size += e_.weight(i) * y * y;
    }
    direction.energy = pairs.ritz.value[static_cast<std::size_t>(k)] / size;
    direction.residual = pairs.ritz.residual[static_cast<std::size_t>(k)];
    direction.moving_nodes = nodes_holding(moving, share, kHalfShare);
    direction.moving_rows = static_cast<Index>(moving.rows.size());
    direction.nodes = ranked(s_, moving.rows, share, kShownShares);
    direction.shape =
        shape_of(s_, *e_.in.matrix.scale, moving, 0, e_.picture.at_node, e_.picture.picture.node.size());
    direction.component = e_.part_of_row(
        moving.rows[static_cast<std::size_t>(std::max_element(share.begin(), share.end()) - share.begin())]);
    CauseFacts facts;
    facts.place = place_of(direction);
    name_cause(direction, facts, moving, share, pairs, k);
    e_.add(std::move(direction), std::move(facts));
  }

  void name_cause(Direction& direction, CauseFacts& facts, const LocalVectors& moving,
                  const std::vector<double>& share, const NegativePairs& pairs, Index k) {
    if (name_spring(direction, facts, moving, share, pairs, k)) return;
    if (name_link(direction, facts, moving, share, pairs, k)) return;
    const double energy_bare = e_.in.bare != nullptr ? bare_energy(pairs, k) : -1;
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

  /// The decisive spring to the ground with the largest share in this direction.
  bool name_spring(Direction& direction, CauseFacts& facts, const LocalVectors& moving,
                   const std::vector<double>& share, const NegativePairs& pairs, Index k) {
    std::size_t best = springs_.size();
    double most = 0, largest = 0;
    for (const double v : share) largest = std::max(largest, v);
    for (std::size_t c = 0; c < springs_.size(); ++c) {
      if (spring_taken_[c] || !springs_[c].decisive) continue;
      const double y = pairs.x.row(springs_[c].row)[k], size = e_.weight(springs_[c].row) * y * y;
      if (size > most) most = size, best = c;
    }
    if (best == springs_.size() || !(most > kSpringShare * largest)) return false;
    spring_taken_[best] = 1;
    direction.cause = Cause::kNegativeSpring;
    facts.place = s_.describe(springs_[best].row);
    facts.stiffness = springs_[best].stiffness;
    facts.felt = springs_[best].felt;
    lead_with(direction, springs_[best].row, moving, share);
    return true;
  }

  /// The decisive spring between two nodes that holds most energy here; without it the motion must turn
  /// positive, so it holds more than what the motion lacks.
  bool name_link(Direction& direction, CauseFacts& facts, const LocalVectors& moving,
                 const std::vector<double>& share, const NegativePairs& pairs, Index k) {
    std::size_t best = links_.size();
    double most = std::fabs(pairs.ritz.value[static_cast<std::size_t>(k)]);
    for (std::size_t c = 0; c < links_.size(); ++c) {
      if (link_taken_[c] || !links_[c].decisive) continue;
      const double energy = links_[c].energy(e_.in.matrix, pairs.x, k);
      if (energy > most) most = energy, best = c;
    }
    if (best == links_.size()) return false;
    link_taken_[best] = 1;
    const NegativeLink& link = links_[best];
    direction.cause = Cause::kNegativeSpring;
    facts.stiffness = link.stiffness;
    facts.essential = link.essential;
    facts.place = "node " + std::to_string(s_.number[static_cast<std::size_t>(link.node[0])]);
    facts.other_place = "node " + std::to_string(s_.number[static_cast<std::size_t>(link.node[1])]);
    facts.along = (link.turns ? "in rotation about " : "along ") + direction_in_words(link.direction);
    for (auto at = link.apart.rbegin(); at != link.apart.rend(); ++at) {
      if (std::fabs(at->second) > 1e-6) lead_with(direction, at->first, moving, share);
    }
    return true;
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
    if (direction.nodes.size() > kShownShares) direction.nodes.pop_back();
  }

  double bare_energy(const NegativePairs& pairs, Index k) const {
    Columns x(s_.rows, kBlockVectors);
    for (Index i = 0; i < s_.rows; ++i) x.row(i)[0] = pairs.x.row(i)[k];
    const Columns ax = times_extended(*e_.in.bare, x, e_.pool);
    double work = 0;
    for (Index i = 0; i < s_.rows; ++i) work += x.row(i)[0] * ax.row(i)[0];
    return work;
  }

  /// Buckling shapes of one part are one cause.
  void merge_unstable() {
    std::vector<Direction> kept;
    for (Direction& direction : e_.out.directions) {
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
    e_.out.directions = std::move(kept);
  }

  Evidence& e_;
  const Structure& s_;
  Index negative_ = 0;  ///< directions to be named
  std::vector<NegativeSpring> springs_;
  std::vector<NegativeLink> links_;
  std::vector<char> spring_taken_, link_taken_;  ///< one direction each
};

}  // namespace

void name_negative(Evidence& evidence) {
  NegativeNamer(evidence).run();
}

}  // namespace stanchion
