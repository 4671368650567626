#pragma once

namespace stanchion {

/// Whether this run is worth a heap on large pages; to be defined by a program that links large_heap.cpp.
/// Called before any initializer, so it may neither allocate nor use what one sets up.
bool wants_large_heap(int argc, char** argv);

/// The bytes of the files that the arguments name, as `wants_large_heap` may ask.
long long bytes_of_named_files(int argc, char** argv);

}  // namespace stanchion
