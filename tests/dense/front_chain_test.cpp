// Two thousand fronts of one pivot each: the rounding of the running Schur complement is what counts.
#include <gtest/gtest.h>

#include "dense/front_makers.hpp"

namespace stanchion {
namespace {

using test::FrontCase;

/// Fronts [1 b; b s] of an arrow matrix, one after the other; s is the border's running diagonal.
struct ArrowChain {
  double bound = 0, bound_without_schur_term = 0;
  long double error = 0;

  void run(int fronts, double coupling, double border) {
    double s = border;
    long double exact = border;
    for (int f = 0; f < fronts; ++f) {
      FrontCase front(
          test::full_from(2, [&](Index i, Index j) { return i != j ? coupling : (i == 0 ? 1.0 : s); }), 1);
      front.run({false, 0.01, true});
      ASSERT_EQ(front.result.eliminated, 1);
      s = front.at(1, 1);
      exact -= static_cast<long double>(coupling) * coupling;
      bound += front.claimed(true)[1];
      bound_without_schur_term += front.claimed(false)[1];
    }
    error = std::fabs(exact - static_cast<long double>(s));
  }
};

TEST(FrontChain, TheBoundHoldsAndNeedsTheSchurTerm) {
  ArrowChain chain;
  chain.run(2000, 0x1.6p-27, 1.5);  // every update is below half a unit of the border's diagonal and is lost
  EXPECT_LE(static_cast<double>(chain.error), chain.bound);
  EXPECT_GT(static_cast<double>(chain.error), 40 * chain.bound_without_schur_term)
      << "this chain is to show that the term may not be left out";
  RecordProperty("error_over_bound", std::to_string(static_cast<double>(chain.error) / chain.bound));
}

TEST(FrontChain, TheBoundHoldsWhenTheUpdatesMatter) {
  for (const double coupling : {1e-3, 0.01, 0.3}) {
    ArrowChain chain;
    chain.run(2000, coupling, 1.0 / 3);
    EXPECT_LE(static_cast<double>(chain.error), chain.bound);
  }
}

}  // namespace
}  // namespace stanchion
