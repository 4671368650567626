// Labels of the drawings of planted faults: inside the frame, none on another, none on a ring around a node.
// The boxes are worked out here from the page as written, by the advances of DejaVu Sans (as its files have
// them), the widest of the faces that the page names.
#include <gtest/gtest.h>

#include <algorithm>
#include <map>
#include <ostream>
#include <regex>
#include <string>
#include <vector>

#include "diagnose/combination.hpp"
#include "report/html.hpp"
#include "report/label_layout.hpp"

namespace stanchion {
namespace {

using namespace test;

struct Rectangle {
  double left, top, right, bottom;
  std::string text;
};

double ems(const std::string& text, bool bold) {
  static const std::map<char, double> plain{
      {' ', .318}, {',', .318}, {'.', .318}, {'i', .278}, {'l', .278}, {'t', .392}, {'r', .411},
      {'f', .352}, {'m', .974}, {'x', .592}, {'y', .592}, {'z', .525}, {'s', .521}, {'c', .55},
      {'n', .634}, {'u', .634}, {'h', .634}, {'d', .635}, {'o', .612}, {'e', .615}, {'p', .635}};
  double sum = 0;
  for (const char c : text) {
    const auto at = plain.find(c);
    sum += (static_cast<unsigned char>(c) & 0xC0) == 0x80 ? 0 : at == plain.end() ? .636 : at->second;
  }
  return sum * (bold ? 1.094 : 1);  // digits of the bold face: .696
}

struct Drawing {
  double width = 0, height = 0;
  std::vector<Rectangle> texts, rings;
};

double number_in(const std::string& element, const std::string& name) {
  const std::size_t at = element.find(" " + name + "=\"");
  return at == std::string::npos ? 0 : std::stod(element.substr(at + name.size() + 3));
}

/// What one picture of a node cloud shows; `narrow` as a telephone shows the overview.
Drawing drawing_of(const std::string& svg, bool narrow) {
  Drawing drawing;
  std::smatch found;
  if (!std::regex_search(svg, found, std::regex("viewBox=\"0 0 (\\d+) (\\d+)\""))) return drawing;
  drawing.width = std::stod(found[1]);
  drawing.height = std::stod(found[2]);
  const bool overview = drawing.width > 500;
  const std::regex circle("<circle class=\"v-ring\"[^>]*>"), text("<(text|g)([^>]*)>([^<]*)");
  for (auto at = std::sregex_iterator(svg.begin(), svg.end(), circle); at != std::sregex_iterator(); ++at) {
    const std::string element = at->str();
    const double x = number_in(element, "cx"), y = number_in(element, "cy"), r = number_in(element, "r");
    drawing.rings.push_back({x - r, y - r, x + r, y + r, "ring"});
  }
  double size_in_group = 0;
  for (auto at = std::sregex_iterator(svg.begin(), svg.end(), text); at != std::sregex_iterator(); ++at) {
    const std::string element = (*at)[2], words = (*at)[3];
    if ((*at)[1] == "g") {
      size_in_group = narrow && overview ? 18 : 11;
      continue;
    }
    const bool label = element.find("v-label") != std::string::npos,
               number = element.find("v-number") != std::string::npos;
    const double size = label ? (narrow && overview ? 20 : 13) : number ? 13 : size_in_group;
    const double x = number_in(element, "x"), y = number_in(element, "y"), width = size * ems(words, label);
    const double left = element.find("\"end\"") != std::string::npos      ? x - width
                        : element.find("\"middle\"") != std::string::npos ? x - width / 2
                                                                          : x;
    drawing.texts.push_back({left, y - 0.73 * size, left + width, y + 0.05 * size, words});
  }
  return drawing;
}

bool meet(const Rectangle& a, const Rectangle& b) {
  return a.left < b.right && b.left < a.right && a.top < b.bottom && b.top < a.bottom;
}

std::string said(const Rectangle& r) {
  char text[200];
  std::snprintf(text, sizeof(text), "\"%s\" at %.0f..%.0f, %.0f..%.0f", r.text.c_str(), r.left, r.right,
                r.top, r.bottom);
  return text;
}

std::vector<std::string> faults_of(const Drawing& drawing) {
  std::vector<std::string> faults;
  for (std::size_t k = 0; k < drawing.texts.size(); ++k) {
    const Rectangle& one = drawing.texts[k];
    if (one.left < 0 || one.top < 0 || one.right > drawing.width || one.bottom > drawing.height)
      faults.push_back("outside: " + said(one));
    for (std::size_t j = 0; j < k; ++j) {
      if (meet(one, drawing.texts[j]))
        faults.push_back("on another: " + said(one) + ", " + said(drawing.texts[j]));
    }
    for (const Rectangle& ring : drawing.rings) {
      if (meet(one, ring)) faults.push_back("on a ring: " + said(one));
    }
  }
  return faults;
}

std::vector<std::string> drawings_in(const std::string& page) {
  std::vector<std::string> all;
  for (std::size_t at = page.find("<svg class=\"view\""); at != std::string::npos;
       at = page.find("<svg class=\"view\"", at + 1))
    all.push_back(page.substr(at, page.find("</svg>", at) - at));
  return all;
}

void expect_legible(const Outcome& outcome, std::size_t least_causes) {
  ASSERT_TRUE(outcome.located);
  EXPECT_GE(outcome.located->directions.size(), least_causes);
  const auto drawings = drawings_in(to_html(outcome, false, false));
  EXPECT_GE(drawings.size(), 2 * least_causes);
  std::size_t named = 0;
  for (const std::string& svg : drawings) {
    for (const bool narrow : {false, true}) {
      const Drawing drawing = drawing_of(svg, narrow);
      for (const std::string& fault : faults_of(drawing))
        ADD_FAILURE() << (narrow ? "narrow, " : "") << fault;
      named += drawing.rings.size();
    }
    // Every node with a ring has its name beside it.
    const auto count = [&svg](const std::string& part) {
      std::size_t many = 0;
      for (std::size_t at = svg.find(part); at != std::string::npos; at = svg.find(part, at + 1)) ++many;
      return many;
    };
    EXPECT_EQ(count("v-ring"), count("class=\"v-label\"")) << svg;
  }
  EXPECT_GE(named, 2 * least_causes);
}

struct LabelCase {
  const char* name;
  const char* dof;
};

void PrintTo(const LabelCase& given, std::ostream* out) {
  *out << given.name;
}

class DrawingLabels : public testing::TestWithParam<LabelCase> {};

/// Springs that push along, at nodes spread over the model and at some next to one another.
TEST_P(DrawingLabels, OfOneToTwelveCausesAreApart) {
  for (const std::size_t causes : {1U, 2U, 5U, 12U}) {
    SCOPED_TRACE(causes);
    PlantedModel model;
    model.append(specimen_with(GetParam().name, 900, Fault::kNone), 123456, 0);
    std::vector<Index> having;
    for (Index e = 0; e < model.rows(); ++e) {
      if (model.dof[static_cast<std::size_t>(e)] == GetParam().dof) having.push_back(e);
    }
    for (std::size_t k = 0; k < causes; ++k) {
      const Index at = having[(2 * k + 1) * having.size() / (2 * causes)];
      model.entries.push_back({at, at, -4 * model.diagonal(at)});
    }
    expect_legible(located(model), causes == 1 ? 1 : 2);
  }
}

TEST_P(DrawingLabels, OfEveryPlantedFaultAreApart) {
  for (const Fault fault :
       {Fault::kFree, Fault::kLoosePart, Fault::kHinge, Fault::kSoftSpring, Fault::kNegativeSpring}) {
    if (!knows_fault(GetParam().name, fault)) continue;
    SCOPED_TRACE(static_cast<int>(fault));
    for (const Offset unknowns : {500, 2500}) {
      PlantedModel model;
      model.append(specimen_with(GetParam().name, unknowns, fault), 0, 0);
      expect_legible(located(model), 1);
    }
  }
}

TEST_P(DrawingLabels, OfAllFaultsAtOnceAreApart) {
  expect_legible(located(combination_of(GetParam().name, 600, 3).model), 3);
}

INSTANTIATE_TEST_SUITE_P(Specimens, DrawingLabels,
                         testing::Values(LabelCase{"cylinder", "uy"}, LabelCase{"plate", "uz"},
                                         LabelCase{"frame", "uz"}, LabelCase{"lattice", "uz"}),
                         [](const auto& given) { return std::string(given.param.name); });

TEST(DrawingLabelsTest, FindsWhatIsPlanted) {
  const std::string frame = "<svg class=\"view\" viewBox=\"0 0 640 432\">";
  const std::string label =
      "<text class=\"v-label\" x=\"100.0\" y=\"50.0\" text-anchor=\"start\">12345 ux</text>";
  EXPECT_EQ(faults_of(drawing_of(frame + label, false)).size(), 0U);
  EXPECT_EQ(faults_of(drawing_of(frame + label + label, false)).size(), 1U);
  EXPECT_EQ(
      faults_of(drawing_of(frame + std::regex_replace(label, std::regex("100.0"), "600.0"), false)).size(),
      1U);
  EXPECT_EQ(
      faults_of(drawing_of(frame + std::regex_replace(label, std::regex("start"), "end"), false)).size(), 0U);
  EXPECT_EQ(
      faults_of(drawing_of(frame + std::regex_replace(label, std::regex("100.0"), "50.0") + label, false))
          .size(),
      1U);
  EXPECT_EQ(
      faults_of(drawing_of(frame + label + "<circle class=\"v-ring\" cx=\"95\" cy=\"48\" r=\"7\"/>", false))
          .size(),
      1U);
  EXPECT_EQ(
      faults_of(drawing_of(frame + label + "<circle class=\"v-ring\" cx=\"90\" cy=\"48\" r=\"7\"/>", false))
          .size(),
      0U);
}

TEST(LabelLayout, WhatIsLongIsCutAtACharacter) {
  EXPECT_EQ(shortened("4411 ux", 200, 13, true), "4411 ux");
  const std::string cut = shortened("4411 pri\xC3\xA9t\xC3\xA9 \xE6\xB8\xAF\xE6\xB8\xAF", 80, 13, true);
  EXPECT_LE(text_width(cut, 13, true), 80);
  EXPECT_EQ(cut.substr(0, 5), "4411 ");
  EXPECT_EQ(cut.substr(cut.size() - 3), "\xE2\x80\xA6");
}

TEST(LabelLayout, NothingIsPlacedWhereThereIsNoRoom) {
  LabelLayout layout({0, 0, 100, 20});
  EXPECT_TRUE(layout.place_somewhere({10, 10}, 5, 60, 15));
  EXPECT_FALSE(layout.place_somewhere({80, 10}, 5, 60, 15));
}

TEST(LabelLayout, ALabelFarOffHasALineThatMeetsNoOther) {
  LabelLayout layout({0, 0, 200, 200});
  std::vector<PlacedLabel> placed;
  for (int k = 0; k < 12; ++k) {
    const auto label = layout.place({100.0 + k % 4, 100.0 + k / 4.0}, 3, 40, 14, 90);
    if (label) placed.push_back(*label);
  }
  ASSERT_GE(placed.size(), 8U);
  EXPECT_GE(std::count_if(placed.begin(), placed.end(), [](const PlacedLabel& one) { return one.led; }), 4);
  for (std::size_t k = 0; k < placed.size(); ++k) {
    for (std::size_t j = 0; j < k; ++j) EXPECT_FALSE(placed[k].box.meets(placed[j].box)) << k << " " << j;
  }
}

}  // namespace
}  // namespace stanchion
