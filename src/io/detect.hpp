// Which matrix format a file is in, from its content.
#pragma once

#include <string>
#include <string_view>

#include "stanchion/types.hpp"

namespace stanchion {

enum class FileFormat { kMatrixMarket, kBoeing, kZip, kHdf5, kTriplets, kNodeKeyed, kOneColumn, kUnknown };

struct Detected {
  FileFormat format = FileFormat::kUnknown;
  char separator = 0;                 ///< of text fields; 0 for blanks
  std::string code, message, remedy;  ///< why it is unknown
  Offset line = 0;                    ///< where, 0 for the whole file
};

/// Looks at signatures first, then at the fields of the first lines that are not blank or comments.
Detected detect_format(std::string_view text);

bool is_hdf5(std::string_view bytes);

/// The separator of a line of fields: ; before tab before , before blanks (0). A comma between digits with a
/// semicolon elsewhere is a decimal comma and refused later, by name.
char separator_of(std::string_view line);

/// Number of fields of `line`; with a separator other than blanks, empty fields count.
int count_fields(std::string_view line, char separator);

}  // namespace stanchion
