// How messages name places: "file:line", and "file, row 12, column 7" (equations from 1).
#pragma once

#include <string>

#include "model/numbers.hpp"
#include "stanchion/types.hpp"

namespace stanchion {

inline std::string at_line(const std::string& path, Offset line) {
  return path + ":" + std::to_string(line);
}

inline std::string at_row(const std::string& path, Offset row) {
  return path + ", row " + std::to_string(row + 1);
}

inline std::string at_entry(const std::string& path, Offset row, Offset column) {
  return at_row(path, row) + ", column " + std::to_string(column + 1);
}

/// "1 entry", "7,000 entries".
inline std::string counted(Offset count, const char* one, const char* many) {
  return grouped(count) + " " + (count == 1 ? one : many);
}

}  // namespace stanchion
