// The parts of the text report, one function a section; text.cpp puts them in order.
#pragma once

#include <optional>
#include <string>

#include "report/page.hpp"
#include "stanchion/outcome.hpp"

namespace stanchion {

/// The answer of the command, whichever it is, without causes.
void write_answer(Page& page, const Outcome& outcome);

/// Inputs, work, memory, time, machine and version.
void write_provenance(Page& page, const Outcome& outcome);

/// Verdict sentence, inertia, and what backs them.
void write_check(Page& page, const Outcome& outcome);

/// What was counted, and one row a shift.
void write_count(Page& page, const Outcome& outcome);

/// Causes with ranked nodes, explanation and remedy; local accuracy; parts and mass.
void write_locate(Page& page, const Outcome& outcome);

/// Where the count jumps, a small picture, and one row a shift.
void write_sweep(Page& page, const Outcome& outcome);

void write_forecast(Page& page, const Outcome& outcome);

/// The matrices that went in, one row each.
void write_inputs(Page& page, const Outcome& outcome);

/// Completeness, one row a value or group, and what is on the other side.
void write_bracket(Page& page, const Outcome& outcome);

/// Verdict on the list, and the stretches where list and counts differ.
void write_audit(Page& page, const Outcome& outcome);

/// The step that decides, each change of the inertia, and one row a step.
void write_path(Page& page, const Outcome& outcome);

/// One row a value: in hertz as well when `hertz`.
void write_values(Page& page, const std::vector<CriticalValue>& values, bool hertz);

/// One row a shift: count, margin where there is one, and what backs it.
void write_counts_table(Page& page, const CountOutcome& answer, Index rows_counted);

/// One bullet a warning, with its place; nothing when there are none.
void write_warnings(Page& page, const Warnings& warnings);

/// "proof", "statistics (wrong with probability at most 1e-06)" or "nothing: no certificate".
std::string backing_in_words(Level level, const std::optional<double>& failure_probability);

}  // namespace stanchion
