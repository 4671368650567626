#include "report/json.hpp"

#include <gtest/gtest.h>

#include <algorithm>
#include <limits>
#include <nlohmann/json.hpp>

#include "report/samples.hpp"
#include "report/text.hpp"

namespace stanchion {
namespace {

using Json = nlohmann::ordered_json;

Json document_of(const Outcome& outcome) {
  return Json::parse(to_json(outcome));
}

std::vector<std::string> keys_of(const Json& object) {
  std::vector<std::string> keys;
  for (const auto& [key, value] : object.items()) keys.push_back(key);
  return keys;
}

TEST(Json, KeysOfACheckInTheirOrder) {
  const std::vector<std::string> expected{"schema_version", "program",
                                          "command",        "arguments",
                                          "title",          "reference",
                                          "inputs",         "tables",
                                          "host",           "rows_analysed",
                                          "rows_struck",    "in_words",
                                          "verdict",        "verdict_for_all_roundings",
                                          "inertia",        "certificate",
                                          "constrained",    "witness",
                                          "risk",           "risk_allowed",
                                          "seed",           "warnings",
                                          "not_checked",    "work",
                                          "memory_bytes",   "timings_seconds"};
  EXPECT_EQ(keys_of(document_of(samples::definite())), expected);
  EXPECT_EQ(keys_of(document_of(samples::unresolved())), expected);
}

TEST(Json, TheWordsAreThoseThatOpenTheText) {
  for (const auto& [name, outcome] : samples::all()) {
    SCOPED_TRACE(name);
    const Json words = document_of(outcome)["in_words"];
    ASSERT_FALSE(words.empty());
    std::string text = to_text(outcome);  // wrapped: any white space counts as one blank
    std::replace(text.begin(), text.end(), '\n', ' ');
    EXPECT_NE(text.find(words[0].get<std::string>()), std::string::npos) << words[0];
  }
}

TEST(Json, ValuesOfACheck) {
  const Json document = document_of(samples::definite());
  EXPECT_EQ(document["schema_version"], 1);
  EXPECT_EQ(document["program"]["name"], "stanchion");
  EXPECT_EQ(document["verdict"], "positive_definite");
  EXPECT_EQ(document["inertia"], Json::parse(R"({"negative":0,"zero":0,"positive":29796,"undecided":0})"));
  EXPECT_EQ(document["certificate"]["level"], "proved");
  EXPECT_EQ(document["certificate"]["runs"][0]["offset"], 1e-11);
  EXPECT_TRUE(document["certificate"]["relative_bound"].is_null());
  EXPECT_TRUE(document["constrained"].is_null());
  EXPECT_EQ(document["inputs"]["stiffness"]["path"], "bridge/K.mtx");
  EXPECT_TRUE(document["inputs"]["mass"].is_null());
  EXPECT_EQ(document["inputs"]["added"].size(), 2U);
  EXPECT_EQ(document["inputs"]["added"][1]["factor"], -0.5);
  EXPECT_EQ(document["title"], "Lock footbridge, span 2");
}

TEST(Json, ConstraintsWithAndWithoutRank) {
  const Json known = document_of(samples::constrained())["constrained"];
  EXPECT_EQ(known["rank"], 40);
  EXPECT_EQ(known["inertia"]["positive"], 29715);
  EXPECT_TRUE(known["negative_range"].is_null());
  EXPECT_EQ(known["redundant_equations"], Json::parse("[29790]"));
  const Json range = document_of(samples::constrained_range())["constrained"];
  EXPECT_TRUE(range["rank"].is_null());
  EXPECT_TRUE(range["inertia"].is_null());
  EXPECT_EQ(range["negative_range"], Json::parse("[0,1]"));
  EXPECT_EQ(known["rank_level"], "statistical");
  EXPECT_EQ(known["rank_failure_probability"], 6e-7);
  EXPECT_EQ(range["rank_level"], "none");
  EXPECT_EQ(range["inertia_level"], "proved");
  EXPECT_TRUE(range["inertia_failure_probability"].is_null());
}

TEST(Json, AWitnessIsGivenWhole) {
  const Json document = document_of(samples::indefinite());
  EXPECT_EQ(document["witness"]["x"], Json::parse("[0.5,0.0,-0.25]"));
  EXPECT_EQ(document["witness"]["quadratic_form"], -3.5e-4);
  EXPECT_TRUE(document["witness"]["path"].is_null());
  Outcome in_a_file = samples::indefinite();
  in_a_file.check->witness->path = "x.csv";
  EXPECT_EQ(document_of(in_a_file)["witness"]["path"], "x.csv");
  EXPECT_TRUE(document_of(in_a_file)["witness"]["x"].is_null());
  EXPECT_EQ(document["risk"], 1e-6);
  EXPECT_EQ(document["risk_allowed"], 1e-5);
  EXPECT_TRUE(document_of(samples::definite())["witness"].is_null());
}

TEST(Json, CountsStayInTheOrderAsked) {
  const Json counts = document_of(samples::counted_in_part())["counts"];
  ASSERT_EQ(counts.size(), 3U);
  EXPECT_EQ(counts[0]["shift"], 1.5);
  EXPECT_EQ(counts[0]["below"], 0);
  EXPECT_EQ(counts[1]["shift"], -2.25);
  EXPECT_TRUE(counts[1]["below"].is_null());
  EXPECT_EQ(counts[1]["level"], "none");
  EXPECT_EQ(counts[1]["below_range"], Json::parse("[2,4]"));
  EXPECT_TRUE(counts[1]["holds_outside"].is_null());
  EXPECT_EQ(counts[2]["holds_outside"].size(), 2U);
}

TEST(Json, NumbersReadBackToTheSameBits) {
  for (const double number :
       {0.1, 1.0 / 3, 5e-324, 1.7976931348623157e308, -2.2250738585072014e-308, 123456789.0}) {
    Outcome outcome = samples::counted();
    outcome.count->counts[0].shift = number;
    EXPECT_EQ(document_of(outcome)["counts"][0]["shift"].get<double>(), number);
  }
  Outcome large = samples::forecast();
  large.forecast->factor_entries = (Offset{1} << 53) + 1;
  EXPECT_EQ(document_of(large)["forecast"]["factor_entries"].get<Offset>(), (Offset{1} << 53) + 1);
}

TEST(Json, NoNumberIsNotANumber) {
  Outcome outcome = samples::definite();
  outcome.check->certificate.error_bound = std::numeric_limits<double>::infinity();
  outcome.check->certificate.resolution = std::numeric_limits<double>::quiet_NaN();
  const std::string text = to_json(outcome);
  EXPECT_EQ(text.find("nan"), std::string::npos);
  EXPECT_EQ(text.find("inf"), std::string::npos);
  EXPECT_TRUE(Json::parse(text)["certificate"]["error_bound"].is_null());
  EXPECT_TRUE(Json::parse(text)["certificate"]["resolution"].is_null());
}

TEST(Json, PathsThatAreNoTextStillGiveADocument) {
  Outcome outcome = samples::definite();
  outcome.inputs[0].path = "K\xff\xfe.mtx";
  outcome.title = "line\nbreak \"and\" quotes";
  const Json document = document_of(outcome);
  EXPECT_EQ(document["title"], "line\nbreak \"and\" quotes");
  EXPECT_EQ(document["inputs"]["stiffness"]["path"].get<std::string>().substr(0, 1), "K");
}

TEST(Json, SameOutcomeSameBytes) {
  EXPECT_EQ(to_json(samples::counted()), to_json(samples::counted()));
}

}  // namespace
}  // namespace stanchion
