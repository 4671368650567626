// Models put together from specimens, with defects planted where the test says, asked as a user asks.
#pragma once

#include <algorithm>
#include <array>
#include <cmath>
#include <map>
#include <numeric>
#include <random>
#include <string>
#include <vector>

#include "engine/model_files.hpp"
#include "specimen/specimen.hpp"

namespace stanchion::test {

/// Equations with their nodes and dofs; entries of the lower or upper triangle, summed.
struct PlantedModel {
  std::vector<Triplet> entries;
  std::vector<std::int64_t> node;  ///< by equation
  std::vector<std::string> dof;
  std::map<std::int64_t, std::array<double, 3>> place;

  Index rows() const { return static_cast<Index>(node.size()); }

  /// Adds a specimen, moved along y, its nodes numbered from `base` + 1.
  void append(const Specimen& specimen, std::int64_t base, double along) {
    const Index first = rows();
    for (const SpecimenDof& d : specimen.dofs) {
      node.push_back(base + d.node);
      dof.emplace_back(specimen::dof_name(d.dof));
    }
    for (std::size_t n = 0; n < specimen.nodes.size(); ++n) {
      const auto& p = specimen.nodes[n];
      place[base + static_cast<std::int64_t>(n) + 1] = {p.x, p.y + along, p.z};
    }
    const SymmetricMatrix& k = specimen.stiffness;
    for (Index j = 0; j < k.rows; ++j) {
      for (Offset e = k.column_start[j]; e < k.column_start[Offset{j} + 1]; ++e) {
        entries.push_back({first + k.row[e], first + j, k.value[e]});
      }
    }
  }

  Index equation(std::int64_t of_node, const std::string& name) const {
    for (Index e = 0; e < rows(); ++e) {
      if (node[static_cast<std::size_t>(e)] == of_node && dof[static_cast<std::size_t>(e)] == name) return e;
    }
    ADD_FAILURE() << "no dof " << name << " at node " << of_node;
    return 0;
  }

  double diagonal(Index equation) const {
    double sum = 0;
    for (const Triplet& t : entries) {
      if (t.row == equation && t.column == equation) sum += t.value;
    }
    return sum;
  }

  /// A spring between two nodes, along one of their dofs.
  void add_link(std::int64_t from, std::int64_t to, const std::string& name, double stiffness) {
    const Index a = equation(from, name), b = equation(to, name);
    entries.push_back({a, a, stiffness});
    entries.push_back({b, b, stiffness});
    entries.push_back({std::max(a, b), std::min(a, b), -stiffness});
  }

  void add_dof(std::int64_t to_node, const std::string& name) {
    node.push_back(to_node);
    dof.push_back(name);
  }

  /// Other numbers for nodes and another order of the equations; returns the new number of every node.
  std::map<std::int64_t, std::int64_t> shuffle(unsigned seed) {
    std::mt19937 random(seed);
    std::vector<Index> to(node.size());
    std::iota(to.begin(), to.end(), 0);
    std::shuffle(to.begin(), to.end(), random);
    std::vector<std::int64_t> numbers;
    for (const auto& [n, p] : place) numbers.push_back(n);
    std::vector<std::int64_t> fresh(numbers.size());
    for (std::size_t k = 0; k < fresh.size(); ++k)
      fresh[k] = 1000 + 7 * static_cast<std::int64_t>(k) + (random() % 7);
    std::shuffle(fresh.begin(), fresh.end(), random);
    std::map<std::int64_t, std::int64_t> renamed;
    for (std::size_t k = 0; k < numbers.size(); ++k) renamed[numbers[k]] = fresh[k];
    for (Triplet& t : entries) {
      t.row = to[static_cast<std::size_t>(t.row)];
      t.column = to[static_cast<std::size_t>(t.column)];
    }
    auto old_node = node;
    auto old_dof = dof;
    for (std::size_t e = 0; e < node.size(); ++e) {
      node[static_cast<std::size_t>(to[e])] = renamed.at(old_node[e]);
      dof[static_cast<std::size_t>(to[e])] = old_dof[e];
    }
    std::map<std::int64_t, std::array<double, 3>> moved;
    for (const auto& [n, p] : place) moved[renamed.at(n)] = p;
    place = std::move(moved);
    return renamed;
  }

  SymmetricMatrix matrix() const { return from_triplets(rows(), entries); }

  /// The request of `locate` for this model.
  Request request(const ModelFiles& files, bool with_dofs = true, bool with_nodes = true) const {
    Request request;
    request.input.stiffness = files.matrix("K.npz", matrix());
    if (with_dofs) {
      std::string text = "equation,node,dof\n";
      for (std::size_t e = 0; e < node.size(); ++e) {
        text += std::to_string(e + 1) + "," + std::to_string(node[e]) + "," + dof[e] + "\n";
      }
      request.input.dofs = files.text("dofs.csv", text);
    }
    if (with_nodes) {
      std::string text = "node,x,y,z\n";
      char line[160];
      for (const auto& [n, p] : place) {
        std::snprintf(line, sizeof(line), "%lld,%.17g,%.17g,%.17g\n", static_cast<long long>(n), p[0], p[1],
                      p[2]);
        text += line;
      }
      request.input.nodes = files.text("nodes.csv", text);
    }
    std::string multipliers;
    for (std::size_t e = 0; e < node.size(); ++e) {
      if (dof[e] == "multiplier") multipliers += std::to_string(e + 1) + "\n";
    }
    if (!multipliers.empty()) request.input.multipliers = files.text("multipliers.txt", multipliers);
    return request;
  }
};

inline Specimen specimen_with(const std::string& name, Offset unknowns, Fault fault) {
  SpecimenOptions options;
  options.fault = fault;
  auto made = make_specimen(name, unknowns, options);
  EXPECT_TRUE(made.ok()) << made.status().to_string();
  return std::move(*made);
}

inline Outcome located(const PlantedModel& model, bool with_dofs = true, bool with_nodes = true) {
  ModelFiles files;
  Outcome outcome = answer(run_locate(model.request(files, with_dofs, with_nodes), {}));
  outcome.command = "locate";
  return outcome;
}

/// The entries of one kind.
inline std::vector<Direction> of_cause(const Outcome& outcome, Cause cause) {
  std::vector<Direction> found;
  if (!outcome.located) return found;
  for (const Direction& direction : outcome.located->directions) {
    if (direction.cause == cause) found.push_back(direction);
  }
  return found;
}

inline std::string summary(const Outcome& outcome) {
  if (!outcome.located) return "not located";
  std::string text;
  for (const Direction& d : outcome.located->directions) text += d.explanation + "\n";
  return text;
}

}  // namespace stanchion::test
