#include "report/json_spectrum.hpp"

#include <cmath>

#include "model/frequency.hpp"
#include "model/names.hpp"

namespace stanchion::json_parts {
namespace {

template <class T, class Write>
Json list_of(const std::vector<T>& items, const Write& write) {
  Json list = Json::array();
  for (const T& item : items) list.push_back(write(item));
  return list;
}

Json jump_of(const Jump& jump) {
  return {{"low", json_of(jump.low)}, {"high", json_of(jump.high)}, {"count", jump.count}};
}

Json contradiction_of(const Contradiction& pair) {
  return {{"shift", json_of(pair.shift)},
          {"other_shift", json_of(pair.other_shift)},
          {"least", pair.least},
          {"most", pair.most}};
}

Json mode_of(const Mode& mode) {
  return {{"rayleigh_quotient", json_of(mode.rayleigh_quotient)}, {"residual", json_of(mode.residual)}};
}

Json value_of(const CriticalValue& value, bool hertz) {
  Json json = {{"value", json_of(value.value)},
               {"low", json_of(value.low)},
               {"high", json_of(value.high)},
               {"multiplicity", value.multiplicity},
               {"level", name_of(value.level)},
               {"proof", value.proof},
               {"failure_probability", json_of(value.failure_probability)},
               {"rigid_body", value.rigid_body}};
  json["hertz"] = hertz ? Json{{"value", json_of(hertz_of(value.value))},
                               {"low", json_of(hertz_of(value.low))},
                               {"high", json_of(hertz_of(value.high))}}
                        : Json(nullptr);
  json["modes"] = value.modes.empty() ? Json(nullptr) : list_of(value.modes, mode_of);
  return json;
}

Json values_of(const std::vector<CriticalValue>& values, bool hertz) {
  return list_of(values, [&](const CriticalValue& value) { return value_of(value, hertz); });
}

Json range_of(const CountedRange& range) {
  return {{"from", json_of(range.from)},
          {"to", json_of(range.to)},
          {"count", json_of(range.count)},
          {"level", name_of(range.level)},
          {"failure_probability", json_of(range.failure_probability)}};
}

Json range_of(const std::optional<CountedRange>& range) {
  return range ? range_of(*range) : Json(nullptr);
}

void add_sweep(Json& document, const SweepOutcome& sweep) {
  document["jumps"] = list_of(sweep.jumps, jump_of);
  document["contradictions"] = list_of(sweep.contradictions, contradiction_of);
  document["side_by_side"] = sweep.side_by_side;
  document["resumed"] = sweep.resumed;
}

void add_bracket(Json& document, const BracketOutcome& bracket) {
  document["critical"] = values_of(bracket.critical, bracket.in_hertz);
  document["complete"] = range_of(bracket.complete);
  document["other_side"] = range_of(bracket.other_side);
  document["none_below"] = bracket.none_below ? Json(*bracket.none_below) : Json(nullptr);
  document["more_than_asked"] = bracket.more_than_asked;
  document["sentences"] = json_of(bracket.sentences);
}

Json gap_of(const AuditGap& gap) {
  return {{"low", json_of(gap.low)},
          {"high", json_of(gap.high)},
          {"listed", gap.listed},
          {"counted", gap.counted},
          {"labels", json_of(gap.labels)}};
}

void add_audit(Json& document, const AuditOutcome& audit) {
  document["verdict"] = name_of(audit.verdict);
  document["gaps"] = list_of(audit.gaps, gap_of);
  document["range"] = {{"from", json_of(audit.range.from)},
                       {"to", json_of(audit.range.to)},
                       {"listed", audit.listed},
                       {"counted", json_of(audit.range.count)},
                       {"level", name_of(audit.range.level)},
                       {"failure_probability", json_of(audit.range.failure_probability)}};
  document["outside"] = audit.outside;
  document["proof"] = audit.proof;
  document["missing"] = values_of(audit.missing, audit.in_hertz);
  document["sentences"] = json_of(audit.sentences);
}

Json step_of(const PathStep& step) {
  return {{"path", step.path},
          {"sha256", step.sha256},
          {"verdict", json_of(step.verdict)},
          {"inertia", json_of(step.inertia)},
          {"changed", step.changed},
          {"certificate", json_of(step.certificate)}};
}

void add_path(Json& document, const PathOutcome& path) {
  document["steps"] = list_of(path.steps, step_of);
  document["first_not_definite"] = json_of(path.first_not_definite);
  document["first_negative"] = json_of(path.first_negative);
}

}  // namespace

void add_spectrum(Json& document, const Outcome& outcome) {
  if (outcome.sweep) add_sweep(document, *outcome.sweep);
  if (outcome.bracket) add_bracket(document, *outcome.bracket);
  if (outcome.audit) add_audit(document, *outcome.audit);
  if (outcome.path) add_path(document, *outcome.path);
}

}  // namespace stanchion::json_parts
