#include "report/certificate_json.hpp"

#include "model/names.hpp"
#include "report/json_parts.hpp"

namespace stanchion {
namespace {

using json_parts::Json;
using json_parts::json_of;

constexpr int kSchemaVersion = 1;

constexpr const char* kScaling =
    "powers of two on both sides of the matrix, from its diagonal where that is positive and dominates, "
    "otherwise equilibrated in the maximum norm; exact, and the inertia stays";

const char* name_of(ValueUnit unit) {
  return unit == ValueUnit::kHertz ? "hertz" : unit == ValueUnit::kOmega2 ? "omega2" : "factor";
}

/// Of an audit; the list itself is among the files.
Json list_of(const Outcome& outcome, const AuditRequest& audit) {
  if (!outcome.audit) return nullptr;
  return {{"unit", name_of(audit.unit)},
          {"tolerance", json_of(audit.tolerance)},
          {"from", json_of(audit.from)},
          {"to", json_of(audit.to)},
          {"find_missing", audit.find_missing}};
}

/// Of a sweep every shift that was counted at is a question of its own.
std::vector<double> shifts_of(const Request& request, const Outcome& outcome) {
  if (!outcome.sweep) return request.shifts;
  std::vector<double> shifts;
  for (const ShiftCount& count : outcome.count->counts) shifts.push_back(count.shift);
  return shifts;
}

Json question_of(const Request& request, const Outcome& outcome) {
  const InputRequest& input = request.input;
  return {{"pencil", name_of(request.pencil)},
          {"shifts", json_of(shifts_of(request, outcome))},
          {"width", outcome.bracket ? json_of(request.bracket.width) : Json(nullptr)},
          {"safety", outcome.bracket ? Json(request.bracket.safety) : Json(nullptr)},
          {"list", list_of(outcome, request.audit)},
          {"load_sign", input.load_sign_minus ? "minus" : "plus"},
          {"symmetric_part", input.symmetric_part},
          {"strike_held", input.strike_held},
          {"base", input.base ? Json(*input.base) : Json(nullptr)},
          {"rows", json_of(input.rows)},
          {"resolution", json_of(request.resolution)},
          {"digits", request.digits ? Json(*request.digits) : Json(nullptr)},
          {"precision", name_of(request.precision)}};
}

Json files_of(const std::vector<CertifiedFile>& files) {
  Json list = Json::array();
  for (const CertifiedFile& file : files) {
    list.push_back({{"role", file.role},
                    {"path", file.path},
                    {"absolute_path", file.absolute_path},
                    {"sha256", file.sha256},
                    {"rows", json_of(file.rows)},
                    {"entries", file.entries ? Json(*file.entries) : Json(nullptr)},
                    {"factor", json_of(file.factor)}});
  }
  return list;
}

Json events_of(const std::vector<RiskEvent>& events) {
  Json list = Json::array();
  for (const RiskEvent& event : events) {
    list.push_back({{"factor", json_of(event.factor)},
                    {"charged", json_of(event.charged)},
                    {"certified", event.certified}});
  }
  return list;
}

Json range_of(const char* which, const CountedRange& range) {
  return {{"statement", "range"},
          {"which", which},
          {"from", json_of(range.from)},
          {"to", json_of(range.to)},
          {"count", json_of(range.count)},
          {"level", name_of(range.level)},
          {"failure_probability", json_of(range.failure_probability)}};
}

void add_range(const char* which, const std::optional<CountedRange>& range, Json& claims) {
  if (range) claims.push_back(range_of(which, *range));
}

void add_values(const std::vector<CriticalValue>& values, Json& claims) {
  for (const CriticalValue& value : values) {
    claims.push_back({{"statement", "values"},
                      {"value", json_of(value.value)},
                      {"low", json_of(value.low)},
                      {"high", json_of(value.high)},
                      {"multiplicity", value.multiplicity},
                      {"level", name_of(value.level)},
                      {"proof", value.proof},
                      {"failure_probability", json_of(value.failure_probability)}});
  }
}

Json audit_of(const AuditOutcome& audit) {
  Json gaps = Json::array();
  for (const AuditGap& gap : audit.gaps) {
    gaps.push_back({{"low", json_of(gap.low)},
                    {"high", json_of(gap.high)},
                    {"listed", gap.listed},
                    {"counted", gap.counted}});
  }
  Json claim = range_of("audited", audit.range);
  claim["statement"] = "audit";
  claim.erase("which");
  claim["verdict"] = name_of(audit.verdict);
  claim["listed"] = audit.listed;
  claim["outside"] = audit.outside;
  claim["proof"] = audit.proof;
  claim["gaps"] = std::move(gaps);
  return claim;
}

const std::vector<std::string>* sentences_of(const Outcome& outcome) {
  if (outcome.count) return &outcome.count->sentences;
  if (outcome.bracket) return &outcome.bracket->sentences;
  return outcome.audit ? &outcome.audit->sentences : nullptr;
}

/// One claim an answer.
Json claims_of(const Outcome& outcome) {
  Json claims = Json::array();
  if (outcome.check) {
    const CheckOutcome& check = *outcome.check;
    claims.push_back({{"statement", "inertia"},
                      {"verdict", json_of(check.verdict)},
                      {"verdict_for_all_roundings", json_of(check.verdict_for_digits)},
                      {"inertia", json_of(check.inertia)},
                      {"certificate", json_of(check.certificate)},
                      {"constrained", json_of(check.constrained)}});
  }
  if (outcome.count) {
    for (const ShiftCount& count : outcome.count->counts) {
      Json claim = {{"statement", "count"}};
      claim.update(json_of(count));
      claims.push_back(std::move(claim));
    }
  }
  if (outcome.bracket) {
    add_values(outcome.bracket->critical, claims);
    add_range("complete", outcome.bracket->complete, claims);
    add_range("other_side", outcome.bracket->other_side, claims);
  }
  if (outcome.audit) {
    claims.push_back(audit_of(*outcome.audit));
    add_values(outcome.audit->missing, claims);
  }
  return claims;
}

Json digest_or_null(const std::string& digest) {
  return digest.empty() ? Json(nullptr) : Json(digest);
}

}  // namespace

std::string certificate_to_json(const CertificateDocument& document) {
  const Outcome& outcome = document.outcome;
  Json json;
  json["schema_version"] = kSchemaVersion;
  json["document"] = "certificate";
  json["program"] = json_parts::program();
  json["command"] = outcome.command;
  json["arguments"] = json_of(outcome.arguments);
  json["title"] = json_of(outcome.title);
  json["reference"] = json_of(outcome.reference);
  json["question"] = question_of(document.request, outcome);
  json["files"] = files_of(document.files);
  json["rows_analysed"] = outcome.rows_analysed;
  json["struck"] = {{"equations", outcome.rows_struck}, {"sha256", digest_or_null(outcome.struck_sha256)}};
  json["scaling"] = {{"method", kScaling}, {"sha256", digest_or_null(outcome.scaling_sha256)}};
  json["claims"] = claims_of(outcome);
  json["sentences"] = sentences_of(outcome) != nullptr ? json_of(*sentences_of(outcome)) : Json::array();
  json["risk"] = {{"allowed", json_of(outcome.risk_allowed)}, {"spent", json_of(outcome.risk)}};
  json["seed"] = outcome.seed;
  json["events"] = events_of(outcome.events);
  json["host"] = json_of(outcome.host);
  json["warnings"] = json_of(outcome.warnings);
  json["not_checked"] = json_of(outcome.not_checked);
  return json_parts::bytes_of(json);
}

}  // namespace stanchion
