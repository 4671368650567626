// All that can be planted in one kind of model, at once: each in a part of its own, numbered anew, equations
// permuted.
#pragma once

#include <algorithm>
#include <iterator>
#include <map>
#include <sstream>
#include <string>
#include <vector>

#include "diagnose/planted_fault.hpp"

namespace stanchion::test {

struct Combination {
  PlantedModel model;
  std::vector<ExpectedCause> expected;
  std::map<std::int64_t, std::int64_t> back;  ///< new number -> number before
};

/// How far numbers are off those of a drawing; what is zero stays so at the resolution.
struct Jitter {
  double place = 1e-9;  ///< of every coordinate, absolute
  double entry = 0;     ///< of every entry, relative
};

/// The faults of its own that a specimen is combined from. In one that cannot come loose in part, the whole
/// is.
inline std::vector<Fault> combined_faults(const std::string& name) {
  std::vector<Fault> faults{knows_fault(name, Fault::kLoosePart) ? Fault::kLoosePart : Fault::kFree};
  for (const Fault fault : {Fault::kRepeatedTie, Fault::kHinge, Fault::kSoftSpring}) {
    if (knows_fault(name, fault)) faults.push_back(fault);
  }
  return faults;
}

/// A spring that pushes along at a node in the middle of the numbering. Where all before was definite it
/// alone decides.
inline ExpectedCause push_in_the_middle(PlantedModel& model, const std::string& dof) {
  std::vector<std::int64_t> having;
  for (Index e = 0; e < model.rows(); ++e) {
    if (model.dof[static_cast<std::size_t>(e)] == dof)
      having.push_back(model.node[static_cast<std::size_t>(e)]);
  }
  const std::int64_t pushed = having.at(having.size() / 2);
  const Index at = model.equation(pushed, dof);
  model.entries.push_back({at, at, -4 * model.diagonal(at)});
  return {Cause::kNegativeSpring, 1, {pushed}, dof};
}

/// Loose part, hinge, soft springs, repeated ties: those that the specimen knows; a negative spring and
/// rotations without stiffness by hand. Parts of about `unknowns` equations each.
inline Combination combination_of(const std::string& name, Offset unknowns, unsigned seed,
                                  const Jitter& jitter = {}) {
  constexpr std::int64_t kStep = 1000000;
  Combination made;
  PlantedModel& model = made.model;
  std::int64_t base = kStep;
  model.append(specimen_with(name, unknowns, Fault::kNone), base, 100);
  made.expected.push_back(push_in_the_middle(model, name == "laplace" ? "t" : "uz"));
  for (const Fault fault : combined_faults(name)) {
    base += kStep;
    const PlantedFault planted = plant_fault(name, unknowns, fault);
    model.append(planted.specimen, base, 100.0 * static_cast<double>(base) / kStep);
    made.expected.push_back(planted.expected.at(0).after(base));
  }
  // Nodes of a block of bricks with rotations that nothing resists.
  base += kStep;
  model.append(specimen_with("solid", 500, Fault::kNone), base, 100.0 * static_cast<double>(base) / kStep);
  std::vector<std::int64_t> turning;
  for (std::int64_t k = 0; k < 7; ++k) {
    turning.push_back(base + 50 + 3 * k);
    model.add_dof(turning.back(), k % 2 == 0 ? "rx" : "rz");
  }
  made.expected.push_back({Cause::kMissingRotation, 7, turning});
  for (const auto& [before, after] : model.shuffle(seed)) made.back[after] = before;
  // Places that are not those of a drawing: each coordinate a little off, but seams stay seams.
  std::map<std::array<double, 3>, std::array<double, 3>> jittered;
  std::mt19937 random(seed);
  std::uniform_real_distribution<double> off(-1, 1);
  for (Triplet& entry : model.entries) entry.value *= 1 + jitter.entry * off(random);
  for (auto& [node, p] : model.place) {
    auto [where, fresh] = jittered.try_emplace(p, p);
    if (fresh) {
      for (double& c : where->second) c += jitter.place * off(random);
    }
    p = where->second;
  }
  return made;
}

inline void expect_planted(const Combination& made, const Outcome& outcome) {
  expect_planted(made.expected, made.back, outcome);
}

}  // namespace stanchion::test
