#include "base/arena.hpp"

#include <sys/mman.h>

#include <algorithm>
#include <cstdint>
#include <new>
#include <utility>

namespace stanchion {
namespace {

constexpr Offset kAlign = 8;  // doubles in a cache line
constexpr std::uintptr_t kLargePage = std::uintptr_t{2} << 20;

double* reserve(Offset doubles) {
  void* memory = mmap(nullptr, static_cast<std::size_t>(doubles) * sizeof(double), PROT_READ | PROT_WRITE,
                      MAP_PRIVATE | MAP_ANONYMOUS | MAP_NORESERVE, -1, 0);
  return memory == MAP_FAILED ? nullptr : static_cast<double*>(memory);
}

}  // namespace

Arena::Arena(Offset doubles) {
  doubles = std::max<Offset>(doubles, 512);
  constexpr Offset kMostDoubles =
      (Offset{1} << 47) / Offset{sizeof(double)};  // all of a process's address space
  if (doubles > kMostDoubles) throw std::bad_alloc();
  // Delayed pivots may need more than any forecast: ask for eight times as much, settle for less.
  for (const Offset factor : {8, 2, 1}) {
    capacity_ = doubles * factor + 65536;
    base_ = reserve(capacity_);
    if (base_ != nullptr) break;
  }
  if (base_ == nullptr) throw std::bad_alloc();
  madvise(base_, static_cast<std::size_t>(capacity_) * sizeof(double), MADV_HUGEPAGE);
}

Arena::~Arena() {
  if (base_ != nullptr) munmap(base_, static_cast<std::size_t>(capacity_) * sizeof(double));
}

Arena::Arena(Arena&& other) noexcept
    : base_(std::exchange(other.base_, nullptr)),
      capacity_(other.capacity_),
      top_(other.top_),
      high_water_(other.high_water_) {}

double* Arena::push(Offset count) {
  const Offset rounded = (count + kAlign - 1) / kAlign * kAlign;
  if (rounded > capacity_ - top_) return nullptr;
  double* block = base_ + top_;
  top_ += rounded;
  high_water_ = std::max(high_water_, top_);
  return block;
}

void Arena::trim(Offset kept) {
  const Offset stays = std::max(top_, kept);
  if (stays >= high_water_) return;
  // A large page given back in part is split: what is touched again comes in small ones.
  const auto begin =
      (reinterpret_cast<std::uintptr_t>(base_ + stays) + kLargePage - 1) / kLargePage * kLargePage;
  const auto end = reinterpret_cast<std::uintptr_t>(base_ + high_water_);
  if (begin < end) madvise(reinterpret_cast<void*>(begin), end - begin, MADV_DONTNEED);
  high_water_ = stays;
}

void Arena::pop_to(const double* mark) {
  top_ = mark - base_;
}

}  // namespace stanchion
