#include "report/json_parts.hpp"

#include <cmath>

#include "model/names.hpp"
#include "model/version.hpp"

namespace stanchion::json_parts {

Json json_of(double number) {
  return std::isfinite(number) ? Json(number) : Json(nullptr);
}

Json json_of(Index number) {
  return number;
}

Json json_of(const std::string& text) {
  return text;
}

Json json_of(Verdict verdict) {
  return name_of(verdict);
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
          {"rank_level", name_of(constrained.rank_backing.level)},
          {"rank_failure_probability", json_of(constrained.rank_backing.failure_probability)},
          {"inertia_level", name_of(constrained.inertia_backing.level)},
          {"inertia_failure_probability", json_of(constrained.inertia_backing.failure_probability)},
          {"redundant_equations", json_of(constrained.redundant_equations)}};
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
          {"no_eigenvalue_within", json_of(count.no_eigenvalue_within)},
          {"certificate", json_of(count.certificate)}};
}

Json json_of(const Warning& warning) {
  return {{"code", warning.code}, {"message", warning.message}, {"place", warning.place}};
}

Json json_of(const HostRecord& host) {
  return {{"cores", host.cores}, {"blas", host.blas}, {"isa", host.isa}};
}

Json program() {
  return {{"name", program_name()}, {"version", program_version()}};
}

std::string bytes_of(const Json& document) {
  return document.dump(2, ' ', false, Json::error_handler_t::replace) + "\n";
}

}  // namespace stanchion::json_parts
