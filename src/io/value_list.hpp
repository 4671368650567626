// Somebody's list of eigenvalues or critical factors: `--values`.
#pragma once

#include <optional>
#include <string>
#include <vector>

#include "stanchion/status.hpp"
#include "stanchion/types.hpp"

namespace stanchion {

/// One line of the list, in the unit of the file (factor, omega^2 or hertz: `--unit` says which).
struct ListedValue {
  double value = 0;
  std::optional<double> tolerance;  ///< in the same unit
  std::string label;
  Offset line = 0;  ///< in the file, for messages; 0 for values that come from none
};

/// Reads the column `value` and optionally `tolerance` and `label`, in any order under a header line, or in
/// this order without one; plain or .gz. Order and repetitions are kept as listed. Errors, kBadInput with
/// file:line: those of reading CSV, "bad-number", "not-finite", "negative-tolerance", "empty-file".
Result<std::vector<ListedValue>> read_values(const std::string& path);

/// Writes value, tolerance and label with a header line; the file appears whole or not at all.
Status write_values(const std::vector<ListedValue>& values, const std::string& path);

}  // namespace stanchion
