// The small files that go with a specimen.
#include "specimen/specimen_text.hpp"

#include <gtest/gtest.h>

#include <cstdlib>
#include <nlohmann/json.hpp>
#include <sstream>

namespace stanchion {
namespace {

std::vector<std::string> lines_of(const std::string& text) {
  std::istringstream in(text);
  std::vector<std::string> lines;
  for (std::string line; std::getline(in, line);) lines.push_back(line);
  return lines;
}

TEST(SpecimenText, DofsNameEveryEquation) {
  const auto specimen = make_specimen("plate", 200);
  const auto lines = lines_of(dofs_csv(*specimen));
  ASSERT_EQ(lines.size(), static_cast<std::size_t>(specimen->stiffness.rows) + 1);
  EXPECT_EQ(lines[0], "equation,node,dof");
  EXPECT_EQ(lines[1], "1,2,uy");
}

TEST(SpecimenText, NodesReadBackToTheSameBits) {
  const auto specimen = make_specimen("solid", 300);
  const auto lines = lines_of(nodes_csv(*specimen));
  ASSERT_EQ(lines.size(), specimen->nodes.size() + 1);
  EXPECT_EQ(lines[0], "node,x,y,z");
  for (std::size_t i = 0; i < specimen->nodes.size(); ++i) {
    std::istringstream fields(lines[i + 1]);
    std::string node, x, y, z;
    std::getline(fields, node, ','), std::getline(fields, x, ','), std::getline(fields, y, ','),
        std::getline(fields, z);
    EXPECT_EQ(std::stoul(node), i + 1);
    EXPECT_EQ(std::strtod(x.c_str(), nullptr), specimen->nodes[i].x);
    EXPECT_EQ(std::strtod(z.c_str(), nullptr), specimen->nodes[i].z);
  }
}

TEST(SpecimenText, MultipliersAreTheLastEquations) {
  const auto specimen = make_specimen("saddle", 300);
  const auto lines = lines_of(multipliers_text(*specimen));
  ASSERT_EQ(lines.size(), specimen->multipliers.size() + 1);
  EXPECT_EQ(lines[0], "equation");
  EXPECT_EQ(lines.back(), std::to_string(specimen->stiffness.rows));
  EXPECT_TRUE(multipliers_text(*make_specimen("solid", 300)).empty());
}

TEST(SpecimenText, ExpectedIsJsonWithTheFactsAndTheirReasons) {
  for (const SpecimenEntry& entry : specimen_list()) {
    const auto specimen = make_specimen(entry.name, 300);
    const auto json = nlohmann::json::parse(expected_json(*specimen));
    EXPECT_EQ(json["specimen"], entry.name);
    EXPECT_EQ(json["rows"], specimen->stiffness.rows);
    const auto& inertia = json["inertia"];
    EXPECT_EQ(
        inertia["negative"].get<Index>() + inertia["zero"].get<Index>() + inertia["positive"].get<Index>(),
        specimen->stiffness.rows);
    EXPECT_FALSE(inertia["why"].get<std::string>().empty());
    EXPECT_EQ(json.contains("constrained"), !specimen->multipliers.empty());
    ASSERT_EQ(json["counts"].size(), specimen->expected.counts.size());
    for (std::size_t i = 0; i < specimen->expected.counts.size(); ++i) {
      EXPECT_EQ(json["counts"][i]["shift"].get<double>(), specimen->expected.counts[i].shift);
    }
  }
}

}  // namespace
}  // namespace stanchion
