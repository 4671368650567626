#include "report/samples.hpp"

#include "model/not_checked.hpp"

namespace stanchion::samples {
namespace {

Outcome base(const char* command, Question question) {
  Outcome outcome;
  outcome.command = command;
  outcome.arguments = {command, "bridge/K.mtx"};
  outcome.inputs.push_back({"stiffness", "bridge/K.mtx", std::string(64, '7'), 29796, 1234567, {}});
  outcome.host = {2, "a BLAS", "AVX2"};
  outcome.rows_analysed = 29796;
  outcome.timings = {0.123, 0.05, 0.02, 0.0831, 0.04, 0.33};
  outcome.work = {4.6e9, 12345678, 1234, 1020, 0, 2, 3, 2};
  outcome.memory = {120000000, 118000000};
  Request request;
  outcome.not_checked = not_checked(request, question);
  return outcome;
}

Certificate proved_offsets(std::vector<OffsetRun> runs) {
  Certificate certificate;
  certificate.level = Level::kProved;
  certificate.method = "offsets";
  certificate.precision = "double";
  certificate.resolution = 1e-11;
  certificate.error_bound = 3.4e-13;
  certificate.runs = std::move(runs);
  return certificate;
}

Outcome checked(Verdict verdict, Inertia inertia, Certificate certificate) {
  Outcome outcome = base("check", Question::kCheck);
  outcome.check.emplace();
  outcome.check->verdict = verdict;
  outcome.check->inertia = inertia;
  outcome.check->certificate = std::move(certificate);
  return outcome;
}

ShiftCount shift_count(double shift, Index below) {
  ShiftCount count;
  count.shift = shift;
  count.below = below;
  count.meaning = "critical factors between 0 and f";
  count.level = Level::kProved;
  count.method = "offsets";
  count.below_range = {below, below};
  count.holds_outside = {shift - 1e-9, shift + 1e-9};
  count.certificate = proved_offsets({{1e-11, below, 2e-13}, {-1e-11, below, 3.4e-13}});
  return count;
}

}  // namespace

Outcome definite() {
  Outcome outcome =
      checked(Verdict::kPositiveDefinite, {0, 0, 29796, 0}, proved_offsets({{1e-11, 0, 3.4e-13}}));
  outcome.check->certificate.smallest_eigenvalue_above = 9.66e-12;
  outcome.check->certificate.smallest_eigenvalue_of_k_above = 0.0021;
  outcome.check->verdict_for_digits = Verdict::kPositiveDefinite;
  outcome.inputs.push_back({"added", "bridge/Gdead.mtx", std::string(64, 'a'), 29796, 345678, 1.35});
  outcome.inputs.push_back({"added", "bridge/soil.mtx", std::string(64, 'b'), 29796, 120, -0.5});
  outcome.title = "Lock footbridge, span 2";
  outcome.reference = "sheet 14";
  return outcome;
}

Outcome semidefinite() {
  Outcome outcome = checked(Verdict::kPositiveSemidefinite, {0, 6, 29790, 0},
                            proved_offsets({{1e-11, 6, 3.4e-13}, {-1e-11, 0, 3.1e-13}}));
  outcome.rows_struck = 12;
  outcome.warnings = {{"duplicate-entries", "3 entries of the same place were summed", "bridge/K.mtx:17"}};
  return outcome;
}

Outcome indefinite() {
  Certificate certificate;
  certificate.level = Level::kStatistical;
  certificate.method = "relative";
  certificate.precision = "single";
  certificate.relative_bound = 0.06;
  certificate.failure_probability = 1e-6;
  certificate.assumptions = {"the random vectors are independent of the matrix"};
  Outcome outcome = checked(Verdict::kIndefinite, {2, 0, 29794, 0}, certificate);
  outcome.risk = 1e-6;
  outcome.risk_allowed = 1e-5;
  outcome.check->witness = Witness{{0.5, 0, -0.25}, -3.5e-4, 1e-12};
  return outcome;
}

Outcome unresolved() {
  return checked(Verdict::kUnresolved, {0, 0, 29795, 1}, {});
}

Outcome constrained() {
  Outcome outcome = checked(Verdict::kIndefinite, {40, 1, 29755, 0}, proved_offsets({{1e-11, 41, 1e-13}}));
  ConstrainedOutcome& constrained = outcome.check->constrained.emplace();
  constrained.multipliers = 41;
  constrained.rank = 40;
  constrained.redundant = 1;
  constrained.inertia = Inertia{0, 0, 29715, 0};
  constrained.redundant_equations = {29790};
  constrained.rank_backing = {Level::kStatistical, 6e-7};
  constrained.inertia_backing = {Level::kStatistical, 6e-7};
  return outcome;
}

Outcome constrained_range() {
  Outcome outcome = constrained();
  ConstrainedOutcome& constrained = outcome.check->constrained.emplace();
  constrained.multipliers = 41;
  constrained.negative_range = {0, 1};
  constrained.inertia_backing = {Level::kProved, {}};
  return outcome;
}

Outcome counted() {
  Outcome outcome = base("count", Question::kCount);
  outcome.inputs.push_back({"geometric", "bridge/G.mtx", std::string(64, 'c'), 29796, 345678, {}});
  outcome.count.emplace();
  outcome.count->counts = {shift_count(1.5, 0), shift_count(-2.25, 3), shift_count(12, 17)};
  outcome.count->sentences = {
      "K and K + 1.5 G are both definite: K + f G is definite at every f in [0, 1.5]."};
  return outcome;
}

Outcome counted_in_part() {
  Outcome outcome = counted();
  ShiftCount& open = outcome.count->counts[1];
  open.below.reset();
  open.level = Level::kNone;
  open.method.reset();
  open.holds_outside.reset();
  open.below_range = {2, 4};
  open.certificate = {};
  return outcome;
}

Outcome forecast() {
  Outcome outcome = base("forecast", Question::kForecast);
  outcome.work.factorizations = 0;
  outcome.forecast =
      ForecastOutcome{12345678, 4.6e9, 12000000, 140000000, 190000000, 0.42,
                      1.3,      0.42,  1,        false,     2.5e10,    "one factorization of 0.42 s"};
  return outcome;
}

Outcome located() {
  Outcome outcome = checked(Verdict::kIndefinite, {1, 8, 29787, 0},
                            proved_offsets({{1e-11, 9, 3.4e-13}, {-1e-11, 1, 3.1e-13}}));
  outcome.command = "locate";
  LocateOutcome& located = outcome.located.emplace();
  located.negative = 1;
  located.zero = 8;
  located.not_located = 0;
  located.weak_below = 1e-7;
  Direction loose;
  loose.cause = Cause::kLoosePart;
  loose.count = 6;
  loose.energy = -2e-17;
  loose.residual = 3e-16;
  loose.nodes = {{4411, "ux", 120, 0.25}, {4412, "uz", 125, 0.125}};
  loose.moving_rows = 24;
  loose.moving_nodes = 4;
  loose.component = 1;
  loose.motions = {"translation x", "rotation about z"};
  loose.explanation = "The 4 nodes around node 4411, ux: this part is not held.";
  loose.remedy = "Connect the part.";
  Direction spring;
  spring.cause = Cause::kNegativeSpring;
  spring.sign = -1;
  spring.energy = -0.5;
  spring.residual = 1e-6;
  spring.nodes = {{std::nullopt, "equation 17", 17, 0.75}};
  spring.moving_rows = 1;
  spring.moving_nodes = 1;
  spring.component = 0;
  spring.explanation = "A spring pushes along.";
  spring.remedy = "Check its sign.";
  Direction rest;
  rest.count = 2;
  rest.explanation = "No cause is named.";
  rest.remedy = "Ask again.";
  located.directions = {spring, loose, rest};
  located.components = {{29772, 4962, 2, std::array<double, 6>{0.5, 0.5, 0.25, 1, 1, 1}}, {24, 4, 6, {}}};
  located.mass = MassTotals{{1000, 1000, 900}, std::array<double, 3>{1, 2, 0.5}};
  located.seconds = 0.5;
  return outcome;
}

Outcome nothing_located() {
  Outcome outcome = definite();
  LocateOutcome& located = outcome.located.emplace();
  located.weak_below = 1e-7;
  located.components = {{29796, 4966, 0, {}}};
  located.mass = MassTotals{{1000, 1000, 900}, {}};
  LocalAccuracy& accuracy = located.accuracy.emplace();
  accuracy.method = "estimated with Gaussian vectors";
  accuracy.vectors = 32;
  accuracy.typical = 1.5;
  accuracy.largest = 8.25;
  accuracy.histogram = {{0, 20000}, {0.5, 9796}};
  accuracy.worst = {{12, "rz", 60, 8.25}, {std::nullopt, "equation 3", 3, 7}};
  accuracy.equations = 29796;
  return outcome;
}

Outcome location_unresolved() {
  Outcome outcome = unresolved();
  outcome.command = "locate";
  return outcome;
}

std::vector<std::pair<std::string, Outcome>> all() {
  return {{"definite", definite()},
          {"semidefinite", semidefinite()},
          {"indefinite", indefinite()},
          {"unresolved", unresolved()},
          {"constrained", constrained()},
          {"constrained_range", constrained_range()},
          {"counted", counted()},
          {"counted_in_part", counted_in_part()},
          {"forecast", forecast()},
          {"located", located()},
          {"nothing_located", nothing_located()},
          {"location_unresolved", location_unresolved()}};
}

}  // namespace stanchion::samples
