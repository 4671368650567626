// "row col value" lines without a size line.
#include <algorithm>
#include <limits>

#include "io/detect.hpp"
#include "io/entry_text.hpp"
#include "io/matrix_formats.hpp"
#include "io/number.hpp"
#include "io/place.hpp"

namespace stanchion {
namespace {

/// Passes over comments and one header line; gives what follows.
TextBody body_after_header(std::string_view text, char separator) {
  LineWalker walker(text);
  std::string_view line;
  TextBody body{text, 1};
  while (walker.next(line)) {
    const std::string_view content = trimmed(line);
    if (content.empty() || content.front() == '%' || content.front() == '#') continue;
    const std::string_view first = trimmed(content.substr(0, content.find(separator == 0 ? ' ' : separator)));
    const char letter = first.empty() ? '\0' : static_cast<char>(first.front() | 0x20);
    // Words where the first row number should be: a header line.
    if ((letter >= 'a' && letter <= 'z') || letter == '"') body = {walker.rest(), walker.number() + 1};
    break;
  }
  return body;
}

/// Which number the first row has. A zero decides for 0. Without one, row 1 in use decides for 1 unless the
/// file would as well be a numbering from 0 that leaves the first row empty: that is so when --rows says that
/// there is one row more than the greatest number, or when row 1 is not used either.
Result<int> decide_base(const ParsedEntries& parsed, const MatrixReadOptions& options,
                        const std::string& path) {
  if (options.base) return *options.base;
  if (parsed.least_index == 0) return 0;
  if (options.rows && parsed.greatest_index >= *options.rows) return 1;
  if (!options.rows && parsed.least_index == 1) return 1;
  return Status::bad_input("ambiguous-base",
                           "row numbers run from " + std::to_string(parsed.least_index) + " to " +
                               std::to_string(parsed.greatest_index) +
                               ": it cannot be seen whether the first row is 0 or 1",
                           path, "say which with --base 0 or --base 1");
}

void shift(EntryList& entries, ThreadPool& pool) {
  constexpr Offset kPiece = Offset{1} << 18;
  pool.run((entries.size() + kPiece - 1) / kPiece, [&](Offset piece, int) {
    const Offset end = std::min(entries.size(), (piece + 1) * kPiece);
    for (Offset k = piece * kPiece; k < end; ++k) {
      entries.row[k] += entries.row[k] < 0 ? 1 : -1;  // ~r + 1 == ~(r - 1)
      --entries.column[k];
    }
  });
}

}  // namespace

Result<RawMatrix> read_triplet_text(const ReadTask& task, char separator) {
  const TextBody body = body_after_header(task.source.text(), separator);
  EntryRules rules;
  rules.separator = separator;
  if (task.options.base) rules.dofs = task.options.dofs;
  rules.base = task.options.base.value_or(0);
  rules.rows = task.options.rows.value_or(std::numeric_limits<Index>::max() - 1);
  if (task.options.rows && !task.options.base) ++rules.rows;  // both numberings, until it is decided
  auto parsed = parse_entries(body, rules, task.path(), task.most_bytes, task.digest, task.pool);
  if (!parsed.ok()) return parsed.status();
  if (parsed->entries.size() == 0) {
    return Status::bad_input("empty-file", "the file holds no entries", task.path(),
                             "export the matrix again");
  }
  const auto base = decide_base(*parsed, task.options, task.path());
  if (!base.ok()) return base.status();
  const int removed = *base - rules.base;  // parse_entries has subtracted a base that was given
  if (removed == 1) shift(parsed->entries, task.pool);
  const Index rows = parsed->greatest_index + 1 - removed;
  if (task.options.rows && rows > *task.options.rows) {
    return Status::bad_input("index-out-of-range",
                             "row number " + std::to_string(parsed->greatest_index) + " is beyond the " +
                                 std::to_string(*task.options.rows) + " rows of --rows",
                             task.path(), "correct --rows or --base");
  }
  RawMatrix raw;
  raw.rows = task.options.rows.value_or(rows);
  if (Status status = check_memory(raw.rows, parsed->entries.size(), task.most_bytes, task.path());
      !status.ok()) {
    return status;
  }
  raw.entries = std::move(parsed->entries);
  raw.format = "triplet text, numbered from " + std::to_string(*base);
  rules.base = *base;
  raw.lines_of = [body, rules](EntryPlace place) { return lines_of_entry(body, rules, place); };
  warn_unfinished_line(parsed->final_line_ended, task.path(), raw.warnings);
  return raw;
}

}  // namespace stanchion
