#include "cli/spectrum_options.hpp"

#include <fmt/format.h>

#include <limits>
#include <utility>
#include <vector>

namespace stanchion::cli {
namespace {

void declare_sweep(Arguments& arguments, SpectrumOptions& options) {
  arguments.real("--from", options.from, "A", "first shift (factor f of either sign, or s)");
  arguments.real("--to", options.to, "B", "last shift");
  arguments.whole("--points", options.points, "N", "shifts in all, both ends included (default 11)");
  arguments.text("--spacing", options.spacing, "linear|geometric", "equal steps (default) or equal ratios");
  arguments.flag("--refine", options.refine, "count again between shifts where the count jumps");
  arguments.real("--width", options.width, "W",
                 "refine until a jump is of one, or narrower than this relative width (default 1e-3)");
}

void declare_bracket(Arguments& arguments, SpectrumOptions& options) {
  arguments.whole("--first", options.first, "M", "the first M critical factors, or the lowest M eigenvalues");
  arguments.real("--below", options.below, "B",
                 "all between 0 and the factor B (of either sign), or all eigenvalues below B");
  arguments.real("--from", options.from, "A", "all from A ...");
  arguments.real("--to", options.to, "B", "... to B");
  arguments.text("--side", options.side, "positive|negative|both",
                 "with --first: which factors of K + f G (default positive)");
  arguments.text("--unit", options.unit, "omega2|hertz", "frequencies: unit of the range and of the answer");
  arguments.real("--width", options.width, "W", "relative width asked of a bracket (default 1e-8)");
  arguments.text(
      "--method", options.method, "residual|counts",
      "residual (default): intervals from mode shapes, counts at the ends; counts: bisection alone");
}

void declare_audit(Arguments& arguments, SpectrumOptions& options) {
  arguments.text("--values", options.values, "FILE", "the list: value, optionally tolerance and label");
  arguments.text("--unit", options.unit, "factor|omega2|hertz",
                 "of the list (default: factor, or omega2 with --mass)");
  arguments.real("--tolerance", options.tolerance, "T",
                 "relative tolerance of values that state none (default 1e-6)");
  arguments.real("--from", options.from, "A",
                 "judge the list from here (default: from 0, or the lowest) ...");
  arguments.real("--to", options.to, "B", "... to here (default: where it ends)");
  arguments.flag("--find-missing", options.find_missing, "bracket what the list lacks");
}

/// The value that a word stands for; bad usage with all the words when it is none of them.
template <class T>
Status choose(const char* option, const std::optional<std::string>& word,
              const std::vector<std::pair<const char*, T>>& words, T& value) {
  if (!word) return {};
  std::string known;
  for (const auto& [name, meant] : words) {
    if (*word == name) {
      value = meant;
      return {};
    }
    known += (known.empty() ? "" : ", ") + std::string(name);
  }
  return Status::bad_usage("bad-word", fmt::format("'{}' is not known here", *word), option,
                           "write one of: " + known);
}

Status narrow(const char* option, std::int64_t value, Index& member) {
  if (value < 1 || value > std::numeric_limits<Index>::max()) {
    return Status::bad_usage("out-of-range", fmt::format("{} is out of range", value), option,
                             "give a whole number from 1");
  }
  member = static_cast<Index>(value);
  return {};
}

Status fill_sweep(const SpectrumOptions& options, SweepRequest& sweep) {
  if (!options.from || !options.to) {
    return Status::bad_usage("missing-argument", "a sweep needs a range", "--from, --to",
                             "write e.g. --from 0.5 --to 2");
  }
  sweep.from = *options.from;
  sweep.to = *options.to;
  sweep.points = 11;
  if (options.points) {
    if (Status status = narrow("--points", *options.points, sweep.points); !status.ok()) return status;
  }
  sweep.refine = options.refine;
  if (options.width) sweep.width = *options.width;
  return choose<bool>("--spacing", options.spacing, {{"linear", false}, {"geometric", true}},
                      sweep.geometric);
}

Status fill_bracket(const SpectrumOptions& options, bool mass, BracketRequest& bracket) {
  if (options.first) {
    Index first = 0;
    if (Status status = narrow("--first", *options.first, first); !status.ok()) return status;
    bracket.first = first;
  }
  bracket.from = options.from;
  bracket.to = options.to;
  if (options.below) {
    if (options.from || options.to) {
      return Status::bad_usage("contradiction", "--below is a range of its own", "--below",
                               "give --below, or --from and --to");
    }
    bracket.below = true;
    (*options.below < 0 && !mass ? bracket.from : bracket.to) = *options.below;
  }
  if (options.width) bracket.width = *options.width;
  bracket.unit = mass ? ValueUnit::kOmega2 : ValueUnit::kFactor;
  for (const Status& status :
       {choose<ValueUnit>(
            "--unit", options.unit,
            {{"factor", ValueUnit::kFactor}, {"omega2", ValueUnit::kOmega2}, {"hertz", ValueUnit::kHertz}},
            bracket.unit),
        choose<Side>("--side", options.side,
                     {{"positive", Side::kPositive}, {"negative", Side::kNegative}, {"both", Side::kBoth}},
                     bracket.side),
        choose<BracketMethod>("--method", options.method,
                              {{"residual", BracketMethod::kResidual}, {"counts", BracketMethod::kCounts}},
                              bracket.method)}) {
    if (!status.ok()) return status;
  }
  return {};
}

Status fill_audit(const SpectrumOptions& options, bool mass, AuditRequest& audit) {
  if (options.values) audit.values = *options.values;
  audit.tolerance = options.tolerance;
  audit.from = options.from;
  audit.to = options.to;
  audit.find_missing = options.find_missing;
  audit.unit = mass ? ValueUnit::kOmega2 : ValueUnit::kFactor;
  return choose<ValueUnit>(
      "--unit", options.unit,
      {{"factor", ValueUnit::kFactor}, {"omega2", ValueUnit::kOmega2}, {"hertz", ValueUnit::kHertz}},
      audit.unit);
}

}  // namespace

void declare_spectrum_options(Arguments& arguments, SpectrumOptions& options, Question question) {
  if (question != Question::kSweep && question != Question::kBracket && question != Question::kAudit) return;
  arguments.group("Question");
  if (question == Question::kSweep) declare_sweep(arguments, options);
  if (question == Question::kBracket) declare_bracket(arguments, options);
  if (question == Question::kAudit) declare_audit(arguments, options);
}

Status fill_spectrum(const SpectrumOptions& options, Question question, Request& request) {
  const bool mass = request.pencil == Pencil::kMass;
  switch (question) {
    case Question::kSweep:
      return fill_sweep(options, request.sweep);
    case Question::kBracket:
      return fill_bracket(options, mass, request.bracket);
    case Question::kAudit:
      return fill_audit(options, mass, request.audit);
    case Question::kCheck:
    case Question::kCount:
    case Question::kLocate:
    case Question::kForecast:
      break;
  }
  return {};
}

}  // namespace stanchion::cli
