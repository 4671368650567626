#include "model/validate.hpp"

#include <fmt/format.h>

#include <cmath>
#include <string>
#include <utility>

namespace stanchion {
namespace {

constexpr int kMostThreads = 1024;

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
  if ((question == Question::kLocate || request.want_location) && request.precision == Precision::kExtended) {
    return contradiction("--precision", "causes are located with a factor in double precision",
                         "leave --precision out, or ask check without --locate");
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
  if (!(locate.attention_digits > 0 && locate.attention_digits < locate.alarm_digits && locate.alarm_digits <= 16)) {
    return out_of_range("--attention-digits, --alarm-digits",
                        fmt::format("{} and {} are no two rising numbers of digits up to 16", locate.attention_digits,
                                    locate.alarm_digits),
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
  return validate_numbers(request);
}

}  // namespace stanchion
