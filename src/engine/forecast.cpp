#include "base/clock.hpp"
#include "engine/prepared_pencil.hpp"

namespace stanchion {
namespace {

/// Sustained rates assumed for the time: operations a second and thread in large fronts, and seconds a front.
/// Rough on purpose; the report calls it likely, not certain.
constexpr double kFlopsPerSecond = 2.5e10, kSecondsPerFront = 4e-6;

double likely_seconds(const Analysis& analysis, int threads) {
  const double fronts = analysis.tree.fronts;
  return (analysis.forecast.front_flops / kFlopsPerSecond + fronts * kSecondsPerFront) / threads;
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
  auto pencil = PreparedPencil::make(*model, false, uncapped, context, pool, outcome);
  if (!pencil.ok()) return pencil.status();
  const StructureForecast& structure = pencil->analysis().forecast;
  ForecastOutcome forecast;
  forecast.factor_entries = structure.factor_entries;
  forecast.factor_flops = structure.factor_flops;
  forecast.peak_bytes_count = outcome.memory.forecast;
  forecast.peak_bytes_solve = outcome.memory.forecast + structure.peak_bytes_solve - structure.peak_bytes_count;
  forecast.seconds = likely_seconds(pencil->analysis(), pool.size());
  outcome.forecast = forecast;
  finish_outcome(outcome, watch.seconds());
  return outcome;
}

}  // namespace stanchion
