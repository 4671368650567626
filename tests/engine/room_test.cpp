// The offset of the count behind the first values, chosen by the room there is.
#include <gtest/gtest.h>

#include <cmath>
#include <numbers>

#include "engine/host.hpp"
#include "engine/pencil_counter.hpp"
#include "model_files.hpp"

namespace stanchion::test {
namespace {

constexpr double kPi = std::numbers::pi;

/// The square of the second differences of n points between two held ones. Eigenvalues: the squares of
/// 4 sin^2(k pi / (2 n + 2)) (closed form of the second differences).
SymmetricMatrix fourth_differences(Index n) {
  std::vector<Triplet> entries;
  for (Index i = 0; i < n; ++i) {
    entries.push_back({i, i, i == 0 || i == n - 1 ? 5.0 : 6.0});
    if (i > 0) entries.push_back({i, i - 1, -4});
    if (i > 1) entries.push_back({i, i - 2, 1});
  }
  return from_triplets(n, entries);
}

double value_of(Index n, int k) {
  const double root = 4 * std::pow(std::sin(k * kPi / (2.0 * n + 2)), 2);
  return root * root;
}

TEST(Room, ValuesCloseToZeroAreCountedWithAnOffsetBelowTheNext) {
  // The third value is 3.8e-9: an offset of 2^-32 of K's norm leaves it undecided at every shift before it,
  // and a fourth factorization follows. (Values near the rounding of K, from some 6,500 rows up, are left to
  // counts.)
  constexpr Index kRows = 1200;
  ModelFiles files;
  Request request = diagonal_pencil(files, {1}, std::vector<double>(kRows, 1.0));
  request.input.stiffness = files.matrix("K.mtx", fourth_differences(kRows));
  request.bracket.first = 2;
  const Outcome outcome = answer(run_bracket(request, {}));
  ASSERT_TRUE(outcome.bracket && outcome.bracket->complete);
  ASSERT_EQ(outcome.bracket->critical.size(), 2u);
  for (int k = 1; k <= 2; ++k) {
    const CriticalValue& found = outcome.bracket->critical[static_cast<std::size_t>(k - 1)];
    EXPECT_EQ(found.proof, "residual");
    EXPECT_NEAR(found.value, value_of(kRows, k), 1e-6 * value_of(kRows, k));
  }
  EXPECT_LE(outcome.work.factorizations, 3);
}

TEST(Room, AnOffsetGivenIsTaken) {
  ModelFiles files;
  Request request = diagonal_pencil(files, {2, 2, 2}, {1, 0.5, 0.25});  // values 2, 4 and 8
  ThreadPool pool(1);
  const RunContext context;
  Outcome outcome = begin_outcome("bracket", request, Question::kBracket);
  auto model = read_model(request, context, pool, outcome);
  ASSERT_TRUE(model.ok());
  PencilCounter counter(request, context, pool, outcome);
  ASSERT_TRUE(counter.prepare(std::move(*model)).ok());
  for (const double offset : {0x1p-10, 0x1p-100}) {
    auto found = counter.pencil().certify_positive_side(-3, 1, offset, pool, outcome);
    ASSERT_TRUE(found.ok());
    EXPECT_EQ(found->certificate.level, Level::kProved);
    EXPECT_EQ(found->inertia.positive, 2);
    if (offset > 0x1p-50) {
      EXPECT_EQ(found->certificate.resolution, offset);
    } else {
      EXPECT_GT(found->certificate.resolution, offset);  // below every bound: another one
    }
  }
}

}  // namespace
}  // namespace stanchion::test
