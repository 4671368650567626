// A stack of doubles in reserved address space: grows without moving, pays for pages only when they are
// touched.
#pragma once

#include <cstddef>

#include "stanchion/types.hpp"

namespace stanchion {

/// Last in, first out. One thread at a time. Pages already touched stay for reuse until trim().
class Arena {
 public:
  /// Reserves address space for about `doubles`, with room to grow where the system allows it.
  /// Throws std::bad_alloc when even that much cannot be reserved.
  explicit Arena(Offset doubles);
  ~Arena();
  Arena(Arena&& other) noexcept;
  Arena& operator=(Arena&&) = delete;
  Arena(const Arena&) = delete;
  Arena& operator=(const Arena&) = delete;

  /// `count` uninitialised doubles on top of the stack, 64-byte aligned, or null when the reservation is
  /// full.
  double* push(Offset count);
  /// Everything from `mark` up is free again.
  void pop_to(const double* mark);

  /// Gives the pages above the top and above `kept` doubles back to the system, large pages as wholes;
  /// high_water() starts again from the higher of the two, or stays below it.
  void trim(Offset kept = 0);

  double* top() const { return base_ + top_; }
  Offset used() const { return top_; }
  Offset high_water() const { return high_water_; }
  Offset capacity() const { return capacity_; }

 private:
  double* base_ = nullptr;
  Offset capacity_ = 0, top_ = 0, high_water_ = 0;
};

}  // namespace stanchion
