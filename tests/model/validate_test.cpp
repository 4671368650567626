#include "model/validate.hpp"

#include <gtest/gtest.h>

#include <functional>
#include <limits>

namespace stanchion {
namespace {

Request good_request() {
  Request request;
  request.input.stiffness = "K.mtx";
  return request;
}

void expect_refused(Question question, const std::string& option,
                    const std::function<void(Request&)>& spoil) {
  Request request = good_request();
  spoil(request);
  const Status status = validate(request, question);
  ASSERT_FALSE(status.ok()) << option;
  EXPECT_EQ(status.kind(), StatusKind::kBadUsage) << option;
  EXPECT_EQ(status.place(), option);
  EXPECT_FALSE(status.message().empty());
  EXPECT_FALSE(status.remedy().empty());
}

TEST(Validate, AcceptsPlainRequests) {
  Request request = good_request();
  EXPECT_TRUE(validate(request, Question::kCheck).ok());
  EXPECT_TRUE(validate(request, Question::kForecast).ok());
  request.shifts = {0, -1.5, 1e300};
  request.pencil = Pencil::kGeometric;
  request.input.geometric = "G.mtx";
  request.input.load_sign_minus = true;
  request.digits = 17;
  request.risk = 0.5;
  request.resolution = 1e-9;
  EXPECT_TRUE(validate(request, Question::kCount).ok());
}

TEST(Validate, RefusesNumbersOutOfRange) {
  const double nan = std::numeric_limits<double>::quiet_NaN();
  for (const double risk : {0.0, 1.0, -1e-6, nan}) {
    expect_refused(Question::kCheck, "--risk", [&](Request& request) { request.risk = risk; });
  }
  for (const double resolution : {0.0, 1.0, -1e-9, nan}) {
    expect_refused(Question::kCheck, "--resolution",
                   [&](Request& request) { request.resolution = resolution; });
  }
  for (const int digits : {0, 18, -3}) {
    expect_refused(Question::kCheck, "--digits", [&](Request& request) { request.digits = digits; });
  }
  for (const int threads : {-1, 1025}) {
    expect_refused(Question::kCheck, "--threads", [&](Request& request) { request.threads = threads; });
  }
  expect_refused(Question::kCheck, "--memory-cap", [](Request& request) { request.memory_cap_bytes = 0; });
  expect_refused(Question::kCheck, "--base", [](Request& request) { request.input.base = 2; });
  expect_refused(Question::kCheck, "--rows", [](Request& request) { request.input.rows = 0; });
  expect_refused(Question::kCheck, "--add", [&](Request& request) {
    request.input.added = {{"G.mtx", nan}};
  });
  expect_refused(Question::kCheck, "--add", [](Request& request) { request.input.added = {{"", 1}}; });
}

TEST(Validate, RefusesContradictions) {
  expect_refused(Question::kCount, "--geometric, --mass", [](Request& request) {
    request.input.geometric = "G.mtx";
    request.input.mass = "M.mtx";
  });
  expect_refused(Question::kCheck, "--geometric", [](Request& request) {
    request.input.geometric = "G.mtx";
    request.pencil = Pencil::kGeometric;
  });
  expect_refused(Question::kCheck, "--mass", [](Request& request) {
    request.input.mass = "M.mtx";
    request.pencil = Pencil::kMass;
  });
  expect_refused(Question::kCount, "--load-sign",
                 [](Request& request) { request.input.load_sign_minus = true; });
}

TEST(Validate, ACountNeedsFiniteShifts) {
  expect_refused(Question::kCount, "--at", [](Request&) {});
  const double infinity = std::numeric_limits<double>::infinity();
  for (const double shift : {infinity, -infinity, std::numeric_limits<double>::quiet_NaN()}) {
    expect_refused(Question::kCount, "--at", [&](Request& request) { request.shifts = {1, shift}; });
  }
}

TEST(Validate, AStiffnessMatrixMustBeNamed) {
  expect_refused(Question::kCheck, "command line", [](Request& request) { request.input.stiffness.clear(); });
}

TEST(Validate, APencilThatIsNotThatOfTheMatricesIsOurOwnMistake) {
  Request request = good_request();
  request.pencil = Pencil::kMass;
  EXPECT_EQ(validate(request, Question::kCheck).kind(), StatusKind::kInternal);
}

}  // namespace
}  // namespace stanchion
