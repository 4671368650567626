#include "report/csv_report.hpp"

#include <fmt/format.h>

#include "model/names.hpp"
#include "model/numbers.hpp"

namespace stanchion {
namespace {

std::string field(const std::string& text) {
  if (text.find_first_of(",\"\r\n") == std::string::npos) return text;
  std::string quoted = "\"";
  for (const char c : text) {
    if (c == '"') quoted += '"';
    quoted += c;
  }
  return quoted + "\"";
}

class Table {
 public:
  void row(const std::string& table, const std::string& item, const std::string& quantity,
           const std::string& value) {
    text_ += fmt::format("{},{},{},{}\n", field(table), field(item), field(quantity), field(value));
  }
  void row(const std::string& table, const std::string& item, const std::string& quantity, double value) {
    row(table, item, quantity, exact(value));
  }
  void row(const std::string& table, const std::string& item, const std::string& quantity, Index value) {
    row(table, item, quantity, std::to_string(value));
  }
  std::string text() && { return std::move(text_); }

 private:
  std::string text_ = "table,item,quantity,value\n";
};

void add_check(Table& table, const CheckOutcome& check) {
  table.row("check", "K", "verdict", name_of(check.verdict));
  table.row("check", "K", "negative", check.inertia.negative);
  table.row("check", "K", "zero", check.inertia.zero);
  table.row("check", "K", "positive", check.inertia.positive);
  table.row("check", "K", "undecided", check.inertia.undecided);
  table.row("check", "K", "level", name_of(check.certificate.level));
  if (check.certificate.resolution) table.row("check", "K", "resolution", *check.certificate.resolution);
}

std::string name_of_dof(const DofShare& d) {
  return d.node ? fmt::format("{} {}", *d.node, d.dof) : d.dof;
}

void add_location(Table& table, const LocateOutcome& located) {
  for (std::size_t k = 0; k < located.directions.size(); ++k) {
    const Direction& d = located.directions[k];
    const std::string item = std::to_string(k + 1);
    table.row("directions", item, "kind", name_of(d.cause));
    table.row("directions", item, "sign", static_cast<Index>(d.sign));
    table.row("directions", item, "count", d.count);
    table.row("directions", item, "energy", d.energy);
    table.row("directions", item, "moving_nodes", d.moving_nodes);
    table.row("directions", item, "explanation", d.explanation);
    table.row("directions", item, "remedy", d.remedy);
    for (const DofShare& share : d.nodes) table.row("shares", item, name_of_dof(share), share.share);
  }
  table.row("location", "all", "not_located", located.not_located);
  for (std::size_t k = 0; k < located.components.size(); ++k) {
    const std::string item = std::to_string(k + 1);
    table.row("components", item, "nodes", located.components[k].nodes);
    table.row("components", item, "rows", located.components[k].rows);
    table.row("components", item, "nullity", located.components[k].nullity);
  }
  if (!located.accuracy_note.empty()) table.row("accuracy", "all", "note", located.accuracy_note);
  if (!located.accuracy) return;
  table.row("accuracy", "all", "equations", located.accuracy->equations);
  table.row("accuracy", "all", "typical", located.accuracy->typical);
  table.row("accuracy", "all", "largest", located.accuracy->largest);
  for (const auto& [from, count] : located.accuracy->histogram)
    table.row("accuracy", "histogram", exact(from), count);
  for (const DofShare& worst : located.accuracy->worst)
    table.row("accuracy", "worst", name_of_dof(worst), worst.share);
}

void add_counts(Table& table, const CountOutcome& answer) {
  for (const ShiftCount& count : answer.counts) {
    const std::string item = exact(count.shift);
    if (count.below) table.row("counts", item, "below", *count.below);
    table.row("counts", item, "least", count.below_range.first);
    table.row("counts", item, "most", count.below_range.second);
    table.row("counts", item, "level", name_of(count.level));
  }
}

void add_jumps(Table& table, const SweepOutcome& sweep) {
  for (std::size_t k = 0; k < sweep.jumps.size(); ++k) {
    const std::string item = std::to_string(k + 1);
    table.row("jumps", item, "low", sweep.jumps[k].low);
    table.row("jumps", item, "high", sweep.jumps[k].high);
    table.row("jumps", item, "count", sweep.jumps[k].count);
  }
}

/// Values in their intervals: "critical" of a bracket, "missing" of an audit.
void add_values(Table& table, const std::string& name, const std::vector<CriticalValue>& values) {
  for (std::size_t k = 0; k < values.size(); ++k) {
    const CriticalValue& value = values[k];
    const std::string item = std::to_string(k + 1);
    table.row(name, item, "value", value.value);
    table.row(name, item, "low", value.low);
    table.row(name, item, "high", value.high);
    table.row(name, item, "multiplicity", value.multiplicity);
    table.row(name, item, "level", name_of(value.level));
  }
}

void add_audit(Table& table, const AuditOutcome& audit) {
  table.row("audit", "list", "verdict", name_of(audit.verdict));
  table.row("audit", "list", "from", audit.range.from);
  table.row("audit", "list", "to", audit.range.to);
  table.row("audit", "list", "listed", audit.listed);
  if (audit.range.count) table.row("audit", "list", "counted", *audit.range.count);
  table.row("audit", "list", "outside", audit.outside);
  table.row("audit", "list", "level", name_of(audit.range.level));
  for (std::size_t k = 0; k < audit.gaps.size(); ++k) {
    const AuditGap& gap = audit.gaps[k];
    const std::string item = std::to_string(k + 1);
    table.row("gaps", item, "low", gap.low);
    table.row("gaps", item, "high", gap.high);
    table.row("gaps", item, "listed", gap.listed);
    table.row("gaps", item, "counted", gap.counted);
  }
  add_values(table, "missing", audit.missing);
}

void add_path(Table& table, const PathOutcome& path) {
  for (std::size_t k = 0; k < path.steps.size(); ++k) {
    const PathStep& step = path.steps[k];
    const std::string item = std::to_string(k + 1);
    table.row("steps", item, "path", step.path);
    table.row("steps", item, "verdict", name_of(step.verdict));
    table.row("steps", item, "negative", step.inertia.negative);
    table.row("steps", item, "zero", step.inertia.zero);
    table.row("steps", item, "positive", step.inertia.positive);
    table.row("steps", item, "undecided", step.inertia.undecided);
    table.row("steps", item, "level", name_of(step.certificate.level));
  }
}

}  // namespace

std::string to_csv(const Outcome& outcome) {
  Table table;
  if (outcome.check) add_check(table, *outcome.check);
  if (outcome.path) add_path(table, *outcome.path);
  if (outcome.count) add_counts(table, *outcome.count);
  if (outcome.sweep) add_jumps(table, *outcome.sweep);
  if (outcome.bracket) add_values(table, "critical", outcome.bracket->critical);
  if (outcome.audit) add_audit(table, *outcome.audit);
  if (outcome.forecast) {
    table.row("forecast", "factor", "seconds", outcome.forecast->seconds);
    table.row("forecast", "factor", "flops", outcome.forecast->factor_flops);
    table.row("forecast", "factor", "peak_bytes_count", std::to_string(outcome.forecast->peak_bytes_count));
    table.row("forecast", "factor", "peak_bytes_solve", std::to_string(outcome.forecast->peak_bytes_solve));
    table.row("forecast", "factor", "peak_bytes_locate", std::to_string(outcome.forecast->peak_bytes_locate));
  }
  if (outcome.located) add_location(table, *outcome.located);
  for (const Warning& warning : outcome.warnings)
    table.row("warnings", warning.code, warning.place, warning.message);
  return std::move(table).text();
}

}  // namespace stanchion
