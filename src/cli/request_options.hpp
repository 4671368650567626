// The options that shape a request, as typed, and the request made from them.
#pragma once

#include <cstdint>
#include <optional>
#include <string>
#include <vector>

#include "cli/arguments.hpp"
#include "cli/spectrum_options.hpp"
#include "model/question.hpp"
#include "stanchion/outcome.hpp"
#include "stanchion/request.hpp"
#include "stanchion/status.hpp"

namespace stanchion::cli {

struct RequestOptions {
  std::optional<std::string> stiffness, geometric, mass, dofs, nodes, axes, fix, multipliers;
  std::optional<std::string> load_sign, memory_cap, precision, analysis_store;
  std::vector<std::string> added, shifts, steps;
  std::optional<std::string> list;
  std::optional<std::int64_t> base, rows, digits, threads, seed, most;
  std::optional<double> resolution, risk, weak_below, attention_digits, alarm_digits;
  bool symmetric_part = false, strike_held = false, locate = false;
  SpectrumOptions spectrum;
};

/// Declares the options that `question` takes; `options` must outlive the parse.
void declare_request_options(Arguments& arguments, RequestOptions& options, Question question);

/// The validated request (see model/validate.hpp), or bad usage.
Result<Request> build_request(const RequestOptions& options, Question question);

/// Every file to be read that `options` name, with its role, whether or not they make a request.
std::vector<TableRecord> files_named(const RequestOptions& options);

}  // namespace stanchion::cli
