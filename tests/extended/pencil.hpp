// K + f G of a specimen, ready to be factored at any f.
#pragma once

#include <gtest/gtest.h>

#include <memory>
#include <vector>

#include "inertia/two_offsets.hpp"
#include "sparse/scaling.hpp"
#include "specimen/specimen.hpp"

namespace stanchion::test {

struct Pencil {
  MatrixFamily family;  ///< in elimination order
  Buffer<double> scale;
  Analysis analysis;
  std::unique_ptr<ThreadPool> pool;

  ShiftedMatrix at(double factor) const { return {&family, {1.0, factor}, &scale, 0}; }
};

inline Pencil make_pencil(const Specimen& specimen, int threads) {
  Pencil pencil;
  pencil.pool = std::make_unique<ThreadPool>(threads);
  const std::vector<const SymmetricMatrix*> members{&specimen.stiffness, &*specimen.geometric};
  const MatrixFamily family = unite(members);
  const SymmetricMatrix pattern{family.rows, family.column_start.clone(), family.row.clone(),
                                family.values[0].clone()};
  std::vector<Index> nodes;
  for (const SpecimenDof& dof : specimen.dofs) nodes.push_back(dof.node - 1);
  auto analysis = analyse({&pattern, nodes, true}, threads);
  EXPECT_TRUE(analysis.ok());
  pencil.analysis = std::move(*analysis);
  pencil.family = permute(family, pencil.analysis.tree.position_of);
  const std::vector<double> stiffness_alone{1.0, 0.0};
  pencil.scale = std::move(*power_of_two_scaling(pencil.family, stiffness_alone));
  return pencil;
}

}  // namespace stanchion::test
