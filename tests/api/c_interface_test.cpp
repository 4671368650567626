#include <gtest/gtest.h>

#include <cstring>
#include <limits>
#include <memory>

#include "stanchion/stanchion.h"

namespace {

struct Free {
  void operator()(stanchion_request* request) const { stanchion_request_free(request); }
  void operator()(stanchion_answer* answer) const { stanchion_answer_free(answer); }
};
using RequestHandle = std::unique_ptr<stanchion_request, Free>;
using AnswerHandle = std::unique_ptr<stanchion_answer, Free>;

RequestHandle demo() {
  RequestHandle request(stanchion_request_new());
  stanchion_set_stiffness(request.get(), STANCHION_DATA "/demo/K.mtx");
  return request;
}

TEST(CInterface, CheckAnswers) {
  const AnswerHandle answer(stanchion_check(demo().get()));
  ASSERT_EQ(stanchion_status(answer.get()), STANCHION_OK) << stanchion_message(answer.get());
  EXPECT_EQ(stanchion_verdict(answer.get()), STANCHION_POSITIVE_DEFINITE);
  EXPECT_EQ(stanchion_level(answer.get()), STANCHION_LEVEL_PROVED);
  EXPECT_EQ(stanchion_negative(answer.get()), 0);
  EXPECT_EQ(stanchion_zero(answer.get()), 0);
  EXPECT_EQ(stanchion_undecided(answer.get()), 0);
  EXPECT_GT(stanchion_positive(answer.get()), 0);
  EXPECT_STREQ(stanchion_message(answer.get()), "");
  EXPECT_NE(std::strstr(stanchion_json(answer.get()), "positive_definite"), nullptr);
  EXPECT_NE(std::strstr(stanchion_text(answer.get()), "K is positive definite"), nullptr);
}

TEST(CInterface, CountAnswersInOrder) {
  const RequestHandle request = demo();
  stanchion_set_geometric(request.get(), STANCHION_DATA "/demo/G.mtx");
  stanchion_add_shift(request.get(), 2);
  stanchion_add_shift(request.get(), 1.5);
  const AnswerHandle answer(stanchion_count(request.get()));
  ASSERT_EQ(stanchion_counts(answer.get()), 2U) << stanchion_message(answer.get());
  double shift = 0;
  int32_t least = 0, most = 0;
  int level = -1;
  ASSERT_EQ(stanchion_count_at(answer.get(), 0, &shift, &least, &most, &level), 1);
  EXPECT_EQ(shift, 2);
  EXPECT_EQ(least, 4);
  EXPECT_EQ(most, 4);
  EXPECT_NE(level, STANCHION_LEVEL_NONE);
  EXPECT_EQ(stanchion_count_at(answer.get(), 1, nullptr, nullptr, nullptr, nullptr), 1);
  EXPECT_EQ(stanchion_count_at(answer.get(), 2, &shift, &least, &most, &level), 0);
  EXPECT_EQ(stanchion_negative(answer.get()), -1);
}

TEST(CInterface, FailuresComeInWords) {
  const RequestHandle request = demo();
  stanchion_set_stiffness(request.get(), "no-such-file.mtx");
  const AnswerHandle answer(stanchion_check(request.get()));
  EXPECT_EQ(stanchion_status(answer.get()), STANCHION_BAD_USAGE);
  EXPECT_STREQ(stanchion_place(answer.get()), "no-such-file.mtx");
  EXPECT_STRNE(stanchion_message(answer.get()), "");
  EXPECT_STRNE(stanchion_code(answer.get()), "");
  EXPECT_STRNE(stanchion_remedy(answer.get()), "");
  EXPECT_STREQ(stanchion_json(answer.get()), "");
  EXPECT_EQ(stanchion_verdict(answer.get()), STANCHION_UNRESOLVED);
}

TEST(CInterface, ContradictionsAndRangesAreRefused) {
  const RequestHandle request = demo();
  stanchion_add_shift(request.get(), std::numeric_limits<double>::quiet_NaN());
  EXPECT_EQ(stanchion_status(AnswerHandle(stanchion_count(request.get())).get()), STANCHION_BAD_USAGE);
  stanchion_set_geometric(request.get(), "G.mtx");
  stanchion_set_mass(request.get(), "M.mtx");
  EXPECT_EQ(stanchion_status(AnswerHandle(stanchion_count(request.get())).get()), STANCHION_BAD_USAGE);
}

TEST(CInterface, ACapIsAResourceLimit) {
  const RequestHandle request = demo();
  stanchion_set_memory_cap(request.get(), 1000);
  EXPECT_EQ(stanchion_status(AnswerHandle(stanchion_check(request.get())).get()), STANCHION_RESOURCE_LIMIT);
}

TEST(CInterface, ProgressCanStopARun) {
  const RequestHandle request = demo();
  int calls = 0;
  stanchion_set_progress(
      request.get(), [](const char*, double, void* user) { return ++*static_cast<int*>(user) < 2 ? 1 : 0; },
      &calls);
  EXPECT_EQ(stanchion_status(AnswerHandle(stanchion_check(request.get())).get()), STANCHION_INTERRUPTED);
  stanchion_set_progress(request.get(), nullptr, nullptr);
  EXPECT_EQ(stanchion_status(AnswerHandle(stanchion_check(request.get())).get()), STANCHION_OK);
}

TEST(CInterface, NullHandlesDoNoHarm) {
  stanchion_set_stiffness(nullptr, "K.mtx");
  stanchion_add_shift(nullptr, 1);
  stanchion_request_free(nullptr);
  stanchion_answer_free(nullptr);
  EXPECT_EQ(stanchion_status(AnswerHandle(stanchion_check(nullptr)).get()), STANCHION_BAD_USAGE);
  EXPECT_EQ(stanchion_status(nullptr), STANCHION_BAD_USAGE);
  EXPECT_EQ(stanchion_counts(nullptr), 0U);
  EXPECT_STREQ(stanchion_text(nullptr), "");
}

}  // namespace
