// One request to the program as a pipeline writes it: {"id", "command", "inputs", "options"}, described by
// data/schemas/request-1.json. What a command takes is read from the tables of the command line itself.
#pragma once

#include <functional>
#include <optional>
#include <string>
#include <string_view>
#include <vector>

#include "model/option_table.hpp"
#include "stanchion/status.hpp"

namespace stanchion {

/// What requests are held against.
struct RequestRules {
  std::vector<CommandTable> commands;

  /// Says what is wrong with an argument vector as a whole (a range without its end, two files that exclude
  /// each other), without reading any file. May be empty. Called from any thread.
  std::function<Status(const std::vector<std::string>& arguments)> check;
};

/// One file that is read: {"stiffness": "K.mtx"} or an item of {"added": [{"path", "factor"}]}.
struct JobInput {
  std::string key;               ///< "stiffness", "added", "dofs", ...
  std::string option;            ///< "--dofs"; empty: a positional argument
  std::string path;              ///< as written, or resolved (see resolve_inputs)
  std::optional<double> factor;  ///< of "added"
};

/// One setting in the spelling of the command line.
struct JobOption {
  std::string key;     ///< "memory_cap"
  std::string option;  ///< "--memory-cap"
  std::string value;   ///< "8G"; empty for flags
  OptionKind kind = OptionKind::kFlag;
};

struct JobRequest {
  std::string id, command;
  std::vector<JobInput> inputs;    ///< in the order of the command's table, equal keys as written
  std::vector<JobOption> options;  ///< in the order of the command's table; flags that are false left out
};

struct RequestLimits {
  std::size_t bytes = std::size_t{1} << 20;  ///< of one request
  std::size_t items = 10'000;                ///< of one list
};

/// Reads and checks one request. Bad input, whose message names the key: "bad-json" (with the place in the
/// text), "bad-request" (missing, unknown or doubled keys, wrong types), "unknown-command", "unknown-option",
/// and what `rules.check` says. An id has 1 to 200 letters, digits and . _ - and does not begin with a dot or
/// a dash, so that files can be named after it. `with_id` false: "id" may be missing (a server gives one).
Result<JobRequest> parse_request(std::string_view json, const RequestRules& rules, bool with_id = true,
                                 const RequestLimits& limits = {});

/// The request as one line of JSON in a fixed spelling: equal requests give equal bytes.
std::string request_to_json(const JobRequest& request);

/// The argument vector for the program: "count", "K.mtx", "--at=1.5", ... No shell, no quoting; a path that
/// begins with a dash cannot be taken for an option.
std::vector<std::string> arguments_of(const JobRequest& request);

/// Makes relative paths relative to `folder` instead of the current one.
void resolve_inputs(JobRequest& request, const std::string& folder);

constexpr std::size_t kLongestJobId = 200;

/// Whether `id` may name a job.
bool is_job_id(std::string_view id);

}  // namespace stanchion
