#include "model/not_checked.hpp"

#include <gtest/gtest.h>

#include <algorithm>

namespace stanchion {
namespace {

bool says(const std::vector<std::string>& sentences, const std::string& words) {
  return std::any_of(sentences.begin(), sentences.end(),
                     [&](const std::string& sentence) { return sentence.find(words) != std::string::npos; });
}

TEST(NotChecked, StiffnessAloneSaysNothingAboutLoad) {
  Request request;
  const auto sentences = not_checked(request, Question::kCheck);
  EXPECT_TRUE(says(sentences, "says nothing about buckling"));
  EXPECT_TRUE(says(sentences, "at the resolution"));
  request.input.added.push_back({"G.mtx", 1.35});
  EXPECT_FALSE(says(not_checked(request, Question::kCheck), "says nothing about buckling"));
  EXPECT_TRUE(says(not_checked(request, Question::kCheck), "Other loads"));
}

TEST(NotChecked, EveryVerdictDefersToPracticeAndNamesWhatIsOutside) {
  Request request;
  for (const Pencil pencil : {Pencil::kStiffness, Pencil::kGeometric, Pencil::kMass}) {
    request.pencil = pencil;
    const auto sentences = not_checked(request, Question::kCount);
    EXPECT_TRUE(says(sentences, "licensed practice"));
    EXPECT_TRUE(says(sentences, "Follower loads, contact, imperfections and yielding"));
    EXPECT_TRUE(says(sentences, "numbers in the files"));
    EXPECT_EQ(says(sentences, "mixed units"), pencil == Pencil::kStiffness);
    EXPECT_EQ(says(sentences, "straight line K + f G"), pencil == Pencil::kGeometric);
  }
}

TEST(NotChecked, OptionsChangeWhatIsSaid) {
  Request request;
  EXPECT_TRUE(says(not_checked(request, Question::kCheck), "count as exact"));
  EXPECT_FALSE(says(not_checked(request, Question::kCheck), "flutter"));
  request.digits = 8;
  request.input.symmetric_part = true;
  EXPECT_FALSE(says(not_checked(request, Question::kCheck), "count as exact"));
  EXPECT_TRUE(says(not_checked(request, Question::kCheck), "flutter"));
}

TEST(NotChecked, AForecastLooksAtThePatternOnly) {
  EXPECT_TRUE(says(not_checked({}, Question::kForecast), "nothing was factored"));
}

}  // namespace
}  // namespace stanchion
