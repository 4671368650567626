#include "report/model_view.hpp"

#include <fmt/format.h>

#include <algorithm>
#include <cmath>
#include <numeric>
#include <unordered_set>

#include "report/label_layout.hpp"
#include "report/markup.hpp"

namespace stanchion {
namespace {

constexpr double kWidth = 640, kHeight = 400, kMargin = 34;
constexpr double kTall = kHeight + 32;  ///< with the strip below that holds the scale
constexpr double kCloseWidth = 340;
constexpr double kRing = 6.5, kCloseRing = 10, kNearDot = 5;
// Sizes of text as in the style of the page. What a narrow window shows larger is placed for that.
constexpr double kLargeText = 20, kLargeLine = 21, kLargeSmall = 18;
constexpr double kMarkText = 13, kNumberText = 13, kNumberLine = 15;
constexpr double kMotion = 0.11;                ///< of the model's size, drawn length of the largest motion
constexpr double kCloseMotion = 0.32;           ///< of the close-up's radius
constexpr double kCell = 2.6, kLinkCell = 2.0;  ///< pixels that hold one dot, or one end of a line
constexpr std::size_t kMostLines = 16000, kMostArrows = 26, kCloseNodes = 18;
constexpr double kApart = 46;           ///< pixels between arrows
constexpr std::size_t kDense = 60'000;  ///< nodes of a field; there are some 38,000 cells

class Drawer {
 public:
  Drawer(const Picture& picture, const std::vector<std::array<float, 3>>& shape,
         const std::vector<Mark>& marks)
      : picture_(picture), shape_(shape), marks_(marks) {}

  ModelDrawing run(const CoarseModel* coarse) {
    ModelDrawing drawing;
    if (picture_.place.empty()) return drawing;
    drawing.view = view_ = best_view(picture_, shape_);
    measure();
    drawing.exaggeration = kMotion;
    if (coarse == nullptr) {
      drawing.overview = overview(drawing);
    } else {
      Drawer whole(coarse->picture, coarse->shape, coarse->marks);
      whole.view_ = view_;
      whole.size_ = size_;
      drawing.overview = whole.overview(drawing);
    }
    if (!marks_.empty()) drawing.close_up = close_up(drawing);
    return drawing;
  }

 private:
  void measure() {
    Triple low = picture_.place[0], high = low;
    for (const Triple& p : picture_.place) {
      for (std::size_t d = 0; d < 3; ++d) {
        low[d] = std::min(low[d], p[d]);
        high[d] = std::max(high[d], p[d]);
      }
    }
    size_ = std::sqrt(std::pow(high[0] - low[0], 2) + std::pow(high[1] - low[1], 2) +
                      std::pow(high[2] - low[2], 2));
    if (!(size_ > 0)) size_ = 1;
  }

  bool moves(std::size_t node) const {
    if (shape_.empty()) return false;
    const auto& u = shape_[node];
    return std::fabs(u[0]) + std::fabs(u[1]) + std::fabs(u[2]) > 1e-3F;
  }

  Triple moved(std::size_t node, double length) const {
    Triple p = picture_.place[node];
    if (shape_.empty()) return p;
    for (std::size_t d = 0; d < 3; ++d) p[d] += length * static_cast<double>(shape_[node][d]);
    return p;
  }

  static std::string open(double width, const std::string& label) {
    return fmt::format("<svg class=\"view\" viewBox=\"0 0 {:.0f} {:.0f}\" role=\"img\" aria-label=\"{}\">\n",
                       width, kTall, escaped(label));
  }

  std::string overview(ModelDrawing& drawing) const {
    const double length = kMotion * size_;
    std::vector<Triple> shown = picture_.place;
    for (std::size_t node = 0; node < picture_.place.size(); ++node) {
      if (moves(node)) shown.push_back(moved(node, length));
    }
    const Projection to(view_, shown, kWidth, kHeight, kMargin);
    std::string svg = open(kWidth, "The model with the motion drawn on it");
    svg += lines(to, 0, "v-link", [](std::size_t, std::size_t) { return true; });
    svg += dots(to, drawing);
    svg +=
        lines(to, length, "v-moved", [this](std::size_t a, std::size_t b) { return moves(a) || moves(b); });
    if (picture_.links.empty()) svg += moved_dots(to, length);
    LabelLayout layout({4, 4, kWidth - 4, kHeight});
    svg += arrows(to, length, layout);
    for (const Mark& mark : marks_)
      layout.keep_clear(Box::around(to.at(picture_.place[mark.node]), kRing + 1, kRing + 1));
    svg += triad(to, layout);
    svg += labels(to, layout);
    svg += scale_bar(to, kWidth);
    return svg + "</svg>\n";
  }

  /// Lines between linked nodes, those that fall on one another drawn once.
  template <class Choose>
  std::string lines(const Projection& to, double length, const char* kind, const Choose& choose) const {
    std::unordered_set<std::uint64_t> seen;
    std::string path;
    std::size_t count = 0;
    for (const auto& [a, b] : picture_.links) {
      const auto i = static_cast<std::size_t>(a), j = static_cast<std::size_t>(b);
      if (!choose(i, j)) continue;
      const Point p = to.at(moved(i, length)), q = to.at(moved(j, length));
      const std::uint64_t one = cell_of(p, kLinkCell), other = cell_of(q, kLinkCell);
      if (one == other || !seen.insert(one * 31 + other * 31 + (one ^ other)).second) continue;
      path += fmt::format("M{:.1f} {:.1f}L{:.1f} {:.1f}", p.x, p.y, q.x, q.y);
      if (++count == kMostLines) break;
    }
    return path.empty() ? "" : fmt::format("<path class=\"{}\" d=\"{}\"/>\n", kind, path);
  }

  std::string dots(const Projection& to, ModelDrawing& drawing) const {
    std::unordered_set<std::uint64_t> seen;
    std::string still, moving;
    const bool linked = !picture_.links.empty();
    for (std::size_t node = 0; node < picture_.place.size(); ++node) {
      const Point p = to.at(picture_.place[node]);
      const bool m = moves(node);
      if (!seen.insert(cell_of(p, kCell) * 2 + (m ? 1 : 0)).second) {
        ++drawing.left_out;
        continue;
      }
      ++drawing.drawn;
      if (linked && !m) continue;
      (m ? moving : still) += fmt::format("M{:.1f} {:.1f}h0", p.x, p.y);
    }
    std::string svg;
    if (!still.empty()) svg += fmt::format("<path class=\"v-dot\" d=\"{}\"/>\n", still);
    if (!moving.empty()) svg += fmt::format("<path class=\"v-part\" d=\"{}\"/>\n", moving);
    return svg;
  }

  std::string moved_dots(const Projection& to, double length) const {
    std::unordered_set<std::uint64_t> seen;
    std::string path;
    for (std::size_t node = 0; node < picture_.place.size(); ++node) {
      if (!moves(node)) continue;
      const Point p = to.at(moved(node, length));
      if (seen.insert(cell_of(p, kCell)).second) path += fmt::format("M{:.1f} {:.1f}h0", p.x, p.y);
    }
    return path.empty() ? "" : fmt::format("<path class=\"v-ghost\" d=\"{}\"/>\n", path);
  }

  static std::string arrow(const Point& p, const Point& q) {
    const double dx = q.x - p.x, dy = q.y - p.y, size = std::hypot(dx, dy);
    if (size < 5) return "";
    const double ux = dx / size, uy = dy / size, head = std::min(7.0, size / 2);
    return fmt::format("M{:.1f} {:.1f}L{:.1f} {:.1f}M{:.1f} {:.1f}L{:.1f} {:.1f}L{:.1f} {:.1f}", p.x, p.y,
                       q.x, q.y, q.x - head * ux - 0.45 * head * uy, q.y - head * uy + 0.45 * head * ux, q.x,
                       q.y, q.x - head * ux + 0.45 * head * uy, q.y - head * uy - 0.45 * head * ux);
  }

  /// A few arrows, spread over the page rather than over the numbering.
  std::string arrows(const Projection& to, double length, LabelLayout& layout) const {
    if (shape_.empty()) return "";
    std::vector<std::size_t> order;
    for (std::size_t node = 0; node < picture_.place.size(); ++node) {
      if (moves(node)) order.push_back(node);
    }
    std::stable_sort(order.begin(), order.end(),
                     [&](std::size_t a, std::size_t b) { return size_of(a) > size_of(b); });
    std::vector<Point> taken;
    std::string path;
    for (const std::size_t node : order) {
      const Point p = to.at(picture_.place[node]);
      const bool near = std::any_of(taken.begin(), taken.end(), [&](const Point& t) {
        return std::hypot(t.x - p.x, t.y - p.y) < kApart;
      });
      if (near) continue;
      const Point q = to.at(moved(node, length));
      const std::string one = arrow(p, q);
      if (one.empty()) continue;
      path += one;
      layout.rather_clear(p, q, 5);
      taken.push_back(p);
      if (taken.size() == kMostArrows) break;
    }
    return path.empty() ? "" : fmt::format("<path class=\"v-arrow\" d=\"{}\"/>\n", path);
  }

  float size_of(std::size_t node) const {
    const auto& u = shape_[node];
    return u[0] * u[0] + u[1] * u[1] + u[2] * u[2];
  }

  /// The ring and name of every mark, with a line from one to the other where they are apart.
  std::string labels(const Projection& to, LabelLayout& layout) const {
    std::string svg;
    for (const Mark& mark : marks_) {
      const Point p = to.at(picture_.place[mark.node]);
      svg += ring(p, kRing);
      const std::string text = shortened(mark.text, 0.4 * kWidth, kLargeText, true);
      const double width = text_width(text, kLargeText, true);
      if (const auto label = layout.place_somewhere(p, kRing, width, kLargeLine))
        svg += label_text(*label, "v-label", "v-lead", 5, text, mark.text);
    }
    return svg;
  }

  static std::string ring(const Point& p, double radius) {
    return fmt::format("<circle class=\"v-ring\" cx=\"{:.1f}\" cy=\"{:.1f}\" r=\"{:.1f}\"/>\n", p.x, p.y,
                       radius);
  }

  static std::string label_text(const PlacedLabel& label, const char* kind, const char* line,
                                double below_middle, const std::string& text, const std::string& whole) {
    std::string svg;
    if (label.led)
      svg += fmt::format("<path class=\"{}\" d=\"M{:.1f} {:.1f}L{:.1f} {:.1f}\"/>", line, label.from.x,
                         label.from.y, label.to.x, label.to.y);
    return svg + fmt::format("<text class=\"{}\" x=\"{:.1f}\" y=\"{:.1f}\" text-anchor=\"{}\">{}{}</text>\n",
                             kind,
                             label.side > 0   ? label.box.left
                             : label.side < 0 ? label.box.right
                                              : (label.box.left + label.box.right) / 2,
                             (label.box.top + label.box.bottom) / 2 + below_middle,
                             label.side > 0   ? "start"
                             : label.side < 0 ? "end"
                                              : "middle",
                             escaped(text), text == whole ? "" : "<title>" + escaped(whole) + "</title>");
  }

  /// In the corner that holds no mark and the fewest dots.
  std::string triad(const Projection& to, LabelLayout& layout) const {
    constexpr double kHalf = 40, kArm = 20;
    const Point corners[] = {{kHalf, kTall - kHalf}, {kHalf, kHalf}, {kWidth - kHalf, kHalf}};
    const Point* corner = corners;
    double least = -1;
    for (const Point& one : corners) {
      const Box box = Box::around(one, kHalf, kHalf);
      double hidden = 0;
      for (const Mark& mark : marks_) {
        if (Box::around(to.at(picture_.place[mark.node]), kRing + 2, kRing + 2).meets(box)) hidden += 1e9;
      }
      for (const Triple& place : picture_.place) {
        const Point p = to.at(place);
        if (Box{p.x, p.y, p.x, p.y}.meets(box)) hidden += 1;
      }
      if (least >= 0 && hidden >= least) continue;
      least = hidden;
      corner = &one;
    }
    std::string svg = "<g class=\"v-triad\">";
    LabelLayout letters(Box::around(*corner, kHalf, kHalf));
    const char* names[] = {"x", "y", "z"};
    for (std::size_t d = 0; d < 3; ++d) {
      const Point arm{kArm * view_.right[d], -kArm * view_.up[d]};
      if (std::hypot(arm.x, arm.y) < 2.4) continue;
      letters.rather_clear(*corner, {corner->x + arm.x, corner->y + arm.y}, 3);
      svg += fmt::format("<path d=\"M{:.0f} {:.0f}l{:.1f} {:.1f}\"/>", corner->x, corner->y, arm.x, arm.y);
    }
    for (std::size_t d = 0; d < 3; ++d) {
      const Point arm{kArm * view_.right[d], -kArm * view_.up[d]};
      const double length = std::hypot(arm.x, arm.y);
      if (length < 2.4) continue;
      const double width = text_width(names[d], kLargeSmall, false);
      const auto label = letters.place({corner->x + arm.x, corner->y + arm.y}, 0, width, kLargeSmall, 12,
                                       {4 * arm.x / length, 4 * arm.y / length});
      if (!label) continue;
      svg += fmt::format("<text x=\"{:.1f}\" y=\"{:.1f}\" text-anchor=\"middle\">{}</text>",
                         (label->box.left + label->box.right) / 2,
                         (label->box.top + label->box.bottom) / 2 + 4, names[d]);
    }
    layout.keep_clear(Box::around(*corner, kHalf, kHalf));
    return svg + "</g>\n";
  }

  /// Below the drawing, where nothing else is.
  static std::string scale_bar(const Projection& to, double width) {
    const double wanted = 90 / to.scale(), power = std::pow(10, std::floor(std::log10(wanted)));
    const double length = (wanted / power >= 5 ? 5 : wanted / power >= 2 ? 2 : 1) * power;
    const double pixels = length * to.scale();
    return fmt::format(
        "<g class=\"v-bar\"><path d=\"M{:.1f} {:.0f}v6h{:.1f}v-6\"/><text x=\"{:.1f}\" y=\"{:.0f}\" "
        "text-anchor=\"end\">{:.4g} in the unit of the coordinates</text></g>\n",
        width - 14 - pixels, kTall - 14, pixels, width - 14, kTall - 20, length);
  }

  /// The first mark's node with its nearest neighbours, their numbers, and the motion once more.
  std::string close_up(ModelDrawing& drawing) const {
    const std::size_t centre = marks_.front().node;
    const Triple& c = picture_.place[centre];
    const auto distance = [&](std::size_t node) {
      const Triple& p = picture_.place[node];
      return std::pow(p[0] - c[0], 2) + std::pow(p[1] - c[1], 2) + std::pow(p[2] - c[2], 2);
    };
    std::vector<std::size_t> near(picture_.place.size());
    std::iota(near.begin(), near.end(), std::size_t{0});
    const std::size_t keep = std::min(kCloseNodes, near.size());
    std::partial_sort(near.begin(), near.begin() + static_cast<std::ptrdiff_t>(keep), near.end(),
                      [&](std::size_t a, std::size_t b) {
                        const double x = distance(a), y = distance(b);
                        return x != y ? x < y : a < b;
                      });
    near.resize(keep);
    const double radius = std::sqrt(distance(near.back()));
    const double length = kCloseMotion * (radius > 0 ? radius : size_);
    std::vector<char> inside(picture_.place.size(), 0);
    for (const std::size_t node : near) inside[node] = 1;
    std::vector<Triple> shown;
    for (const std::size_t node : near) {
      shown.push_back(picture_.place[node]);
      shown.push_back(moved(node, length));
    }
    const Projection to(view_, shown, kCloseWidth, kHeight, 52);
    const auto both = [&](std::size_t a, std::size_t b) { return inside[a] != 0 && inside[b] != 0; };
    std::string svg = open(kCloseWidth, "Close up: " + marks_.front().text);
    svg += lines(to, 0, "v-link v-near", both);
    svg += lines(to, length, "v-moved",
                 [&](std::size_t a, std::size_t b) { return both(a, b) && (moves(a) || moves(b)); });
    LabelLayout layout({4, 4, kCloseWidth - 4, kHeight});
    for (const auto& [a, b] : picture_.links) {
      const auto i = static_cast<std::size_t>(a), j = static_cast<std::size_t>(b);
      if (both(i, j)) layout.rather_clear(to.at(picture_.place[i]), to.at(picture_.place[j]), 1.5);
    }
    std::string still, moving, path;
    for (const std::size_t node : near) {
      const Point p = to.at(picture_.place[node]);
      (moves(node) ? moving : still) += fmt::format("M{:.1f} {:.1f}h0", p.x, p.y);
      layout.rather_clear(p, kNearDot, 30);
      if (!moves(node)) continue;
      const Point q = to.at(moved(node, length));
      path += arrow(p, q);
      layout.rather_clear(p, q, 5);
    }
    if (!still.empty()) svg += fmt::format("<path class=\"v-dot v-near\" d=\"{}\"/>\n", still);
    if (!moving.empty()) svg += fmt::format("<path class=\"v-part v-near\" d=\"{}\"/>\n", moving);
    if (!path.empty()) svg += fmt::format("<path class=\"v-arrow\" d=\"{}\"/>\n", path);
    svg += numbers(to, near, layout, drawing);
    svg += scale_bar(to, kCloseWidth);
    return svg + "</svg>\n";
  }

  /// Rings and names of the marks, then the numbers of their neighbours as far as there is room; nodes that
  /// fall on one another share a label.
  std::string numbers(const Projection& to, const std::vector<std::size_t>& near, LabelLayout& layout,
                      ModelDrawing& drawing) const {
    struct Spot {
      Point at;
      std::string text;
      bool marked = false;
      std::size_t nodes = 0;
    };
    const auto mark_of = [this](std::size_t node) {
      return std::find_if(marks_.begin(), marks_.end(), [&](const Mark& mark) { return mark.node == node; });
    };
    std::vector<std::size_t> order = near;
    std::stable_partition(order.begin(), order.end(),
                          [&](std::size_t node) { return mark_of(node) != marks_.end(); });
    std::vector<Spot> spots;
    for (const std::size_t node : order) {
      const Point p = to.at(picture_.place[node]);
      const auto mark = mark_of(node);
      const std::string text = mark != marks_.end() ? mark->text : std::to_string(picture_.node[node]);
      const auto same = std::find_if(spots.begin(), spots.end(), [&](const Spot& spot) {
        return std::hypot(p.x - spot.at.x, p.y - spot.at.y) < 0.5;
      });
      if (same == spots.end()) {
        spots.push_back({p, text, mark != marks_.end(), 1});
      } else {
        same->text += ", " + text;
        ++same->nodes;
      }
    }
    std::string svg;
    for (const Spot& spot : spots) {
      if (!spot.marked) continue;
      layout.keep_clear(Box::around(spot.at, kCloseRing, kCloseRing));
      svg += ring(spot.at, kCloseRing);
    }
    for (const Spot& spot : spots) {
      const double size = spot.marked ? kMarkText : kNumberText;
      const std::string text = shortened(spot.text, 0.6 * kCloseWidth, size, spot.marked);
      const double width = text_width(text, size, spot.marked);
      const auto label = spot.marked ? layout.place_somewhere(spot.at, kCloseRing, width, kNumberLine)
                                     : layout.place(spot.at, kNearDot, width, kNumberLine, 70);
      if (label)
        svg += label_text(*label, spot.marked ? "v-label" : "v-number", spot.marked ? "v-lead" : "v-tie", 4.5,
                          text, spot.text);
      else
        drawing.without_number += spot.nodes;
    }
    return svg;
  }

  const Picture& picture_;
  const std::vector<std::array<float, 3>>& shape_;
  const std::vector<Mark>& marks_;
  ViewAxes view_;
  double size_ = 1;
};

}  // namespace

CoarseModel coarse_model(const LocateOutcome& located, const ReducedModel& reduced,
                         const std::vector<std::array<float, 3>>& shape, const std::vector<Mark>& marks) {
  CoarseModel coarse;
  const Picture& all = located.picture;
  for (const std::size_t node : reduced.kept) {
    coarse.picture.node.push_back(all.node[node]);
    coarse.picture.place.push_back(all.place[node]);
    coarse.picture.component.push_back(all.component[node]);
    if (!shape.empty()) coarse.shape.push_back(shape[node]);
  }
  coarse.picture.links = reduced.links;
  for (const Mark& mark : marks) {
    const auto at = std::lower_bound(reduced.kept.begin(), reduced.kept.end(), mark.node);
    if (at == reduced.kept.end() || *at != mark.node) continue;
    coarse.marks.push_back({static_cast<std::size_t>(at - reduced.kept.begin()), mark.text});
  }
  return coarse;
}

ModelDrawing draw_model(const Picture& picture, const std::vector<std::array<float, 3>>& shape,
                        const std::vector<Mark>& marks, const CoarseModel* coarse) {
  return Drawer(picture, shape, marks).run(coarse);
}

double field_dot(int step) {
  return 0.8 + 0.14 * step;
}

std::string draw_field(const Picture& picture, const std::vector<float>& value, double top) {
  if (picture.place.empty() || value.size() != picture.place.size()) return "";
  constexpr int kSteps = 6;
  const ViewAxes view = best_view(picture, {});
  const Projection to(view, picture.place, kWidth, kHeight, kMargin);
  // The largest value of a cell is the one that shows.
  std::vector<std::size_t> order(picture.place.size());
  std::iota(order.begin(), order.end(), std::size_t{0});
  std::stable_sort(order.begin(), order.end(),
                   [&](std::size_t a, std::size_t b) { return value[a] > value[b]; });
  std::unordered_set<std::uint64_t> seen;
  std::array<std::string, kSteps> paths;
  std::string without;  // nodes that have no figure
  const double dot_width =
      std::clamp(0.6 * std::sqrt(kWidth * kHeight / static_cast<double>(order.size())), 3.2, 11.0);
  const bool dense = order.size() > kDense;
  for (const std::size_t node : order) {
    Point p = to.at(picture.place[node]);
    if (!seen.insert(cell_of(p, kCell)).second) continue;
    // Where many nodes share a cell its middle stands for them: no streaks where two grids meet.
    if (dense) p = {kCell * (std::floor(p.x / kCell) + 0.5), kCell * (std::floor(p.y / kCell) + 0.5)};
    if (value[node] < 0) {
      without += fmt::format("M{:.1f} {:.1f}h0", p.x, p.y);
      continue;
    }
    const double part = top > 0 ? static_cast<double>(value[node]) / top : 0;
    const int step = std::clamp(static_cast<int>(part * kSteps), 0, kSteps - 1);
    paths[static_cast<std::size_t>(step)] += fmt::format("M{:.1f} {:.1f}h0", p.x, p.y);
  }
  std::string svg = fmt::format(
      "<svg class=\"view\" viewBox=\"0 0 {:.0f} {:.0f}\" role=\"img\" aria-label=\"Digits lost, by "
      "node\">\n",
      kWidth, kHeight);
  if (!without.empty()) svg += fmt::format("<path class=\"v-dot\" d=\"{}\"/>\n", without);
  for (int step = 0; step < kSteps; ++step) {
    const std::string& path = paths[static_cast<std::size_t>(step)];
    // Larger as well as of another colour where more digits are lost.
    if (!path.empty())
      svg += fmt::format("<path class=\"v-field v-{}\" style=\"stroke-width:{:.1f}\" d=\"{}\"/>\n", step,
                         dot_width * field_dot(step), path);
  }
  return svg + "</svg>\n";
}

}  // namespace stanchion
