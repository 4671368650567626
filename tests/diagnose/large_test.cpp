// Planted defects in models of 50,000 to 200,000 equations, and what locating costs beside one count in solve
// mode.
#include <gtest/gtest.h>

#include "diagnose/combination.hpp"

namespace stanchion {
namespace {

using namespace test;

struct LargeCase {
  const char* name;
  Offset unknowns;
  Fault fault;
  Cause cause;
  Index count;
};

class Large : public testing::TestWithParam<LargeCase> {};

TEST_P(Large, DefectIsFound) {
  const LargeCase& given = GetParam();
  PlantedModel model;
  model.append(specimen_with(given.name, given.unknowns, given.fault), 0, 0);
  model.shuffle(7);
  ModelFiles files;
  const Outcome outcome = answer(run_locate(model.request(files), {}));
  ASSERT_TRUE(outcome.located);
  const auto& directions = outcome.located->directions;
  if (given.count == 0) {
    EXPECT_TRUE(directions.empty()) << summary(outcome);
    return;
  }
  ASSERT_EQ(directions.size(), 1U) << summary(outcome);
  EXPECT_EQ(directions[0].cause, given.cause) << summary(outcome);
  EXPECT_EQ(directions[0].count, given.count);
  RecordProperty("seconds_locating", std::to_string(outcome.located->seconds));
  RecordProperty("seconds_factoring", std::to_string(outcome.timings.factor));
  RecordProperty("factorizations", outcome.work.factorizations);
}

/// Five parts, together up to 200,000 equations.
TEST(LargeCombined, EveryDefectIsNamedApartWithItsNodes) {
  for (const char* name : {"solid", "plate", "frame", "lattice"}) {
    const Combination made = combination_of(name, 49000, 7);
    ModelFiles files;
    expect_planted(made, answer(run_locate(made.model.request(files), {})));
  }
}

INSTANTIATE_TEST_SUITE_P(
    Specimens, Large,
    testing::Values(LargeCase{"solid", 50000, Fault::kNone, Cause::kUnresolved, 0},
                    LargeCase{"solid", 200000, Fault::kHinge, Cause::kMechanism, 1},
                    LargeCase{"solid", 200000, Fault::kLoosePart, Cause::kLoosePart, 6},
                    LargeCase{"solid", 50000, Fault::kNegativeSpring, Cause::kNegativeSpring, 1},
                    LargeCase{"plate", 200000, Fault::kNone, Cause::kUnresolved, 0},
                    LargeCase{"plate", 200000, Fault::kLoosePart, Cause::kLoosePart, 6},
                    LargeCase{"plate", 200000, Fault::kSoftSpring, Cause::kNearMechanism, 6},
                    LargeCase{"plate", 200000, Fault::kNegativeSpring, Cause::kNegativeSpring, 1},
                    LargeCase{"frame", 50000, Fault::kHinge, Cause::kLoosePart, 3},
                    LargeCase{"frame", 50000, Fault::kNegativeSpring, Cause::kNegativeSpring, 1},
                    LargeCase{"lattice", 200000, Fault::kNone, Cause::kUnresolved, 0}),
    [](const auto& given) {
      return given.param.name + std::string("_") + std::to_string(given.param.unknowns) + "_" +
             std::to_string(static_cast<int>(given.param.fault));
    });

}  // namespace
}  // namespace stanchion
