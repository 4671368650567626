// A program on a large heap if its second argument says so: prints what the environment says of the heap, its
// arguments, and how much of 64 MB of the heap lies on large pages.
#include <cstdio>
#include <cstdlib>
#include <cstring>
#include <fstream>
#include <string>
#include <vector>

#include "base/large_heap.hpp"

bool stanchion::wants_large_heap(int argc, char** argv) {
  if (argc < 2) return false;
  if (std::strcmp(argv[1], "by-size") == 0) return bytes_of_named_files(argc, argv) >= 1000;
  return std::strcmp(argv[1], "large") == 0;
}

int main(int argc, char** argv) {
  const char* tunables = std::getenv("GLIBC_TUNABLES");
  std::printf("%s\n", tunables == nullptr ? "-" : tunables);
  for (int i = 0; i < argc; ++i) std::printf("%s%s", i == 0 ? "" : " ", argv[i]);
  std::vector<char*> pieces;  // each below the size that the C library maps on its own
  for (int i = 0; i < 1024; ++i) {
    pieces.push_back(static_cast<char*>(std::malloc(65536)));
    if (pieces.back() == nullptr) return 1;
    std::memset(pieces.back(), 1, 65536);
  }
  std::ifstream map("/proc/self/smaps_rollup");
  long long kilobytes = 0;
  for (std::string line; std::getline(map, line);) {
    if (line.rfind("AnonHugePages:", 0) == 0) kilobytes = std::stoll(line.substr(14));
  }
  std::printf("\n%lld\n", kilobytes);
  for (char* piece : pieces) std::free(piece);
  return 0;
}
