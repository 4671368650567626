#include "report/text.hpp"

#include <gtest/gtest.h>

#include <sstream>

#include "report/page.hpp"
#include "report/samples.hpp"

namespace stanchion {
namespace {

std::string first_line(const Outcome& outcome) {
  const std::string text = to_text(outcome);
  return text.substr(0, text.find('\n'));
}

bool says(const Outcome& outcome, const std::string& words) {
  return to_text(outcome).find(words) != std::string::npos;
}

TEST(Text, TheVerdictComesFirst) {
  Outcome definite = samples::definite();
  definite.title.reset();
  definite.reference.reset();
  EXPECT_EQ(
      first_line(definite),
      "The sum of K and 2 added matrices is positive definite: no negative and no zero direction in 29,796");
  definite.inputs.resize(1);
  EXPECT_EQ(first_line(definite),
            "K is positive definite: no negative and no zero direction in 29,796 equations.");
  EXPECT_EQ(first_line(samples::semidefinite()),
            "K is positive semidefinite at the resolution 1e-11: 6 zero directions, no negative one.");
  EXPECT_EQ(first_line(samples::indefinite()), "K is indefinite: 2 negative directions, no zero direction.");
  EXPECT_EQ(first_line(samples::unresolved()), "Unresolved: the sign of 1 direction could not be certified.");
  EXPECT_EQ(first_line(samples::counted()), "All 3 counts are certified: critical factors between 0 and f.");
  EXPECT_EQ(first_line(samples::counted_in_part()),
            "Not every count could be certified: critical factors between 0 and f.");
  EXPECT_EQ(first_line(samples::forecast()), "One count will take about 0.42 s and 12 MB of memory.");
  EXPECT_TRUE(says(samples::forecast(), "one factorization of 0.42 s; 1.3 s if that does not settle it"));
  EXPECT_TRUE(says(samples::forecast(), "25 Gflop/s a thread in large fronts"));
}

TEST(Text, TitleAndReferenceStandAboveIt) {
  EXPECT_EQ(first_line(samples::definite()), "Lock footbridge, span 2");
  EXPECT_TRUE(says(samples::definite(), "Reference: sheet 14\n"));
}

TEST(Text, NoLineIsWiderThanThePageAndNoneEndsInBlanks) {
  for (const auto& [name, outcome] : samples::all()) {
    std::istringstream lines(to_text(outcome));
    std::string line;
    while (std::getline(lines, line)) {
      EXPECT_LE(line.size(), Page::kWidth) << name << ": " << line;
      EXPECT_TRUE(line.empty() || line.back() != ' ') << name << ": " << line;
    }
  }
}

TEST(Text, SaysWhatBacksTheVerdict) {
  EXPECT_TRUE(
      says(samples::definite(), "proof, from one factorization shifted off zero, in double precision"));
  EXPECT_TRUE(says(samples::definite(), "offset +1e-11: 0 below, rounding errors at most 3.4e-13"));
  EXPECT_TRUE(says(samples::indefinite(), "statistics (wrong with probability at most 1e-06)"));
  EXPECT_TRUE(says(samples::indefinite(), "the random vectors are independent of the matrix"));
  EXPECT_TRUE(says(samples::unresolved(), "nothing: no certificate"));
  EXPECT_TRUE(
      says(samples::definite(), "For every matrix whose rounding gives the numbers in the file: positive"));
}

TEST(Text, NamesWhatWasNotCheckedAndEveryWarningWithItsPlace) {
  for (const auto& [name, outcome] : samples::all()) {
    EXPECT_TRUE(says(outcome, "\nNot checked\n")) << name;
  }
  EXPECT_TRUE(says(samples::semidefinite(),
                   "  - bridge/K.mtx:17: 3 entries of the same place were summed [duplicate-entries]\n"));
  EXPECT_FALSE(says(samples::definite(), "Warning"));
  EXPECT_TRUE(says(samples::semidefinite(), "12 equations held at zero"));
}

TEST(Text, CountsAreATable) {
  const std::string text = to_text(samples::counted());
  EXPECT_NE(text.find("  shift  count  margin  backed by\n"), std::string::npos);
  EXPECT_NE(text.find("  -2.25      3   1e-09  proof, from factors on both sides\n"), std::string::npos);
  EXPECT_TRUE(
      says(samples::counted_in_part(), "2 to 4       -  only the range; no certificate for one number"));
  EXPECT_TRUE(says(samples::counted(), "definite at every f in [0, 1.5]"));
}

TEST(Text, ACountWithoutAnyCertificateSaysSo) {
  Outcome outcome = samples::counted_in_part();
  outcome.count->counts[1].below_range = {0, outcome.rows_analysed};
  EXPECT_TRUE(says(outcome, "0 to 29,796       -  nothing: no certificate\n"));
}

TEST(Text, StatisticalCountsSayHowSureTheyAre) {
  Outcome outcome = samples::counted();
  ShiftCount& count = outcome.count->counts[2];
  count.level = Level::kStatistical;
  count.method = "relative";
  count.failure_probability = 2.5e-7;
  count.certificate.runs.clear();
  EXPECT_TRUE(says(outcome, "     12     17   1e-09  statistics, wrong with probability at most 2.5e-07\n"));
  EXPECT_TRUE(
      says(outcome, "\nStatistics: the factor was held against the matrix itself, on random vectors.\n"));
  EXPECT_FALSE(says(samples::counted(), "Statistics:"));
}

TEST(Text, OtherPrecisionsThanDoubleAreNamed) {
  Outcome outcome = samples::counted();
  outcome.count->counts[1].certificate.precision = "extended";
  EXPECT_TRUE(says(outcome, "1e-09  proof, from factors on both sides, in extended precision\n"));
}

TEST(Text, DifferentMeaningsGetAColumn) {
  Outcome outcome = samples::counted();
  outcome.count->counts[1].meaning = "critical factors between f and 0";
  EXPECT_EQ(first_line(outcome), "All 3 counts are certified.");
  EXPECT_TRUE(says(outcome, "  -2.25      3   1e-09  proof, from factors on both sides  between f and 0\n"));
}

TEST(Text, ASingleCountIsASentence) {
  Outcome outcome = samples::counted();
  outcome.count->counts.resize(1);
  EXPECT_EQ(first_line(outcome), "At 1.5: 0 critical factors between 0 and f.");
}

TEST(Text, ConstraintsAreToldApart) {
  EXPECT_EQ(first_line(samples::constrained()),
            "On its constraints the structure is positive definite: no negative and no zero direction.");
  EXPECT_EQ(first_line(samples::constrained_range()),
            "On its constraints the structure has between 0 and 1 negative directions.");
  EXPECT_TRUE(says(samples::constrained(), "41 multipliers, 40 independent, 1 redundant"));
  EXPECT_TRUE(says(samples::constrained(), "redundant     the multipliers of equations 29790\n"));
  EXPECT_TRUE(
      says(samples::constrained(), "rank by       statistics (wrong with probability at most 6e-07)"));
  EXPECT_TRUE(says(samples::constrained_range(), "backed by     proof\n"));
  EXPECT_TRUE(says(samples::indefinite(), "x^T K x = -0.00035, 1e-12 at most off"));
  EXPECT_TRUE(says(samples::constrained(), "0 negative, 0 zero, 29,715 positive"));
  EXPECT_TRUE(
      says(samples::constrained_range(), "between 0 and 1: the rank of the constraints is not certified"));
}

}  // namespace
}  // namespace stanchion
