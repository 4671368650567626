#include "io/entry_text.hpp"

#include <algorithm>
#include <cstring>
#include <limits>
#include <vector>

#include "io/number.hpp"
#include "io/place.hpp"
#include "io/shortest.hpp"
#include "model/byte_size.hpp"

namespace stanchion {
namespace {

constexpr std::size_t kPieceBytes = std::size_t{1} << 21;

/// One piece of the text, with what the first pass counted and the second found.
struct Piece {
  const char* begin = nullptr;
  const char* end = nullptr;
  Offset lines = 0, entries = 0;
  Offset first_line = 1, first_entry = 0;
  Index least = std::numeric_limits<Index>::max(), greatest = -1;
  Status fault;
};

std::vector<Piece> cut(std::string_view text) {
  std::vector<Piece> pieces;
  const char* begin = text.data();
  const char* const end = text.data() + text.size();
  while (begin != end) {
    const char* stop = end;
    if (static_cast<std::size_t>(end - begin) > kPieceBytes) {
      const void* line_end =
          std::memchr(begin + kPieceBytes, '\n', static_cast<std::size_t>(end - begin) - kPieceBytes);
      if (line_end != nullptr) stop = static_cast<const char*>(line_end) + 1;
    }
    Piece piece;
    piece.begin = begin;
    piece.end = stop;
    pieces.push_back(piece);
    begin = stop;
  }
  return pieces;
}

const char* line_end(const char* begin, const char* end) {
  const void* found = std::memchr(begin, '\n', static_cast<std::size_t>(end - begin));
  return found != nullptr ? static_cast<const char*>(found) : end;
}

bool holds_entry(const char* p, const char* end) {
  p = skip_blanks(p, end);
  return p != end && *p != '%' && *p != '#';
}

void count(Piece& piece) {
  for (const char* p = piece.begin; p != piece.end;) {
    const char* const stop = line_end(p, piece.end);
    ++piece.lines;
    if (holds_entry(p, stop)) ++piece.entries;
    p = stop == piece.end ? stop : stop + 1;
  }
}

std::string_view field_at(const char* p, const char* end) {
  const char* q = p;
  while (q != end && !ends_number(*q)) ++q;
  return {p, static_cast<std::size_t>(q - p)};
}

/// Parses the lines of one file; knows how to name what is wrong with them.
class LineParser {
 public:
  LineParser(const EntryRules& rules, const std::string& path)
      : rules_(rules), path_(path), last_(Offset{rules.base} + rules.rows - 1) {}

  /// False: the line is at fault, see explain().
  bool parse(const char* p, const char* end, Index& row, Index& column, double& value, bool& exact) const {
    Offset first = 0, second = 0;
    exact = true;
    p = skip_blanks(p, end);
    if (scan_whole(p, end, first) != NumberFault::kNone || first < rules_.base || first > last_) return false;
    if (!pass_separator(p, end)) return false;
    if (scan_whole(p, end, second) != NumberFault::kNone || second < rules_.base || second > last_)
      return false;
    if (!pass_separator(p, end)) return false;
    const NumberFault fault =
        rules_.whole_numbers ? scan_integer_value(p, end, value, exact) : scan_real(p, end, value);
    if (fault != NumberFault::kNone || !exact) return false;
    row = static_cast<Index>(first - rules_.base);
    column = static_cast<Index>(second - rules_.base);
    return skip_blanks(p, end) == end;
  }

  Status explain(const char* p, const char* end, Offset line) const {
    const std::string place = at_line(path_, line);
    p = skip_blanks(p, end);
    Offset entry[2] = {0, 0};
    for (const std::size_t side : {0U, 1U}) {
      const char* const name = side == 0 ? "row" : "column";
      Offset& index = entry[side];
      const std::string_view field = field_at(p, end);
      const NumberFault fault = scan_whole(p, end, index);
      if (fault == NumberFault::kMissing) return missing(name, place);
      if (fault == NumberFault::kUnreadable) {
        return Status::bad_input("bad-number", "\"" + excerpt(field) + "\" is not a " + name + " number",
                                 place, "each line must be: row, column, value");
      }
      if (fault == NumberFault::kOverflow || index < rules_.base || index > last_) {
        return Status::bad_input("index-out-of-range",
                                 std::string(name) + " " + excerpt(field) + " is outside " +
                                     std::to_string(rules_.base) + " to " + std::to_string(last_),
                                 place, "correct the index, or the size the file announces");
      }
      if (!pass_separator(p, end)) {
        return skip_blanks(p, end) == end ? missing(side == 0 ? "column" : "value", place)
                                          : extra(p, end, place);
      }
    }
    // Without a map the line says enough; the base of triplet text is not even known yet.
    const std::string where =
        rules_.dofs == nullptr ? std::string()
                               : " at " + entry_name(static_cast<Index>(entry[0] - rules_.base),
                                                     static_cast<Index>(entry[1] - rules_.base), rules_.dofs);
    return explain_value(p, end, place, where);
  }

 private:
  bool pass_separator(const char*& p, const char* end) const {
    p = skip_blanks(p, end);
    if (p == end) return false;
    if (rules_.separator == 0) return true;
    if (*p != rules_.separator) return false;
    p = skip_blanks(p + 1, end);
    return true;
  }

  Status explain_value(const char* p, const char* end, const std::string& place,
                       const std::string& where) const {
    double value = 0;
    bool exact = true;
    const std::string_view field = field_at(p, end);
    const NumberFault fault =
        rules_.whole_numbers ? scan_integer_value(p, end, value, exact) : scan_real(p, end, value);
    const std::string shown = "\"" + excerpt(field) + "\"" + where;
    switch (fault) {
      case NumberFault::kMissing:
        return missing("value", place);
      case NumberFault::kUnreadable:
        return Status::bad_input(
            "bad-number",
            shown + (rules_.whole_numbers ? " is not a whole number, which the header announces"
                                          : " is not a number"),
            place,
            rules_.whole_numbers ? "write \"real\" in place of \"integer\" in the header"
                                 : "write numbers like -1.5e+03, with a decimal point");
      case NumberFault::kOverflow:
        return Status::bad_input("number-overflow", shown + " is larger than any double-precision number",
                                 place, "check the value, or choose units that keep stiffnesses below 1e300");
      case NumberFault::kUnderflow:
        return Status::bad_input("number-underflow",
                                 shown + " is not zero, but smaller than any double-precision number", place,
                                 "write 0 if zero is meant, or choose other units");
      case NumberFault::kNotFinite:
        return Status::bad_input("not-finite", shown + " is not a finite number", place,
                                 "find the element that produced it: often one of zero length or zero area");
      case NumberFault::kNone:
        break;
    }
    if (!exact) {
      return Status::bad_input("integer-rounds",
                               "the whole number " + shown + " is beyond 2^53 and would be rounded", place,
                               "scale the matrix, or write the values as reals if their rounding is meant");
    }
    return extra(p, end, place);
  }

  static Status missing(const char* what, const std::string& place) {
    return Status::bad_input("missing-field", std::string("the line ends before its ") + what, place,
                             "each line must be: row, column, value");
  }

  static Status extra(const char* p, const char* end, const std::string& place) {
    p = skip_blanks(p, end);
    return Status::bad_input(
        "extra-text", "unexpected \"" + excerpt({p, static_cast<std::size_t>(end - p)}) + "\" in the line",
        place, "each line must be: row, column, value, with the same separator throughout");
  }

  const EntryRules& rules_;
  const std::string& path_;
  Offset last_;
};

void parse(Piece& piece, const LineParser& parser, EntryList& entries) {
  Offset line = piece.first_line, position = piece.first_entry;
  for (const char* p = piece.begin; p != piece.end; ++line) {
    const char* const stop = line_end(p, piece.end);
    Index row = 0, column = 0;
    double value = 0;
    bool exact = true;
    if (parser.parse(p, stop, row, column, value, exact)) {
      entries.set(position++, row, column, value);
      piece.least = std::min({piece.least, row, column});
      piece.greatest = std::max({piece.greatest, row, column});
    } else if (holds_entry(p, stop)) {
      piece.fault = parser.explain(p, stop, line);
      return;
    }
    p = stop == piece.end ? stop : stop + 1;
  }
}

Status wrong_count(Offset announced, Offset found, bool ended, const std::string& path, Offset last_line) {
  const std::string counts = counted(announced, "entry is", "entries are") + " announced, " +
                             std::to_string(found) + (found == 1 ? " is there" : " are there");
  if (found < announced && !ended) {
    return Status::bad_input("truncated-file", "the file is cut off: " + counts, at_line(path, last_line),
                             "write or transfer the file again");
  }
  return Status::bad_input("wrong-count", counts, at_line(path, last_line),
                           found < announced ? "write or transfer the file again, or correct the size line"
                                             : "correct the number of entries in the size line");
}

}  // namespace

Status check_memory(Offset rows, Offset entries, Offset most_bytes, const std::string& path) {
  // While entries are sorted: two copies of row, and one each of column, value and offsets.
  const double bytes = 24.0 * static_cast<double>(entries) + 24.0 * static_cast<double>(rows);
  if (bytes <= static_cast<double>(most_bytes)) return {};
  return Status::resource_limit(
      "memory-limit",
      "reading " + grouped(rows) + " rows and " + grouped(entries) + " entries needs " +
          size_needed(static_cast<Offset>(std::min(bytes, 0x1p62))) + ", more than the " +
          size_allowed(most_bytes) + " allowed",
      path, "check the size the file announces, raise --memory-cap, or use a machine with more memory");
}

Result<ParsedEntries> parse_entries(const TextBody& body, const EntryRules& rules, const std::string& path,
                                    Offset most_bytes, FileDigest& digest, ThreadPool& pool) {
  std::vector<Piece> pieces = cut(body.text);
  const auto piece_count = static_cast<Offset>(pieces.size());
  pool.run(piece_count, [&](Offset piece, int) { count(pieces[static_cast<std::size_t>(piece)]); });
  Offset lines = 0, total = 0;
  for (Piece& piece : pieces) {
    piece.first_line = body.first_line + lines;
    piece.first_entry = total;
    lines += piece.lines;
    total += piece.entries;
  }
  ParsedEntries parsed;
  parsed.final_line_ended = body.text.empty() || body.text.back() == '\n';
  if (rules.announced && *rules.announced != total) {
    return wrong_count(*rules.announced, total, parsed.final_line_ended, path, body.first_line + lines - 1);
  }
  if (Status status = check_memory(0, total, most_bytes, path); !status.ok()) return status;
  parsed.entries = EntryList(total);
  const LineParser parser(rules, path);
  // The digest comes first: it is the longest piece where the processor has no instructions for it.
  pool.run(piece_count + 1, [&](Offset piece, int) {
    if (piece == 0) {
      digest.compute();
    } else {
      parse(pieces[static_cast<std::size_t>(piece - 1)], parser, parsed.entries);
    }
  });
  Index least = std::numeric_limits<Index>::max();
  for (const Piece& piece : pieces) {
    if (!piece.fault.ok()) return piece.fault;
    least = std::min(least, piece.least);
    parsed.greatest_index = std::max(parsed.greatest_index, piece.greatest);
  }
  if (total > 0) parsed.least_index = least;
  return parsed;
}

std::pair<Offset, Offset> lines_of_entry(const TextBody& body, const EntryRules& rules, EntryPlace place) {
  LineWalker walker(body.text, body.first_line);
  std::string_view line;
  Offset first_found = 0;
  while (walker.next(line)) {
    const char* p = skip_blanks(line.data(), line.data() + line.size());
    const char* const end = line.data() + line.size();
    Offset row = 0, column = 0;
    if (scan_whole(p, end, row) != NumberFault::kNone || row - rules.base != place.row) continue;
    p = skip_blanks(p, end);
    if (p != end && rules.separator != 0 && *p == rules.separator) p = skip_blanks(p + 1, end);
    if (scan_whole(p, end, column) != NumberFault::kNone || column - rules.base != place.column) continue;
    if (first_found != 0) return {first_found, walker.number()};
    first_found = walker.number();
  }
  return {first_found, 0};
}

}  // namespace stanchion
