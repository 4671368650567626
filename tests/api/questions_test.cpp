#include <gtest/gtest.h>

#include "stanchion/stanchion.hpp"

namespace stanchion {
namespace {

Request demo() {
  Request request;
  request.input.stiffness = STANCHION_DATA "/demo/K.mtx";
  return request;
}

TEST(Questions, CheckAnswers) {
  const auto outcome = check(demo());
  ASSERT_TRUE(outcome.ok()) << outcome.status().to_string();
  ASSERT_TRUE(outcome->check.has_value());
  EXPECT_EQ(outcome->check->verdict, Verdict::kPositiveDefinite);
  EXPECT_EQ(outcome->check->inertia.positive, outcome->rows_analysed);
  EXPECT_NE(to_text(*outcome).find("K is positive definite"), std::string::npos);
  EXPECT_NE(to_json(*outcome).find("\"verdict\": \"positive_definite\""), std::string::npos);
}

TEST(Questions, CountAndForecastAnswer) {
  Request request = demo();
  request.input.geometric = STANCHION_DATA "/demo/G.mtx";
  request.pencil = Pencil::kGeometric;
  request.shifts = {1.5, 2};
  const auto counted = count(request);
  ASSERT_TRUE(counted.ok()) << counted.status().to_string();
  ASSERT_EQ(counted->count->counts.size(), 2U);
  EXPECT_EQ(counted->count->counts[0].below, 0);
  EXPECT_EQ(counted->count->counts[1].below, 4);
  const auto forecasted = forecast(demo());
  ASSERT_TRUE(forecasted.ok()) << forecasted.status().to_string();
  EXPECT_GT(forecasted->forecast->factor_entries, 0);
}

TEST(Questions, ARequestIsValidatedFirst) {
  Request request = demo();
  request.risk = 2;
  const auto outcome = check(request);
  ASSERT_FALSE(outcome.ok());
  EXPECT_EQ(outcome.status().kind(), StatusKind::kBadUsage);
}

TEST(Questions, AMissingFileIsBadInput) {
  Request request;
  request.input.stiffness = "no-such-file.mtx";
  const auto outcome = check(request);
  ASSERT_FALSE(outcome.ok());
  EXPECT_EQ(outcome.status().kind(), StatusKind::kBadInput);
}

TEST(Questions, TheListenerCanStopARun) {
  Listener listener;
  int calls = 0;
  listener.progress = [&](const char*, double) { return ++calls < 2; };
  const auto outcome = check(demo(), listener);
  ASSERT_FALSE(outcome.ok());
  EXPECT_EQ(outcome.status().kind(), StatusKind::kInterrupted);
}

}  // namespace
}  // namespace stanchion
