#include <fmt/format.h>

#include <algorithm>

#include "model/names.hpp"
#include "model/numbers.hpp"
#include "report/cause_words.hpp"
#include "report/text_sections.hpp"

namespace stanchion {
namespace {

constexpr std::size_t kNodesShown = 6;
constexpr std::size_t kPartsShown = 8;

std::string ranked_nodes(const Direction& direction) {
  std::string text;
  for (std::size_t k = 0; k < std::min(kNodesShown, direction.nodes.size()); ++k) {
    const DofShare& d = direction.nodes[k];
    text += fmt::format("{}{} {}", k == 0 ? "" : "; ", dof_in_words(d), percent(d.share));
  }
  const Offset rest =
      Offset{direction.moving_rows} - static_cast<Offset>(std::min(kNodesShown, direction.nodes.size()));
  if (rest > 0) text += fmt::format("; and {} more", grouped(rest));
  return text;
}

void write_direction(Page& page, const Direction& direction, std::size_t number) {
  page.blank();
  page.sentence(fmt::format("{}. {}: {}", number, title_of(direction.cause), how_many(direction)));
  page.row("", direction.explanation);
  if (!direction.motions.empty()) {
    std::string text;
    for (const std::string& motion : direction.motions) text += (text.empty() ? "" : "; ") + motion;
    page.row("moves", text);
  }
  if (!direction.nodes.empty()) page.row("nodes", ranked_nodes(direction));
  if (direction.cause != Cause::kOverStiffCoupling) {
    std::string judged =
        fmt::format("energy {} of what the dofs have by themselves", rounded(direction.energy));
    if (direction.residual && direction.sign == 0)
      judged += fmt::format(", residual {}", rounded(*direction.residual));
    page.row("held to K", judged);
  }
  page.row("remedy", direction.remedy);
}

void write_parts(Page& page, const LocateOutcome& located) {
  if (located.components.size() < 2) return;
  page.title(fmt::format("{} connected parts", grouped(static_cast<Offset>(located.components.size()) +
                                                       located.components_left_out)));
  std::vector<std::vector<std::string>> rows{{"part", "nodes", "equations", "zero directions"}};
  for (std::size_t k = 0; k < std::min(kPartsShown, located.components.size()); ++k) {
    const ComponentRecord& part = located.components[k];
    rows.push_back({std::to_string(k + 1), grouped(part.nodes), grouped(part.rows), grouped(part.nullity)});
  }
  page.table(rows, 3);
}

void write_rigid_energies(Page& page, const LocateOutcome& located) {
  std::vector<std::vector<std::string>> rows{{"part", "x", "y", "z", "turn x", "turn y", "turn z"}};
  for (std::size_t k = 0; k < std::min(kPartsShown, located.components.size()); ++k) {
    const auto& energies = located.components[k].rigid_energy;
    if (!energies) continue;
    rows.push_back({std::to_string(k + 1)});
    for (const double e : *energies) rows.back().push_back(fmt::format("{:.1e}", e));
  }
  if (rows.size() == 1) return;
  page.title("Rigid motions: energy over what the dofs have by themselves; about 1e-16 means free");
  page.table(rows, 7);
}

void write_accuracy(Page& page, const LocateOutcome& located) {
  if (!located.accuracy && located.accuracy_note.empty()) return;
  page.title("Local accuracy: digits that double precision loses, of 16");
  if (!located.accuracy) return page.sentence(located.accuracy_note);
  const LocalAccuracy& accuracy = *located.accuracy;
  page.row("typical", fmt::format("{:.1f}, at most {:.1f}; {} ({} vectors, about 0.2 digits off)",
                                  accuracy.typical, accuracy.largest, accuracy.method, accuracy.vectors));
  page.row("levels",
           fmt::format("attention from {}, alarm from {} (common practice, no source): {}",
                       exact(accuracy.attention), exact(accuracy.alarm), accuracy_verdict(accuracy)));
  std::string worst;
  for (std::size_t k = 0; k < std::min<std::size_t>(4, accuracy.worst.size()); ++k) {
    worst += fmt::format("{}{} {:.1f}", k == 0 ? "" : "; ", dof_in_words(accuracy.worst[k]),
                         accuracy.worst[k].share);
  }
  page.row("most at", worst);
  if (!accuracy.held.empty()) page.row("held at", held_in_words(accuracy));
  if (!located.accuracy_note.empty()) page.row("but", located.accuracy_note);
}

void write_mass(Page& page, const MassTotals& mass) {
  page.title("Mass");
  page.row("total", fmt::format("x {}, y {}, z {} (struck equations carry none)", rounded(mass.mass[0]),
                                rounded(mass.mass[1]), rounded(mass.mass[2])));
  if (mass.centre) {
    page.row("centre", fmt::format("({}, {}, {})", rounded((*mass.centre)[0]), rounded((*mass.centre)[1]),
                                   rounded((*mass.centre)[2])));
  }
}

}  // namespace

void write_locate(Page& page, const Outcome& outcome) {
  const LocateOutcome& located = *outcome.located;
  page.title("Where and why");
  page.sentence(location_headline(located));
  for (std::size_t k = 0; k < located.directions.size(); ++k)
    write_direction(page, located.directions[k], k + 1);
  write_parts(page, located);
  write_rigid_energies(page, located);
  write_accuracy(page, located);
  if (located.mass) write_mass(page, *located.mass);
}

}  // namespace stanchion
