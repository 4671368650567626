#include "bench/process_usage.hpp"

#include <malloc.h>
#include <sys/resource.h>

#include <fstream>
#include <string>

namespace stanchion::bench {
namespace {

Offset status_bytes(const std::string& key) {
  std::ifstream status("/proc/self/status");
  for (std::string line; std::getline(status, line);) {
    if (line.rfind(key, 0) == 0) return std::stoll(line.substr(key.size() + 1)) * 1024;
  }
  return 0;
}

double seconds(const timeval& time) {
  return static_cast<double>(time.tv_sec) + 1e-6 * static_cast<double>(time.tv_usec);
}

}  // namespace

double processor_seconds() {
  rusage usage{};
  getrusage(RUSAGE_SELF, &usage);
  return seconds(usage.ru_utime) + seconds(usage.ru_stime);
}

Offset resident_bytes() {
  return status_bytes("VmRSS:");
}

Offset highest_resident_bytes() {
  return status_bytes("VmHWM:");
}

void reset_highest_resident() {
  malloc_trim(0);
  std::ofstream("/proc/self/clear_refs") << 5;
}

}  // namespace stanchion::bench
