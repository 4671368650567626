// Numbers as people read them: grouped digits, sizes and durations with a unit, probabilities.
#pragma once

#include <string>

#include "stanchion/types.hpp"

namespace stanchion {

/// 29796 -> "29,796".
std::string grouped(Offset number);

/// 3.14159e-12 -> "3.14e-12": three significant digits, for bounds.
std::string rounded(double number);

/// The shortest decimal that reads back to the same double: for numbers the user gave.
std::string exact(double number);

/// So many significant digits of it, rounded down or up: what was a bound stays one.
std::string rounded_down(double number, int digits);
std::string rounded_up(double number, int digits);

/// 1300000000 -> "1.3 GB" (powers of 1000).
std::string bytes_in_words(Offset bytes);

/// 4.6e9 -> "4.6 Gflop".
std::string flops_in_words(double flops);

/// 0.0004 -> "<1 ms", 0.0312 -> "0.031 s", 75 -> "1 min 15 s", 7260 -> "2 h 1 min".
std::string duration_in_words(double seconds);

/// Within a sentence: "less than 1 ms", or `qualifier` ("about ") and the duration in words.
std::string duration_in_sentence(double seconds, const char* qualifier = "");

/// (1, "zero direction") -> "1 zero direction"; (6, ...) -> "6 zero directions"; 0 -> "no zero direction".
std::string counted(Offset number, const std::string& noun);

}  // namespace stanchion
