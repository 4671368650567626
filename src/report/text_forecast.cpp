#include <fmt/format.h>

#include "model/numbers.hpp"
#include "report/text_sections.hpp"

namespace stanchion {

void write_forecast(Page& page, const Outcome& outcome) {
  const ForecastOutcome& forecast = *outcome.forecast;
  page.sentence(fmt::format("One count will take {} and {} of memory.",
                            duration_in_sentence(forecast.seconds, "about "),
                            bytes_in_words(forecast.peak_bytes_count)));
  page.blank();
  page.row("likely work", fmt::format("{}; {} if that does not settle it", forecast.assumption,
                                      duration_in_words(forecast.seconds_otherwise)));
  page.row("measured", flops_in_words(forecast.flops_per_second) +
                           "/s a thread in large fronts, just now; a busy machine is slower");
  page.row("factor", fmt::format("{} entries, {}", grouped(forecast.factor_entries),
                                 flops_in_words(forecast.factor_flops)));
  page.row("memory",
           fmt::format("{} to count (the factor is thrown away), {} to keep the factor, {} to locate",
                       bytes_in_words(forecast.peak_bytes_count), bytes_in_words(forecast.peak_bytes_solve),
                       bytes_in_words(forecast.peak_bytes_locate)));
  const std::string each = duration_in_sentence(forecast.seconds_side_by_side, "about ");
  page.row("sweep", fmt::format("{} at a time in {}, {} a shift that is not definite",
                                counted(forecast.side_by_side, "shift"),
                                bytes_in_words(forecast.peak_bytes_side_by_side), each));
  page.row("fronts", fmt::format("{}, the largest with {} rows", grouped(outcome.work.supernodes),
                                 grouped(outcome.work.largest_front)));
}

}  // namespace stanchion
