// Forecasts of time: measured rates and the work that a count will take.
#include "engine/host.hpp"
#include "engine/host_rates.hpp"
#include "engine/model_files.hpp"
#include "support/factored.hpp"
#include "support/generators.hpp"

namespace stanchion {
namespace {

using namespace test;

TEST(HostRates, LargerFrontsTakeLongerAndRunFaster) {
  const HostRates rates = measure_host();
  for (std::size_t k = 1; k < rates.fronts.size(); ++k) {
    EXPECT_GT(rates.fronts[k].flops, rates.fronts[k - 1].flops);
    EXPECT_GT(rates.fronts[k].seconds, rates.fronts[k - 1].seconds);
  }
  const auto rate = [](const HostRates::FrontTime& front) { return front.flops / front.seconds; };
  EXPECT_GT(rate(rates.fronts.back()), rate(rates.fronts.front()));
  EXPECT_GT(rates.seconds_per_tested_entry, 0);
}

TEST(HostRates, MoreWorkTakesLonger) {
  const HostRates rates = measure_host();
  const auto small = prepare(laplacian(8, 8, 8)), large = prepare(laplacian(20, 20, 20));
  EXPECT_GT(factorization_seconds(small.analysis, rates, 1), 0);
  EXPECT_GT(factorization_seconds(large.analysis, rates, 1),
            5 * factorization_seconds(small.analysis, rates, 1));
  EXPECT_GT(relative_test_seconds(large.analysis, large.family.entries(), rates, 1),
            5 * relative_test_seconds(small.analysis, small.family.entries(), rates, 1));
}

TEST(Forecast, TheSecondsAreThoseOfTheLikelyWork) {
  ModelFiles files;
  Request request;
  request.input.stiffness = files.matrix("K.mtx", laplacian(12, 12, 12));
  const ForecastOutcome definite = *answer(run_forecast(request, {})).forecast;
  EXPECT_EQ(definite.factorizations, 1);
  EXPECT_FALSE(definite.relative_test);
  EXPECT_EQ(definite.seconds, definite.factorization_seconds);
  EXPECT_GE(definite.seconds_otherwise, 2.9 * definite.seconds);
  EXPECT_GT(definite.flops_per_second, 1e7);
  EXPECT_NE(definite.assumption.find("expected to be definite"), std::string::npos);
  request.input.mass = files.matrix("M.mtx", diagonal(std::vector<double>(1728, 1.0)));
  request.pencil = Pencil::kMass;
  const ForecastOutcome shifted = *answer(run_forecast(request, {})).forecast;
  EXPECT_EQ(shifted.factorizations, 2);
  EXPECT_NE(shifted.assumption.find("may be indefinite"), std::string::npos);
  EXPECT_DOUBLE_EQ(shifted.seconds, 2 * shifted.factorization_seconds);
}

// One more than two: the first of two offsets lies below the bound amid the spectrum (measured).
TEST(Forecast, AShiftOfASweepByOffsetsTakesThreeFactorizations) {
  ModelFiles files;
  Request request;
  request.threads = 1;
  request.input.stiffness = files.matrix("K.mtx", laplacian(400, 400, 1));
  const ForecastOutcome chosen = *answer(run_forecast(request, {})).forecast;
  EXPECT_DOUBLE_EQ(chosen.seconds_side_by_side, 3 * chosen.factorization_seconds);
  request.resolution = 1e-9;
  const ForecastOutcome given = *answer(run_forecast(request, {})).forecast;
  EXPECT_DOUBLE_EQ(given.seconds_side_by_side, 2 * given.factorization_seconds);
}

TEST(Forecast, AsManyShiftsOfASweepRunAtATimeAsTheMemoryHolds) {
  ModelFiles files;
  Request request;
  request.input.stiffness = files.matrix("K.mtx", laplacian(24, 24, 24));
  request.threads = 3;
  const ForecastOutcome uncapped = *answer(run_forecast(request, {})).forecast;
  EXPECT_EQ(uncapped.side_by_side, 3);
  EXPECT_GT(uncapped.seconds_side_by_side, 0);
  // Alike where the tests before have had a higher peak; program_forecast looks at a process of its own.
  EXPECT_GE(uncapped.peak_bytes_side_by_side, uncapped.peak_bytes_count);
  int before = 0;
  for (int factors = 0; factors <= 4; ++factors) {
    request.memory_cap_bytes = resident_bytes() + factors * uncapped.peak_bytes_solve;
    const int many = answer(run_forecast(request, {})).forecast->side_by_side;
    EXPECT_GE(many, std::max(before, 1));
    if (factors == 0) {
      EXPECT_EQ(many, 1);
    }
    before = many;
  }
  EXPECT_EQ(before, 3);
}

}  // namespace
}  // namespace stanchion
