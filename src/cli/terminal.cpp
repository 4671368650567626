#include "cli/terminal.hpp"

#include <cerrno>
#include <cstdio>
#include <cstring>

namespace stanchion::cli {

Status print_result(const std::string& text) {
  const bool written = std::fwrite(text.data(), 1, text.size(), stdout) == text.size();
  if (written && std::fflush(stdout) == 0) return {};
  return Status::resource_limit("write-failed", std::strerror(errno), "standard output",
                                "send the output to a place that can take it");
}

Status out_of_memory() {
  return Status::resource_limit("out-of-memory", "the machine gave no more memory", {},
                                "set --memory-cap to learn the need beforehand, or use a larger machine");
}

void print_failure(const Status& failure) {
  std::fprintf(stderr, "stanchion: %s\n", failure.to_string().c_str());
}

}  // namespace stanchion::cli
