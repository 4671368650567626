#include "report/recheck_report.hpp"

#include <fmt/format.h>

#include <algorithm>

#include "model/numbers.hpp"
#include "model/version.hpp"
#include "report/json_parts.hpp"
#include "report/page.hpp"
#include "report/text_sections.hpp"

namespace stanchion {
namespace {

using json_parts::Json;
using json_parts::json_of;

constexpr int kSchemaVersion = 1;
constexpr const char* kOrdering = "minimum degree";

const char* name_of(Agreement agreement) {
  switch (agreement) {
    case Agreement::kAgreed:
      return "agreed";
    case Agreement::kContradicted:
      return "contradicted";
    case Agreement::kNotRepeated:
      break;
  }
  return "not_repeated";
}

std::string in_words(Agreement agreement) {
  return agreement == Agreement::kNotRepeated ? "not repeated" : name_of(agreement);
}

std::string headline(const RecheckReport& report) {
  const Agreement agreement = agreement_of(report);
  const std::size_t claims = report.claims.size();
  if (agreement == Agreement::kNotRepeated && worst(report.claims) == Agreement::kAgreed) {
    return fmt::format("Not repeated: the second path agrees with the certificate, but {} counts otherwise.",
                       report.library->name);
  }
  const std::string all = claims == 1 ? "the claim" : fmt::format("all {} claims", claims);
  switch (agreement) {
    case Agreement::kAgreed:
      return fmt::format("Agreed: {} of the certificate {} found again by another path.", all,
                         claims == 1 ? "was" : "were");
    case Agreement::kContradicted:
      return "NOT AGREED: the certificate and the second path make statements that cannot both be true.";
    case Agreement::kNotRepeated:
      break;
  }
  return "Not repeated: the second path could not say as much as the certificate, and did not contradict it.";
}

/// Whether any statement rests on random vectors: only then can chance have a part in a contradiction.
bool is_statistical(const Outcome& outcome) {
  if (outcome.check) return outcome.check->certificate.level == Level::kStatistical;
  if (outcome.bracket || outcome.audit) return outcome.risk > 0;
  return outcome.count &&
         std::any_of(outcome.count->counts.begin(), outcome.count->counts.end(),
                     [](const ShiftCount& count) { return count.level == Level::kStatistical; });
}

void write_alarm(Page& page, const RecheckReport& report) {
  page.sentence(
      "The certificate was altered, or the machine or the program made a mistake, then or now. Rely on "
      "neither "
      "answer: run `stanchion selftest`, then the original command again on another machine.");
  if (is_statistical(report.claimed) || is_statistical(report.found)) {
    page.sentence(fmt::format("By chance alone this happens with probability at most {}.",
                              rounded(report.claimed.risk + report.found.risk)));
  }
}

void write_claims(Page& page, const std::vector<ClaimComparison>& claims) {
  const bool shifts = claims.size() > 1 || (!claims.empty() && claims.front().shift);
  std::vector<std::vector<std::string>> rows;
  if (shifts) rows.push_back({"shift", "claimed", "found", "result"});
  for (const ClaimComparison& claim : claims) {
    const std::string result = in_words(claim.agreement) + (claim.why.empty() ? "" : ": " + claim.why);
    if (shifts) {
      rows.push_back({claim.shift ? exact(*claim.shift) : "", claim.claimed, claim.found, result});
    } else {
      page.row("claimed", claim.claimed);
      page.row("found", claim.found);
      page.row("result", result);
    }
  }
  if (shifts) page.table(rows, 3);
}

/// "at shift 1.5, offset +4.6e-12: 13, in the certificate 12".
std::string in_words(const LibraryCount& count) {
  std::string text =
      count.shift ? fmt::format("at shift {}, offset ", exact(*count.shift)) : std::string("offset ");
  text += fmt::format("{:+.3g}: ", count.offset);
  if (!count.found) return text + fmt::format("nothing ({})", count.why_not);
  return text + fmt::format("{}, in the certificate {}", grouped(*count.found), grouped(count.claimed));
}

void write_library(Page& page, const std::optional<LibraryComparison>& library) {
  if (!library) return;
  const std::string name = library->name + " " + library->version;
  if (library->counts.empty()) return page.row("other library", name + ": no factorization to compare with");
  const auto same = std::count_if(library->counts.begin(), library->counts.end(),
                                  [](const LibraryCount& count) { return count.found == count.claimed; });
  page.row("other library",
           fmt::format("{}: the same number of negative pivots in {} of {}", name, same,
                       counted(static_cast<Offset>(library->counts.size()), "factorization")));
  for (const LibraryCount& count : library->counts) {
    if (count.found != count.claimed) page.row("", in_words(count));
  }
  if (agreement_of(*library) == Agreement::kAgreed) return;
  page.row("",
           "its counts carry no error bound: an eigenvalue may lie within its rounding of the offset, or one "
           "of the "
           "two is wrong");
}

Json library_of(const std::optional<LibraryComparison>& library) {
  if (!library) return nullptr;
  Json counts = Json::array();
  for (const LibraryCount& count : library->counts) {
    counts.push_back({{"shift", json_of(count.shift)},
                      {"offset", json_of(count.offset)},
                      {"claimed", count.claimed},
                      {"found", json_of(count.found)},
                      {"why_not", count.why_not}});
  }
  return {{"name", library->name},
          {"version", library->version},
          {"result", name_of(agreement_of(*library))},
          {"counts", counts}};
}

Json claim_of(const ClaimComparison& claim) {
  return {{"shift", json_of(claim.shift)},
          {"result", name_of(claim.agreement)},
          {"claimed", claim.claimed},
          {"found", claim.found},
          {"why", claim.why}};
}

Json inputs_of(const Outcome& found) {
  Json list = Json::array();
  for (const InputRecord& input : found.inputs) {
    list.push_back({{"role", input.role}, {"path", input.path}, {"sha256", input.sha256}});
  }
  return list;
}

}  // namespace

Agreement agreement_of(const RecheckReport& report) {
  const Agreement own = worst(report.claims);
  return report.library ? std::max(own, agreement_of(*report.library)) : own;
}

std::string recheck_to_text(const RecheckReport& report) {
  const Agreement agreement = agreement_of(report);
  Page page;
  page.sentence(headline(report));
  if (agreement == Agreement::kContradicted) write_alarm(page, report);
  page.blank();
  write_claims(page, report.claims);
  page.blank();
  page.row("certificate",
           fmt::format("{} (made by {} {})", report.certificate_path, program_name(), report.made_by));
  page.row("second path", fmt::format("{} ordering, plain kernels ({}), seed {}", kOrdering,
                                      report.found.host.isa, report.found.seed));
  write_library(page, report.library);
  write_inputs(page, report.found);
  page.row("time", fmt::format("{}; {} {}", duration_in_words(report.found.timings.total), program_name(),
                               program_version()));
  write_warnings(page, report.found.warnings);
  return page.text();
}

std::string recheck_to_json(const RecheckReport& report) {
  const Agreement agreement = agreement_of(report);
  Json document;
  document["schema_version"] = kSchemaVersion;
  document["program"] = json_parts::program();
  document["command"] = "recheck";
  document["arguments"] = json_of(report.arguments);
  document["certificate"] = {{"path", report.certificate_path},
                             {"sha256", report.certificate_sha256},
                             {"program_version", report.made_by},
                             {"command", report.claimed.command}};
  document["agreed"] = agreement == Agreement::kAgreed;
  document["result"] = name_of(agreement);
  document["claims"] = Json::array();
  for (const ClaimComparison& claim : report.claims) document["claims"].push_back(claim_of(claim));
  document["second_path"] = {
      {"ordering", kOrdering}, {"kernels", report.found.host.isa}, {"seed", report.found.seed}};
  document["other_library"] = library_of(report.library);
  document["inputs"] = inputs_of(report.found);
  document["risk"] = {{"claimed", json_of(report.claimed.risk)}, {"found", json_of(report.found.risk)}};
  document["host"] = json_of(report.found.host);
  document["warnings"] = json_of(report.found.warnings);
  document["seconds"] = json_of(report.found.timings.total);
  return json_parts::bytes_of(document);
}

}  // namespace stanchion
