#include "report/view_json.hpp"

#include <fmt/format.h>

#include <algorithm>
#include <cmath>

#include "model/names.hpp"
#include "report/json_parts.hpp"
#include "report/model_reduction.hpp"

namespace stanchion {
namespace {

using json_parts::Json;
using json_parts::json_of;

constexpr std::size_t kMostNodes = 16000, kMostLinks = 40000;
constexpr float kStill = 1e-3F;  ///< of the largest motion

/// Lists of numbers go on one line each: a megabyte rather than ten.
class Writer {
 public:
  void member(const char* name, const Json& value) { line(name, value.dump(-1, ' ', false, kReplace)); }

  template <class Items, class Write>
  void list(const char* name, const Items& items, const Write& write) {
    std::string text = "[";
    for (const auto& item : items) {
      if (text.size() > 1) text += ',';
      write(text, item);
    }
    text += ']';
    line(name, text);
  }

  std::string text() const { return fmt::format("{{{}\n}}\n", text_); }

  void line(const char* name, const std::string& value) {
    text_ += fmt::format("{}\n  \"{}\": {}", text_.empty() ? "" : ",", name, value);
  }

 private:
  static constexpr auto kReplace = Json::error_handler_t::replace;
  std::string text_;
};

struct Box {
  std::array<double, 3> centre{};
  double size = 1;  ///< diagonal
};

Box box_of(const Picture& picture) {
  Box box;
  if (picture.place.empty()) return box;
  auto low = picture.place.front(), high = low;
  for (const auto& p : picture.place) {
    for (std::size_t d = 0; d < 3; ++d) {
      low[d] = std::min(low[d], p[d]);
      high[d] = std::max(high[d], p[d]);
    }
  }
  for (std::size_t d = 0; d < 3; ++d) box.centre[d] = low[d] / 2 + high[d] / 2;
  const double size = std::hypot(high[0] - low[0], high[1] - low[1], high[2] - low[2]);
  if (size > 0 && std::isfinite(size)) box.size = size;
  return box;
}

/// A motion on the nodes that are kept; nothing where none of them moves.
std::string motion_of(const Direction& direction, std::size_t number, const Picture& picture,
                      const ReducedModel& model) {
  std::string nodes, moved;
  const bool drawn = direction.shape.size() == picture.node.size();
  for (std::size_t k = 0; drawn && k < model.kept.size(); ++k) {
    const auto& u = direction.shape[model.kept[k]];
    if (std::fabs(u[0]) + std::fabs(u[1]) + std::fabs(u[2]) <= kStill) continue;
    const char* comma = nodes.empty() ? "" : ",";
    nodes += fmt::format("{}{}", comma, k);
    moved += fmt::format("{}{:.4g},{:.4g},{:.4g}", comma, u[0], u[1], u[2]);
  }
  std::string marks;
  for (const DofShare& share : direction.nodes) {
    for (std::size_t k = 0; share.node && k < model.kept.size(); ++k) {
      if (picture.node[model.kept[k]] != *share.node) continue;
      marks += fmt::format("{}{}", marks.empty() ? "" : ",", k);
      break;
    }
  }
  return fmt::format(
      "\n    {{\"direction\": {}, \"kind\": \"{}\", \"marks\": [{}], \"nodes\": [{}], \"moved\": [{}]}}",
      number, name_of(direction.cause), marks, nodes, moved);
}

}  // namespace

std::string to_view_json(const LocateOutcome& located) {
  const Picture& picture = located.picture;
  const ReducedModel model = reduce_model(located, kMostNodes, kMostLinks);
  const Box box = box_of(picture);
  Writer json;
  json.member("schema_version", 1);
  json.member("program", json_parts::program());
  json.member("nodes", picture.node.size());
  json.member("links_left_out", model.links_left_out);
  json.member("cell", model.cell > 0 ? json_of(model.cell) : Json(nullptr));
  json.list("centre", box.centre, [](std::string& text, double c) { text += fmt::format("{}", c); });
  json.member("size", json_of(box.size));
  json.list("node", model.kept,
            [&](std::string& text, std::size_t i) { text += fmt::format("{}", picture.node[i]); });
  json.list("place", model.kept, [&](std::string& text, std::size_t i) {
    const auto& p = picture.place[i];
    text +=
        fmt::format("{:.6g},{:.6g},{:.6g}", p[0] - box.centre[0], p[1] - box.centre[1], p[2] - box.centre[2]);
  });
  json.list("component", model.kept,
            [&](std::string& text, std::size_t i) { text += fmt::format("{}", picture.component[i]); });
  json.list("links", model.links, [](std::string& text, const auto& link) {
    text += fmt::format("{},{}", link.first, link.second);
  });
  const auto& accuracy = located.accuracy;
  if (accuracy && !picture.node.empty() && accuracy->by_node.size() == picture.node.size()) {
    json.list("digits", model.kept, [&](std::string& text, std::size_t i) {
      const float digits = accuracy->by_node[i];
      text += std::isfinite(digits) && digits >= 0 ? fmt::format("{:.3g}", digits) : "null";
    });
  } else {
    json.member("digits", nullptr);
  }
  std::string motions;
  for (std::size_t k = 0; k < located.directions.size(); ++k) {
    if (k > 0) motions += ',';
    motions += motion_of(located.directions[k], k, picture, model);
  }
  json.line("motions", fmt::format("[{}]", motions));
  return json.text();
}

}  // namespace stanchion
