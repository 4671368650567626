// The vector that detects faults in the extended factorization: silent on a sound machine, loud on a bad
// memory cell.
#include <gtest/gtest.h>

#include <bit>
#include <cmath>

#include "extended/factorize.hpp"
#include "inertia/two_offsets.hpp"
#include "support/factored.hpp"
#include "support/generators.hpp"

namespace stanchion {
namespace {

using test::Random;

using Factorize = Result<Factorization> (*)(const Analysis&, const ShiftedMatrix&, const FactorOptions&,
                                            ThreadPool&);

std::vector<SymmetricMatrix> matrices() {
  Random random(83);
  std::vector<SymmetricMatrix> list;
  list.push_back(test::laplacian(7, 6, 5));
  list.push_back(test::laplacian(7, 6, 5, 3.1));
  list.push_back(test::laplacian(8, 8, 8, 6));  // exactly singular
  list.push_back(test::saddle(random, 120, 40));
  list.push_back(test::random_sparse(random, 150, 5, 1.0, 0));
  list.push_back(test::wildly_scaled(random, test::random_sparse(random, 100, 4, 0.5, 0), 6));
  return list;
}

TEST(ExtendedFault, SilentOnASoundMachine) {
  for (const SymmetricMatrix& matrix : matrices()) {
    const auto prepared = test::prepare(matrix, 2, false);
    for (const Factorize factorize_by : {factorize_extended, factorize_plainly}) {
      for (const double offset : {0.0, 1e-25, 0.1}) {
        for (std::uint64_t seed = 1; seed <= 5; ++seed) {
          FactorOptions options;
          options.seed = seed;
          const auto f = factorize_by(prepared.analysis, prepared.shifted(offset), options, *prepared.pool);
          ASSERT_TRUE(f.ok());
          EXPECT_FALSE(f->fault) << "row " << f->fault_row << " of " << matrix.rows;
          EXPECT_FALSE(f->breakdown);
        }
      }
    }
  }
}

TEST(ExtendedFault, OneFlippedBitInMemoryIsNoticedDownToTheLast) {
  // After the first front a bit of an entry that a later one will read is flipped: double-double sees the
  // last bit.
  int spoiled = 0, noticed = 0;
  for (const SymmetricMatrix& matrix : matrices()) {
    for (int round = 0; round < 40; ++round) {
      auto prepared = test::prepare(matrix, 1, false);
      if (prepared.analysis.tree.fronts < 3) continue;
      Buffer<double>& values = prepared.family.values[0];
      const Index last = prepared.family.rows - 1 - round % 5;
      const Offset entry = prepared.family.column_start[last];
      if (values[entry] == 0 || std::fabs(values[entry]) < 1e-3) continue;
      const double kept = values[entry];
      FactorOptions options;
      options.seed = static_cast<std::uint64_t>(round);
      options.progress = [&](const char*, double) {
        values[entry] = std::bit_cast<double>(std::bit_cast<std::uint64_t>(kept) ^ (1ULL << (round % 52)));
      };
      const auto f = factorize_extended(prepared.analysis, prepared.shifted(0), options, *prepared.pool);
      ASSERT_TRUE(f.ok());
      if (f->breakdown || values[entry] == kept) continue;
      ++spoiled;
      noticed += f->fault;
      EXPECT_EQ(check_fault(prepared.analysis, *f).code(), f->fault ? "machine-fault" : "");
    }
  }
  EXPECT_GT(spoiled, 100);
  EXPECT_EQ(noticed, spoiled);
}

TEST(ExtendedFault, NoAnswerIsGiven) {
  auto prepared = test::prepare(test::laplacian(7, 6, 5, 3.1), 1, false);
  Buffer<double>& values = prepared.family.values[0];
  OffsetOptions options;
  options.extended = true;
  bool spoiled = false;
  options.factor.progress = [&](const char*, double) {
    if (!spoiled) values[prepared.family.column_start[prepared.family.rows - 1]] += 1e-9;
    spoiled = true;
  };
  const auto found = certify_by_offsets(prepared.analysis, prepared.shifted(0), options, *prepared.pool);
  ASSERT_FALSE(found.ok());
  EXPECT_EQ(found.status().code(), "machine-fault");
}

}  // namespace
}  // namespace stanchion
