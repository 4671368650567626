// What another library is asked about a certificate: the factorizations that decide its claims, and no
// others.
#include "engine/library_recheck.hpp"

#include <algorithm>
#include <cmath>

#include "engine/model_files.hpp"
#include "support/dense_reference.hpp"

namespace stanchion {
namespace {

using namespace test;

/// Dense eigenvalues (LAPACK) in the place of another library.
Result<Index> dense_negative(const TripletMatrix& matrix) {
  std::vector<Triplet> entries;
  for (std::size_t k = 0; k < matrix.value.size(); ++k) {
    entries.push_back({matrix.row[k] - 1, matrix.column[k] - 1, matrix.value[k]});
  }
  const auto values = eigenvalues(from_triplets(matrix.rows, entries));
  return static_cast<Index>(std::count_if(values.begin(), values.end(), [](double v) { return v < 0; }));
}

std::vector<LibraryCount> asked(const Request& request, const Outcome& claimed,
                                const CountNegative& count = dense_negative) {
  auto counts = count_by_library(request, claimed, count, {});
  EXPECT_TRUE(counts.ok()) << counts.status().to_string();
  return counts.ok() ? std::move(*counts) : std::vector<LibraryCount>{};
}

void expect_same(const std::vector<LibraryCount>& counts, std::size_t many) {
  EXPECT_EQ(counts.size(), many);
  for (const LibraryCount& count : counts) EXPECT_EQ(count.found, count.claimed) << "offset " << count.offset;
}

TEST(LibraryRecheck, DefiniteClaimsByTheirOneFactorization) {
  ModelFiles files;
  Request request;
  request.input.stiffness = files.matrix("K.mtx", spring_chain(40, 1));
  const Outcome claimed = answer(run_check(request, {}));
  const auto counts = asked(request, claimed);
  expect_same(counts, 1);
  EXPECT_EQ(counts[0].offset, claimed.check->certificate.resolution);
  EXPECT_EQ(counts[0].claimed, 0);
}

TEST(LibraryRecheck, SemidefiniteClaimsOnBothSidesOfZero) {
  ModelFiles files;
  Request request;
  request.input.stiffness = files.matrix("K.mtx", spring_chain(40, 0));
  const auto counts = asked(request, answer(run_check(request, {})));
  expect_same(counts, 2);
  EXPECT_EQ(counts[0].claimed - counts[1].claimed, 1) << "one zero direction between the offsets";
}

TEST(LibraryRecheck, CountsAtShiftsOfEveryPencil) {
  ModelFiles files;
  Request request;
  request.input.stiffness = files.matrix("K.mtx", spring_chain(30, 2));
  request.shifts = {0.3, 1.7};
  expect_same(asked(request, answer(run_count(request, {}))), 4);
  request.input.mass = files.matrix("M.mtx", diagonal(std::vector<double>(30, 2.0)));
  request.pencil = Pencil::kMass;
  expect_same(asked(request, answer(run_count(request, {}))), 4);
  request.input.mass.reset();
  request.input.geometric = files.matrix("G.mtx", diagonal(std::vector<double>(30, -1.0)));
  request.pencil = Pencil::kGeometric;
  request.shifts = {0.3, -2.0};
  expect_same(asked(request, answer(run_count(request, {}))), 3);
  request.input.load_sign_minus = true;
  expect_same(asked(request, answer(run_count(request, {}))), 3);
}

TEST(LibraryRecheck, RelativeClaimsAtTheMatrixItself) {
  ModelFiles files;
  Request request;
  request.input.stiffness = files.matrix("K.mtx", diagonal({1, -2, 3, -4, 5}));
  Outcome claimed = answer(run_check(request, {}));
  claimed.check->certificate = {};
  claimed.check->certificate.level = Level::kStatistical;
  claimed.check->certificate.method = "relative";
  const auto counts = asked(request, claimed);
  expect_same(counts, 1);
  EXPECT_EQ(counts[0].offset, 0);
  EXPECT_EQ(counts[0].claimed, 2);
}

TEST(LibraryRecheck, RelativeCountsWithMasslessDofsAreLeftOut) {
  // K on the massless dof is negative: n-(K - s M) is one more than the count, and the certificate does not
  // say so.
  ModelFiles files;
  Request request;
  request.input.stiffness = files.matrix("K.mtx", diagonal({1, -1, 2}));
  request.input.mass = files.matrix("M.mtx", diagonal({1, 0, 1}));
  request.pencil = Pencil::kMass;
  request.shifts = {1.5};
  Outcome claimed = answer(run_count(request, {}));
  ASSERT_EQ(claimed.count->counts[0].below, 1);
  expect_same(asked(request, claimed), 2);  // by offsets: pivots are compared
  Certificate& certificate = claimed.count->counts[0].certificate;
  certificate.method = "relative";
  certificate.runs.clear();
  expect_same(asked(request, claimed), 0);
}

TEST(LibraryRecheck, NothingIsAskedAboutWhatTheLibraryCannotTell) {
  ModelFiles files;
  Request request;
  request.input.stiffness = files.matrix("K.mtx", spring_chain(40, 1));
  request.precision = Precision::kExtended;
  expect_same(asked(request, answer(run_check(request, {}))), 0);
  request.precision = Precision::kDouble;
  Outcome claimed = answer(run_check(request, {}));
  claimed.scaling_sha256[0] = claimed.scaling_sha256[0] == 'a' ? 'b' : 'a';
  expect_same(asked(request, claimed), 0);
  claimed = answer(run_check(request, {}));
  claimed.check->certificate.level = Level::kNone;
  expect_same(asked(request, claimed), 0);
}

TEST(LibraryRecheck, WhatTheLibrarySaysIsPassedOn) {
  ModelFiles files;
  Request request;
  request.input.stiffness = files.matrix("K.mtx", spring_chain(40, 0));
  const Outcome claimed = answer(run_check(request, {}));
  const auto wrong = asked(request, claimed, [](const TripletMatrix&) { return Result<Index>(7); });
  ASSERT_EQ(wrong.size(), 2U);
  EXPECT_EQ(wrong[0].found, 7);
  EXPECT_EQ(agreement_of(LibraryComparison{"x", "1", wrong}), Agreement::kNotRepeated);
  const auto failed = asked(request, claimed, [](const TripletMatrix&) {
    return Result<Index>(Status::resource_limit("other-library", "no memory", "", ""));
  });
  EXPECT_FALSE(failed[1].found);
  EXPECT_EQ(failed[1].why_not, "no memory");
  EXPECT_EQ(agreement_of(LibraryComparison{"x", "1", failed}), Agreement::kNotRepeated);
  EXPECT_EQ(agreement_of(LibraryComparison{"x", "1", asked(request, claimed)}), Agreement::kAgreed);
}

}  // namespace
}  // namespace stanchion
