#include "report/html_parts.hpp"

#include <fmt/format.h>

#include <algorithm>
#include <cmath>
#include <optional>

#include "model/numbers.hpp"
#include "report/cause_words.hpp"
#include "report/html_frame.hpp"
#include "report/label_layout.hpp"
#include "report/markup.hpp"
#include "report/model_view.hpp"

namespace stanchion {
namespace {

constexpr std::size_t kNodesShown = 8, kMarks = 2, kPartsShown = 12;
constexpr std::size_t kMostLinks = 16000, kCoarseNodes = 4000;  ///< that an overview shows

std::string tag(const char* name, const std::string& text) {
  return fmt::format("<{0}>{1}</{0}>", name, flowing(text));
}

/// A table of more columns than this is set closer, so that it fits beside the heading of its section.
constexpr std::size_t kEasyColumns = 7;

std::string table_of(const Page::Block& block, const std::string& name) {
  const bool many = !block.cells.empty() && block.cells[0].size() > kEasyColumns;
  const auto cells_of = [&](std::size_t r, const char* kind, const char* scope) {
    std::string cells;
    for (std::size_t c = 0; c < block.cells[r].size(); ++c) {
      cells += fmt::format("<{0}{1}{2}>{3}</{0}>", kind, scope,
                           c < block.to_the_right ? " class=\"right\"" : "", escaped(block.cells[r][c]));
    }
    return cells;
  };
  std::string html =
      begin_table(name, many ? "close" : "", block.cells.empty() ? "" : cells_of(0, "th", " scope=\"col\""));
  for (std::size_t r = 1; r < block.cells.size(); ++r) html += "<tr>" + cells_of(r, "td", "") + "</tr>\n";
  return html + end_table();
}

std::string ranked_table(const Direction& direction) {
  if (direction.nodes.empty()) return "";
  double most = 0;
  for (const DofShare& d : direction.nodes) most = std::max(most, d.share);
  std::string html = begin_table("Nodes and dofs by their share", "",
                                 "<th scope=\"col\">node</th><th scope=\"col\">dof</th><th scope=\"col\" "
                                 "colspan=\"2\">share</th>");
  for (std::size_t k = 0; k < std::min(kNodesShown, direction.nodes.size()); ++k) {
    const DofShare& d = direction.nodes[k];
    html += fmt::format(
        "<tr><td>{}</td><td>{}</td><td class=\"bar\"><i style=\"width:{:.1f}%\"></i></td><td "
        "class=\"right\">{}</td></tr>\n",
        d.node ? std::to_string(*d.node) : "-", escaped(d.dof), most > 0 ? 100 * d.share / most : 0,
        escaped(percent(d.share)));
  }
  html += end_table();
  const Offset rest =
      Offset{direction.moving_rows} - static_cast<Offset>(std::min(kNodesShown, direction.nodes.size()));
  if (rest > 0) html += fmt::format("<p>and {}</p>", counted(rest, "more equation"));
  return html;
}

std::vector<Mark> marks_of(const LocateOutcome& located, const Direction& direction) {
  std::vector<Mark> marks;
  for (const DofShare& d : direction.nodes) {
    if (!d.node || marks.size() == kMarks) continue;
    const auto& numbers = located.picture.node;
    const auto at = std::find(numbers.begin(), numbers.end(), *d.node);
    if (at == numbers.end()) continue;
    const auto node = static_cast<std::size_t>(at - numbers.begin());
    const bool named = std::any_of(marks.begin(), marks.end(), [&](const Mark& m) { return m.node == node; });
    if (!named) marks.push_back({node, fmt::format("{} {}", *d.node, d.dof)});
  }
  return marks;
}

std::string figure_of(const LocateOutcome& located, const Direction& direction,
                      const std::optional<ReducedModel>& reduced) {
  const auto marks = marks_of(located, direction);
  if (located.picture.place.empty() || (marks.empty() && direction.shape.empty())) return "";
  std::optional<CoarseModel> coarse;
  if (reduced) coarse = coarse_model(located, *reduced, direction.shape, marks);
  const ModelDrawing drawing =
      draw_model(located.picture, direction.shape, marks, coarse ? &*coarse : nullptr);
  std::string caption =
      direction.shape.empty()
          ? "Rings mark the nodes ranked first."
          : fmt::format(
                "Blue dots: what moves. Orange, dashed, with arrows: where it goes; the largest motion "
                "is drawn as {:.0f} % of the model's size, its true size is open. Rings mark the nodes "
                "ranked first.",
                100 * drawing.exaggeration);
  const auto& t = drawing.view.toward;
  caption += fmt::format(" Seen from ({:.2f}, {:.2f}, {:.2f}).", t[0], t[1], t[2]);
  if (coarse) {
    caption += fmt::format(" Of {} nodes {} stand for the others, with the links between those.",
                           grouped(static_cast<Offset>(located.picture.node.size())),
                           grouped(static_cast<Offset>(coarse->picture.node.size())));
  } else if (drawing.left_out > 0 && located.picture.links.empty())
    caption += fmt::format(" Of {} nodes one in every few pixels is drawn.",
                           grouped(static_cast<Offset>(located.picture.node.size())));
  if (!drawing.close_up.empty())
    caption += fmt::format(" Beside it, or below: close up on node {}, with node numbers{}.",
                           located.picture.node[marks.front().node],
                           drawing.without_number == 0 ? "" : " as far as there is room");
  return fmt::format("<figure><div class=\"plates\">{}{}</div><figcaption>{}</figcaption></figure>\n",
                     drawing.overview, drawing.close_up, flowing(caption));
}

/// Shape beside colour: a negative direction points down, a zero one is level, a weak one leans, an open one
/// is hollow.
std::string sign_mark(const Direction& direction) {
  const char* path = direction.cause == Cause::kUnresolved ? "M4 4h12v12h-12z"
                     : direction.sign < 0                  ? "M3 5h14l-7 11z"
                     : direction.sign == 0                 ? "M2 10h16M2 6h16"
                                                           : "M3 15h14l-7-11z";
  const bool line = direction.cause == Cause::kUnresolved || (direction.sign == 0);
  return fmt::format(
      "<svg width=\"20\" height=\"20\" viewBox=\"0 0 20 20\" aria-hidden=\"true\"><path d=\"{}\" fill=\"{}\" "
      "stroke=\"currentColor\" stroke-width=\"2\"/></svg>",
      path, line ? "none" : "currentColor");
}

std::string cause_to_html(const LocateOutcome& located, const Direction& direction, std::size_t number,
                          const std::optional<ReducedModel>& reduced) {
  std::string html = fmt::format(
      "<article class=\"cause\"><header><span class=\"{}\">{}</span><h3>{}. {}</h3><span "
      "class=\"tally\">{}</span></header>\n",
      direction.cause == Cause::kUnresolved ? "open" : "heed", sign_mark(direction), number,
      title_of(direction.cause), how_many(direction));
  html += fmt::format("<p class=\"why\">{}</p>\n", flowing(direction.explanation));
  html += figure_of(located, direction, reduced);
  std::string facts;
  const auto fact = [&facts](const char* label, const std::string& text) {
    facts += tag("dt", label) + tag("dd", text);
  };
  if (!direction.motions.empty()) {
    std::string text;
    for (const std::string& motion : direction.motions) text += (text.empty() ? "" : "; ") + motion;
    fact("moves", text);
  }
  if (direction.component)
    fact("part",
         fmt::format("{} of {}", *direction.component + 1,
                     located.components.size() + static_cast<std::size_t>(located.components_left_out)));
  // More equations than these nodes have: the nodes are those that hold half of a motion of the whole.
  const bool half = direction.moving_rows > 8 * direction.moving_nodes;
  if (direction.moving_nodes > 0)
    fact(half ? "half of it at" : "takes part", counted(direction.moving_nodes, "node"));
  if (direction.cause != Cause::kOverStiffCoupling) {
    fact("held to K",
         fmt::format(
             "energy {} of what the dofs have by themselves{}", rounded(direction.energy),
             direction.residual && direction.sign == 0 ? ", residual " + rounded(*direction.residual) : ""));
  }
  fact("remedy", direction.remedy);
  html += fmt::format("<div class=\"columns\"><dl>{}</dl><div>{}</div></div></article>\n", facts,
                      ranked_table(direction));
  return html;
}

/// Two digits or three, so that it is hardly wider than a bar, whose title has the exact number.
std::string short_count(Index count) {
  if (count < 1000) return std::to_string(count);
  if (count < 9'950) return fmt::format("{:.1f}k", count / 1e3);
  if (count < 999'500) return fmt::format("{:.0f}k", count / 1e3);
  if (count < 9'950'000) return fmt::format("{:.1f}M", count / 1e6);
  return fmt::format("{:.0f}M", count / 1e6);
}

struct BarTop {
  double middle, top;
  std::string words;
};

/// Each count over its bar; where it would touch what is there already a little aside or a line higher, else
/// not at all: the bar's title has it.
std::string counts_over(const std::vector<BarTop>& bars, double bar_width) {
  constexpr double kSize = 11, kAir = 0.8;
  constexpr std::pair<double, double> kTries[] = {{0, -4}, {3, -4}, {-3, -4}, {0, -15}, {3, -15}, {-3, -15}};
  std::vector<Box> taken;
  for (const BarTop& bar : bars)
    taken.push_back({bar.middle - bar_width / 2 + 1, bar.top, bar.middle + bar_width / 2 - 1, 1e9});
  std::string svg;
  for (const BarTop& bar : bars) {
    const double half = text_width(bar.words, kSize, false) / 2 + kAir;
    for (const auto& [aside, up] : kTries) {
      const double middle = bar.middle + aside, foot = bar.top + up;
      const Box box{middle - half, foot - 8, middle + half, foot};
      if (std::any_of(taken.begin(), taken.end(), [&](const Box& other) { return box.meets(other); }))
        continue;
      taken.push_back(box);
      svg +=
          fmt::format("<text class=\"c-small\" x=\"{:.1f}\" y=\"{:.1f}\" text-anchor=\"middle\">{}</text>\n",
                      middle, foot, bar.words);
      break;
    }
  }
  return svg;
}

/// Bars by half digits, with the two levels.
std::string histogram(const LocalAccuracy& accuracy, ChartWidth size) {
  const double width = size == ChartWidth::kWide ? 640 : 360;
  constexpr double kHeight = 210, kLeft = 20, kBase = 172, kTop = 26;
  const double digits = std::max({accuracy.alarm + 1.0, accuracy.largest + 0.5, 4.0});
  const double unit = (width - 2 * kLeft) / digits;
  Index most = 1;
  for (const auto& [from, count] : accuracy.histogram) most = std::max(most, count);
  std::string svg = fmt::format(
      "<svg class=\"chart\" viewBox=\"0 0 {:.0f} {:.0f}\" role=\"img\" aria-label=\"Equations by digits "
      "lost\">\n",
      width, size == ChartWidth::kWide ? kHeight : kHeight + 15);
  std::vector<BarTop> tops;
  for (const auto& [from, count] : accuracy.histogram) {
    if (count == 0) continue;
    const double height = std::max(2.0, (kBase - kTop) * count / most);
    const char* kind = from >= accuracy.alarm ? " c-alarm" : from >= accuracy.attention ? " c-heed" : "";
    svg += fmt::format(
        "<rect class=\"c-bar{}\" x=\"{:.1f}\" y=\"{:.1f}\" width=\"{:.1f}\" height=\"{:.1f}\"><title>{} to "
        "{} digits: {}</title></rect>\n",
        kind, kLeft + unit * from + 1, kBase - height, std::max(1.0, unit / 2 - 2), height, from, from + 0.5,
        counted(count, "equation"));
    tops.push_back({kLeft + unit * (from + 0.25), kBase - height, short_count(count)});
  }
  svg += counts_over(tops, unit / 2);
  svg += fmt::format("<path class=\"c-axis\" d=\"M{:.0f} {:.0f}H{:.0f}\"/>\n", kLeft, kBase, width - kLeft);
  for (int d = 0; d <= static_cast<int>(digits); d += 2) {
    svg += fmt::format("<text class=\"c-small\" x=\"{:.1f}\" y=\"{:.0f}\" text-anchor=\"middle\">{}</text>\n",
                       kLeft + unit * d, kBase + 15, d);
  }
  const auto level = [&](double at, const char* name) {
    svg += fmt::format(
        "<path class=\"c-level\" d=\"M{0:.1f} {1:.0f}V{2:.0f}\"/><text class=\"c-small\" x=\"{3:.1f}\" "
        "y=\"{4:.0f}\">{5}</text>\n",
        kLeft + unit * at, kBase, kTop - 10, kLeft + unit * at + 4, kTop - 2, name);
  };
  level(accuracy.attention, "attention");
  level(accuracy.alarm, "alarm");
  double line = kBase + 32;
  for (const std::string& words :
       wrapped("decimal digits lost, of 16; above each bar its equations (k: thousand, M: million)",
               width - 12, 11)) {
    svg += fmt::format("<text class=\"c-small\" x=\"{:.0f}\" y=\"{:.0f}\" text-anchor=\"middle\">{}</text>\n",
                       width / 2, line, words);
    line += 15;
  }
  return svg + "</svg>\n";
}

/// The dots of the field with the digits they stand for; `without` some nodes have no figure.
std::string scale_of(double top, bool without) {
  std::string html = "<p class=\"scale\">";
  for (int step = 0; step < 6; ++step) {
    html += fmt::format(
        "<span><svg viewBox=\"0 0 16 12\" aria-hidden=\"true\"><path class=\"v-field v-{0}\" d=\"M8 6h0\" "
        "style=\"stroke-width:{3:.1f}\"/></svg> {1:.1f} to {2:.1f}</span>",
        step, top * step / 6, top * (step + 1) / 6, 7 * field_dot(step));
  }
  if (without)
    html +=
        "<span><svg viewBox=\"0 0 16 12\" aria-hidden=\"true\"><path class=\"v-dot\" d=\"M8 6h0\"/></svg> no "
        "figure</span>";
  return html + "</p>";
}

}  // namespace

std::string band(const std::string& heading, const std::string& body) {
  if (body.empty()) return "";
  return fmt::format("<section class=\"band\"><h2>{}</h2><div>\n{}</div></section>\n", escaped(heading),
                     body);
}

std::string blocks_to_html(const std::string& name, const std::vector<Page::Block>& blocks, std::size_t begin,
                           std::size_t end) {
  std::string html;
  for (std::size_t k = begin; k < end;) {
    const Page::Kind kind = blocks[k].kind;
    std::size_t last = k + 1;
    while (last < end && blocks[last].kind == kind) ++last;
    if (kind == Page::Kind::kRow) {
      html += "<dl>\n";
      for (; k < last; ++k) html += tag("dt", blocks[k].label) + tag("dd", blocks[k].text) + "\n";
      html += "</dl>\n";
    } else if (kind == Page::Kind::kBullet) {
      html += "<ul>\n";
      for (; k < last; ++k) html += tag("li", blocks[k].text) + "\n";
      html += "</ul>\n";
    } else {
      for (; k < last; ++k) {
        if (kind == Page::Kind::kTable) html += table_of(blocks[k], name);
        if (kind == Page::Kind::kSentence) html += tag("p", blocks[k].text) + "\n";
      }
    }
    k = last;
  }
  return html;
}

std::string causes_to_html(const LocateOutcome& located) {
  std::string html;
  std::optional<ReducedModel> reduced;
  if (located.picture.links.size() > kMostLinks && !located.directions.empty())
    reduced = reduce_model(located, kCoarseNodes, kMostLinks);
  for (std::size_t k = 0; k < located.directions.size(); ++k)
    html += cause_to_html(located, located.directions[k], k + 1, reduced);
  return html;
}

std::string parts_to_html(const LocateOutcome& located) {
  if (located.components.size() < 2 &&
      !(located.components.size() == 1 && located.components[0].rigid_energy))
    return "";
  const bool rigid = std::any_of(located.components.begin(), located.components.end(),
                                 [](const ComponentRecord& part) { return part.rigid_energy.has_value(); });
  Page::Block table{Page::Kind::kTable, {}, {}, {}, 4};
  std::vector<std::string> head{"part", "nodes", "equations", "zero directions"};
  if (rigid) {
    for (const char* name : {"x", "y", "z", "turn x", "turn y", "turn z"}) head.emplace_back(name);
    table.to_the_right = 10;
  }
  table.cells.push_back(std::move(head));
  for (std::size_t k = 0; k < std::min(kPartsShown, located.components.size()); ++k) {
    const ComponentRecord& part = located.components[k];
    std::vector<std::string> row{std::to_string(k + 1), grouped(part.nodes), grouped(part.rows),
                                 grouped(part.nullity)};
    if (part.rigid_energy) {
      for (const double e : *part.rigid_energy) row.push_back(fmt::format("{:.1e}", e));
    }
    table.cells.push_back(std::move(row));
  }
  std::string html = table_of(table, "Connected parts");
  if (rigid)
    html += tag("p",
                "x to turn z: energy of each rigid motion of the part over what its dofs have by themselves; "
                "about 1e-16 means free.");
  const auto rest = static_cast<Offset>(located.components.size()) + located.components_left_out -
                    static_cast<Offset>(std::min(kPartsShown, located.components.size()));
  if (rest > 0) html += fmt::format("<p>and {} more</p>", grouped(rest));
  return html;
}

std::string mass_to_html(const LocateOutcome& located) {
  if (!located.mass) return "";
  const auto& m = located.mass->mass;
  std::string html = "<dl>" + tag("dt", "total") +
                     tag("dd", fmt::format("x {}, y {}, z {} (struck equations carry none)", rounded(m[0]),
                                           rounded(m[1]), rounded(m[2])));
  if (located.mass->centre) {
    const auto& c = *located.mass->centre;
    html += tag("dt", "centre") +
            tag("dd", fmt::format("({}, {}, {})", rounded(c[0]), rounded(c[1]), rounded(c[2])));
  }
  return html + "</dl>";
}

std::string accuracy_to_html(const LocateOutcome& located) {
  if (!located.accuracy) return located.accuracy_note.empty() ? "" : tag("p", located.accuracy_note);
  const LocalAccuracy& accuracy = *located.accuracy;
  std::string html = fmt::format(
      "<p>log10 of k<sub>ii</sub> (K<sup>-1</sup>)<sub>ii</sub>: about so many of 16 decimal digits are lost "
      "at an equation. Typical "
      "{:.1f}, at most {:.1f}: {}. Attention from {}, alarm from {} digits (common practice, no source); {} "
      "({} vectors, about "
      "0.2 digits off).</p>\n",
      accuracy.typical, accuracy.largest, accuracy_verdict(accuracy), exact(accuracy.attention),
      exact(accuracy.alarm), escaped(accuracy.method), accuracy.vectors);
  if (!located.accuracy_note.empty()) html += tag("p", located.accuracy_note);
  if (!accuracy.held.empty()) html += tag("p", "Held at " + held_in_words(accuracy) + ".");
  html += in_both_widths([&](ChartWidth width) { return histogram(accuracy, width); });
  const std::string field =
      draw_field(located.picture, accuracy.by_node, std::max(accuracy.attention, accuracy.largest));
  std::string worst = begin_table("Nodes at which most digits are lost", "",
                                  "<th scope=\"col\">node</th><th scope=\"col\">dof</th><th scope=\"col\" "
                                  "class=\"right\">digits lost</th>");
  for (std::size_t k = 0; k < std::min(kNodesShown, accuracy.worst.size()); ++k) {
    const DofShare& d = accuracy.worst[k];
    worst += fmt::format("<tr><td>{}</td><td>{}</td><td class=\"right\">{:.1f}</td></tr>\n",
                         d.node ? std::to_string(*d.node) : "-", escaped(d.dof), d.share);
  }
  worst += end_table();
  if (field.empty()) return html + worst;
  const bool without =
      std::any_of(accuracy.by_node.begin(), accuracy.by_node.end(), [](float v) { return v < 0; });
  return html +
         fmt::format(
             "<figure><div class=\"plates\">{}<div>{}</div></div><figcaption>The largest digits lost at each "
             "node.{}</figcaption></figure>\n",
             field, worst, scale_of(std::max(accuracy.attention, accuracy.largest), without));
}

}  // namespace stanchion
