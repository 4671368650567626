#include "report/json.hpp"

#include "model/names.hpp"
#include "report/cause_words.hpp"
#include "report/json_parts.hpp"
#include "report/json_spectrum.hpp"
#include "report/text_sections.hpp"

namespace stanchion {
namespace {

using json_parts::Json;
using json_parts::json_of;

constexpr int kSchemaVersion = 1;

Json json_of(const ForecastOutcome& forecast) {
  return {{"factor_entries", forecast.factor_entries},
          {"factor_flops", json_of(forecast.factor_flops)},
          {"peak_bytes_count", forecast.peak_bytes_count},
          {"peak_bytes_solve", forecast.peak_bytes_solve},
          {"peak_bytes_locate", forecast.peak_bytes_locate},
          {"seconds", json_of(forecast.seconds)},
          {"seconds_otherwise", json_of(forecast.seconds_otherwise)},
          {"factorization_seconds", json_of(forecast.factorization_seconds)},
          {"factorizations", forecast.factorizations},
          {"relative_test", forecast.relative_test},
          {"flops_per_second", json_of(forecast.flops_per_second)},
          {"assumption", forecast.assumption},
          {"side_by_side", forecast.side_by_side},
          {"peak_bytes_side_by_side", forecast.peak_bytes_side_by_side},
          {"seconds_side_by_side", json_of(forecast.seconds_side_by_side)}};
}

/// The vector itself unless a file holds it.
Json witness_of(const Witness& witness) {
  return {{"quadratic_form", json_of(witness.quadratic_form)},
          {"error_bound", json_of(witness.error_bound)},
          {"path", json_of(witness.path)},
          {"x", witness.path ? Json(nullptr) : json_of(witness.x)}};
}

Json json_of(const DofShare& share) {
  return {{"node", share.node ? Json(*share.node) : Json(nullptr)},
          {"dof", share.dof},
          {"equation", share.equation},
          {"share", json_of(share.share)}};
}

/// A list of lists or records, whatever their kind.
template <class Items, class Make>
Json list_of(const Items& items, const Make& make) {
  Json list = Json::array();
  for (const auto& item : items) list.push_back(make(item));
  return list;
}

Json shares_of(const std::vector<DofShare>& shares) {
  return list_of(shares, [](const DofShare& share) { return json_of(share); });
}

Json json_of(const Direction& direction) {
  return {{"kind", name_of(direction.cause)},
          {"sign", direction.sign},
          {"count", direction.count},
          {"energy", json_of(direction.energy)},
          {"residual", json_of(direction.residual)},
          {"nodes", shares_of(direction.nodes)},
          {"moving_nodes", direction.moving_nodes},
          {"moving_rows", direction.moving_rows},
          {"component", json_of(direction.component)},
          {"motions", json_of(direction.motions)},
          {"explanation", direction.explanation},
          {"remedy", direction.remedy}};
}

template <std::size_t n>
Json numbers_of(const std::array<double, n>& numbers) {
  return list_of(numbers, [](double number) { return json_of(number); });
}

Json json_of(const ComponentRecord& part) {
  return {{"rows", part.rows},
          {"nodes", part.nodes},
          {"nullity", part.nullity},
          {"rigid_energy", part.rigid_energy ? numbers_of(*part.rigid_energy) : Json(nullptr)}};
}

Json json_of(const LocalAccuracy& accuracy) {
  return {{"method", accuracy.method},
          {"vectors", accuracy.vectors},
          {"attention", json_of(accuracy.attention)},
          {"alarm", json_of(accuracy.alarm)},
          {"typical", json_of(accuracy.typical)},
          {"largest", json_of(accuracy.largest)},
          {"histogram", list_of(accuracy.histogram,
                                [](const auto& bin) {
                                  return Json{{"from", bin.first}, {"equations", bin.second}};
                                })},
          {"worst", list_of(accuracy.worst,
                            [](const DofShare& worst) {
                              Json entry = json_of(worst);
                              entry["digits"] = entry["share"];
                              entry.erase("share");
                              return entry;
                            })},
          {"equations", accuracy.equations},
          {"held_directions", accuracy.held_directions},
          {"held", list_of(accuracy.held, [](const DofShare& held) {
             Json entry = json_of(held);
             entry.erase("share");
             return entry;
           })}};
}

void add_location(Json& document, const LocateOutcome& located) {
  document["directions"] = list_of(located.directions, [](const Direction& d) { return json_of(d); });
  document["components"] =
      list_of(located.components, [](const ComponentRecord& part) { return json_of(part); });
  document["location"] = {{"negative", located.negative},
                          {"zero", located.zero},
                          {"not_located", located.not_located},
                          {"weak_below", json_of(located.weak_below)},
                          {"components_left_out", located.components_left_out},
                          {"accuracy_note", located.accuracy_note},
                          {"seconds", json_of(located.seconds)}};
  document["local_accuracy"] = located.accuracy ? json_of(*located.accuracy) : Json(nullptr);
  document["mass"] = nullptr;
  if (located.mass) {
    document["mass"] = {{"total", numbers_of(located.mass->mass)},
                        {"centre", located.mass->centre ? numbers_of(*located.mass->centre) : Json(nullptr)}};
  }
}

Json json_of(const InputRecord& input) {
  return {{"path", input.path}, {"sha256", input.sha256}, {"rows", input.rows}, {"entries", input.entries}};
}

Json json_of(const TableRecord& table) {
  return {{"role", table.role}, {"path", table.path}, {"sha256", table.sha256}};
}

/// One member a role; "added" is a list because --add may be repeated. A role that was not given is null.
Json inputs_of(const std::vector<InputRecord>& inputs) {
  Json roles = {{"stiffness", nullptr}, {"geometric", nullptr}, {"mass", nullptr}, {"added", nullptr}};
  for (const InputRecord& input : inputs) {
    Json record = json_of(input);
    if (input.role != "added") {
      roles[input.role] = std::move(record);
      continue;
    }
    record["factor"] = json_of(input.factor);
    if (roles["added"].is_null()) roles["added"] = Json::array();
    roles["added"].push_back(std::move(record));
  }
  return roles;
}

Json json_of(const Timings& timings) {
  return {{"read", json_of(timings.read)},       {"order", json_of(timings.order)},
          {"analyse", json_of(timings.analyse)}, {"factor", json_of(timings.factor)},
          {"certify", json_of(timings.certify)}, {"total", json_of(timings.total)}};
}

Json json_of(const Work& work) {
  return {{"factor_flops", json_of(work.factor_flops)},
          {"factor_entries", work.factor_entries},
          {"supernodes", work.supernodes},
          {"largest_front", work.largest_front},
          {"redone_in_double", work.redone_in_double},
          {"delayed_pivots", work.delayed_pivots},
          {"two_by_two_pivots", work.two_by_two_pivots},
          {"factorizations", work.factorizations},
          {"analysis_reused", work.analysis_reused}};
}

/// The sentences that open the text report.
Json words_of(const Outcome& outcome) {
  Page page;
  write_answer(page, outcome);
  Json words = Json::array();
  for (const Page::Block& block : page.blocks()) {
    if (block.kind != Page::Kind::kSentence) break;
    const bool opens_a_table = block.text.ends_with(':');
    if (words.empty() || !opens_a_table) words.push_back(json_of(block.text));
  }
  if (outcome.located) words.push_back(json_of(location_headline(*outcome.located)));
  return words;
}

Json common_part(const Outcome& outcome) {
  Json document;
  document["schema_version"] = kSchemaVersion;
  document["program"] = json_parts::program();
  document["command"] = outcome.command;
  document["arguments"] = json_of(outcome.arguments);
  document["title"] = json_of(outcome.title);
  document["reference"] = json_of(outcome.reference);
  document["inputs"] = inputs_of(outcome.inputs);
  document["tables"] = Json::array();
  for (const TableRecord& table : outcome.tables) document["tables"].push_back(json_of(table));
  document["host"] = json_of(outcome.host);
  document["rows_analysed"] = outcome.rows_analysed;
  document["rows_struck"] = outcome.rows_struck;
  return document;
}

void add_answer(Json& document, const Outcome& outcome) {
  if (outcome.check) {
    const CheckOutcome& check = *outcome.check;
    document["verdict"] = json_of(check.verdict);
    document["verdict_for_all_roundings"] = json_of(check.verdict_for_digits);
    document["inertia"] = json_of(check.inertia);
    document["certificate"] = json_of(check.certificate);
    document["constrained"] = json_of(check.constrained);
    document["witness"] = check.witness ? witness_of(*check.witness) : Json(nullptr);
  }
  if (outcome.count) {
    document["counts"] = json_of(outcome.count->counts);
    document["sentences"] = json_of(outcome.count->sentences);
  }
  if (outcome.located) {
    add_location(document, *outcome.located);
  } else if (outcome.command == "locate") {
    add_location(document, {});  // nothing is certain: nothing is named
  }
  json_parts::add_spectrum(document, outcome);
  if (outcome.forecast) document["forecast"] = json_of(*outcome.forecast);
}

}  // namespace

std::string to_json(const Outcome& outcome) {
  Json document = common_part(outcome);
  document["in_words"] = words_of(outcome);
  add_answer(document, outcome);
  document["risk"] = json_of(outcome.risk);
  document["risk_allowed"] = json_of(outcome.risk_allowed);
  document["seed"] = outcome.seed;
  document["warnings"] = json_of(outcome.warnings);
  document["not_checked"] = json_of(outcome.not_checked);
  document["work"] = json_of(outcome.work);
  document["memory_bytes"] = {{"forecast", outcome.memory.forecast}, {"peak", outcome.memory.peak}};
  document["timings_seconds"] = json_of(outcome.timings);
  return json_parts::bytes_of(document);
}

}  // namespace stanchion
