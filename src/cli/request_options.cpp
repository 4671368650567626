#include "cli/request_options.hpp"

#include <fmt/format.h>

#include <algorithm>
#include <filesystem>
#include <fstream>
#include <limits>

#include "model/byte_size.hpp"
#include "model/names.hpp"
#include "model/validate.hpp"

namespace stanchion::cli {
namespace {

void declare_matrices(Arguments& arguments, RequestOptions& options, Question question) {
  arguments.positional("K", options.stiffness, "FILE",
                       "the stiffness matrix; its format is found from its content",
                       question != Question::kCheck);
  arguments.last().key = "stiffness";
  if (question == Question::kCheck) {
    arguments.positionals("steps", options.steps, "FILE",
                          "more matrices of one pattern: a load path, in order");
  }
  arguments.group("Matrices");
  if (question == Question::kLocate) {
    arguments.text("--mass", options.mass, "FILE",
                   "mass M, matrix or diagonal: its total and centre are stated");
  } else if (question == Question::kCheck) {
    arguments.text("--list", options.list, "FILE", "the matrices of a load path, one path a line, in order");
    arguments.last().use = OptionUse::kRunner;  // a request names its files one by one
  } else {
    arguments.text("--geometric", options.geometric, "FILE", "geometric stiffness G: the pencil K + f G");
    arguments.text("--mass", options.mass, "FILE", "mass M, matrix or diagonal: the pencil K - s M");
    arguments.text("--load-sign", options.load_sign, "plus|minus",
                   "minus: G was written for K - f G (default plus)");
  }
  arguments.texts("--add", options.added, "FILE:factor",
                  "add factor times this matrix to K (may be repeated)");
  arguments.last().key = "added";
  arguments.flag("--symmetric-part", options.symmetric_part,
                 "judge (K + K^T)/2 of a matrix that is not symmetric");
  arguments.whole("--base", options.base, "0|1", "number of the first equation in triplet text");
  arguments.whole("--rows", options.rows, "N", "equations of a triplet text whose last rows are empty");
}

void declare_model_files(Arguments& arguments, RequestOptions& options) {
  arguments.group("Model");
  arguments.text("--dofs", options.dofs, "FILE", "equation,node,dof: what each equation stands for");
  arguments.text("--nodes", options.nodes, "FILE", "node,x,y,z");
  arguments.text("--axes", options.axes, "FILE", "node and nine direction cosines of its own axes");
  arguments.text("--fix", options.fix, "FILE", "equations (or node,dof) held at zero: struck out first");
  arguments.text("--multipliers", options.multipliers, "FILE",
                 "equations (or node,dof) that are multipliers");
  arguments.flag("--strike-held", options.strike_held,
                 "strike out held equations stamped with a diagonal only");
}

void declare_numbers(Arguments& arguments, RequestOptions& options, Question question) {
  arguments.group("Certificate");
  if (question != Question::kForecast) {
    const bool single =
        question != Question::kBracket && question != Question::kAudit && question != Question::kLocate;
    arguments.text("--precision", options.precision, single ? "single|double|extended" : "double|extended",
                   single ? "single: half the memory, or no answer; extended: slow, for what double cannot "
                            "tell apart (default: double, or single where it is faster and certifies itself)"
                          : "extended: factor in double-double, slow, for what double cannot tell apart");
  }
  arguments.real("--resolution", options.resolution, "c",
                 "what counts as zero, in units of the scaled matrix");
  arguments.real("--risk", options.risk, "p", "accepted failure probability of the document (default 1e-6)");
  arguments.whole("--digits", options.digits, "d",
                  "decimal digits in the file: their rounding joins the bound");
  arguments.whole("--seed", options.seed, "N", "of the random vectors (default 1)");
  arguments.group("Resources");
  arguments.whole("--threads", options.threads, "N", "default: every processor available");
  arguments.text("--memory-cap", options.memory_cap, "SIZE", "stop before using more, e.g. 8G or 512M");
  arguments.text("--analysis-store", options.analysis_store, "DIR",
                 "find and leave elimination orders here, for other runs on the same pattern");
  arguments.last().use = OptionUse::kRunner;
}

void declare_location(Arguments& arguments, RequestOptions& options, Question question) {
  arguments.group("Location");
  if (question == Question::kCheck) {
    arguments.flag("--locate", options.locate,
                   "also where and why: nodes and dofs of zero, negative, weak directions");
  }
  arguments.whole("--most", options.most, "N", "entries shown at most (default 12)");
  arguments.real("--weak-below", options.weak_below, "r",
                 "energy ratio below which a positive direction counts as weak (default 1e-7)");
  arguments.real("--attention-digits", options.attention_digits, "d",
                 "local accuracy: digits lost that deserve attention (default 8)");
  arguments.real("--alarm-digits", options.alarm_digits, "d", "digits lost that leave little (default 12)");
}

/// FILE:factor, split at the last colon so that paths may hold colons.
Result<AddedMatrix> parse_added(const std::string& text) {
  const auto colon = text.rfind(':');
  if (colon == std::string::npos || colon == 0) {
    return Status::bad_usage("bad-added-matrix", fmt::format("'{}' names no file with a factor", text),
                             "--add", "write --add FILE:factor, e.g. --add Gdead.mtx:1.35");
  }
  const auto factor = parse_real("--add", text.substr(colon + 1));
  if (!factor.ok()) return factor.status();
  return AddedMatrix{text.substr(0, colon), *factor};
}

/// Comma separated numbers of one --at.
Status append_shifts(const std::string& list, std::vector<double>& shifts) {
  std::size_t begin = 0;
  for (;;) {
    const auto comma = list.find(',', begin);
    const auto length = comma == std::string::npos ? comma : comma - begin;
    const auto shift = parse_real("--at", list.substr(begin, length));
    if (!shift.ok()) return shift.status();
    shifts.push_back(*shift);
    if (comma == std::string::npos) return {};
    begin = comma + 1;
  }
}

/// A whole-number option into a narrower member; too large counts as out of range.
template <class Member>
Status narrow(const char* option, const std::optional<std::int64_t>& value, std::int64_t least,
              Member& member) {
  if (!value) return {};
  if (*value < least || *value > std::numeric_limits<Index>::max()) {
    return Status::bad_usage("out-of-range", fmt::format("{} is out of range", *value), option,
                             fmt::format("give a whole number from {}", least));
  }
  member = static_cast<Index>(*value);
  return {};
}

Status fill_numbers(const RequestOptions& options, Request& request) {
  for (const Status& status : {narrow("--base", options.base, 0, request.input.base),
                               narrow("--rows", options.rows, 1, request.input.rows),
                               narrow("--digits", options.digits, 1, request.digits),
                               narrow("--most", options.most, 1, request.locate.most),
                               narrow("--threads", options.threads, 1, request.threads)}) {
    if (!status.ok()) return status;
  }
  if (options.seed) {
    if (*options.seed < 0) {
      return Status::bad_usage("out-of-range", "a seed cannot be negative", "--seed",
                               "give a whole number from 0");
    }
    request.seed = static_cast<std::uint64_t>(*options.seed);
  }
  if (options.precision) {
    const auto given = {Precision::kSingle, Precision::kDouble, Precision::kExtended};
    const auto* const found = std::find_if(given.begin(), given.end(),
                                           [&](Precision p) { return name_of(p) == *options.precision; });
    if (found == given.end()) {
      return Status::bad_usage("bad-precision",
                               fmt::format("'{}' is none of single, double and extended", *options.precision),
                               "--precision", "leave it out for the usual choice, or name one of the three");
    }
    request.precision = *found;
  }
  request.analysis_store = options.analysis_store;
  request.resolution = options.resolution;
  request.want_location = options.locate;
  if (options.weak_below) request.locate.weak_below = *options.weak_below;
  if (options.attention_digits) request.locate.attention_digits = *options.attention_digits;
  if (options.alarm_digits) request.locate.alarm_digits = *options.alarm_digits;
  if (options.risk) request.risk = *options.risk;
  if (options.memory_cap) {
    const auto bytes = parse_byte_size(*options.memory_cap);
    if (!bytes.ok()) {
      const Status& bad = bytes.status();
      return Status::bad_usage(bad.code(), bad.message(), "--memory-cap", bad.remedy());
    }
    request.memory_cap_bytes = *bytes;
  }
  return {};
}

Status fill_input(const RequestOptions& options, InputRequest& input) {
  input.stiffness = options.stiffness.value_or("");
  input.geometric = options.geometric;
  input.mass = options.mass;
  input.dofs = options.dofs;
  input.nodes = options.nodes;
  input.axes = options.axes;
  input.fix = options.fix;
  input.multipliers = options.multipliers;
  input.symmetric_part = options.symmetric_part;
  input.strike_held = options.strike_held;
  for (const std::string& text : options.added) {
    auto added = parse_added(text);
    if (!added.ok()) return added.status();
    input.added.push_back(std::move(*added));
  }
  if (!options.load_sign) return {};
  if (*options.load_sign != "plus" && *options.load_sign != "minus") {
    return Status::bad_usage("bad-load-sign",
                             fmt::format("'{}' is neither plus nor minus", *options.load_sign), "--load-sign",
                             "plus for K + f G (the default), minus for K - f G");
  }
  if (!input.geometric) {
    return Status::bad_usage("contradiction", "there is no geometric stiffness whose sign it could give",
                             "--load-sign", "name the matrix with --geometric, or leave --load-sign out");
  }
  input.load_sign_minus = *options.load_sign == "minus";
  return {};
}

/// The paths of a list, one a line; relative ones beside the list. Blank lines and those that begin with #
/// are passed over.
Result<std::vector<std::string>> read_path_list(const std::string& list) {
  std::ifstream file(list);
  if (!file) {
    return Status::bad_input("file-not-found", "the list cannot be read", list,
                             "name a file with one path a line");
  }
  std::vector<std::string> paths;
  for (std::string line; std::getline(file, line);) {
    const auto end = line.find_last_not_of(" \t\r");
    const auto begin = line.find_first_not_of(" \t\r");
    if (begin == std::string::npos || line[begin] == '#') continue;
    const std::filesystem::path path = line.substr(begin, end - begin + 1);
    paths.push_back(path.is_absolute() ? path.string()
                                       : (std::filesystem::path(list).parent_path() / path).string());
  }
  if (paths.empty())
    return Status::bad_input("empty-file", "the list names no matrix", list, "write one path a line");
  return paths;
}

Status fill_load_path(const RequestOptions& options, Request& request) {
  request.steps = options.steps;
  if (!options.list) return {};
  if (options.stiffness) {
    return Status::bad_usage("contradiction", "matrices come from the command line and from a list", "--list",
                             "give them one way");
  }
  auto paths = read_path_list(*options.list);
  if (!paths.ok()) return paths.status();
  request.input.stiffness = paths->front();
  request.steps.assign(paths->begin() + 1, paths->end());
  return {};
}

}  // namespace

void declare_request_options(Arguments& arguments, RequestOptions& options, Question question) {
  declare_matrices(arguments, options, question);
  if (question == Question::kCount) {
    arguments.group("Question");
    arguments.numbers("--at", options.shifts, "s1,s2,...",
                      "where to count (may be repeated; negative ones too)");
  }
  declare_spectrum_options(arguments, options.spectrum, question);
  declare_model_files(arguments, options);
  if (question == Question::kCheck || question == Question::kLocate)
    declare_location(arguments, options, question);
  declare_numbers(arguments, options, question);
}

Result<Request> build_request(const RequestOptions& options, Question question) {
  Request request;
  if (Status status = fill_input(options, request.input); !status.ok()) return status;
  if (Status status = fill_load_path(options, request); !status.ok()) return status;
  if (Status status = fill_numbers(options, request); !status.ok()) return status;
  for (const std::string& list : options.shifts) {
    if (Status status = append_shifts(list, request.shifts); !status.ok()) return status;
  }
  if (request.input.geometric) request.pencil = Pencil::kGeometric;
  if (request.input.mass) request.pencil = Pencil::kMass;
  if (request.input.geometric && request.input.mass) request.pencil = Pencil::kStiffness;
  if (Status status = fill_spectrum(options.spectrum, question, request); !status.ok()) return status;
  if (Status status = validate(request, question); !status.ok()) return status;
  return request;
}

std::vector<TableRecord> files_named(const RequestOptions& options) {
  std::vector<TableRecord> files;
  const auto add = [&files](const char* role, const std::string& path) { files.push_back({role, path, {}}); };
  if (options.stiffness) add("stiffness", *options.stiffness);
  for (const std::string& step : options.steps) add("step", step);
  if (options.list) {
    add("list", *options.list);
    const auto steps = read_path_list(*options.list);
    for (const std::string& step : steps.ok() ? *steps : std::vector<std::string>()) add("step", step);
  }
  for (const std::string& text : options.added) add("added", text.substr(0, text.rfind(':')));
  for (const auto& [role, path] :
       {std::pair{"geometric", &options.geometric}, std::pair{"mass", &options.mass},
        std::pair{"dofs", &options.dofs}, std::pair{"nodes", &options.nodes},
        std::pair{"axes", &options.axes}, std::pair{"fix", &options.fix},
        std::pair{"multipliers", &options.multipliers}, std::pair{"values", &options.spectrum.values}}) {
    if (*path) add(role, **path);
  }
  return files;
}

}  // namespace stanchion::cli
