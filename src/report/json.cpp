#include "report/json.hpp"

#include <cmath>
#include <nlohmann/json.hpp>
#include <optional>
#include <utility>
#include <vector>

#include "model/names.hpp"
#include "model/version.hpp"

namespace stanchion {
namespace {

using Json = nlohmann::ordered_json;

constexpr int kSchemaVersion = 1;

/// JSON has no NaN and no Infinity.
Json json_of(double number) {
  return std::isfinite(number) ? Json(number) : Json(nullptr);
}
Json json_of(Index number) {
  return number;
}
Json json_of(const std::string& text) {
  return text;
}

// Declared ahead of the templates below, which look them up where they are defined.
Json json_of(const Inertia& inertia);
Json json_of(const OffsetRun& run);
Json json_of(const Certificate& certificate);
Json json_of(const ConstrainedOutcome& constrained);
Json json_of(const ShiftCount& count);
Json json_of(const Witness& witness);
Json json_of(const Warning& warning);

template <class T>
Json json_of(const std::pair<T, T>& pair) {
  return Json::array({json_of(pair.first), json_of(pair.second)});
}

template <class T>
Json json_of(const std::optional<T>& value) {
  return value ? json_of(*value) : Json(nullptr);
}

template <class T>
Json json_of(const std::vector<T>& items) {
  Json list = Json::array();
  for (const T& item : items) list.push_back(json_of(item));
  return list;
}

Json json_of(const Inertia& inertia) {
  return {{"negative", inertia.negative},
          {"zero", inertia.zero},
          {"positive", inertia.positive},
          {"undecided", inertia.undecided}};
}

Json json_of(const OffsetRun& run) {
  return {
      {"offset", json_of(run.offset)}, {"negative", run.negative}, {"error_bound", json_of(run.error_bound)}};
}

Json json_of(const Certificate& certificate) {
  return {{"level", name_of(certificate.level)},
          {"method", json_of(certificate.method)},
          {"precision", json_of(certificate.precision)},
          {"resolution", json_of(certificate.resolution)},
          {"error_bound", json_of(certificate.error_bound)},
          {"relative_bound", json_of(certificate.relative_bound)},
          {"failure_probability", json_of(certificate.failure_probability)},
          {"assumptions", json_of(certificate.assumptions)},
          {"smallest_eigenvalue_above", json_of(certificate.smallest_eigenvalue_above)},
          {"smallest_eigenvalue_of_k_above", json_of(certificate.smallest_eigenvalue_of_k_above)},
          {"runs", json_of(certificate.runs)}};
}

Json json_of(const ConstrainedOutcome& constrained) {
  return {{"multipliers", constrained.multipliers},
          {"rank", json_of(constrained.rank)},
          {"redundant", json_of(constrained.redundant)},
          {"inertia", json_of(constrained.inertia)},
          {"negative_range", json_of(constrained.negative_range)},
          {"redundant_equations", json_of(constrained.redundant_equations)}};
}

Json json_of(const Witness& witness) {
  return {{"quadratic_form", json_of(witness.quadratic_form)},
          {"error_bound", json_of(witness.error_bound)},
          {"x", json_of(witness.x)}};
}

Json json_of(const ShiftCount& count) {
  return {{"shift", json_of(count.shift)},
          {"below", json_of(count.below)},
          {"meaning", count.meaning},
          {"level", name_of(count.level)},
          {"method", json_of(count.method)},
          {"failure_probability", json_of(count.failure_probability)},
          {"below_range", json_of(count.below_range)},
          {"holds_outside", json_of(count.holds_outside)},
          {"certificate", json_of(count.certificate)}};
}

Json json_of(const ForecastOutcome& forecast) {
  return {{"factor_entries", forecast.factor_entries},
          {"factor_flops", json_of(forecast.factor_flops)},
          {"peak_bytes_count", forecast.peak_bytes_count},
          {"peak_bytes_solve", forecast.peak_bytes_solve},
          {"seconds", json_of(forecast.seconds)}};
}

Json json_of(const Warning& warning) {
  return {{"code", warning.code}, {"message", warning.message}, {"place", warning.place}};
}

Json json_of(const InputRecord& input) {
  return {{"path", input.path}, {"sha256", input.sha256}, {"rows", input.rows}, {"entries", input.entries}};
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
          {"delayed_pivots", work.delayed_pivots},
          {"two_by_two_pivots", work.two_by_two_pivots},
          {"factorizations", work.factorizations}};
}

Json common_part(const Outcome& outcome) {
  Json document;
  document["schema_version"] = kSchemaVersion;
  document["program"] = {{"name", program_name()}, {"version", program_version()}};
  document["command"] = outcome.command;
  document["arguments"] = json_of(outcome.arguments);
  document["title"] = json_of(outcome.title);
  document["reference"] = json_of(outcome.reference);
  document["inputs"] = inputs_of(outcome.inputs);
  document["host"] = {{"cores", outcome.host.cores}, {"blas", outcome.host.blas}, {"isa", outcome.host.isa}};
  document["rows_analysed"] = outcome.rows_analysed;
  document["rows_struck"] = outcome.rows_struck;
  return document;
}

void add_answer(Json& document, const Outcome& outcome) {
  if (outcome.check) {
    const CheckOutcome& check = *outcome.check;
    document["verdict"] = name_of(check.verdict);
    document["verdict_with_rounding"] =
        check.verdict_as_written ? Json(name_of(*check.verdict_as_written)) : Json(nullptr);
    document["inertia"] = json_of(check.inertia);
    document["certificate"] = json_of(check.certificate);
    document["constrained"] = json_of(check.constrained);
    document["witness"] = json_of(check.witness);
  }
  if (outcome.count) {
    document["counts"] = json_of(outcome.count->counts);
    document["sentences"] = json_of(outcome.count->sentences);
  }
  if (outcome.forecast) document["forecast"] = json_of(*outcome.forecast);
}

}  // namespace

std::string to_json(const Outcome& outcome) {
  Json document = common_part(outcome);
  add_answer(document, outcome);
  document["risk"] = json_of(outcome.risk);
  document["risk_allowed"] = json_of(outcome.risk_allowed);
  document["seed"] = outcome.seed;
  document["warnings"] = json_of(outcome.warnings);
  document["not_checked"] = json_of(outcome.not_checked);
  document["work"] = json_of(outcome.work);
  document["memory_bytes"] = {{"forecast", outcome.memory.forecast}, {"peak", outcome.memory.peak}};
  document["timings_seconds"] = json_of(outcome.timings);
  return document.dump(2, ' ', false, Json::error_handler_t::replace) + "\n";
}

}  // namespace stanchion
