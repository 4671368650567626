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

Json question_of(const Request& request) {
  const InputRequest& input = request.input;
  return {{"pencil", name_of(request.pencil)},
          {"shifts", json_of(request.shifts)},
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
  json["question"] = question_of(document.request);
  json["files"] = files_of(document.files);
  json["rows_analysed"] = outcome.rows_analysed;
  json["struck"] = {{"equations", outcome.rows_struck}, {"sha256", digest_or_null(outcome.struck_sha256)}};
  json["scaling"] = {{"method", kScaling}, {"sha256", digest_or_null(outcome.scaling_sha256)}};
  json["claims"] = claims_of(outcome);
  json["sentences"] = outcome.count ? json_of(outcome.count->sentences) : Json::array();
  json["risk"] = {{"allowed", json_of(outcome.risk_allowed)}, {"spent", json_of(outcome.risk)}};
  json["seed"] = outcome.seed;
  json["events"] = events_of(outcome.events);
  json["host"] = json_of(outcome.host);
  json["warnings"] = json_of(outcome.warnings);
  json["not_checked"] = json_of(outcome.not_checked);
  return json_parts::bytes_of(json);
}

}  // namespace stanchion
