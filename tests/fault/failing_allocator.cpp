#include "fault/failing_allocator.hpp"

#include <atomic>
#include <cstdlib>
#include <new>

namespace {

std::atomic<bool> armed{false}, lasting_failure{false}, struck_once{false};
std::atomic<long> requests_made{0}, fails_at{0}, live{0};
std::atomic<std::size_t> spared_bytes{0};

void* allocate(std::size_t size, std::size_t alignment) {
  if (armed.load(std::memory_order_relaxed)) {
    const long number = requests_made.fetch_add(1);
    const long at = fails_at.load();
    if (lasting_failure ? number >= at && size > spared_bytes : number == at) {
      struck_once = true;
      throw std::bad_alloc();
    }
  }
  void* block = alignment == 0 ? std::malloc(size == 0 ? 1 : size)
                               : std::aligned_alloc(alignment, (size + alignment) / alignment * alignment);
  if (block == nullptr) throw std::bad_alloc();
  live.fetch_add(1, std::memory_order_relaxed);
  return block;
}

void release(void* block) noexcept {
  if (block == nullptr) return;
  live.fetch_sub(1, std::memory_order_relaxed);
  std::free(block);
}

}  // namespace

void* operator new(std::size_t size) {
  return allocate(size, 0);
}
void* operator new[](std::size_t size) {
  return allocate(size, 0);
}
// The sanitizers bring their own of these, which our delete must not meet.
void* operator new(std::size_t size, const std::nothrow_t&) noexcept {
  try {
    return allocate(size, 0);
  } catch (const std::bad_alloc&) {
    return nullptr;
  }
}
void* operator new[](std::size_t size, const std::nothrow_t& none) noexcept {
  return operator new(size, none);
}
void* operator new(std::size_t size, std::align_val_t alignment) {
  return allocate(size, static_cast<std::size_t>(alignment));
}
void* operator new[](std::size_t size, std::align_val_t alignment) {
  return allocate(size, static_cast<std::size_t>(alignment));
}
void operator delete(void* block) noexcept {
  release(block);
}
void operator delete[](void* block) noexcept {
  release(block);
}
void operator delete(void* block, std::size_t) noexcept {
  release(block);
}
void operator delete[](void* block, std::size_t) noexcept {
  release(block);
}
void operator delete(void* block, const std::nothrow_t&) noexcept {
  release(block);
}
void operator delete[](void* block, const std::nothrow_t&) noexcept {
  release(block);
}
void operator delete(void* block, std::align_val_t) noexcept {
  release(block);
}
void operator delete[](void* block, std::align_val_t) noexcept {
  release(block);
}
void operator delete(void* block, std::size_t, std::align_val_t) noexcept {
  release(block);
}
void operator delete[](void* block, std::size_t, std::align_val_t) noexcept {
  release(block);
}

namespace stanchion::test {

FailingAllocator::FailingAllocator(long which, bool lasting, std::size_t spared) {
  struck_once = false;
  requests_made = 0;
  fails_at = which;
  lasting_failure = lasting;
  spared_bytes = spared;
  armed = true;
}

FailingAllocator::~FailingAllocator() {
  armed = false;
}

long FailingAllocator::requests() const {
  return requests_made.load();
}

bool FailingAllocator::struck() const {
  return struck_once;
}

long live_allocations() {
  return live.load();
}

}  // namespace stanchion::test
