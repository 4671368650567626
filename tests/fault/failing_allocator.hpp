// Operator new of this test program, made to fail on demand.
#pragma once

#include <cstddef>

namespace stanchion::test {

/// While alive, `fails` says which requests throw std::bad_alloc. One at a time; counts every thread's
/// requests.
class FailingAllocator {
 public:
  /// Only the `which`-th request (from 0) fails.
  static FailingAllocator once(long which) { return FailingAllocator(which, false, 0); }
  /// From the `which`-th on every request above `spared` bytes fails: memory has run out, error texts still
  /// fit.
  static FailingAllocator from_then_on(long which, std::size_t spared) { return {which, true, spared}; }
  /// None fails; for counting.
  static FailingAllocator never() { return FailingAllocator(-1, false, 0); }
  ~FailingAllocator();
  FailingAllocator(const FailingAllocator&) = delete;
  FailingAllocator& operator=(const FailingAllocator&) = delete;

  /// Requests since this object was made.
  long requests() const;
  /// Whether any request has failed since this object was made.
  bool struck() const;

 private:
  FailingAllocator(long which, bool lasting, std::size_t spared);
};

/// Blocks from operator new that are not deleted yet.
long live_allocations();

}  // namespace stanchion::test
