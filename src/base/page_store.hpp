// Memory handed out in pieces and freed all at once: for very many arrays that live and die together.
#pragma once

#include <algorithm>
#include <cstddef>
#include <limits>
#include <new>
#include <span>
#include <type_traits>
#include <vector>

#include "base/buffer.hpp"

namespace stanchion {

/// Pieces of blocks that double in size up to 16 MiB; the large ones lie in large pages, so that filling many
/// small arrays costs few page faults. Movable: what was handed out stays where it is. One thread at a time.
class PageStore {
 public:
  /// `count` uninitialised elements, 64-byte aligned relative to their block. Throws std::bad_alloc.
  template <class T>
  std::span<T> take(Offset count) {
    static_assert(std::is_trivially_copyable_v<T> && alignof(T) <= kAlign);
    if (count > (std::numeric_limits<Offset>::max() - kAlign) / Offset{sizeof(T)}) throw std::bad_alloc();
    const Offset bytes = (count * Offset{sizeof(T)} + kAlign - 1) / kAlign * kAlign;
    if (blocks_.empty() || bytes > blocks_.back().size() - used_) {
      next_ = std::min(next_ * 2, kLargestBlock);
      blocks_.emplace_back(std::max(bytes, next_));
      used_ = 0;
    }
    auto* first = reinterpret_cast<T*>(blocks_.back().data() + used_);
    used_ += bytes;
    return {first, static_cast<std::size_t>(count)};
  }

 private:
  static constexpr Offset kAlign = 64, kLargestBlock = Offset{16} << 20;

  std::vector<Buffer<std::byte>> blocks_;
  Offset used_ = 0, next_ = 8192;
};

}  // namespace stanchion
