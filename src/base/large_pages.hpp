// Memory for large arrays straight from the system, in its large pages where it has them: hundreds of times
// fewer page faults on first use, which cost more than the clearing itself.
#pragma once

#include <cstddef>
#include <limits>

namespace stanchion {

// A sanitizer watches the ends of what the ordinary allocator gives.
#if defined(__SANITIZE_ADDRESS__)
#define STANCHION_WATCHED_ALLOCATOR 1
#elif defined(__has_feature)
#if __has_feature(address_sanitizer)
#define STANCHION_WATCHED_ALLOCATOR 1
#endif
#endif
#ifdef STANCHION_WATCHED_ALLOCATOR
inline constexpr std::size_t kLargePagesFrom = std::numeric_limits<std::size_t>::max();
#else
inline constexpr std::size_t kLargePagesFrom = std::size_t{4} << 20;
#endif

/// Uninitialised memory of `bytes` > 0, aligned to a large page. Throws std::bad_alloc.
void* large_pages(std::size_t bytes);

/// Gives back what large_pages(bytes) gave.
void release_large_pages(void* memory, std::size_t bytes) noexcept;

}  // namespace stanchion
