// Blocks cut from large pages, each owned on its own: for results that are handed on and dropped one by one.
#pragma once

#include <algorithm>
#include <cstddef>
#include <limits>
#include <memory>
#include <new>
#include <type_traits>

#include "base/buffer.hpp"
#include "base/large_pages.hpp"

namespace stanchion {

/// Cuts blocks from pages that grow to a large page of the system; a page goes back when its last block and
/// the store are done with it, and is cut again from its start when only the store is. One thread at a time
/// takes; blocks may be dropped by any thread that is ordered before the next take().
class SharedPages {
 public:
  /// `count` uninitialised elements, 64-byte aligned relative to their page. Throws std::bad_alloc.
  template <class T>
  std::shared_ptr<T> take(Offset count) {
    static_assert(std::is_trivially_copyable_v<T> && alignof(T) <= kAlign);
    if (count < 0 ||
        static_cast<std::size_t>(count) > std::numeric_limits<std::size_t>::max() / 4 / sizeof(T))
      throw std::bad_alloc();
    const std::size_t bytes = (static_cast<std::size_t>(count) * sizeof(T) + kAlign - 1) / kAlign * kAlign;
    if (page_.use_count() == 1) used_ = 0;
    if (bytes > size_ - used_) open(bytes);
    auto* first = reinterpret_cast<T*>(page_.get() + used_);
    used_ += bytes;
    return {page_, first};
  }

 private:
  static constexpr std::size_t kAlign = 64, kFirstPage = std::size_t{128} << 10,
                               kLastPage = std::size_t{2} << 20;

  void open(std::size_t bytes) {
    // A sanitizer watches the ends of every block.
    const bool watched = kLargePagesFrom == std::numeric_limits<std::size_t>::max();
    const std::size_t size = watched ? bytes : std::max(bytes, next_);
    page_.reset();
    size_ = used_ = 0;
    if (watched || size < kLastPage) {
      page_ = std::shared_ptr<std::byte>(new std::byte[size], std::default_delete<std::byte[]>());
    } else {
      page_ = std::shared_ptr<std::byte>(static_cast<std::byte*>(large_pages(size)),
                                         [size](std::byte* page) { release_large_pages(page, size); });
    }
    size_ = size;
    next_ = std::min(next_ * 4, kLastPage);
  }

  std::shared_ptr<std::byte> page_;
  std::size_t size_ = 0, used_ = 0, next_ = kFirstPage;
};

}  // namespace stanchion
