#include "report/label_layout.hpp"

#include <algorithm>
#include <cmath>

namespace stanchion {
namespace {

constexpr double kApart = 2;  ///< pixels between labels, so that their halos do not eat one another
constexpr double kGap = 3;    ///< between what is named and a label right beside it
constexpr double kUnled = 9;  ///< a label farther off has a line
constexpr double kLengthCost = 0.2;
constexpr int kDirections = 24;
constexpr const char* kEllipsis = "\xE2\x80\xA6";
constexpr double kPi = 3.14159265358979323846;

/// In ems; bold faces are an eighth wider.
double advance(unsigned char c) {
  if (c == 'm' || c == 'w' || c == 'M' || c == 'W' || c == '@' || c == '%') return 1;
  if (c == ' ' || c == ',' || c == '.' || c == 'i' || c == 'j' || c == 'l' || c == ':' || c == ';' ||
      c == '\'')
    return 0.36;
  if (c >= 'A' && c <= 'Z') return 0.8;
  if (c < 0x80)
    return c == '+' || c == '=' || c == '<' || c == '>' || c == '~' || c == '#' || c == '&' ? 0.84 : 0.64;
  return (c & 0xC0) == 0x80 ? 0 : 1;  // one character however many bytes
}

double cross(const Point& o, const Point& a, const Point& b) {
  return (a.x - o.x) * (b.y - o.y) - (a.y - o.y) * (b.x - o.x);
}

bool strokes_cross(const Point& a, const Point& b, const Point& c, const Point& d) {
  return cross(a, b, c) * cross(a, b, d) < 0 && cross(c, d, a) * cross(c, d, b) < 0;
}

bool stroke_meets(const Point& a, const Point& b, const Box& box) {
  const auto inside = [&box](const Point& p) {
    return p.x > box.left && p.x < box.right && p.y > box.top && p.y < box.bottom;
  };
  if (inside(a) || inside(b)) return true;
  if (std::max(a.x, b.x) < box.left || std::min(a.x, b.x) > box.right || std::max(a.y, b.y) < box.top ||
      std::min(a.y, b.y) > box.bottom)
    return false;
  return strokes_cross(a, b, {box.left, box.top}, {box.right, box.bottom}) ||
         strokes_cross(a, b, {box.left, box.bottom}, {box.right, box.top});
}

double distance_to(const Point& p, const Box& box) {
  return std::hypot(std::max({box.left - p.x, 0.0, p.x - box.right}),
                    std::max({box.top - p.y, 0.0, p.y - box.bottom}));
}

double distance_to(const Point& p, const Point& a, const Point& b) {
  const double dx = b.x - a.x, dy = b.y - a.y, square = dx * dx + dy * dy;
  const double t = square > 0 ? std::clamp(((p.x - a.x) * dx + (p.y - a.y) * dy) / square, 0.0, 1.0) : 0;
  return std::hypot(p.x - a.x - t * dx, p.y - a.y - t * dy);
}

}  // namespace

Box Box::around(const Point& centre, double half_width, double half_height) {
  return {centre.x - half_width, centre.y - half_height, centre.x + half_width, centre.y + half_height};
}

bool Box::meets(const Box& other) const {
  return left < other.right && other.left < right && top < other.bottom && other.top < bottom;
}

bool Box::contains(const Box& other) const {
  return other.left >= left && other.right <= right && other.top >= top && other.bottom <= bottom;
}

double text_width(std::string_view text, double size, bool bold) {
  double width = 0;
  for (const char c : text) width += advance(static_cast<unsigned char>(c));
  return width * size * (bold ? 1.125 : 1);
}

std::vector<std::string> wrapped(std::string_view text, double width, double size) {
  std::vector<std::string> lines;
  for (std::size_t from = 0; from < text.size();) {
    const std::size_t end = std::min(text.find(' ', from), text.size());
    const std::string word(text.substr(from, end - from));
    if (!lines.empty() && text_width(lines.back() + " " + word, size, false) <= width)
      lines.back() += " " + word;
    else
      lines.push_back(word);
    from = end + 1;
  }
  return lines;
}

std::string shortened(std::string_view text, double width, double size, bool bold) {
  if (text_width(text, size, bold) <= width) return std::string(text);
  std::size_t end = text.size();
  do {
    --end;
    while (end > 0 && (static_cast<unsigned char>(text[end]) & 0xC0) == 0x80) --end;
  } while (end > 0 &&
           text_width(text.substr(0, end), size, bold) + text_width(kEllipsis, size, bold) > width);
  return std::string(text.substr(0, end)) + kEllipsis;
}

void LabelLayout::rather_clear(const Point& from, const Point& to, double cost) {
  strokes_.push_back({from, to, cost});
}

void LabelLayout::rather_clear(const Point& dot, double radius, double cost) {
  dots_.push_back({dot, radius, cost});
}

bool LabelLayout::is_free(const Box& box) const {
  if (!frame_.contains(box)) return false;
  const Box wide{box.left - kApart, box.top - kApart, box.right + kApart, box.bottom + kApart};
  return std::none_of(taken_.begin(), taken_.end(), [&](const Box& one) { return one.meets(wide); }) &&
         std::none_of(lines_.begin(), lines_.end(),
                      [&](const Stroke& line) { return stroke_meets(line.from, line.to, wide); });
}

double LabelLayout::cost_of(const Box& box) const {
  double cost = 0;
  for (const Stroke& stroke : strokes_) cost += stroke_meets(stroke.from, stroke.to, box) ? stroke.cost : 0;
  for (const Dot& dot : dots_) cost += distance_to(dot.at, box) < dot.radius ? dot.cost : 0;
  return cost;
}

/// Whether a reader could take the label for that of another dot.
bool LabelLayout::near_other(const Box& box, const Point& anchor, double distance) const {
  return std::any_of(dots_.begin(), dots_.end(), [&](const Dot& dot) {
    return std::hypot(dot.at.x - anchor.x, dot.at.y - anchor.y) > 1 &&
           distance_to(dot.at, box) < distance + 2;
  });
}

bool LabelLayout::line_is_free(const Point& from, const Point& to, const Point& anchor, double radius) const {
  return std::none_of(taken_.begin(), taken_.end(),
                      [&](const Box& one) {
                        return stroke_meets(from, to, one) &&
                               !one.contains(Box::around(anchor, radius / 2, radius / 2));
                      }) &&
         std::none_of(lines_.begin(), lines_.end(),
                      [&](const Stroke& line) { return strokes_cross(line.from, line.to, from, to); }) &&
         std::none_of(dots_.begin(), dots_.end(), [&](const Dot& dot) {
           return std::hypot(dot.at.x - anchor.x, dot.at.y - anchor.y) > 1 &&
                  distance_to(dot.at, from, to) < dot.radius;
         });
}

PlacedLabel LabelLayout::settled(const Box& box, const Point& anchor, double radius) const {
  PlacedLabel label;
  label.box = box;
  const double aside = (box.left + box.right) / 2 - anchor.x, tenth = (box.right - box.left) / 10;
  label.side = aside < -tenth ? -1 : aside > tenth ? 1 : 0;
  const Point near{std::clamp(anchor.x, box.left, box.right), std::clamp(anchor.y, box.top, box.bottom)};
  const double away = std::hypot(near.x - anchor.x, near.y - anchor.y);
  label.led = away > radius + kUnled || near_other(box, anchor, away);
  if (!(away > 0)) return label;
  // It ends at the middle of the near side where the label is beside, not above or below, what it names.
  label.to = near.x == anchor.x ? near : Point{near.x, (box.top + box.bottom) / 2};
  const double dx = label.to.x - anchor.x, dy = label.to.y - anchor.y, length = std::hypot(dx, dy);
  label.from = {anchor.x + radius * dx / length, anchor.y + radius * dy / length};
  if (length < radius + 2) label.led = false;
  return label;
}

void LabelLayout::take(const PlacedLabel& label) {
  taken_.push_back(label.box);
  if (label.led) lines_.push_back({label.from, label.to, 0});
}

std::optional<PlacedLabel> LabelLayout::place(const Point& anchor, double radius, double width, double height,
                                              double reach, const Point& preferred) {
  std::optional<PlacedLabel> best;
  double least = 0;
  for (double off = 0; off <= reach; off += off < 12 ? 4 : 8) {
    for (int k = 0; k < kDirections; ++k) {
      const double angle = 2 * kPi * k / kDirections;
      const Point u{std::cos(angle), std::sin(angle)};
      const double away = radius + kGap + off;
      const auto side = [](double along) { return std::clamp(1.9 * along, -1.0, 1.0) / 2; };
      const Box box =
          Box::around({anchor.x + u.x * away + side(u.x) * width, anchor.y + u.y * away + side(u.y) * height},
                      width / 2, height / 2);
      if (!is_free(box)) continue;
      const PlacedLabel label = settled(box, anchor, radius);
      if (label.led && !line_is_free(label.from, label.to, anchor, radius)) continue;
      const double cost = kLengthCost * off + cost_of(box) + (label.led ? 2 : 0) -
                          2 * (u.x * preferred.x + u.y * preferred.y) - 0.3 * u.x;
      if (best && cost >= least) continue;
      best = label;
      least = cost;
    }
  }
  if (best) take(*best);
  return best;
}

std::optional<PlacedLabel> LabelLayout::place_somewhere(const Point& anchor, double radius, double width,
                                                        double height) {
  if (auto beside = place(anchor, radius, width, height, 120)) return beside;
  std::optional<PlacedLabel> best;
  double least = 0;
  for (double top = frame_.top; top + height <= frame_.bottom; top += 4) {
    for (double left = frame_.left; left + width <= frame_.right; left += 4) {
      const Box box{left, top, left + width, top + height};
      const double away = distance_to(anchor, box);
      if ((best && away >= least) || !is_free(box)) continue;
      best = settled(box, anchor, radius);
      least = away;
    }
  }
  if (best) take(*best);
  return best;
}

}  // namespace stanchion
