#include "diagnose/evidence.hpp"

namespace stanchion {

Evidence::Evidence(const DiagnosisInput& input, ThreadPool& workers)
    : in(input),
      pool(workers),
      s(describe_structure(input.analysis, input.matrix, input.names)),
      factor(input.analysis, *input.kept.factorization.factor, workers),
      inertia(input.certified.inertia),
      resolution(input.kept.offset) {}

const RigidProbe& Evidence::rigid_probe() {
  if (!probe_) probe_ = probe_rigid_motions(s, in.matrix, pool);
  return *probe_;
}

void Evidence::add(Direction direction, CauseFacts facts) {
  facts.cause = direction.cause;
  facts.count = direction.count;
  facts.nodes = direction.moving_nodes;
  facts.energy = direction.energy;
  facts.motions = direction.motions;
  facts.placed = s.placed;
  facts.resolution_given = in.resolution_given && direction.sign == 0;
  facts.named = s.named;
  direction.explanation = explanation_of(facts);
  direction.remedy = remedy_of(facts);
  out.directions.push_back(std::move(direction));
}

std::string place_of(const Direction& direction) {
  if (direction.nodes.empty()) return "no node";
  const DofShare& first = direction.nodes.front();
  return first.node ? "node " + std::to_string(*first.node) + ", " + first.dof
                    : "equation " + std::to_string(first.equation);
}

}  // namespace stanchion
