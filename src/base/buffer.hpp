// A plain uninitialised array: for large data that is written once before it is read.
#pragma once

#include <cstddef>
#include <cstring>
#include <limits>
#include <memory>
#include <new>
#include <span>
#include <type_traits>
#include <utility>

#include "base/large_pages.hpp"
#include "stanchion/types.hpp"

namespace stanchion {

/// Owns `size` uninitialised elements of a trivial type; movable, copyable on request only.
/// Throws std::bad_alloc; callers at the library's edge turn that into a resource-limit Status.
template <class T>
class Buffer {
  static_assert(std::is_trivially_copyable_v<T>);

 public:
  Buffer() = default;
  explicit Buffer(Offset size) : data_(allocate(size)), size_(size) {}
  Buffer(Offset size, T fill) : Buffer(size) {
    for (Offset i = 0; i < size_; ++i) data_[static_cast<std::size_t>(i)] = fill;
  }
  Buffer(Buffer&& other) noexcept : data_(std::move(other.data_)), size_(std::exchange(other.size_, 0)) {}
  Buffer& operator=(Buffer&& other) noexcept {
    data_ = std::move(other.data_);
    size_ = std::exchange(other.size_, 0);
    return *this;
  }
  Buffer(const Buffer&) = delete;
  Buffer& operator=(const Buffer&) = delete;

  Buffer clone() const {
    Buffer copy(size_);
    if (size_ > 0) std::memcpy(copy.data(), data(), static_cast<std::size_t>(size_) * sizeof(T));
    return copy;
  }

  /// Keeps the first `size` elements; the memory itself is not returned.
  void shrink(Offset size) { size_ = size < size_ ? size : size_; }
  void reset() {
    data_.reset();
    size_ = 0;
  }

  T* data() { return data_.get(); }
  const T* data() const { return data_.get(); }
  Offset size() const { return size_; }
  bool empty() const { return size_ == 0; }
  T& operator[](Offset i) { return data_[static_cast<std::size_t>(i)]; }
  const T& operator[](Offset i) const { return data_[static_cast<std::size_t>(i)]; }
  T* begin() { return data(); }
  T* end() { return data() + size_; }
  const T* begin() const { return data(); }
  const T* end() const { return data() + size_; }
  std::span<T> span() { return {data(), static_cast<std::size_t>(size_)}; }
  std::span<const T> span() const { return {data(), static_cast<std::size_t>(size_)}; }

 private:
  struct Release {
    std::size_t bytes = 0;  ///< 0: from the ordinary allocator
    void operator()(T* data) const {
      if (bytes == 0) {
        delete[] data;
      } else {
        release_large_pages(data, bytes);
      }
    }
  };
  using Array = std::unique_ptr<T[], Release>;

  static Array allocate(Offset size) {
    const auto count = static_cast<std::size_t>(size);
    if (count > std::numeric_limits<std::size_t>::max() / 2 / sizeof(T)) throw std::bad_alloc();
    const std::size_t bytes = count * sizeof(T);
    if (bytes < kLargePagesFrom) return Array(new T[count]);
    return Array(static_cast<T*>(large_pages(bytes)), Release{bytes});
  }

  Array data_;
  Offset size_ = 0;
};

}  // namespace stanchion
