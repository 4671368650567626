#include "cli/progress_line.hpp"

#include <fmt/format.h>
#include <unistd.h>

#include <algorithm>
#include <cstdio>

#include "model/numbers.hpp"

namespace stanchion::cli {
namespace {

constexpr double kRedrawSeconds = 0.1;
constexpr const char* kEraseLine = "\r\x1b[K";

}  // namespace

bool standard_error_is_terminal() {
  return isatty(STDERR_FILENO) == 1;
}

std::string progress_text(const std::string& stage, double fraction, double elapsed, double in_stage) {
  const double done = std::clamp(fraction, 0.0, 1.0);
  std::string text = fmt::format("{} {:.0f} %, {:.0f} s elapsed", stage, 100 * done, elapsed);
  // Less says too little about the speed of the rest.
  if (done > 0.02 && in_stage > 0.3) {
    text += fmt::format(", about {} to go", duration_in_words(in_stage * (1 - done) / done));
  }
  return text;
}

void ProgressLine::update(const char* stage, double fraction) {
  if (!enabled_) return;
  const bool new_stage = stage_ != stage;
  if (new_stage) {
    stage_ = stage;
    in_stage_.restart();
  }
  if (shown_ && !new_stage && since_drawn_.seconds() < kRedrawSeconds) return;
  const auto text = progress_text(stage_, fraction, total_.seconds(), in_stage_.seconds());
  std::fprintf(stderr, "%s%s", kEraseLine, text.c_str());
  std::fflush(stderr);
  since_drawn_.restart();
  shown_ = true;
}

void ProgressLine::erase() {
  if (!shown_) return;
  std::fputs(kEraseLine, stderr);
  std::fflush(stderr);
  shown_ = false;
}

}  // namespace stanchion::cli
