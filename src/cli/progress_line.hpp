// One line on the terminal that says how far the work is; gone when it is done.
#pragma once

#include <string>

#include "base/clock.hpp"

namespace stanchion::cli {

/// Standard error is a terminal.
bool standard_error_is_terminal();

/// Redraws at most ten times a second. Calls of `update` must not overlap (the engine promises that).
class ProgressLine {
 public:
  explicit ProgressLine(bool enabled) : enabled_(enabled) {}
  ProgressLine(const ProgressLine&) = delete;
  ProgressLine& operator=(const ProgressLine&) = delete;
  ~ProgressLine() { erase(); }

  /// `fraction` of the stage is done: of its flops, where it has any.
  void update(const char* stage, double fraction);
  void erase();

 private:
  bool enabled_;
  bool shown_ = false;
  std::string stage_;
  Stopwatch total_, in_stage_, since_drawn_;
};

/// "factor 43 %, 12 s elapsed, about 16 s to go"; the last part only once it can be told.
std::string progress_text(const std::string& stage, double fraction, double elapsed, double in_stage);

}  // namespace stanchion::cli
