#include <algorithm>
#include <cmath>

#include "diagnose/bundle_judge.hpp"
#include "diagnose/bundle_merge.hpp"
#include "diagnose/distinct.hpp"
#include "diagnose/naming.hpp"
#include "diagnose/purify.hpp"
#include "diagnose/shares.hpp"
#include "model/numbers.hpp"

namespace stanchion {
namespace {

constexpr double kZeroActive = 1e-6, kWeakActive = 1e-4, kZeroRigid = 1e-4, kWeakRigid = 1e-2;
constexpr double kMultipliersOnly = 0.99, kCouplingsOnly = 0.9;  ///< shares that decide a kind
constexpr std::size_t kPatternNodes = 4;                         ///< fewer make no pattern
constexpr double kAgainst = 0.4;  ///< of the touching pairs of which one moves: alike no more

class BundleNamer {
 public:
  BundleNamer(Evidence& evidence, bool weak) : e_(evidence), s_(evidence.s), weak_(weak) {}

  void run() {
    std::vector<std::pair<Index, std::vector<Index>>> wanted;
    for (Index part = 0; part < s_.parts; ++part) {
      const PartChoice& choice = e_.choice[static_cast<std::size_t>(part)];
      if (weak_ && !choice.weak.empty()) wanted.emplace_back(part, choice.weak);
      if (weak_ || choice.zero.empty()) continue;
      e_.nullity[part] += static_cast<Index>(choice.zero.size());
      if (choice.zero_certain) {
        wanted.emplace_back(part, choice.zero);
      } else {
        add_unresolved(part, static_cast<Index>(choice.zero.size()));
      }
    }
    const PurifyOptions options{weak_ ? kWeakActive : kZeroActive, weak_ ? kWeakRigid : kZeroRigid};
    auto bundles = purify(s_, e_.in.matrix, e_.near.x, wanted, options);
    std::vector<char> redundant;
    for (const Bundle& bundle : bundles)
      redundant.push_back(of_multipliers(bundle.x, row_shares(s_, bundle.x)) > kMultipliersOnly);
    if (!weak_) {
      merge_marked(bundles, redundant, kZeroActive);
      merge_chains(bundles, kZeroActive);
    }
    const std::vector<Judged> judged = judge(e_, bundles);
    for (std::size_t b = 0; b < bundles.size(); ++b) add_bundle(bundles[b], judged[b]);
  }

 private:
  void add_unresolved(Index part, Index count) {
    Direction direction;
    direction.count = count;
    direction.component = part;
    direction.moving_nodes = s_.part_nodes[static_cast<std::size_t>(part)];
    direction.moving_rows = s_.part_rows[static_cast<std::size_t>(part)];
    const Ritz& ritz = e_.near.parts[static_cast<std::size_t>(part)].ritz;
    direction.energy = ritz.value.empty() ? 0 : ritz.value[0];
    direction.sign = 0;
    CauseFacts facts;
    facts.unresolved_because =
        "The eigenvalues of this part run down to the resolution without a gap, so that what is called zero "
        "cannot be "
        "told from what is merely soft; no cause is named.";
    e_.add(std::move(direction), std::move(facts));
  }
  void add_bundle(const Bundle& bundle, const Judged& judged) {
    Direction direction;
    direction.count = static_cast<Index>(bundle.x.count);
    direction.sign = weak_ ? 1 : 0;
    direction.energy = judged.energy;
    direction.residual = judged.residual;
    direction.component = bundle.part;
    direction.moving_nodes = static_cast<Index>(bundle.nodes.size());
    const LocalVectors moving = restricted(bundle.x, bundle.nodes);
    direction.moving_rows = static_cast<Index>(moving.rows.size());
    const std::vector<double> share = row_shares(s_, moving);
    if (weak_ && of_couplings(moving, share) > kCouplingsOnly)
      return;  // the common motion of what is coupled: named as that
    direction.nodes = ranked(s_, moving.rows, share, kShownShares);
    direction.motions = motions_in_words(bundle.rigid);
    direction.shape = shape_of(s_, *e_.in.matrix.scale, moving, moving.count - 1, e_.picture.at_node,
                               e_.picture.picture.node.size());
    CauseFacts facts;
    facts.place = place_of(direction);
    facts.rigid = !bundle.rigid.motions.empty();
    facts.whole_part = bundle.whole_part;
    facts.only_part = s_.parts == 1;
    facts.separated = bundle.separated;
    facts.seam = e_.seams.in_words(s_, bundle.nodes);
    const bool residual_small = judged.residual <= std::max(e_.resolution, 1e-9);
    if (!weak_ && (!residual_small || std::fabs(judged.energy) > e_.resolution)) {
      facts.unresolved_because =
          "The motion found does not satisfy K x = 0 to the resolution; no cause is named.";
      direction.motions.clear();
    } else if (weak_) {
      direction.cause = Cause::kNearMechanism;
    } else {
      direction.cause = cause_of(bundle, share, moving, facts);
      if (facts.rigid && !facts.pattern && !bundle.whole_part) facts.hangs = at_rest_beside(bundle);
    }
    e_.add(std::move(direction), std::move(facts));
  }

  /// The share of equations that an over-stiff coupling holds.
  double of_couplings(const LocalVectors& moving, const std::vector<double>& share) const {
    double sum = 0;
    for (std::size_t i = 0; i < moving.rows.size(); ++i) {
      const bool coupled = std::any_of(e_.couplings.begin(), e_.couplings.end(), [&](const StiffCoupling& c) {
        return c.row == moving.rows[i] || c.other == moving.rows[i];
      });
      if (coupled) sum += share[i];
    }
    return sum;
  }

  double of_multipliers(const LocalVectors& moving, const std::vector<double>& share) const {
    double sum = 0;
    for (std::size_t i = 0; i < moving.rows.size(); ++i) {
      const Index row = moving.rows[i];
      if (e_.is_multiplier(row) || e_.looks_like_multiplier(row)) sum += share[i];
    }
    return sum;
  }

  Cause cause_of(const Bundle& bundle, const std::vector<double>& share, const LocalVectors& moving,
                 CauseFacts& facts) const {
    if (of_multipliers(moving, share) > kMultipliersOnly) return Cause::kRedundantConstraint;
    const auto count = static_cast<Index>(bundle.x.count);
    facts.chain = bundle.chain;
    facts.pattern = !facts.chain && alternates(bundle);
    if (facts.rigid && !facts.pattern) {
      const bool single_turn =
          count == 1 && !bundle.whole_part && s_.placed && turns(bundle.rigid.motions.front());
      return single_turn ? Cause::kMechanism : Cause::kLoosePart;
    }
    // Without coordinates (or a dof map) a part that moves everywhere, in no more ways than a rigid body has.
    const bool everywhere =
        static_cast<Index>(bundle.nodes.size()) == s_.part_nodes[static_cast<std::size_t>(bundle.part)];
    if (!bundle.chain && (!s_.placed || !has_displacements(bundle)) && everywhere && count <= 6) {
      facts.by_connectivity = facts.whole_part = true;
      facts.displacements = has_displacements(bundle);
      return Cause::kLoosePart;
    }
    return Cause::kMechanism;
  }

  /// The nodes at rest that share stiffness with the moving ones: where a loose part hangs on the rest.
  std::string at_rest_beside(const Bundle& bundle) const {
    constexpr std::size_t kShown = 4;
    std::vector<char> moves(static_cast<std::size_t>(s_.nodes), 0);
    for (const Index node : bundle.nodes) moves[static_cast<std::size_t>(node)] = 1;
    std::vector<NodeNumber> found;
    const MatrixFamily& family = *e_.in.matrix.family;
    for (Index j = 0; j < family.rows; ++j) {
      const auto b = static_cast<std::size_t>(s_.node_of[static_cast<std::size_t>(j)]);
      for (Offset k = family.column_start[j]; k < family.column_start[Offset{j} + 1]; ++k) {
        const auto a = static_cast<std::size_t>(s_.node_of[static_cast<std::size_t>(family.row[k])]);
        if (moves[a] == moves[b] || e_.in.matrix.entry(k, family.row[k], j) == 0) continue;
        const NodeNumber number = s_.number[moves[a] ? b : a];
        if (number != kNoNode) found.push_back(number);
      }
    }
    make_distinct(found);
    if (found.empty()) return "";
    std::string text = found.size() == 1 ? "node " : "nodes ";
    const std::size_t shown = found.size() <= kShown + 1 ? found.size() : kShown;
    for (std::size_t k = 0; k < shown; ++k) {
      text += (k == 0 ? "" : k + 1 == found.size() ? " and " : ", ") + std::to_string(found[k]);
    }
    return shown < found.size()
               ? text + " and " + grouped(static_cast<Offset>(found.size() - shown)) + " more"
               : text;
  }

  /// Most of what a moving node touches stays or moves the other way: no body of its own, but a pattern.
  bool alternates(const Bundle& bundle) const {
    if (bundle.whole_part || bundle.nodes.size() < kPatternNodes) return false;
    const LocalVectors& x = bundle.x;
    std::vector<Index> at(static_cast<std::size_t>(s_.nodes), -1);
    for (std::size_t n = 0; n < x.nodes.size(); ++n)
      at[static_cast<std::size_t>(x.nodes[n])] = static_cast<Index>(n);
    std::vector<char> moves(static_cast<std::size_t>(s_.nodes), 0);
    for (const Index node : bundle.nodes) moves[static_cast<std::size_t>(node)] = 1;
    Offset together = 0, against = 0;
    const MatrixFamily& family = *e_.in.matrix.family;
    for (Index j = 0; j < family.rows; ++j) {
      const auto b = static_cast<std::size_t>(s_.node_of[static_cast<std::size_t>(j)]);
      for (Offset k = family.column_start[j]; k < family.column_start[Offset{j} + 1]; ++k) {
        const auto a = static_cast<std::size_t>(s_.node_of[static_cast<std::size_t>(family.row[k])]);
        if (a == b || (!moves[a] && !moves[b])) continue;
        const bool same = moves[a] && moves[b] && likeness(x, at[a], at[b]) > 0;
        ++(same ? together : against);
      }
    }
    return against > kAgainst * static_cast<double>(together + against);
  }

  /// Sum over the vectors and the dofs that both nodes have of the product of their motions.
  double likeness(const LocalVectors& x, Index a, Index b) const {
    double sum = 0;
    for (std::size_t p = x.first[static_cast<std::size_t>(a)]; p < x.first[static_cast<std::size_t>(a) + 1];
         ++p) {
      for (std::size_t q = x.first[static_cast<std::size_t>(b)]; q < x.first[static_cast<std::size_t>(b) + 1];
           ++q) {
        if (s_.kind[static_cast<std::size_t>(x.rows[p])] != s_.kind[static_cast<std::size_t>(x.rows[q])])
          continue;
        for (std::size_t c = 0; c < x.count; ++c) sum += x.row(p)[c] * x.row(q)[c];
      }
    }
    return sum;
  }

  bool has_displacements(const Bundle& bundle) const {
    return std::any_of(bundle.x.rows.begin(), bundle.x.rows.end(),
                       [&](Index row) { return s_.kind[static_cast<std::size_t>(row)] <= DofKind::kRz; });
  }

  static bool turns(const RigidMotion& motion) {
    return motion.w[0] != 0 || motion.w[1] != 0 || motion.w[2] != 0;
  }

  Evidence& e_;
  const Structure& s_;
  bool weak_;
};

}  // namespace

void name_bundles(Evidence& evidence, bool weak) {
  BundleNamer(evidence, weak).run();
}

}  // namespace stanchion
