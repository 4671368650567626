// Fortran formats of fixed-column files.
#pragma once

#include <optional>
#include <string_view>

#include "io/number.hpp"
#include "stanchion/types.hpp"

namespace stanchion {

/// One repeated field: "(1P,5E16.9)" is 5 fields a line, 16 wide, with 9 decimals where no point is written.
struct FortranFormat {
  int per_line = 0;
  int width = 0;
  int skip = 0;      ///< blanks before each field, as in (5(1X,E15.8))
  int decimals = 0;  ///< implied when a field has no decimal point
  int scale = 0;     ///< the P factor: divides values that have no exponent
  bool real = false;
};

/// Understands (rIw), (rEw.d) with E, D, F or G, an optional kP before it with or without a comma, Ew.dEe,
/// and one level of repeated group with nX. Nothing for any other format.
std::optional<FortranFormat> parse_fortran_format(std::string_view text);

/// Reads field number `field` (from 0) of a line. A line shorter than the field counts as blank; blank fields
/// are kMissing. Blanks inside a number are passed over, as Fortran does.
NumberFault read_fortran_real(std::string_view line, int field, const FortranFormat& format, double& value);
NumberFault read_fortran_whole(std::string_view line, int field, const FortranFormat& format, Offset& value);

}  // namespace stanchion
