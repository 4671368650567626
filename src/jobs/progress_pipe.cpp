#include "jobs/progress_pipe.hpp"

#include <fcntl.h>
#include <signal.h>
#include <unistd.h>

#include <algorithm>
#include <nlohmann/json.hpp>

namespace stanchion {
namespace {

using Json = nlohmann::ordered_json;

constexpr double kSecondsBetween = 0.05;

const char* name_of(StatusKind kind) {
  switch (kind) {
    case StatusKind::kOk:
      return "ok";
    case StatusKind::kBadUsage:
      return "bad_usage";
    case StatusKind::kBadInput:
      return "bad_input";
    case StatusKind::kResourceLimit:
      return "resource_limit";
    case StatusKind::kInterrupted:
      return "interrupted";
    case StatusKind::kInternal:
      break;
  }
  return "internal";
}

}  // namespace

ProgressPipe::ProgressPipe(int handle) : handle_(handle) {
  if (handle_ < 0) return;
  ::signal(SIGPIPE, SIG_IGN);
  const int flags = ::fcntl(handle_, F_GETFL);
  ::fcntl(handle_, F_SETFL, flags | O_NONBLOCK);
  ::fcntl(handle_, F_SETFD, FD_CLOEXEC);
}

void ProgressPipe::write(const std::string& line) const {
  const ssize_t written = ::write(handle_, line.data(), line.size());
  (void)written;  // a full or broken pipe costs a line, not the run
}

void ProgressPipe::update(const char* phase, double fraction) {
  if (handle_ < 0) return;
  const bool new_phase = phase_ != phase;
  if (!new_phase && since_written_.seconds() < kSecondsBetween) return;
  phase_ = phase;
  since_written_.restart();
  write(Json{{"phase", phase}, {"done", std::clamp(fraction, 0.0, 1.0)}, {"total", 1}}.dump(
            -1, ' ', true, Json::error_handler_t::replace) +
        "\n");
}

void ProgressPipe::fail(const Status& failure) {
  if (handle_ < 0) return;
  const Json account{{"kind", name_of(failure.kind())},
                     {"code", failure.code()},
                     {"message", failure.message()},
                     {"place", failure.place()},
                     {"remedy", failure.remedy()}};
  write(Json{{"failure", account}}.dump(-1, ' ', true, Json::error_handler_t::replace) + "\n");
}

}  // namespace stanchion
