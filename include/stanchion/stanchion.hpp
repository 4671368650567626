// The C++ face of the library: the questions of the command line as functions.
//
//   stanchion::Request request;
//   request.input.stiffness = "K.mtx";
//   const auto outcome = stanchion::check(request);
//   if (!outcome.ok()) return report(outcome.status().to_string());
//   if (outcome->check->verdict == stanchion::Verdict::kPositiveDefinite) ...
//
// Nothing here throws, prints or exits. Singular, indefinite and unresolved are answers, not errors. Any
// number of calls may run side by side; each has its own threads. The same request gives the same answer, to
// the bit, for any number of threads.
#pragma once

#include <functional>
#include <string>

#include "stanchion/outcome.hpp"
#include "stanchion/request.hpp"
#include "stanchion/status.hpp"

namespace stanchion {

/// What a caller may listen to. Empty members are not called.
struct Listener {
  /// Stage name and the fraction of it that is done (0 to 1); from any thread, never from two at once.
  /// Returning false stops the run, which then ends with StatusKind::kInterrupted.
  std::function<bool(const char* stage, double fraction)> progress;
  /// One line a stage.
  std::function<void(const std::string& line)> log;
  /// Every count of a sweep as it comes, in no order; never from two threads at once.
  std::function<void(const ShiftCount& count)> on_count;
};

/// Is the stiffness matrix positive definite; if not, its inertia at the resolution. The outcome's `check` is
/// set. Errors: bad usage (the request contradicts itself), bad input (a file), resource limit (the memory
/// cap; the machine's memory), interrupted, internal. Cost: one sparse factorization when definite, two to
/// six otherwise.
Result<Outcome> check(const Request& request, const Listener& listener = {});

/// As check, and where and why: `located` is set beside `check` unless the inertia is unresolved. Keeps the
/// factor. Errors as above. Cost: one or two factorizations and some ten solves with eight vectors.
Result<Outcome> locate(const Request& request, const Listener& listener = {});

/// Counts at every shift of `request`, in the order asked; `pencil` must agree with the matrices named. The
/// outcome's `count` is set. Errors as above. Cost: one to six factorizations a shift, one analysis for all.
Result<Outcome> count(const Request& request, const Listener& listener = {});

/// The staircase of counts over `request.sweep`, side by side where memory allows. The outcome's `count` and
/// `sweep` are set. Errors as above. Cost: as count, for every shift of the grid and those that refinement
/// adds.
Result<Outcome> sweep(const Request& request, const Listener& listener = {});

/// The values of `request.bracket`, each in an interval with multiplicity and proof, and how far the list is
/// complete. The outcome's `bracket` is set. Errors as above. Cost: three to six factorizations and some
/// twenty passes over one that is kept; by counts alone 30 to 40 factorizations a value.
Result<Outcome> bracket(const Request& request, const Listener& listener = {});

/// Is the list of `request.audit` complete in its range, and is everything in it real? The outcome's `audit`
/// is set. Errors as above, and those of reading the list. Cost: as bracket.
Result<Outcome> audit(const Request& request, const Listener& listener = {});

/// Factor size, flops, memory and likely time; nothing is factored. The outcome's `forecast` is set.
Result<Outcome> forecast(const Request& request, const Listener& listener = {});

/// The outcome as the command line prints it, and as the JSON document of data/schemas/outcome-1.json.
std::string to_text(const Outcome& outcome);
std::string to_json(const Outcome& outcome);

/// "0.1.0".
const char* program_version();

}  // namespace stanchion
