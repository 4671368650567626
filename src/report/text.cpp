#include "report/text.hpp"

#include <fmt/format.h>

#include "model/numbers.hpp"
#include "model/version.hpp"
#include "report/text_sections.hpp"

namespace stanchion {
namespace {

std::string role_in_words(const InputRecord& input) {
  if (input.role == "stiffness") return "stiffness K";
  if (input.role == "geometric") return "geometric G";
  if (input.role == "mass") return "mass M";
  return "added";
}

void write_heading(Page& page, const Outcome& outcome) {
  if (outcome.title) page.sentence(*outcome.title);
  if (outcome.reference) page.sentence("Reference: " + *outcome.reference);
  if (outcome.title || outcome.reference) page.blank();
}

void write_work(Page& page, const Outcome& outcome) {
  const Work& work = outcome.work;
  page.row("work", fmt::format("{} of {}{}, {} entries in L", counted(work.factorizations, "factorization"),
                               flops_in_words(work.factor_flops), work.factorizations > 1 ? " each" : "",
                               grouped(work.factor_entries)));
  if (work.redone_in_double > 0) {
    page.row("", fmt::format("{} in single precision, not certified; done again in double",
                             counted(work.redone_in_double, "factorization")));
  }
  page.row("fronts",
           fmt::format("{}, the largest with {} rows; {} handed up, {} two by two", grouped(work.supernodes),
                       grouped(work.largest_front), counted(work.delayed_pivots, "pivot"),
                       counted(work.two_by_two_pivots, "pivot")));
  page.row("memory", fmt::format("peak {}, forecast {}", bytes_in_words(outcome.memory.peak),
                                 bytes_in_words(outcome.memory.forecast)));
}

/// Libraries state their whole build configuration; a person wants name and version.
std::string first_words(const std::string& text, int words) {
  std::size_t end = 0;
  for (int k = 0; k < words && end != std::string::npos; ++k) end = text.find(' ', end == 0 ? 0 : end + 1);
  return text.substr(0, end);
}

void write_time(Page& page, const Outcome& outcome) {
  const Timings& t = outcome.timings;
  std::string parts;
  const auto part = [&](const char* name, double seconds) {
    if (seconds <= 0) return;
    parts += fmt::format("{}{} {}", parts.empty() ? "" : ", ", name, duration_in_words(seconds));
  };
  part("read", t.read);
  part("order", t.order);
  part("analyse", t.analyse);
  part("factor", t.factor);
  part("certify", t.certify);
  if (outcome.located) part("locate", outcome.located->seconds);
  page.row("time", duration_in_words(t.total) + (parts.empty() ? "" : ": " + parts));
  std::string machine = counted(outcome.host.cores, "core");
  if (!outcome.host.isa.empty()) machine += ", " + outcome.host.isa;
  if (!outcome.host.blas.empty()) machine += ", " + first_words(outcome.host.blas, 2);
  page.row("machine", fmt::format("{}; {} {}", machine, program_name(), program_version()));
}

void write_not_checked(Page& page, const Outcome& outcome) {
  if (outcome.not_checked.empty()) return;
  page.title("Not checked");
  for (const std::string& sentence : outcome.not_checked) page.bullet(sentence);
}

}  // namespace

void write_warnings(Page& page, const Warnings& warnings) {
  if (warnings.empty()) return;
  page.title(warnings.size() == 1 ? "Warning" : "Warnings");
  for (const Warning& warning : warnings) {
    const std::string place = warning.place.empty() ? "" : warning.place + ": ";
    page.bullet(fmt::format("{}{} [{}]", place, warning.message, warning.code));
  }
}

void write_inputs(Page& page, const Outcome& outcome) {
  for (const InputRecord& input : outcome.inputs) {
    std::string text = fmt::format("{}: {} equations, {} entries in the lower triangle", input.path,
                                   grouped(input.rows), grouped(input.entries));
    if (input.factor) text += ", times " + exact(*input.factor);
    page.row(role_in_words(input), text);
  }
  if (outcome.rows_struck > 0) {
    page.row("struck out",
             fmt::format("{} held at zero; {} analysed", counted(outcome.rows_struck, "equation"),
                         grouped(outcome.rows_analysed)));
  }
}

std::string backing_in_words(Level level, const std::optional<double>& failure_probability) {
  switch (level) {
    case Level::kProved:
      return "proof";
    case Level::kStatistical:
      return failure_probability ? fmt::format("statistics (wrong with probability at most {})",
                                               rounded(*failure_probability))
                                 : "statistics";
    case Level::kNone:
      break;
  }
  return "nothing: no certificate";
}

void write_answer(Page& page, const Outcome& outcome) {
  if (outcome.path) {
    write_path(page, outcome);
  } else if (outcome.check) {
    write_check(page, outcome);
  }
  if (outcome.bracket) write_bracket(page, outcome);
  if (outcome.audit) write_audit(page, outcome);
  if (outcome.sweep) {
    write_sweep(page, outcome);
  } else if (outcome.count) {
    write_count(page, outcome);
  }
  if (outcome.forecast) write_forecast(page, outcome);
}

void write_provenance(Page& page, const Outcome& outcome) {
  write_inputs(page, outcome);
  if (!outcome.forecast) write_work(page, outcome);
  write_time(page, outcome);
}

std::string to_text(const Outcome& outcome) {
  Page page;
  write_heading(page, outcome);
  write_answer(page, outcome);
  if (outcome.located) write_locate(page, outcome);
  page.blank();
  write_provenance(page, outcome);
  write_warnings(page, outcome.warnings);
  write_not_checked(page, outcome);
  return page.text();
}

}  // namespace stanchion
