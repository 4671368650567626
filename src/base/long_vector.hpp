// A standard vector whose memory comes in large pages where it is long: for arrays that grow, shrink and are
// given back.
#pragma once

#include <cstddef>
#include <new>
#include <vector>

#include "base/large_pages.hpp"

namespace stanchion {

/// Without a state; as Buffer takes its memory.
template <class T>
struct LargePageAllocator {
  using value_type = T;

  LargePageAllocator() = default;
  template <class U>
  LargePageAllocator(const LargePageAllocator<U>&) {}

  T* allocate(std::size_t count) {
    if (count > static_cast<std::size_t>(-1) / 2 / sizeof(T)) throw std::bad_alloc();
    const std::size_t bytes = count * sizeof(T);
    return static_cast<T*>(bytes < kLargePagesFrom ? ::operator new(bytes) : large_pages(bytes));
  }

  void deallocate(T* memory, std::size_t count) noexcept {
    const std::size_t bytes = count * sizeof(T);
    if (bytes < kLargePagesFrom) {
      ::operator delete(memory);
    } else {
      release_large_pages(memory, bytes);
    }
  }

  template <class U>
  bool operator==(const LargePageAllocator<U>&) const {
    return true;
  }
};

template <class T>
using LongVector = std::vector<T, LargePageAllocator<T>>;

}  // namespace stanchion
