// The heap of a program that links this file on large pages, never that of the library's users. METIS and the
// containers of the analysis touch some hundred megabytes once, and a seventh of a large plate's time was the
// system's handing out of pages of 4 kB. The C library asks for large ones where GLIBC_TUNABLES says so as a
// process begins, and at no other time; hence a second beginning, before the other libraries have started
// their threads. Figures: DEVELOPERS.md.
#include "base/large_heap.hpp"

#include <fcntl.h>
#include <sys/stat.h>
#include <unistd.h>

#include <climits>
#include <cstring>

namespace stanchion {

long long bytes_of_named_files(int argc, char** argv) {
  long long bytes = 0;
  for (int i = 1; i < argc; ++i) {
    const char* value = argv[i];
    if (value[0] == '-') {
      value = std::strchr(value, '=');
      if (value == nullptr) continue;
      ++value;
    }
    struct stat file {};
    if (stat(value, &file) == 0 && S_ISREG(file.st_mode)) bytes += file.st_size;
  }
  return bytes;
}

namespace {

constexpr char kVariable[] = "GLIBC_TUNABLES=";
constexpr char kAnySetting[] = "glibc.malloc.";
// Large pages; and since pieces below 2 MB that are mapped one by one get none, and a heap that grows by less
// none either: map apart from 4 MB on, grow by 8 MB, and give back what has been free at the top only from
// 256 MB on.
constexpr char kSetting[] =
    "glibc.malloc.hugetlb=1:glibc.malloc.mmap_threshold=4194304:glibc.malloc.top_pad=8388608:"
    "glibc.malloc.trim_threshold=268435456";
constexpr std::size_t kMostVariables = 4096, kLongestValue = 4096;

/// Whether the system gives large pages to those who ask, and only to them.
bool large_pages_on_request() {
  const int file = open("/sys/kernel/mm/transparent_hugepage/enabled", O_RDONLY | O_CLOEXEC);
  if (file < 0) return false;
  char words[64] = {};
  const ssize_t length = read(file, words, sizeof words - 1);
  close(file);
  return length > 0 && std::strstr(words, "[madvise]") != nullptr;
}

/// Begins the process anew with the setting; comes back, having changed nothing, where that cannot be done.
[[maybe_unused]] void begin_with_large_heap(int argc, char** argv, char** environment) {
  static char setting[sizeof kVariable + kLongestValue + sizeof kSetting + 1];
  static char* variables[kMostVariables + 2];
  static char program[PATH_MAX];
  if (!wants_large_heap(argc, argv)) return;
  const char* before = "";
  std::size_t kept = 0;
  for (char** variable = environment; *variable != nullptr; ++variable) {
    if (kept == kMostVariables) return;
    if (std::strncmp(*variable, kVariable, sizeof kVariable - 1) == 0) {
      before = *variable + sizeof kVariable - 1;
    } else {
      variables[kept++] = *variable;
    }
  }
  if (std::strstr(before, kAnySetting) != nullptr || std::strlen(before) > kLongestValue) return;
  if (!large_pages_on_request()) return;
  if (readlink("/proc/self/exe", program, sizeof program - 1) <= 0) return;
  std::strcpy(setting, kVariable);
  std::strcat(setting, before);
  if (before[0] != '\0') std::strcat(setting, ":");
  std::strcat(setting, kSetting);
  variables[kept] = setting;
  execve(program, argv, variables);
}

#ifndef STANCHION_HEAP_IS_GIVEN
[[gnu::used, gnu::section(".preinit_array")]] void (*const kBegin)(int, char**,
                                                                   char**) = begin_with_large_heap;
#endif

}  // namespace
}  // namespace stanchion
