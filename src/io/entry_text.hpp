// The body of a text matrix: one "row column value" a line, parsed on all threads.
#pragma once

#include <string>
#include <string_view>

#include "base/threads.hpp"
#include "io/raw_matrix.hpp"
#include "io/text_source.hpp"
#include "stanchion/status.hpp"

namespace stanchion {

/// How the lines are written.
struct EntryRules {
  char separator = 0;               ///< between the fields; 0 for blanks
  int base = 1;                     ///< number of the first row
  Index rows = 0;                   ///< every index lies in [base, base + rows)
  bool whole_numbers = false;       ///< values must be whole numbers and are refused when they round
  std::optional<Offset> announced;  ///< entries the file says it holds
  const DofMap* dofs = nullptr;     ///< names the entry in messages about its value
};

/// The part of a text that holds the entries.
struct TextBody {
  std::string_view text;
  Offset first_line = 1;
};

struct ParsedEntries {
  EntryList entries;
  Index least_index = 0, greatest_index = -1;  ///< over rows and columns, from base; greatest < least: none
  bool final_line_ended = true;                ///< the text ends with a line end
};

/// Parses every line of `body`; blank lines and lines that start with % or # are passed over. The text is cut
/// in pieces at line ends; the result and the error (that of the first bad line) do not depend on the number
/// of threads. `digest` is computed alongside. Memory: 16 bytes an entry, within `most_bytes`.
/// Errors: kBadInput "wrong-count", "truncated-file", "missing-field", "bad-number", "number-overflow",
/// "not-finite", "index-out-of-range", "extra-text", "integer-rounds"; kResourceLimit "memory-limit".
Result<ParsedEntries> parse_entries(const TextBody& body, const EntryRules& rules, const std::string& path,
                                    Offset most_bytes, FileDigest& digest, ThreadPool& pool);

/// Line numbers of the first two entries at `place` (given from 0); 0 where there is none. Serial reread.
std::pair<Offset, Offset> lines_of_entry(const TextBody& body, const EntryRules& rules, EntryPlace place);

/// "memory-limit" unless `entries` and `rows` fit into `most_bytes` while they are read.
Status check_memory(Offset rows, Offset entries, Offset most_bytes, const std::string& path);

}  // namespace stanchion
