#include <algorithm>
#include <cmath>

#include "diagnose/distinct.hpp"
#include "diagnose/naming.hpp"
#include "diagnose/shares.hpp"

namespace stanchion {
namespace {

constexpr double kPresent = 1e-6;  ///< entry of a unit vector from which a dof takes part

class NodeMotionNamer {
 public:
  explicit NodeMotionNamer(Evidence& evidence) : e_(evidence), s_(evidence.s) {}

  void run() {
    std::map<std::string, std::vector<const NodeMotion*>> groups;
    for (const NodeMotion& motion : e_.motions.of_nodes) groups[group_of(motion)].push_back(&motion);
    for (const auto& [name, members] : groups) add_node_group(name, members);
  }

 private:
  std::string group_of(const NodeMotion& motion) const {
    bool turns = true;
    Index only = -1;
    const auto rows = s_.rows_of(motion.node);
    for (std::size_t r = 0; r < motion.entry.size(); ++r) {
      if (std::fabs(motion.entry[r]) < kPresent) continue;
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
        if (std::fabs(motion->entry[r]) < kPresent) continue;
        rows.push_back(of_node[r]);
        share.push_back(motion->entry[r] * motion->entry[r] / direction.count);
      }
    }
    make_distinct(nodes);
    direction.moving_nodes = static_cast<Index>(nodes.size());
    direction.moving_rows = static_cast<Index>(rows.size());
    direction.residual = 0;
    if (name == "rotation") {
      direction.cause = empty && direction.count == 1 ? Cause::kUnattachedDof : Cause::kMissingRotation;
    } else {
      direction.cause = empty ? Cause::kUnattachedDof : Cause::kMechanism;
    }
    direction.nodes = ranked(s_, rows, share, kShownShares);
    const Index part = e_.part_of_row(rows.front());
    const bool one_part =
        std::all_of(rows.begin(), rows.end(), [&](Index row) { return e_.part_of_row(row) == part; });
    if (one_part) direction.component = part;
    for (const NodeMotion* motion : members) ++e_.nullity[s_.part_of[static_cast<std::size_t>(motion->node)]];
    CauseFacts facts;
    facts.place = s_.describe(rows.front());
    facts.dof = s_.named ? s_.dof_name(rows.front()) : "no dof map";
    facts.across_bars = direction.cause == Cause::kUnattachedDof && across_bars(rows);
    e_.add(std::move(direction), std::move(facts));
  }

  /// Displacements of nodes all of which have stiffness along other displacements.
  bool across_bars(const std::vector<Index>& rows) const {
    return std::all_of(rows.begin(), rows.end(), [&](Index row) {
      if (!is_translation(s_.kind[static_cast<std::size_t>(row)])) return false;
      const auto beside = s_.rows_of(s_.node_of[static_cast<std::size_t>(row)]);
      return std::any_of(beside.begin(), beside.end(), [&](Index r) {
        return is_translation(s_.kind[static_cast<std::size_t>(r)]) && !s_.empty[static_cast<std::size_t>(r)];
      });
    });
  }

  Evidence& e_;
  const Structure& s_;
};

}  // namespace

void name_node_motions(Evidence& evidence) {
  NodeMotionNamer(evidence).run();
}

}  // namespace stanchion
