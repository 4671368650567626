// The thinned node cloud: what is named stays, what is thinned is spread, and it fits in a browser.
#include <gtest/gtest.h>

#include <algorithm>
#include <array>
#include <cmath>
#include <nlohmann/json.hpp>
#include <set>

#include "report/model_reduction.hpp"
#include "report/view_json.hpp"

namespace stanchion {
namespace {

/// A block of nodes numbered from 1, unit apart, linked along x.
LocateOutcome block(int nx, int ny, int nz) {
  LocateOutcome located;
  for (int k = 0; k < nz; ++k) {
    for (int j = 0; j < ny; ++j) {
      for (int i = 0; i < nx; ++i) {
        const auto at = static_cast<Index>(located.picture.node.size());
        if (i > 0) located.picture.links.emplace_back(at - 1, at);
        located.picture.node.push_back(at + 1);
        located.picture.place.push_back({1.0 * i, 1.0 * j, 1.0 * k});
      }
    }
  }
  located.picture.component.assign(located.picture.node.size(), 0);
  return located;
}

Direction moving(const LocateOutcome& located, const std::vector<std::size_t>& nodes) {
  Direction direction;
  direction.cause = Cause::kMechanism;
  direction.shape.assign(located.picture.node.size(), {0, 0, 0});
  for (const std::size_t node : nodes) direction.shape[node] = {0, 0, 1};
  DofShare first;
  first.node = located.picture.node[nodes.front()];
  first.dof = "uz";
  direction.nodes = {first};
  return direction;
}

TEST(ModelReduction, SmallModelsStayWhole) {
  const LocateOutcome located = block(5, 4, 3);
  const ReducedModel model = reduce_model(located, 100, 100);
  EXPECT_EQ(model.kept.size(), 60U);
  EXPECT_EQ(model.links.size(), 48U);
  EXPECT_EQ(model.cell, 0);
  EXPECT_EQ(model.links_left_out, 0U);
}

TEST(ModelReduction, NothingToDrawIsNothing) {
  const ReducedModel model = reduce_model({}, 100, 100);
  EXPECT_TRUE(model.kept.empty());
  EXPECT_TRUE(model.links.empty());
}

TEST(ModelReduction, AMillionNodesKeepWhatIsNamedAndFillTheBox) {
  LocateOutcome located = block(100, 100, 100);
  located.picture.links.clear();
  // A single node inside moves; so does its neighbour, by itself.
  located.directions = {moving(located, {543210}), moving(located, {543211})};
  located.accuracy.emplace().by_node.assign(1000000, 2);
  located.accuracy->by_node[777777] = 13;
  const ReducedModel model = reduce_model(located, 16000, 40000);
  EXPECT_LE(model.kept.size(), 16000U);
  EXPECT_GE(model.kept.size(), 8000U);
  EXPECT_TRUE(std::is_sorted(model.kept.begin(), model.kept.end()));
  for (const std::size_t node : {543210U, 543211U, 777777U})
    EXPECT_TRUE(std::binary_search(model.kept.begin(), model.kept.end(), node)) << node;
  // Every node has one that is shown within the diagonal of a cube.
  EXPECT_GT(model.cell, 1);
  std::set<std::array<int, 3>> cubes;
  for (const std::size_t node : model.kept) {
    const auto& p = located.picture.place[node];
    std::array<int, 3> cube{};
    for (std::size_t d = 0; d < 3; ++d)
      cube[d] = static_cast<int>(std::min(p[d] / model.cell, 99 / model.cell - 1e-9));
    cubes.insert(cube);
  }
  const int side = static_cast<int>(std::lround(99 / model.cell));
  EXPECT_EQ(cubes.size(), static_cast<std::size_t>(side) * side * side);
  EXPECT_EQ(reduce_model(located, 16000, 40000).kept, model.kept);
}

TEST(ModelReduction, OfACrowdThatMovesTheLargestStayAndTheRestIsEven) {
  LocateOutcome located = block(100, 100, 10);
  located.picture.links.clear();
  std::vector<std::size_t> half;
  for (std::size_t i = 0; i < 50000; ++i) half.push_back(i);
  located.directions = {moving(located, half)};
  located.directions[0].shape[31234] = {0, 0, 3};
  const ReducedModel model = reduce_model(located, 2000, 100);
  EXPECT_TRUE(std::binary_search(model.kept.begin(), model.kept.end(), std::size_t{31234}));
  // About as many are kept of every fifth along y.
  std::array<int, 5> fifths{};
  for (const std::size_t node : model.kept) {
    if (node < 50000) ++fifths[node / 100 % 100 / 20];
  }
  const auto [least, most] = std::minmax_element(fifths.begin(), fifths.end());
  EXPECT_GT(*least, 100);
  EXPECT_LT(*most, 2 * *least);
}

TEST(ModelReduction, LinksGoBetweenWhatStandsForTheirEnds) {
  const LocateOutcome located = block(1000, 1, 1);  // a line: what is left is a line
  const ReducedModel model = reduce_model(located, 100, 100);
  ASSERT_LE(model.kept.size(), 100U);
  ASSERT_GE(model.kept.size(), 90U);
  ASSERT_EQ(model.links.size(), model.kept.size() - 1);
  for (std::size_t k = 0; k < model.links.size(); ++k) {
    EXPECT_EQ(model.links[k].first, static_cast<Index>(k));
    EXPECT_EQ(model.links[k].second, static_cast<Index>(k + 1));
  }
}

TEST(ModelReduction, LinksBeyondTheLimitAreCounted) {
  const LocateOutcome located = block(50, 2, 1);
  const ReducedModel model = reduce_model(located, 100, 30);
  EXPECT_EQ(model.links.size(), 30U);
  EXPECT_EQ(model.links_left_out, 68U);
}

TEST(ModelReduction, PlacesThatCoincideOrAreHugeDoNoHarm) {
  LocateOutcome located = block(20, 20, 1);
  for (auto& place : located.picture.place) place = {1, 1, 1};
  EXPECT_EQ(reduce_model(located, 100, 100).kept.size(), 1U);
  located.picture.place[7] = {-1e308, 1e308, 0};
  EXPECT_LE(reduce_model(located, 100, 100).kept.size(), 100U);
}

TEST(ViewJson, MillionNodesStayBelowTwoMegabytes) {
  LocateOutcome located = block(100, 100, 100);
  located.picture.links.clear();
  std::vector<std::size_t> tip;
  for (std::size_t i = 900000; i < 1000000; ++i) tip.push_back(i);
  located.directions = {moving(located, tip)};
  const std::string text = to_view_json(located);
  EXPECT_LT(text.size(), 2000000U);
  const auto view = nlohmann::json::parse(text);
  EXPECT_EQ(view["nodes"], 1000000);
  EXPECT_EQ(view["place"].size(), 3 * view["node"].size());
  EXPECT_TRUE(view["digits"].is_null());
  const auto& motion = view["motions"][0];
  EXPECT_EQ(motion["moved"].size(), 3 * motion["nodes"].size());
  ASSERT_EQ(motion["marks"].size(), 1U);
  EXPECT_EQ(view["node"][motion["marks"][0].get<std::size_t>()], 900001);
  for (const auto& k : motion["nodes"]) EXPECT_GT(view["node"][k.get<std::size_t>()], 900000);
}

}  // namespace
}  // namespace stanchion
