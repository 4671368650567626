// A wrong matrix product or a bad memory cell during the factorization: it must be noticed, and no answer
// given.
#include <gtest/gtest.h>

#include <cmath>

#include "fault/wrong_product.hpp"
#include "inertia/two_offsets.hpp"
#include "numeric/rebuilt.hpp"
#include "support/generators.hpp"

namespace stanchion {
namespace {

using test::Random;
using test::Wrong;

struct Tally {
  int wrong = 0;    ///< factorizations off by more than their bound
  int noticed = 0;  ///< of those
};

/// Factors with one product spoiled, and says whether the factors are off by more than eight times their
/// bound.
void spoil_once(const test::Prepared& prepared, Wrong wrong, std::int64_t call, std::uint64_t seed,
                bool definite, Tally& tally) {
  FactorOptions options;
  options.keep_factor = true;
  options.definite = definite;
  options.seed = seed;
  test::spoil_product(wrong, call, seed);
  const Factorization f = prepared.factor(0, options);
  test::mend_product();
  if (f.breakdown || f.stopped) return;  // no count either way
  const double error = test::largest_row_error(prepared.shifted(0), *f.factor);
  if (error <= 8 * f.error_bound) return;
  ++tally.wrong;
  tally.noticed += f.fault;
}

std::int64_t products_of(const test::Prepared& prepared, bool definite) {
  use_kernels(test::spoiled_kernels());
  FactorOptions options;
  options.definite = definite;
  test::mend_product();
  EXPECT_FALSE(prepared.factor(0, options).fault);
  return test::mend_product();
}

Tally spoil_many(const SymmetricMatrix& matrix, bool definite, int rounds) {
  const auto prepared = test::prepare(matrix);
  const std::int64_t calls = products_of(prepared, definite);
  EXPECT_GT(calls, 5);
  Tally tally;
  for (int round = 0; round < rounds; ++round) {
    const auto seed = static_cast<std::uint64_t>(round);
    for (const Wrong wrong : {Wrong::kDroppedTerm, Wrong::kNudged, Wrong::kFlippedBit}) {
      spoil_once(prepared, wrong, (round * 7) % calls, seed, definite, tally);
    }
  }
  return tally;
}

void expect_all_noticed(const Tally& tally) {
  EXPECT_GT(tally.wrong, 30);  // otherwise the spoiled products did not matter and nothing was tested
  EXPECT_EQ(tally.noticed, tally.wrong);
}

TEST(WrongProduct, IsNoticedWithoutPivoting) {
  expect_all_noticed(spoil_many(test::laplacian(7, 6, 5), true, 60));
}

TEST(WrongProduct, IsNoticedWithPivoting) {
  expect_all_noticed(spoil_many(test::laplacian(7, 6, 5, 3.1), false, 60));
}

TEST(WrongProduct, IsNoticedWithDelaysAndZeroDiagonals) {
  Random random(31);
  expect_all_noticed(spoil_many(test::random_sparse(random, 150, 5, 1.0, 0), false, 60));
  expect_all_noticed(spoil_many(test::saddle(random, 120, 40), false, 60));
}

TEST(WrongProduct, IsNoticedOnBadScales) {
  Random random(32);
  const SymmetricMatrix base = test::random_sparse(random, 150, 5, 0.3, 0);
  expect_all_noticed(spoil_many(test::wildly_scaled(random, base.clone(), 4), false, 60));
}

TEST(WrongProduct, GivesAnInternalErrorAndNoAnswer) {
  const auto prepared = test::prepare(test::laplacian(9, 8, 7));
  for (const bool definite_first : {true, false}) {
    OffsetOptions options;
    options.definite_first = definite_first;
    use_kernels(test::spoiled_kernels());
    test::spoil_product(Wrong::kDroppedTerm, 0, 5, true);
    const auto answer = certify_by_offsets(prepared.analysis, prepared.shifted(0), options, *prepared.pool);
    test::mend_product();
    ASSERT_FALSE(answer.ok());
    EXPECT_EQ(answer.status().kind(), StatusKind::kInternal);
    EXPECT_EQ(answer.status().code(), "machine-fault");
    EXPECT_EQ(answer.status().place().rfind("equation ", 0), 0U) << answer.status().place();
    EXPECT_NE(answer.status().message().find("a fault of the machine, its memory, or the program"),
              std::string::npos);
    EXPECT_NE(answer.status().remedy().find("selftest"), std::string::npos);
  }
}

TEST(BadMemory, AnEntryThatChangesDuringTheFactorizationIsNoticed) {
  auto prepared = test::prepare(test::laplacian(9, 8, 7));
  Buffer<double>& values = prepared.family.values[0];
  const Offset last = values.size() - 1;  // the last diagonal entry: it enters the last front
  for (const double factor : {1 + 0x1p-20, -1.0, 0.0}) {
    const double right = values[last];
    FactorOptions options;
    options.progress = [&](const char*, double) { values[last] = right * factor; };
    const Factorization f = prepared.factor(0, options);
    values[last] = right;
    EXPECT_TRUE(f.fault);
    EXPECT_EQ(f.fault_row, prepared.family.rows - 1);
    EXPECT_FALSE(check_fault(prepared.analysis, f).ok());
  }
  EXPECT_TRUE(check_fault(prepared.analysis, prepared.factor(0)).ok());
}

}  // namespace
}  // namespace stanchion
