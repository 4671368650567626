#include "base/large_pages.hpp"

#include <sys/mman.h>

#include <cstdint>
#include <new>

namespace stanchion {
namespace {

constexpr std::size_t kLargePage = std::size_t{2} << 20;

std::size_t rounded_up(std::size_t bytes) {
  return (bytes + kLargePage - 1) / kLargePage * kLargePage;
}

}  // namespace

void* large_pages(std::size_t bytes) {
  if (bytes > std::numeric_limits<std::size_t>::max() / 2) throw std::bad_alloc();
  const std::size_t wanted = rounded_up(bytes), reserved = wanted + kLargePage;
  void* memory = mmap(nullptr, reserved, PROT_READ | PROT_WRITE, MAP_PRIVATE | MAP_ANONYMOUS, -1, 0);
  if (memory == MAP_FAILED) throw std::bad_alloc();
  // What stands over at both ends goes back.
  const auto begin = reinterpret_cast<std::uintptr_t>(memory);
  const std::uintptr_t aligned = rounded_up(begin);
  char* start = static_cast<char*>(memory) + (aligned - begin);
  if (aligned > begin) munmap(memory, aligned - begin);
  const std::size_t behind = begin + reserved - (aligned + wanted);
  if (behind > 0) munmap(start + wanted, behind);
  madvise(start, wanted, MADV_HUGEPAGE);  // a wish: without it pages are small
  return start;
}

void release_large_pages(void* memory, std::size_t bytes) noexcept {
  munmap(memory, rounded_up(bytes));
}

}  // namespace stanchion
