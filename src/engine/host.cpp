#include "engine/host.hpp"

#include <unistd.h>

#include <cstdio>
#include <cstring>
#include <memory>

#include "base/threads.hpp"
#include "dense/blas.hpp"
#include "dense/kernels.hpp"

namespace stanchion {
namespace {

/// A "VmXXX: n kB" line of /proc/self/status, in bytes.
Offset status_bytes(const char* key) {
  const std::unique_ptr<std::FILE, int (*)(std::FILE*)> file(std::fopen("/proc/self/status", "r"),
                                                             &std::fclose);
  if (!file) return 0;
  char line[256];
  long long kilobytes = 0;
  while (std::fgets(line, sizeof(line), file.get()) != nullptr) {
    if (std::strncmp(line, key, std::strlen(key)) == 0 &&
        std::sscanf(line + std::strlen(key), ": %lld", &kilobytes) == 1) {
      return Offset{kilobytes} * 1024;
    }
  }
  return 0;
}

}  // namespace

HostRecord describe_host() {
  return {available_processors(), blas_description(), kernels().isa};
}

Offset resident_bytes() {
  return status_bytes("VmRSS");
}

Offset total_memory_bytes() {
  return Offset{sysconf(_SC_PHYS_PAGES)} * sysconf(_SC_PAGE_SIZE);
}

Offset peak_resident_bytes() {
  return status_bytes("VmHWM");
}

}  // namespace stanchion
