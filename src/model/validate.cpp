#include "model/validate.hpp"

#include <fmt/format.h>

#include <cmath>
#include <string>
#include <utility>

namespace stanchion {
namespace {

constexpr int kMostThreads = 1024;
constexpr Index kMostPoints = 100'000, kMostValues = 10'000;

Status out_of_range(std::string option, std::string message, std::string remedy) {
  return Status::bad_usage("out-of-range", std::move(message), std::move(option), std::move(remedy));
}

Status contradiction(std::string option, std::string message, std::string remedy) {
  return Status::bad_usage("contradiction", std::move(message), std::move(option), std::move(remedy));
}

Status validate_matrices(const Request& request, Question question) {
  const InputRequest& input = request.input;
  if (input.stiffness.empty()) {
    return Status::bad_usage("missing-argument", "no stiffness matrix was named", "command line",
                             "name the file of K after the command");
  }
  if (input.geometric && input.mass) {
    return contradiction("--geometric, --mass", "K + f G and K - s M are two different problems",
                         "give one of the two; ask twice for both");
  }
  const Pencil named = input.geometric ? Pencil::kGeometric : input.mass ? Pencil::kMass : Pencil::kStiffness;
  if (request.pencil != named) {
    return Status::internal("the pencil of the request does not agree with its matrices", "request");
  }
  if (question == Question::kCheck && named != Pencil::kStiffness) {
    return contradiction(input.geometric ? "--geometric" : "--mass", "check judges one matrix, with no shift",
                         "use count with --at, or --add FILE:factor for a fixed load");
  }
  if (question == Question::kLocate && named == Pencil::kGeometric) {
    return contradiction("--geometric", "locate judges one matrix", "use --add FILE:factor for a fixed load");
  }
  const bool locating = question == Question::kLocate || request.want_location;
  if (locating && (request.precision == Precision::kExtended || request.precision == Precision::kSingle)) {
    return contradiction("--precision", "causes are located with a factor in double precision",
                         "leave --precision out, or ask check without --locate");
  }
  if (request.precision == Precision::kSingle) {
    if (question == Question::kBracket || question == Question::kAudit) {
      return contradiction("--precision", "values are enclosed with a factor in double precision",
                           "leave --precision out; single goes with check, count and sweep");
    }
    if (request.resolution || request.digits) {
      return contradiction(
          "--precision single, " + std::string(request.resolution ? "--resolution" : "--digits"),
          "the relative test that certifies a factor in single precision has no resolution",
          "leave one of the two out");
    }
  }
  if (input.load_sign_minus && !input.geometric) {
    return contradiction("--load-sign", "there is no geometric stiffness whose sign it could give",
                         "name the matrix with --geometric, or leave --load-sign out");
  }
  return {};
}

Status validate_input(const InputRequest& input) {
  for (const AddedMatrix& added : input.added) {
    if (added.path.empty() || !std::isfinite(added.factor)) {
      return out_of_range("--add", "an added matrix needs a file and a finite factor",
                          "write --add FILE:factor, e.g. --add Gdead.mtx:1.35");
    }
  }
  if (input.base && *input.base != 0 && *input.base != 1) {
    return out_of_range("--base", fmt::format("equations are numbered from 0 or 1, not from {}", *input.base),
                        "write --base 0 or --base 1");
  }
  if (input.rows && *input.rows < 1) {
    return out_of_range("--rows", fmt::format("a matrix cannot have {} rows", *input.rows),
                        "give the number of equations, at least 1");
  }
  return {};
}

Status validate_shifts(const Request& request, Question question) {
  if (question != Question::kCount) return {};
  if (request.shifts.empty()) {
    return Status::bad_usage(
        "missing-argument", "no shift was given to count at", "--at",
        "write --at 1.5 or --at 1,2,-0.5 (for K alone, --at 0 counts negative directions)");
  }
  for (const double shift : request.shifts) {
    if (!std::isfinite(shift)) {
      return out_of_range("--at", "a shift must be a finite number",
                          "write decimal numbers, e.g. --at 1.5,2");
    }
  }
  return {};
}

Status validate_sweep(const SweepRequest& sweep) {
  if (!std::isfinite(sweep.from) || !std::isfinite(sweep.to) || !(sweep.from < sweep.to)) {
    return out_of_range("--from, --to", fmt::format("from {} to {} is no range", sweep.from, sweep.to),
                        "give two numbers, the smaller one first, e.g. --from 0.5 --to 2");
  }
  if (sweep.points < 2 || sweep.points > kMostPoints) {
    return out_of_range("--points",
                        fmt::format("{} points are not between 2 and {}", sweep.points, kMostPoints),
                        "both ends are points; e.g. --points 11");
  }
  if (sweep.geometric && !(sweep.from * sweep.to > 0)) {
    return contradiction("--spacing", "geometric spacing cannot reach or cross 0",
                         "give ends of one sign, or sweep each side on its own");
  }
  if (!(sweep.width > 0 && sweep.width < 1)) {
    return out_of_range("--width", fmt::format("{} is no relative width between 0 and 1", sweep.width),
                        "e.g. --width 1e-3");
  }
  return {};
}

/// Values are in the pencil's own unit, or hertz for K - s M.
Status validate_unit(const Request& request, ValueUnit unit, const char* option) {
  const bool mass = request.pencil == Pencil::kMass;
  if (mass == (unit != ValueUnit::kFactor)) return {};
  return contradiction(
      option, mass ? "values of K - s M are omega^2 or hertz" : "only frequencies have such a unit",
      mass ? "write --unit omega2 or --unit hertz" : "leave --unit out, or name the mass with --mass");
}

Status validate_range(const std::optional<double>& from, const std::optional<double>& to) {
  for (const auto& end : {from, to}) {
    if (end && !std::isfinite(*end))
      return out_of_range("--from, --to", "the ends must be finite", "give two numbers");
  }
  if (from && to && !(*from < *to)) {
    return out_of_range("--from, --to", fmt::format("from {} to {} is no range", *from, *to),
                        "give the smaller number first");
  }
  return {};
}

Status validate_bracket(const Request& request) {
  const BracketRequest& bracket = request.bracket;
  if (Status status = validate_unit(request, bracket.unit, "--unit"); !status.ok()) return status;
  if (Status status = validate_range(bracket.from, bracket.to); !status.ok()) return status;
  const bool range = bracket.below ? bracket.from || bracket.to : bracket.from && bracket.to;
  if (bracket.first && (bracket.from || bracket.to)) {
    return contradiction("--first", "the first ones and a range are two questions", "give one of the two");
  }
  if (!bracket.first && !range) {
    return Status::bad_usage("missing-argument", "nothing was asked", "--first, --below, --from, --to",
                             "write --first 10, --below 1.5, or --from 1 --to 2");
  }
  if (bracket.first && (*bracket.first < 1 || *bracket.first > kMostValues)) {
    return out_of_range("--first", fmt::format("{} is not between 1 and {}", *bracket.first, kMostValues),
                        "ask for a range with --from and --to instead");
  }
  if (bracket.below && (bracket.to == 0.0 || bracket.from == 0.0)) {
    return out_of_range("--below", "nothing lies between 0 and 0", "give a factor, e.g. --below 1.5");
  }
  if (bracket.side != Side::kPositive && (request.pencil != Pencil::kGeometric || !bracket.first)) {
    return contradiction("--side", "only the first factors of K + f G can be asked by side",
                         "leave --side out; a range may reach over 0");
  }
  if (!(bracket.width > 0 && bracket.width < 1)) {
    return out_of_range("--width", fmt::format("{} is no relative width between 0 and 1", bracket.width),
                        "e.g. --width 1e-8");
  }
  return {};
}

Status validate_audit(const Request& request) {
  if (request.pencil == Pencil::kStiffness && request.audit.unit != ValueUnit::kFactor) {
    return validate_unit(request, request.audit.unit, "--unit");
  }
  if (request.audit.values.empty()) {
    return Status::bad_usage("missing-argument", "no list was named", "--values", "write --values list.csv");
  }
  if (Status status = validate_unit(request, request.audit.unit, "--unit"); !status.ok()) return status;
  if (request.audit.tolerance && !(*request.audit.tolerance >= 0 && *request.audit.tolerance < 1)) {
    return out_of_range("--tolerance", fmt::format("{} is no relative tolerance", *request.audit.tolerance),
                        "e.g. --tolerance 1e-6");
  }
  return validate_range(request.audit.from, request.audit.to);
}

Status validate_load_path(const Request& request) {
  if (request.steps.empty()) return {};
  const char* what = request.want_witness        ? "--witness"
                     : request.want_location     ? "--locate"
                     : request.input.multipliers ? "--multipliers"
                                                 : nullptr;
  if (what == nullptr) return {};
  return contradiction(what, "this belongs to one matrix, not to a load path",
                       "ask it of the step that you want to know about");
}

Status validate_question(const Request& request, Question question) {
  switch (question) {
    case Question::kSweep:
      return validate_sweep(request.sweep);
    case Question::kBracket:
      return validate_bracket(request);
    case Question::kAudit:
      return validate_audit(request);
    case Question::kCheck:
      return validate_load_path(request);
    case Question::kCount:
    case Question::kLocate:
    case Question::kForecast:
      break;
  }
  return {};
}

Status validate_numbers(const Request& request) {
  if (!(request.risk > 0 && request.risk < 1)) {
    return out_of_range("--risk", fmt::format("{} is no probability between 0 and 1", request.risk),
                        "give the failure probability you accept, e.g. --risk 1e-6");
  }
  if (request.resolution && !(*request.resolution > 0 && *request.resolution < 1)) {
    return out_of_range(
        "--resolution", fmt::format("{} is not between 0 and 1", *request.resolution),
        "it is in units of the scaled matrix, whose rows are about 1; e.g. --resolution 1e-10");
  }
  if (request.digits && (*request.digits < 1 || *request.digits > 17)) {
    return out_of_range("--digits",
                        fmt::format("{} decimal digits are not between 1 and 17", *request.digits),
                        "give the significant digits of the numbers in the file, e.g. --digits 8");
  }
  if (request.threads < 0 || request.threads > kMostThreads) {
    return out_of_range("--threads",
                        fmt::format("{} threads are not between 1 and {}", request.threads, kMostThreads),
                        "leave --threads out to use every processor available");
  }
  const LocateOptions& locate = request.locate;
  if (locate.most < 1 || locate.most > 1000) {
    return out_of_range("--most", fmt::format("{} directions are not between 1 and 1000", locate.most),
                        "leave --most out for 12");
  }
  if (!(locate.weak_below >= 0 && locate.weak_below < 1)) {
    return out_of_range("--weak-below", fmt::format("{} is no energy ratio from 0 to 1", locate.weak_below),
                        "give the ratio below which a direction counts as weak, e.g. --weak-below 1e-7");
  }
  if (!(locate.attention_digits > 0 && locate.attention_digits < locate.alarm_digits &&
        locate.alarm_digits <= 16)) {
    return out_of_range("--attention-digits, --alarm-digits",
                        fmt::format("{} and {} are no two rising numbers of digits up to 16",
                                    locate.attention_digits, locate.alarm_digits),
                        "leave them out for 8 and 12");
  }
  if (request.memory_cap_bytes && *request.memory_cap_bytes < 1) {
    return out_of_range("--memory-cap", "the cap must be positive", "write e.g. --memory-cap 8G");
  }
  return {};
}

}  // namespace

Status validate(const Request& request, Question question) {
  if (Status status = validate_matrices(request, question); !status.ok()) return status;
  if (Status status = validate_input(request.input); !status.ok()) return status;
  if (Status status = validate_shifts(request, question); !status.ok()) return status;
  if (Status status = validate_question(request, question); !status.ok()) return status;
  return validate_numbers(request);
}

}  // namespace stanchion
