// The two-pass assembler against a plain sum of triplets.
#include "specimen/assembler.hpp"

#include <gtest/gtest.h>

#include <map>
#include <random>

#include "specimen/dense_spectrum.hpp"

namespace stanchion::specimen {
namespace {

/// Two kinds of elements with random symmetric matrices on shared nodes, some unknowns absent.
struct Muddle {
  DofTable table;
  std::vector<Index> triangles, pairs;
  std::vector<ElementGroup> groups;
};

std::vector<double> random_symmetric(std::mt19937& engine, int order, const ElementGroup& group) {
  std::uniform_real_distribution<double> number(-1, 1);
  std::vector<int> dof;
  for (int d = 0; d < kDofKinds; ++d) {
    if (group.dofs >> d & 1U) dof.push_back(d);
  }
  std::vector<double> m(static_cast<std::size_t>(order * order), 0.0);
  for (int i = 0; i < order; ++i) {
    for (int j = 0; j <= i; ++j) {
      const int p = dof[static_cast<std::size_t>(i) % dof.size()],
                q = dof[static_cast<std::size_t>(j) % dof.size()];
      if ((group.coupling[static_cast<std::size_t>(p)] >> q & 1U) == 0) continue;
      m[static_cast<std::size_t>(i * order + j)] = m[static_cast<std::size_t>(j * order + i)] =
          number(engine);
    }
  }
  return m;
}

void fill_muddle(Muddle& muddle, std::mt19937& engine) {
  std::uniform_int_distribution<int> set(0, 63);
  for (int i = 0; i < 20; ++i) muddle.table.add_node({1.0 * i, 0, 0}, static_cast<DofSet>(set(engine)));
  muddle.table.strike(3, kAllSix);
  muddle.table.number();
  std::uniform_int_distribution<Index> node(0, 19);
  const auto distinct = [&](std::vector<Index>& list, int width) {
    std::vector<Index> chosen;
    while (static_cast<int>(chosen.size()) < width) {
      const Index n = node(engine);
      if (std::find(chosen.begin(), chosen.end(), n) == chosen.end()) chosen.push_back(n);
    }
    list.insert(list.end(), chosen.begin(), chosen.end());
  };
  for (int e = 0; e < 15; ++e) distinct(muddle.triangles, 3);
  for (int e = 0; e < 10; ++e) distinct(muddle.pairs, 2);
  Coupling apart{};
  for (std::size_t c = 0; c < 6; ++c) apart[c] = c < 3 ? kDisplacements : kRotations;
  muddle.groups.push_back({3, kAllSix, apart, muddle.triangles, {}});
  muddle.groups.push_back({2, kDisplacements | kRotations, full_coupling(kAllSix), muddle.pairs, {}});
  for (ElementGroup& group : muddle.groups) {
    std::vector<std::vector<double>> matrices;
    for (Offset e = 0; e < group.elements(); ++e) {
      matrices.push_back(random_symmetric(engine, 6 * group.nodes_per_element, group));
    }
    group.fill = [matrices](Offset e, std::span<double> out) {
      const auto& m = matrices[static_cast<std::size_t>(e)];
      std::copy(m.begin(), m.end(), out.begin());
    };
  }
}

Eigen::MatrixXd plain_sum(const Muddle& muddle) {
  Eigen::MatrixXd sum = Eigen::MatrixXd::Zero(muddle.table.equations(), muddle.table.equations());
  for (const ElementGroup& group : muddle.groups) {
    const auto order = static_cast<std::size_t>(6 * group.nodes_per_element);
    std::vector<double> m(order * order);
    for (Offset e = 0; e < group.elements(); ++e) {
      group.fill(e, m);
      const auto equation = [&](std::size_t i) {
        const auto at = static_cast<std::size_t>(e * group.nodes_per_element) + i / 6;
        return muddle.table.equation(group.nodes[at], static_cast<int>(i % 6));
      };
      for (std::size_t i = 0; i < order; ++i) {
        for (std::size_t j = 0; j < order; ++j) {
          if (equation(i) >= 0 && equation(j) >= 0) sum(equation(i), equation(j)) += m[i * order + j];
        }
      }
    }
  }
  return sum;
}

TEST(Assembler, EqualsThePlainSumOfTriplets) {
  std::mt19937 engine(7);
  for (int trial = 0; trial < 20; ++trial) {
    Muddle muddle;
    fill_muddle(muddle, engine);
    const SymmetricMatrix matrix = assemble(muddle.table, muddle.groups);
    EXPECT_TRUE(check_invariants(matrix));
    EXPECT_LT((testing::dense(matrix) - plain_sum(muddle)).cwiseAbs().maxCoeff(), 1e-14);
  }
}

TEST(DofTable, NumbersByNodeAndThenByUnknown) {
  DofTable table;
  table.add_node({0, 0, 0}, kDisplacements);
  table.add_node({1, 0, 0}, kAllSix);
  table.add_node({2, 0, 0}, kMultiplierOnly);
  table.strike(1, dof_bit(Dof::kUy));
  table.number();
  EXPECT_EQ(table.equations(), 9);
  EXPECT_EQ(table.equation(0, 2), 2);
  EXPECT_EQ(table.equation(0, 3), -1);
  EXPECT_EQ(table.equation(1, 0), 3);
  EXPECT_EQ(table.equation(1, 1), -1);
  EXPECT_EQ(table.equation(1, 2), 4);
  EXPECT_EQ(table.equation(2, static_cast<int>(Dof::kMultiplier)), 8);
}

}  // namespace
}  // namespace stanchion::specimen
