// Charts of an audit and of a load path: each stretch and step is there, told apart by shape and words.
#include "report/answer_svg.hpp"

#include <gtest/gtest.h>

#include <regex>
#include <string>

#include "report/html.hpp"
#include "report/text.hpp"

namespace stanchion {
namespace {

int many(const std::string& text, const std::string& part) {
  int count = 0;
  for (std::size_t at = text.find(part); at != std::string::npos; at = text.find(part, at + 1)) ++count;
  return count;
}

/// Listed 1, 2, 4, 6 of 0 to 7; counted one more between 2.5 and 3.5 and none about 6.
Outcome audited() {
  Outcome outcome;
  outcome.command = "audit";
  AuditOutcome& audit = outcome.audit.emplace();
  audit.verdict = AuditVerdict::kMissingAndSurplus;
  audit.values = {1, 2, 4, 6};
  audit.listed = 4;
  audit.range = {0, 7.0000000123456789, 4, Level::kProved, std::nullopt};
  audit.gaps = {{2.5000000123, 3.4999999991, 0, 1, {}}, {5.1234567890123456, 6.9, 1, 0, {"ghost"}}};
  return outcome;
}

Outcome path_of(std::vector<Inertia> steps) {
  Outcome outcome;
  outcome.command = "check";
  PathOutcome& path = outcome.path.emplace();
  for (const Inertia& inertia : steps) {
    PathStep step;
    step.path = "K" + std::to_string(path.steps.size() + 1) + ".mtx";
    step.inertia = inertia;
    path.steps.push_back(step);
    const auto number = static_cast<Index>(path.steps.size());
    if (!path.first_negative && inertia.negative > 0) path.first_negative = number;
    if (!path.first_not_definite && inertia.negative + inertia.zero + inertia.undecided > 0)
      path.first_not_definite = number;
  }
  return outcome;
}

TEST(AuditSvg, MissingAndSurplusDifferInShapeAndWords) {
  const std::string svg = audit_svg(audited());
  EXPECT_EQ(many(svg, "class=\"c-more\""), 1);
  EXPECT_EQ(many(svg, "class=\"c-fewer\""), 1);
  EXPECT_EQ(many(svg, "class=\"c-wrong\""), 1) << "a cross for the value that does not exist";
  EXPECT_EQ(many(svg, ">listed: "), 4);
  EXPECT_EQ(many(svg, "as many are counted as are listed"), 3);
  EXPECT_NE(svg.find(">1 missing</text>"), std::string::npos);
  EXPECT_NE(svg.find(">1 surplus</text>"), std::string::npos);
  EXPECT_EQ(svg.find("complete"), std::string::npos);
  EXPECT_NE(to_html(audited(), false, false).find(svg), std::string::npos);
}

TEST(AuditSvg, AStretchLiesWhereItsEndsAre) {
  const std::string svg = audit_svg(audited());
  std::smatch found;
  ASSERT_TRUE(std::regex_search(
      svg, found, std::regex("class=\"c-more\" x=\"([0-9.]+)\" y=\"[0-9.]+\" width=\"([0-9.]+)\"")));
  const double left = std::stod(found[1]), right = left + std::stod(found[2]);
  std::vector<double> listed;
  const std::regex disc("class=\"s-point\" transform=\"translate\\(([0-9.]+)");
  for (auto at = std::sregex_iterator(svg.begin(), svg.end(), disc); at != std::sregex_iterator(); ++at)
    listed.push_back(std::stod((*at)[1]));
  ASSERT_EQ(listed.size(), 3U);
  // 2.5 is halfway from 1 to 4, and 3.5 five sixths.
  EXPECT_NEAR(left, (listed[0] + listed[2]) / 2, 0.2);
  EXPECT_NEAR(right, listed[0] + (listed[2] - listed[0]) * 5 / 6, 0.2);
}

TEST(AuditSvg, ACompleteListSaysSo) {
  Outcome outcome = audited();
  outcome.audit->verdict = AuditVerdict::kComplete;
  outcome.audit->gaps.clear();
  const std::string svg = audit_svg(outcome);
  EXPECT_NE(svg.find("complete: 4 listed, 4 counted"), std::string::npos);
  EXPECT_EQ(many(svg, "class=\"c-more\"") + many(svg, "class=\"c-fewer\"") + many(svg, "class=\"c-wrong\""),
            0);
  outcome.audit->verdict = AuditVerdict::kUnresolved;
  outcome.audit->range.count.reset();
  const std::string open = audit_svg(outcome);
  EXPECT_EQ(open.find("complete"), std::string::npos);
  EXPECT_NE(open.find("could not be judged"), std::string::npos);
}

TEST(AuditText, EndsAreThoseCountedAtDigitForDigit) {
  const std::string text = to_text(audited());
  EXPECT_NE(text.find("and 7.000000012345679, 4 counted"), std::string::npos) << text;
  EXPECT_NE(text.find("  2.5000000123  3.4999999991 "), std::string::npos) << text;
  EXPECT_NE(text.find("  5.123456789012345           6.9 "), std::string::npos) << text;
}

TEST(PathSvg, NegativeZeroAndUndecidedDiffer) {
  const std::string svg =
      path_svg(path_of({{0, 0, 9, 0}, {0, 2, 7, 0}, {1, 0, 8, 0}, {1, 0, 8, 0}, {0, 0, 0, 9}}));
  EXPECT_EQ(many(svg, "class=\"s-point\""), 4);
  EXPECT_EQ(many(svg, "class=\"c-found\""), 1) << "one square: the step with zero directions";
  EXPECT_EQ(many(svg, "class=\"c-open\""), 1);
  EXPECT_EQ(many(svg, "class=\"c-more\""), 1) << "one change of the number of negative directions";
  EXPECT_EQ(many(svg, "class=\"s-step\""), 2);
  EXPECT_NE(svg.find("first negative direction: step 3"), std::string::npos);
  EXPECT_NE(svg.find("not positive definite: step 2"), std::string::npos);
}

TEST(PathSvg, AllDefiniteSaysSo) {
  const std::string svg = path_svg(path_of({{0, 0, 9, 0}, {0, 0, 9, 0}}));
  EXPECT_NE(svg.find("all 2 steps are positive definite"), std::string::npos);
  EXPECT_EQ(svg.find("first negative"), std::string::npos);
  EXPECT_EQ(path_svg(path_of({{0, 0, 9, 0}})), "");
  EXPECT_EQ(path_svg({}), "");
}

}  // namespace
}  // namespace stanchion
