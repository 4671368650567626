#include "report/count_journal.hpp"

#include <fmt/format.h>

#include <algorithm>

#include "model/claim_consistency.hpp"
#include "model/names.hpp"
#include "model/version.hpp"
#include "report/claim_read.hpp"
#include "report/json_parts.hpp"

namespace stanchion {
namespace {

using json_parts::BadMember;
using json_parts::Json;
using json_parts::json_of;
using json_parts::Member;

Json json_of_event(const RiskEvent& event) {
  return {
      {"factor", json_of(event.factor)}, {"charged", json_of(event.charged)}, {"certified", event.certified}};
}

RiskEvent event_of(const Member& member) {
  RiskEvent event;
  event.factor = unless_null(member.at("factor"), [](const Member& m) { return m.real(); });
  event.charged = member.at("charged").real();
  if (!(event.charged >= 0 && event.charged <= 1)) member.at("charged").wrong("no probability");
  event.certified = member.at("certified").truth();
  return event;
}

JournalLine line_of(const Member& member, Index rows) {
  JournalLine line;
  line.number = member.at("number").index();
  line.count = read_count_claim(member);
  const bool certified = line.count.certificate.level != Level::kNone;
  if (certified && contradiction_within(line.count, rows))
    member.at("below_range").wrong("not what its own certificate gives");
  for (const Member& event : member.at("events").items()) line.events.push_back(event_of(event));
  return line;
}

/// What a count is less than the negative pivots of its own factorization: one number for a whole sweep, of
/// what is taken off for massless dofs or multipliers. Nothing where the certificate has no such
/// factorization.
std::optional<Index> taken_off(const ShiftCount& count) {
  const Certificate& certificate = count.certificate;
  const double resolution = certificate.resolution.value_or(0);
  std::optional<Index> negative;
  for (const OffsetRun& run : certificate.runs) {
    if (run.offset == -resolution || (run.offset == resolution && run.negative == 0)) negative = run.negative;
  }
  if (!negative || count.below_range.first == 0) return std::nullopt;  // nothing is taken off below 0
  return std::max(*negative - count.below_range.first, Index{-1});
}

Status bad(const std::string& path, std::size_t number, const std::string& why) {
  return Status::bad_input("bad-journal", "this is no line of a sweep's results: " + why,
                           fmt::format("{}:{}", path, number),
                           "name another file, or delete this one and start afresh");
}

Index rows_of(const nlohmann::json& header) {
  return header.value("rows_analysed", Index{0});
}

}  // namespace

std::string journal_header(const Request& request, const Outcome& begun,
                           const std::vector<NamedDigest>& files) {
  Json inputs = Json::array();
  for (const InputRecord& input : begun.inputs) {
    inputs.push_back({{"role", input.role}, {"sha256", input.sha256}, {"factor", json_of(input.factor)}});
  }
  for (const auto& [role, digest] : files) inputs.push_back({{"role", role}, {"sha256", digest}});
  const SweepRequest& sweep = request.sweep;
  const Json header = {{"stanchion_sweep", 1},
                       {"version", program_version()},
                       {"pencil", name_of(request.pencil)},
                       {"load_sign", request.input.load_sign_minus ? "minus" : "plus"},
                       {"inputs", inputs},
                       {"rows_analysed", begun.rows_analysed},
                       {"struck_sha256", begun.struck_sha256},
                       {"symmetric_part", request.input.symmetric_part},
                       {"risk", json_of(request.risk)},
                       {"seed", request.seed},
                       {"resolution", json_of(request.resolution)},
                       {"digits", request.digits ? Json(*request.digits) : Json(nullptr)},
                       {"precision", name_of(request.precision)},
                       {"grid", {json_of(sweep.from), json_of(sweep.to), sweep.points, sweep.geometric}}};
  return header.dump(-1, ' ', false, Json::error_handler_t::replace);
}

std::string journal_text(const JournalLine& line) {
  Json json = {{"number", line.number}, {"statement", "count"}};
  json.update(json_of(line.count));
  json["events"] = Json::array();
  for (const RiskEvent& event : line.events) json["events"].push_back(json_of_event(event));
  return json.dump(-1, ' ', false, Json::error_handler_t::replace);
}

Result<std::vector<JournalLine>> read_journal(std::string_view text, const std::string& header,
                                              const std::string& path) {
  std::vector<JournalLine> lines;
  std::optional<Index> off;
  Index rows = 0;
  for (std::size_t number = 1; !text.empty(); ++number) {
    const auto end = text.find('\n');
    if (end == std::string_view::npos) break;  // cut off while it was written
    const std::string_view line = text.substr(0, end);
    text.remove_prefix(end + 1);
    if (number == 1 && line != header) {
      return Status::bad_input("other-sweep", "the file holds the results of another sweep", path,
                               "name another file, or delete this one and start afresh");
    }
    try {
      const nlohmann::json json = nlohmann::json::parse(line);
      if (number == 1) {
        rows = rows_of(json);
      } else {
        lines.push_back(line_of(Member(json, ""), rows));
        const auto own = taken_off(lines.back().count);
        if (own && (*own < 0 || *own != off.value_or(*own)))
          return bad(path, number, "its count is not that of its factorizations");
        if (own) off = own;
      }
    } catch (const BadMember& wrong) {
      return bad(path, number, wrong.message);
    } catch (const nlohmann::json::exception& wrong) {
      return bad(path, number, wrong.what());
    }
  }
  return lines;
}

}  // namespace stanchion
