// What goes to standard output and standard error.
#pragma once

#include <string>

#include "stanchion/status.hpp"

namespace stanchion::cli {

/// Resource limit ("write-failed") when standard output does not take it all.
Status print_result(const std::string& text);

/// The failure that stands for std::bad_alloc.
Status out_of_memory();

/// "stanchion: place: message [code]" and the remedy, on standard error.
void print_failure(const Status& failure);

}  // namespace stanchion::cli
