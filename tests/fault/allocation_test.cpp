// Memory that runs out at the k-th request, for every k: a resource-limit Status or success, nothing lost.
#include <gtest/gtest.h>

#include <functional>

#include "fault/failing_allocator.hpp"
#include "support/factored.hpp"
#include "support/generators.hpp"

namespace stanchion {
namespace {

using test::FailingAllocator;

constexpr long kMostRequests = 200'000;
constexpr std::size_t kErrorText = 300;  // room for the words of a Status

/// What one attempt came to.
enum class Outcome { kSuccess, kRefused, kWrongStatus, kThrew };

/// Whether std::bad_alloc may leave the call: its caller at the library's edge then turns it into a Status.

Outcome outcome_of(const Status& status) {
  if (status.ok()) return Outcome::kSuccess;
  return status.kind() == StatusKind::kResourceLimit ? Outcome::kRefused : Outcome::kWrongStatus;
}

/// Runs `attempt` with the k-th request failing, k = 0, stride, 2 stride, ... until one run meets no failure.
/// `attempt` must free whatever it made.
void expect_survives(const std::function<Outcome()>& attempt, bool lasting, long stride = 1) {
  attempt();  // one-time allocations of the libraries
  const long live_before = test::live_allocations();
  long refusals = 0;
  for (long k = 0; k < kMostRequests; k += stride) {
    Outcome outcome = Outcome::kThrew;
    bool struck = false;
    {
      const auto allocator =
          lasting ? FailingAllocator::from_then_on(k, kErrorText) : FailingAllocator::once(k);
      try {
        outcome = attempt();
      } catch (const std::bad_alloc&) {
        outcome = Outcome::kThrew;
      }
      struck = allocator.struck();
    }
    ASSERT_TRUE(outcome != Outcome::kThrew) << "std::bad_alloc escaped when request " << k << " failed";
    ASSERT_NE(outcome, Outcome::kWrongStatus) << "request " << k;
    ASSERT_EQ(test::live_allocations(), live_before) << "a leak when request " << k << " failed";
    refusals += outcome == Outcome::kRefused || outcome == Outcome::kThrew;
    if (!struck) {
      EXPECT_EQ(outcome, Outcome::kSuccess);
      EXPECT_GT(refusals, 0);
      return;
    }
  }
  FAIL() << "still failing after " << kMostRequests << " requests";
}

/// A model with delays, pairs and several fronts.
const SymmetricMatrix& model() {
  static const SymmetricMatrix matrix = test::laplacian(7, 6, 5, 6);
  return matrix;
}

Outcome factor_once(const test::Prepared& prepared, const ShiftedMatrix& matrix, bool keep) {
  FactorOptions options;
  options.keep_factor = keep;
  const auto result = factorize(prepared.analysis, matrix, options, *prepared.pool);
  if (result.ok()) {
    EXPECT_EQ(result->signs.negative + result->signs.positive + result->signs.zero, 210);
  }
  return outcome_of(result.status());
}

TEST(AllocationFailure, OneRefusedRequestInTheNumericPhase) {
  for (const int threads : {1, 2}) {
    for (const bool keep : {false, true}) {
      SCOPED_TRACE("threads " + std::to_string(threads) + (keep ? ", factor kept" : ""));
      const auto prepared = test::prepare(model(), threads);
      const ShiftedMatrix matrix = prepared.shifted(0);
      expect_survives([&] { return factor_once(prepared, matrix, keep); }, false);
    }
  }
}

TEST(AllocationFailure, MemoryRunsOutInTheNumericPhase) {
  for (const int threads : {1, 2}) {
    SCOPED_TRACE(threads);
    const auto prepared = test::prepare(model(), threads);
    const ShiftedMatrix matrix = prepared.shifted(0);
    expect_survives([&] { return factor_once(prepared, matrix, true); }, true);
  }
}

/// Fronts worked on by a team: requests fail while the other threads wait for work.
TEST(AllocationFailure, OneRefusedRequestInSharedFronts) {
  const auto prepared = test::prepare(test::laplacian(26, 25, 24), 3);
  ASSERT_FALSE(prepared.analysis.schedule.shared_fronts.empty());
  const ShiftedMatrix matrix = prepared.shifted(0);
  const auto attempt = [&] {
    return outcome_of(factorize(prepared.analysis, matrix, {}, *prepared.pool).status());
  };
  expect_survives(attempt, false, 997);
}

TEST(AllocationFailure, OneRefusedRequestInTheAnalysis) {
  const SymmetricMatrix matrix = test::laplacian(6, 5, 5);  // large enough for dissection
  for (const int workers : {1, 2}) {
    const OrderingInput input{&matrix, {}, true};
    expect_survives([&] { return outcome_of(analyse(input, workers).status()); }, false, 1);
    expect_survives([&] { return outcome_of(analyse(input, workers).status()); }, true, 1);
  }
}

TEST(AllocationFailure, OneRefusedRequestInASolve) {
  const auto prepared = test::prepare(model());
  FactorOptions options;
  options.keep_factor = true;
  const Factorization f = prepared.factor(0, options);
  const ShiftedMatrix matrix = prepared.shifted(0);
  const std::vector<double> b(210, 1.0);
  std::vector<double> x(210);
  expect_survives([&] { return outcome_of(solve(*f.factor, x.data(), 1)); }, false, 1);
  double backward_error = 0;
  const auto refined = [&] { return outcome_of(solve_refined(*f.factor, matrix, b, x, 3, &backward_error)); };
  expect_survives(refined, false, 1);
  expect_survives(refined, true, 1);
}

/// Which of two threads takes a piece of work is chance, and each grows its memory when it first takes one: a
/// thread that slept through the first shift grows it in a later one. So the later shifts are counted
/// together.
TEST(Allocation, LaterShiftsAllocateNextToNothing) {
  constexpr int kLater = 25;
  constexpr long kEach = 40;  // the result itself, and per thread what hands the pieces of work out
  for (const int threads : {1, 2}) {
    const auto prepared = test::prepare(test::laplacian(12, 12, 12), threads);
    FactorOptions options;
    options.workspace = std::make_shared<FactorWorkspace>();
    const auto requests_of = [&](double offset, bool single) {
      options.single = single;
      const auto counter = FailingAllocator::never();
      prepared.factor(offset, options);
      return counter.requests();
    };
    for (const bool single : {false, true}) {
      const long first = requests_of(0.1, single);
      EXPECT_GT(first, 100);
      long later = 0;
      for (int k = 1; k <= kLater; ++k) later += requests_of(0.1 + 0.01 * k, single);
      const long growth_of_other_threads = (threads - 1) * first;
      EXPECT_LE(later, kLater * kEach + growth_of_other_threads)
          << threads << " threads; the first took " << first;
    }
  }
}

}  // namespace
}  // namespace stanchion
