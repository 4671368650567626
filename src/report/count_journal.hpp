// The file in which a sweep keeps its counts as they come: a header line and one line a count, each a JSON
// object.
#pragma once

#include <string>
#include <string_view>
#include <utility>
#include <vector>

#include "stanchion/outcome.hpp"
#include "stanchion/request.hpp"
#include "stanchion/status.hpp"

namespace stanchion {

/// One line: the count with its certificate, and the statistical attempts it made.
struct JournalLine {
  Index number = 0;
  ShiftCount count;
  std::vector<RiskEvent> events;
};

/// Role and digest of a file that bears on the counts and is no matrix: dof map, lists of equations.
using NamedDigest = std::pair<std::string, std::string>;

/// What makes two runs one question: version, digests of the inputs, pencil, risk, seed and whatever else
/// decides the counts. Without the line end.
std::string journal_header(const Request& request, const Outcome& begun,
                           const std::vector<NamedDigest>& files);

/// Without the line end.
std::string journal_text(const JournalLine& line);

/// The counts of `text`, which must begin with the line `header`. A last line that was cut off is passed
/// over. Bad input "other-sweep" when the header differs, "bad-journal" when a line cannot be read or is not
/// what its own certificate gives.
Result<std::vector<JournalLine>> read_journal(std::string_view text, const std::string& header,
                                              const std::string& path);

}  // namespace stanchion
