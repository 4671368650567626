#include <fmt/format.h>

#include <algorithm>
#include <optional>

#include "base/clock.hpp"
#include "diagnose/diagnosis.hpp"
#include "engine/host.hpp"
#include "engine/host_rates.hpp"
#include "engine/prepared_pencil.hpp"
#include "extended/factorize.hpp"
#include "inertia/factor_kind.hpp"
#include "model/numbers.hpp"

namespace stanchion {
namespace {

/// "2 factorizations of 0.21 s each and the relative test".
std::string in_words(Index factorizations, double seconds_each, bool relative) {
  const std::string each = duration_in_sentence(seconds_each);
  std::string text = factorizations == 1 ? "one factorization of " + each
                                         : fmt::format("{} factorizations of {} each", factorizations, each);
  return relative ? text + " and the relative test" : text;
}

/// K is expected definite, alone or at its smaller loads, unless multipliers or a mass say otherwise.
bool definite_expected(const Request& request, bool multipliers) {
  return !multipliers && !request.input.mass;
}

/// Measured when first asked for, in either precision.
class Rates {
 public:
  const HostRates& of(bool single) {
    std::optional<HostRates>& rates = single ? single_ : double_;
    if (!rates) rates = measure_host(single);
    return *rates;
  }

 private:
  std::optional<HostRates> single_, double_;
};

void forecast_time(const PreparedPencil& pencil, const Request& request, bool definite, Rates& measured,
                   ForecastOutcome& forecast) {
  const Analysis& analysis = pencil.analysis();
  const LikelyWork work = pencil.likely_work(definite);
  const HostRates& rates = measured.of(work.single);
  const bool extended = request.precision == Precision::kExtended;
  const int workers = analysis.schedule.workers;
  const double each =
      extended ? extended_seconds_forecast(analysis) : factorization_seconds(analysis, rates, workers);
  const double test = relative_test_seconds(analysis, pencil.entries(), rates, workers);
  forecast.factorization_seconds = each;
  forecast.factorizations = work.factorizations;
  forecast.relative_test = work.relative;
  forecast.seconds = work.factorizations * each + (work.relative ? test : 0);
  forecast.seconds_otherwise = forecast.seconds + work.more_if_not * each + (work.relative_if_not ? test : 0);
  forecast.flops_per_second = rates.fronts.back().flops / rates.fronts.back().seconds;
  forecast.assumption =
      in_words(work.factorizations, each, work.relative) +
      (definite ? ", for the matrix is expected to be definite" : ", for the matrix may be indefinite");
}

/// Of the speed alone that a count reaches beside others, which want the same memory (measured: plates of
/// 50,000 and 200,000 on two threads, 0.81 and 0.75).
constexpr double kShareBesideOthers = 0.8;

/// Of a count amid the spectrum. The first of two offsets lies below the bound there, mostly, but for small
/// models: one factorization more (plates and a cylinder of 50,000 took 3.0 to 3.3 a shift).
Index factorizations_a_shift(const Analysis& analysis, const LikelyWork& work, const Request& request) {
  const bool again =
      analysis.forecast.front_flops >= kTellingOperations && !work.relative && !request.resolution;
  return work.factorizations + (again ? 1 : 0);
}

/// Shifts of a sweep side by side, where the matrix may be indefinite, whatever it is at 0.
void forecast_sweep(const PreparedPencil& pencil, const Request& request, Rates& measured,
                    ForecastOutcome& forecast) {
  const Analysis& analysis = pencil.analysis();
  const int threads = analysis.schedule.workers;
  Offset room = pencil.free_bytes();
  if (request.memory_cap_bytes) room = std::min(room, *request.memory_cap_bytes - resident_bytes());
  forecast.side_by_side = pencil.side_by_side(threads, room);
  const int each = std::max(1, threads / forecast.side_by_side);
  forecast.peak_bytes_side_by_side = pencil.bytes_side_by_side(forecast.side_by_side, each);
  const LikelyWork work = pencil.likely_work(false);
  const HostRates& rates = measured.of(work.single);
  const double seconds = request.precision == Precision::kExtended
                             ? extended_seconds_forecast(analysis)
                             : factorization_seconds(analysis, rates, each);
  const double test = work.relative ? relative_test_seconds(analysis, pencil.entries(), rates, each) : 0;
  const double together = forecast.side_by_side > 1 ? kShareBesideOthers * forecast.side_by_side : 1;
  forecast.seconds_side_by_side =
      (factorizations_a_shift(analysis, work, request) * seconds + test) / together;
}

}  // namespace

Result<Outcome> run_forecast(const Request& request, const RunContext& context) {
  const Stopwatch watch;
  ThreadPool pool(threads_of(request));
  Outcome outcome = begin_outcome("forecast", request, Question::kForecast);
  Request uncapped = request;
  uncapped.memory_cap_bytes.reset();  // a forecast answers even when the run itself would be refused
  auto model = read_model(uncapped, context, pool, outcome);
  if (!model.ok()) return model.status();
  const bool definite = definite_expected(request, !model->multipliers.empty());
  auto pencil = PreparedPencil::make(*model, false, uncapped, context, pool, outcome);
  if (!pencil.ok()) return pencil.status();
  const StructureForecast& structure = pencil->analysis().forecast;
  ForecastOutcome forecast;
  forecast.factor_entries = structure.factor_entries;
  forecast.factor_flops = structure.factor_flops;
  forecast.peak_bytes_count = outcome.memory.forecast;
  forecast.peak_bytes_solve = outcome.memory.forecast + with_allowance(structure.peak_bytes_solve) -
                              with_allowance(structure.peak_bytes_count);
  const LocateOptions shown;  // as many directions as are shown unasked, of either kind
  const Offset locating =
      std::max(structure.peak_bytes_solve,
               structure.stored_factor_entries * Offset{sizeof(double)} +
                   diagnosis_bytes(pencil->analysis().tree.rows, shown.most, shown.most, shown));
  forecast.peak_bytes_locate =
      outcome.memory.forecast + with_allowance(locating) - with_allowance(structure.peak_bytes_count);
  Rates measured;
  forecast_time(*pencil, request, definite, measured, forecast);
  forecast_sweep(*pencil, request, measured, forecast);
  outcome.forecast = forecast;
  finish_outcome(outcome, watch.seconds());
  return outcome;
}

}  // namespace stanchion
