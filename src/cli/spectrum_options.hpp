// The options of sweep, bracket and audit, as typed, and the part of a request made from them.
#pragma once

#include <cstdint>
#include <optional>
#include <string>

#include "cli/arguments.hpp"
#include "model/question.hpp"
#include "stanchion/request.hpp"
#include "stanchion/status.hpp"

namespace stanchion::cli {

struct SpectrumOptions {
  std::optional<double> from, to, below, width, tolerance;
  std::optional<std::int64_t> points, first;
  std::optional<std::string> spacing, side, unit, method, values;
  bool refine = false, find_missing = false;
};

void declare_spectrum_options(Arguments& arguments, SpectrumOptions& options, Question question);

/// Fills the part of `request` that `question` reads; its pencil is known already. Bad usage for words that
/// are not known; ranges are checked by model/validate.hpp.
Status fill_spectrum(const SpectrumOptions& options, Question question, Request& request);

}  // namespace stanchion::cli
