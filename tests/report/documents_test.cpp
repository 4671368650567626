// HTML, CSV, JUnit XML, VTU: they say what the text says; golden files hold them word for word.
#include <gtest/gtest.h>

#include <cmath>
#include <cstdlib>
#include <fstream>
#include <sstream>

#include "model/numbers.hpp"
#include "report/csv_report.hpp"
#include "report/html.hpp"
#include "report/html_frame.hpp"
#include "report/junit.hpp"
#include "report/markup.hpp"
#include "report/model_view.hpp"
#include "report/refusal.hpp"
#include "report/samples.hpp"
#include "report/text.hpp"
#include "report/vtu.hpp"

namespace stanchion {
namespace {

/// The golden file of that name, or with STANCHION_UPDATE_GOLDEN set: writes it.
void expect_golden(const std::string& name, const std::string& text) {
  const std::string path = std::string(STANCHION_GOLDEN) + "/" + name;
  if (std::getenv("STANCHION_UPDATE_GOLDEN") != nullptr) std::ofstream(path, std::ios::binary) << text;
  std::ifstream file(path, std::ios::binary);
  std::stringstream golden;
  golden << file.rdbuf();
  EXPECT_EQ(text, golden.str()) << "if the change is meant: STANCHION_UPDATE_GOLDEN=1 " << path;
}

Outcome drawn() {
  Outcome outcome = samples::located();
  Picture& picture = outcome.located->picture;
  picture.node = {4411, 4412, 4413, 4414};
  picture.place = {{0, 0, 0}, {1, 0, 0}, {1, 1, 0}, {0, 0, 1}};
  picture.links = {{0, 1}, {1, 2}};
  picture.component = {1, 1, 1, 0};
  LocateOutcome& located = *outcome.located;
  located.accuracy = samples::nothing_located().located->accuracy;
  located.accuracy->by_node = {1.5F, 9.2F, -1, 3};
  located.accuracy->held_directions = 8;
  located.accuracy->held = {{4411, "ux", 5, 0}};
  located.accuracy_note =
      "8 zero directions are held for this, each at one equation that it moves: along a zero direction no "
      "digit "
      "is left, and the figures are those of the structure so held.";
  outcome.tables = {{"dofs", "model/dofs.csv", std::string(64, 'd')},
                    {"nodes", "model/nodes.csv", std::string(64, 'e')}};
  outcome.located->directions[1].shape = {{1, 0, 0}, {1, 0, 0}, {1, 0, 0}, {0, 0, 0}};
  return outcome;
}

TEST(Documents, GoldenFilesHold) {
  const Outcome outcome = drawn();
  expect_golden("located.txt", to_text(outcome));
  expect_golden("located.csv", to_csv(outcome));
  expect_golden("located.xml", to_junit(outcome, false, true));
  expect_golden("located.vtu", to_vtu(*outcome.located));
  expect_golden("located.html", to_html(outcome, false, true));
}

TEST(Html, EverySampleMakesAPageThatLoadsNothing) {
  for (const auto& [name, outcome] : samples::all()) {
    SCOPED_TRACE(name);
    const std::string page = to_html(outcome, true, false);
    EXPECT_EQ(page.rfind("<!DOCTYPE html>", 0), 0U);
    for (const char* forbidden :
         {"<script", "http:", "https:", "<link", "@import", "url(", "<img", "<iframe"}) {
      EXPECT_EQ(page.find(forbidden), std::string::npos) << forbidden;
    }
    EXPECT_NE(page.find("Not checked"), std::string::npos);
  }
}

TEST(Html, SaysVerdictRiskDigitsAndCausesInTheWordsOfTheText) {
  Outcome outcome = drawn();
  outcome.digits = 8;
  outcome.risk = 1e-6;
  outcome.risk_allowed = 1e-5;
  const std::string page = to_html(outcome, false, true);
  EXPECT_NE(page.find("K is indefinite: 1\xC2\xA0negative direction, 8\xC2\xA0zero directions"),
            std::string::npos);
  const auto number = [](const std::string& text) { return "<span class=\"num\">" + text + "</span>"; };
  EXPECT_NE(page.find("at most " + number("1e-06") + " (allowed: " + number("1e-05") + ")"),
            std::string::npos);
  EXPECT_NE(page.find("count to 8 decimal digits"), std::string::npos);
  for (const Direction& direction : outcome.located->directions) {
    EXPECT_NE(page.find(direction.explanation), std::string::npos);
    EXPECT_NE(page.find(direction.remedy), std::string::npos);
  }
  EXPECT_NE(page.find("4411 ux"), std::string::npos);
}

TEST(Html, WhatTheUserWroteIsEscaped) {
  Outcome outcome = samples::definite();
  outcome.title = "<script>alert('1')</script> & \"more\"";
  outcome.inputs[0].path = "a<b>.mtx";
  const std::string page = to_html(outcome, true, false);
  EXPECT_EQ(page.find("<script>"), std::string::npos);
  EXPECT_NE(page.find("&lt;script&gt;alert(&#39;1&#39;)&lt;/script&gt; &amp; &quot;more&quot;"),
            std::string::npos);
  EXPECT_NE(page.find("a&lt;b&gt;.mtx"), std::string::npos);
}

Refusal refused(Status why) {
  return {"check", {"check", "a b.mtx"}, std::nullopt, std::nullopt, {{"stiffness", "a<b>.mtx", ""}}, why, 2};
}

TEST(Refusal, PageAndSuiteEscapeWhatOthersWrote) {
  const Refusal refusal =
      refused(Status::bad_input("bad-entry", "'<b>' is no number", "a<b>.mtx:4", "x & y"));
  for (const std::string& text : {refusal_to_html(refusal), refusal_to_junit(refusal)}) {
    EXPECT_EQ(text.find("<b>"), std::string::npos);
    for (const char* part :
         {"&#39;&lt;b&gt;&#39; is no number", "a&lt;b&gt;.mtx:4", "x &amp; y", "bad-entry"})
      EXPECT_NE(text.find(part), std::string::npos) << part;
  }
  EXPECT_NE(refusal_to_html(refusal).find("<code>stanchion check &#39;a b.mtx&#39;</code>"),
            std::string::npos);
}

TEST(Refusal, SaysWhatKindOfEndItWas) {
  for (const auto& [why, words] :
       {std::pair{Status::bad_usage("c", "m", "p", "r"), "The question was refused as typed."},
        std::pair{Status::bad_input("c", "m", "p", "r"), "The input was refused."},
        std::pair{Status::resource_limit("c", "m", "p", "r"),
                  "A limit was reached before there was an answer."},
        std::pair{Status::interrupted(), "The run was stopped before there was an answer."},
        std::pair{Status::internal("m"), "The program failed."}}) {
    const std::string page = refusal_to_html(refused(why));
    EXPECT_NE(page.find(words), std::string::npos) << words;
    EXPECT_NE(page.find("Nothing was counted, and nothing is certified."), std::string::npos);
  }
}

TEST(Markup, BadBytesAreReplaced) {
  EXPECT_EQ(escaped("a\x01z"), "a\xEF\xBF\xBDz");
  EXPECT_EQ(escaped("\xC3\xA9"), "\xC3\xA9");
  EXPECT_EQ(escaped("\xC3("), "\xEF\xBF\xBD(");
  EXPECT_EQ(escaped("\xED\xA0\x80"), "\xEF\xBF\xBD\xEF\xBF\xBD\xEF\xBF\xBD");
}

TEST(Markup, NumbersWithAnExponentStayOnOneLine) {
  EXPECT_EQ(flowing("at 1.33e-09. <6>"), "at <span class=\"num\">1.33e-09</span>. &lt;6&gt;");
  EXPECT_EQ(flowing("2e-5"), "<span class=\"num\">2e-5</span>");
  EXPECT_EQ(flowing("1e+10, e-9, 3e-, file-7.mtx & more"), "1e+10, e-9, 3e-, file-7.mtx &amp; more");
}

TEST(Markup, NumbersStayWithWhatTheyCountInAHeadline) {
  EXPECT_EQ(headline("1 negative direction, 6 zero ones"), "1\xC2\xA0negative direction, 6\xC2\xA0zero ones");
  EXPECT_EQ(headline("between 0 and 1.9, 4 counted (node 12, ux)"),
            "between 0 and 1.9, 4\xC2\xA0"
            "counted (node\xC2\xA0"
            "12, ux)");
  EXPECT_EQ(headline("Step 3 (a/b.mtx) is <6 1e-9"),
            "Step 3 (a/<wbr>b.mtx) is &lt;6 <span class=\"num\">1e-9</span>");
  EXPECT_EQ(headline(""), "");
  EXPECT_EQ(headline("a  b <3 "), "a  b &lt;3 ");
}

TEST(Markup, CommandsCanBePastedIntoAShell) {
  const auto code = [](const std::string& words) { return "<code>stanchion " + words + "</code>"; };
  EXPECT_EQ(command_to_html({"check", "a/K-1.mtx"}), code("check a/K-1.mtx"));
  EXPECT_EQ(command_to_html({"it's", "", "a b", "#1", "~x", "a\\b"}),
            code("&#39;it&#39;\\&#39;&#39;s&#39; &#39;&#39; &#39;a b&#39; &#39;#1&#39; &#39;~x&#39; "
                 "&#39;a\\b&#39;"));
}

TEST(Csv, FieldsAreQuotedAsRfc4180Asks) {
  Outcome outcome = samples::located();
  outcome.located->directions[0].explanation = "one, \"two\"\nthree";
  EXPECT_NE(to_csv(outcome).find("\"one, \"\"two\"\"\nthree\""), std::string::npos);
}

TEST(Csv, ACountThatIsKnownAsARangeHasBothEnds) {
  const Outcome outcome = samples::counted_in_part();
  const std::string table = to_csv(outcome);
  bool open = false;
  for (const ShiftCount& count : outcome.count->counts) {
    const auto [least, most] = count.below_range;
    open = open || least < most;
    const std::string item = "counts," + exact(count.shift);
    EXPECT_NE(table.find(item + ",least," + std::to_string(least) + "\n"), std::string::npos) << table;
    EXPECT_NE(table.find(item + ",most," + std::to_string(most) + "\n"), std::string::npos) << table;
    EXPECT_EQ(table.find(item + ",below,") != std::string::npos, count.below.has_value()) << table;
  }
  EXPECT_TRUE(open);
}

TEST(Junit, AnswersGoodNotGoodAndOpenDiffer) {
  EXPECT_NE(to_junit(samples::definite(), true, false).find("failures=\"0\" errors=\"0\""),
            std::string::npos);
  EXPECT_NE(to_junit(samples::indefinite(), false, false).find("failures=\"1\" errors=\"0\""),
            std::string::npos);
  EXPECT_NE(to_junit(samples::counted_in_part(), false, true).find("failures=\"0\" errors=\"2\""),
            std::string::npos);
  EXPECT_NE(to_junit(samples::located(), false, true).find("failures=\"2\" errors=\"2\""), std::string::npos);
}

double dot(const std::array<double, 3>& a, const std::array<double, 3>& b) {
  return a[0] * b[0] + a[1] * b[1] + a[2] * b[2];
}

TEST(ModelView, AViewShowsTheMotionAndIsOrthonormal) {
  Picture picture;
  for (int i = 0; i < 27; ++i) {
    picture.node.push_back(i);
    picture.place.push_back(
        {static_cast<double>(i % 3), static_cast<double>(i / 3 % 3), static_cast<double>(i / 9)});
    picture.component.push_back(0);
  }
  for (std::size_t d = 0; d < 3; ++d) {
    std::vector<std::array<float, 3>> shape(27, {0, 0, 0});
    for (auto& u : shape) u[d] = 1;
    const ViewAxes view = best_view(picture, shape);
    EXPECT_NEAR(dot(view.right, view.right), 1, 1e-12);
    EXPECT_NEAR(dot(view.up, view.up), 1, 1e-12);
    EXPECT_NEAR(dot(view.right, view.up), 0, 1e-12);
    EXPECT_NEAR(dot(view.right, view.toward), 0, 1e-12);
    // Of a unit motion along d at least nine tenths lie in the page.
    EXPECT_LT(std::fabs(view.toward[d]), 0.44) << d;
  }
}

TEST(ModelView, AMillionNodesGiveADrawingOfABrowsersSize) {
  Picture picture;
  std::vector<std::array<float, 3>> shape;
  for (int i = 0; i < 1000000; ++i) {
    picture.node.push_back(i);
    picture.place.push_back({i % 100 * 1.0, i / 100 % 100 * 1.0, i / 10000 * 1.0});
    shape.push_back({0, 0, i > 900000 ? 1.0F : 0.0F});
  }
  picture.component.assign(1000000, 0);
  const ModelDrawing drawing = draw_model(picture, shape, {{999999, "999999 uz"}});
  EXPECT_LT(drawing.overview.size() + drawing.close_up.size(), 1500000U);
  EXPECT_GT(drawing.drawn, 1000U);
  EXPECT_EQ(drawing.drawn + drawing.left_out, 1000000U);
}

}  // namespace
}  // namespace stanchion
