// A certificate read back. Nothing in the file is trusted: every member is looked at before it is used.
#include <fmt/format.h>

#include <algorithm>
#include <cmath>

#include "model/input_files.hpp"
#include "model/names.hpp"
#include "report/certificate_json.hpp"
#include "report/claim_read.hpp"
#include "report/json_member.hpp"

namespace stanchion {
namespace {

using json_parts::BadMember;
using json_parts::Member;
using json_parts::unless_null;

double real_of(const Member& member) {
  return member.real();
}
Index index_of(const Member& member) {
  return member.index();
}
std::string text_of(const Member& member) {
  return member.text();
}
std::optional<double> optional_real(const Member& member) {
  return unless_null(member, real_of);
}

Verdict verdict_of(const Member& member) {
  return member.named({Verdict::kPositiveDefinite, Verdict::kPositiveSemidefinite,
                       Verdict::kNegativeSemidefinite, Verdict::kNegativeDefinite, Verdict::kIndefinite,
                       Verdict::kUnresolved});
}

Level level_of(const Member& member) {
  return member.named({Level::kProved, Level::kStatistical, Level::kNone});
}

Inertia inertia_of(const Member& member) {
  return {member.at("negative").index(), member.at("zero").index(), member.at("positive").index(),
          member.at("undecided").index()};
}

template <class T, class Read>
std::pair<T, T> pair_of(const Member& member, const Read& read) {
  const auto both = member.items();
  if (both.size() != 2) member.wrong("no pair");
  return {read(both[0]), read(both[1])};
}

double probability_of(const Member& member) {
  if (!(member.real() >= 0 && member.real() <= 1)) member.wrong("no probability");
  return member.real();
}

double bound_of(const Member& member) {
  if (!(member.real() >= 0)) member.wrong("negative");
  return member.real();
}

/// A text that is one of `words`.
std::string word_of(const Member& member, std::initializer_list<const char*> words) {
  const std::string text = member.text();
  if (std::find(words.begin(), words.end(), text) == words.end()) member.wrong("none of the known words");
  return text;
}

std::string method_of(const Member& member) {
  return word_of(member, {"offsets", "relative"});
}
std::string precision_of(const Member& member) {
  return word_of(member, {"double", "single", "extended"});
}

Certificate certificate_of(const Member& member) {
  Certificate certificate;
  certificate.level = level_of(member.at("level"));
  certificate.method = unless_null(member.at("method"), method_of);
  certificate.precision = unless_null(member.at("precision"), precision_of);
  certificate.resolution = unless_null(member.at("resolution"), bound_of);
  certificate.error_bound = unless_null(member.at("error_bound"), bound_of);
  certificate.relative_bound = unless_null(member.at("relative_bound"), bound_of);
  certificate.failure_probability = unless_null(member.at("failure_probability"), probability_of);
  for (const Member& text : member.at("assumptions").items()) certificate.assumptions.push_back(text.text());
  certificate.smallest_eigenvalue_above = optional_real(member.at("smallest_eigenvalue_above"));
  certificate.smallest_eigenvalue_of_k_above = optional_real(member.at("smallest_eigenvalue_of_k_above"));
  for (const Member& run : member.at("runs").items()) {
    certificate.runs.push_back(
        {run.at("offset").real(), run.at("negative").index(), unless_null(run.at("error_bound"), bound_of)});
  }
  return certificate;
}

/// Certificates written before these keys existed have none.
Backing backing_of(const Member& member, const std::string& what) {
  if (!member.has(what + "_level")) return {};
  return {level_of(member.at(what + "_level")),
          unless_null(member.at(what + "_failure_probability"), probability_of)};
}

ConstrainedOutcome constrained_of(const Member& member) {
  ConstrainedOutcome constrained;
  constrained.multipliers = member.at("multipliers").index();
  constrained.rank = unless_null(member.at("rank"), index_of);
  constrained.redundant = unless_null(member.at("redundant"), index_of);
  constrained.inertia = unless_null(member.at("inertia"), inertia_of);
  constrained.negative_range = unless_null(
      member.at("negative_range"), [](const Member& range) { return pair_of<Index>(range, index_of); });
  constrained.rank_backing = backing_of(member, "rank");
  constrained.inertia_backing = backing_of(member, "inertia");
  return constrained;
}

CheckOutcome check_of(const Member& claim) {
  CheckOutcome check;
  word_of(claim.at("statement"), {"inertia"});
  check.verdict = verdict_of(claim.at("verdict"));
  check.verdict_for_digits = unless_null(claim.at("verdict_for_all_roundings"), verdict_of);
  check.inertia = inertia_of(claim.at("inertia"));
  check.certificate = certificate_of(claim.at("certificate"));
  check.constrained = unless_null(claim.at("constrained"), constrained_of);
  return check;
}

ShiftCount count_of(const Member& claim) {
  ShiftCount count;
  word_of(claim.at("statement"), {"count"});
  count.method = unless_null(claim.at("method"), method_of);
  count.failure_probability = unless_null(claim.at("failure_probability"), probability_of);
  count.shift = claim.at("shift").real();
  count.below = unless_null(claim.at("below"), index_of);
  count.meaning = claim.at("meaning").text();
  count.level = level_of(claim.at("level"));
  count.below_range = pair_of<Index>(claim.at("below_range"), index_of);
  count.holds_outside = unless_null(claim.at("holds_outside"),
                                    [](const Member& band) { return pair_of<double>(band, real_of); });
  count.no_eigenvalue_within = unless_null(claim.at("no_eigenvalue_within"), bound_of);
  count.certificate = certificate_of(claim.at("certificate"));
  return count;
}

CriticalValue value_of(const Member& claim) {
  CriticalValue value;
  value.value = claim.at("value").real();
  value.low = claim.at("low").real();
  value.high = claim.at("high").real();
  value.multiplicity = claim.at("multiplicity").index();
  value.level = level_of(claim.at("level"));
  value.proof = word_of(claim.at("proof"), {"counts", "residual"});
  value.failure_probability = unless_null(claim.at("failure_probability"), probability_of);
  return value;
}

/// A range that is open below has no `from`.
CountedRange range_of(const Member& claim) {
  return {optional_real(claim.at("from")).value_or(-INFINITY), claim.at("to").real(),
          unless_null(claim.at("count"), index_of), level_of(claim.at("level")),
          unless_null(claim.at("failure_probability"), probability_of)};
}

AuditOutcome audit_of(const Member& claim) {
  AuditOutcome audit;
  audit.verdict =
      claim.at("verdict").named({AuditVerdict::kComplete, AuditVerdict::kMissing, AuditVerdict::kSurplus,
                                 AuditVerdict::kMissingAndSurplus, AuditVerdict::kUnresolved});
  audit.range = range_of(claim);
  audit.listed = claim.at("listed").index();
  audit.outside = claim.at("outside").index();
  audit.proof = claim.at("proof").text();
  for (const Member& gap : claim.at("gaps").items()) {
    audit.gaps.push_back({optional_real(gap.at("low")).value_or(-INFINITY),
                          gap.at("high").real(),
                          gap.at("listed").index(),
                          gap.at("counted").index(),
                          {}});
  }
  return audit;
}

void read_value_claim(const Member& claim, Outcome& outcome) {
  const std::string statement = word_of(claim.at("statement"), {"values", "range", "audit"});
  if (statement == "audit" && outcome.command == "audit" && !outcome.audit) {
    outcome.audit = audit_of(claim);
  } else if (statement == "values" && (outcome.bracket || outcome.audit)) {
    (outcome.bracket ? outcome.bracket->critical : outcome.audit->missing).push_back(value_of(claim));
  } else if (statement == "range" && outcome.bracket) {
    const bool complete = word_of(claim.at("which"), {"complete", "other_side"}) == "complete";
    (complete ? outcome.bracket->complete : outcome.bracket->other_side) = range_of(claim);
  } else {
    claim.at("statement").wrong("no statement of this command");
  }
}

void read_claims(const Member& claims, Outcome& outcome) {
  const auto list = claims.items();
  if (outcome.command == "check") {
    if (list.size() != 1) claims.wrong("not the one claim that check makes");
    outcome.check = check_of(list.front());
    return;
  }
  if (list.empty() && outcome.command != "bracket") claims.wrong("empty");
  if (outcome.command == "bracket" || outcome.command == "audit") {
    if (outcome.command == "bracket") outcome.bracket.emplace();
    for (const Member& claim : list) read_value_claim(claim, outcome);
    if (outcome.command == "audit" && !outcome.audit) claims.wrong("without a verdict");
    return;
  }
  outcome.count.emplace();
  for (const Member& claim : list) outcome.count->counts.push_back(count_of(claim));
}

CertifiedFile file_of(const Member& member) {
  return {member.at("role").text(),
          member.at("path").text(),
          member.at("absolute_path").text(),
          member.at("sha256").text(),
          unless_null(member.at("rows"), index_of),
          unless_null(member.at("entries"), [](const Member& m) { return static_cast<Offset>(m.natural()); }),
          optional_real(member.at("factor"))};
}

/// The role of a file in the request; false for a role nobody knows.
bool place_file(const CertifiedFile& file, Request& request) {
  InputRequest& input = request.input;
  if (file.role == "stiffness") {
    input.stiffness = file.path;
  } else if (file.role == "values") {
    request.audit.values = file.path;
  } else if (file.role == "added") {
    input.added.push_back({file.path, file.factor.value_or(1)});
  } else if (std::optional<std::string>* place = file_of_role(input, file.role)) {
    *place = file.path;
  } else {
    return false;
  }
  return true;
}

void read_list(const Member& list, AuditRequest& audit) {
  const std::string unit = word_of(list.at("unit"), {"factor", "omega2", "hertz"});
  audit.unit = unit == "hertz"    ? ValueUnit::kHertz
               : unit == "omega2" ? ValueUnit::kOmega2
                                  : ValueUnit::kFactor;
  audit.tolerance = optional_real(list.at("tolerance"));
  audit.from = optional_real(list.at("from"));
  audit.to = optional_real(list.at("to"));
  audit.find_missing = list.at("find_missing").truth();
}

void read_question(const Member& question, Request& request) {
  InputRequest& input = request.input;
  request.pencil = question.at("pencil").named({Pencil::kStiffness, Pencil::kGeometric, Pencil::kMass});
  for (const Member& shift : question.at("shifts").items()) request.shifts.push_back(shift.real());
  input.load_sign_minus = question.at("load_sign").text() == "minus";
  input.symmetric_part = question.at("symmetric_part").truth();
  input.strike_held = question.at("strike_held").truth();
  input.base = unless_null(question.at("base"), index_of);
  input.rows = unless_null(question.at("rows"), index_of);
  request.resolution = optional_real(question.at("resolution"));
  request.digits = unless_null(question.at("digits"), index_of);
  if (question.has("width")) request.bracket.width = optional_real(question.at("width")).value_or(1e-8);
  if (question.has("safety")) {
    request.bracket.safety =
        unless_null(question.at("safety"), [](const Member& m) { return m.truth(); }).value_or(false);
  }
  if (question.has("list") && !question.at("list").is_null()) read_list(question.at("list"), request.audit);
  request.precision =
      question.at("precision")
          .named({Precision::kAutomatic, Precision::kSingle, Precision::kDouble, Precision::kExtended});
}

CertificateDocument document_of(const Member& root) {
  if (root.at("document").text() != "certificate") root.at("document").wrong("not 'certificate'");
  if (root.at("schema_version").natural() != 1) root.at("schema_version").wrong("of a version unknown here");
  CertificateDocument document;
  Outcome& outcome = document.outcome;
  document.program_version = root.at("program").at("version").text();
  outcome.command = root.at("command").text();
  word_of(root.at("command"), {"check", "count", "sweep", "bracket", "audit"});
  read_question(root.at("question"), document.request);
  for (const Member& file : root.at("files").items()) {
    document.files.push_back(file_of(file));
    if (!place_file(document.files.back(), document.request)) file.at("role").wrong("no known role");
  }
  if (document.request.input.stiffness.empty()) root.at("files").wrong("without a stiffness matrix");
  outcome.rows_analysed = root.at("rows_analysed").index();
  outcome.rows_struck = root.at("struck").at("equations").index();
  outcome.struck_sha256 = unless_null(root.at("struck").at("sha256"), text_of).value_or("");
  outcome.scaling_sha256 = unless_null(root.at("scaling").at("sha256"), text_of).value_or("");
  read_claims(root.at("claims"), outcome);
  for (const Member& sentence : root.at("sentences").items()) {
    if (outcome.count) outcome.count->sentences.push_back(sentence.text());
  }
  document.request.risk = outcome.risk_allowed = root.at("risk").at("allowed").real();
  outcome.risk = root.at("risk").at("spent").real();
  for (const Member& event : root.at("events").items()) {
    outcome.events.push_back({optional_real(event.at("factor")), probability_of(event.at("charged")),
                              event.at("certified").truth()});
  }
  document.request.seed = outcome.seed = root.at("seed").natural();
  if (outcome.count &&
      !std::equal(document.request.shifts.begin(), document.request.shifts.end(),
                  outcome.count->counts.begin(), outcome.count->counts.end(),
                  [](double shift, const ShiftCount& count) { return shift == count.shift; })) {
    root.at("claims").wrong("not one claim a shift");
  }
  return document;
}

Status bad_certificate(std::string message, const std::string& path) {
  return Status::bad_input("bad-certificate", std::move(message), path,
                           "give a file written by --certificate, as it was written");
}

}  // namespace

Result<CertificateDocument> read_certificate(std::string_view text, const std::string& path) {
  const auto json = nlohmann::json::parse(text.begin(), text.end(), nullptr, false);
  if (json.is_discarded()) return bad_certificate("this is not JSON", path);
  try {
    return document_of(Member(json, ""));
  } catch (const BadMember& bad) {
    return bad_certificate(bad.message, path);
  }
}

ShiftCount read_count_claim(const Member& claim) {
  return count_of(claim);
}

}  // namespace stanchion
