// Matrix Market exchange format (R. F. Boisvert, R. Pozo, K. A. Remington, NIST report 5935, 1996).
#include <limits>
#include <memory>
#include <sstream>

#include "io/entry_text.hpp"
#include "io/matrix_formats.hpp"
#include "io/number.hpp"
#include "io/place.hpp"

namespace stanchion {
namespace {

struct Header {
  bool array = false, whole_numbers = false, symmetric = false;
  Offset rows = 0, columns = 0, entries = 0;
  Offset size_line = 0;
};

Status refuse(const std::string& code, const std::string& message, const std::string& place,
              const std::string& remedy) {
  return Status::bad_input(code, message, place, remedy);
}

/// The words of the first line.
Status read_banner(std::string_view line, const std::string& place, MatrixRole role, Header& header) {
  std::istringstream words(lower_case(line));
  std::string banner, object, format, field, symmetry, surplus;
  words >> banner >> object >> format >> field >> symmetry >> surplus;
  if (object != "matrix" || symmetry.empty() || !surplus.empty()) {
    return refuse("bad-header", "the first line is not a Matrix Market header: \"" + excerpt(line) + "\"",
                  place, "start the file with: %%MatrixMarket matrix coordinate real symmetric");
  }
  if (format == "array") {
    if (role != MatrixRole::kMass) {
      return refuse("array-format", "the matrix is written as a dense array", place,
                    "export it in coordinate format; only the vector of a diagonal mass may be an array");
    }
    header.array = true;
  } else if (format != "coordinate") {
    return refuse("bad-header", "unknown layout \"" + excerpt(format) + "\"", place, "use coordinate format");
  }
  if (field == "pattern") {
    return refuse("pattern-matrix", "the file holds a pattern without values", place,
                  "export the matrix with its values (field \"real\")");
  }
  if (field == "complex") {
    return refuse("complex-matrix", "the matrix is complex", place,
                  "export the real stiffness: without damping, and without frequency-dependent terms");
  }
  if (field != "real" && field != "integer" && field != "double") {
    return refuse("bad-header", "unknown field \"" + excerpt(field) + "\"", place,
                  "use \"real\" or \"integer\"");
  }
  header.whole_numbers = field == "integer";
  if (symmetry == "skew-symmetric") {
    return refuse("skew-symmetric", "the matrix is skew-symmetric: it has no inertia", place,
                  "leave gyroscopic terms out and export the symmetric stiffness");
  }
  if (symmetry == "hermitian") {
    return refuse(
        "hermitian-matrix", "the matrix is declared hermitian", place,
        "a real matrix is declared \"symmetric\"; export the real part if the imaginary one is zero");
  }
  if (symmetry != "symmetric" && symmetry != "general") {
    return refuse("bad-header", "unknown symmetry \"" + excerpt(symmetry) + "\"", place,
                  "use \"symmetric\" or \"general\"");
  }
  header.symmetric = symmetry == "symmetric";
  return {};
}

/// The line of sizes: rows, columns and, for coordinate files, entries.
Status read_sizes(std::string_view line, const std::string& place, Header& header) {
  const char* p = line.data();
  const char* const end = p + line.size();
  Offset* const sizes[] = {&header.rows, &header.columns, &header.entries};
  const int wanted = header.array ? 2 : 3;
  for (int i = 0; i < wanted; ++i) {
    p = skip_blanks(p, end);
    if (scan_whole(p, end, *sizes[i]) != NumberFault::kNone || *sizes[i] < 0) {
      return refuse("bad-size-line", "the size line does not hold its numbers: \"" + excerpt(line) + "\"",
                    place, header.array ? "it must be: rows columns" : "it must be: rows columns entries");
    }
  }
  if (skip_blanks(p, end) != end) {
    return refuse("bad-size-line", "the size line holds too much: \"" + excerpt(line) + "\"", place,
                  header.array ? "it must be: rows columns" : "it must be: rows columns entries");
  }
  if (header.rows == 0) {
    return refuse("empty-matrix", "the matrix has no rows", place, "export the matrix again");
  }
  if (header.rows > std::numeric_limits<Index>::max() - 1) {
    return refuse("too-many-rows", std::to_string(header.rows) + " rows are more than 2147483646", place,
                  "check the size line");
  }
  if (header.array ? header.columns != 1 : header.columns != header.rows) {
    return refuse("not-square",
                  "the matrix has " + std::to_string(header.rows) + " rows and " +
                      std::to_string(header.columns) + " columns",
                  place,
                  header.array ? "a diagonal mass is an array of one column" : "export the square matrix");
  }
  return {};
}

Result<Header> read_header(LineWalker& walker, const std::string& path, MatrixRole role) {
  Header header;
  std::string_view line;
  if (!walker.next(line)) {
    return refuse("empty-file", "the file is empty", path, "export the matrix again");
  }
  if (Status status = read_banner(line, at_line(path, 1), role, header); !status.ok()) return status;
  while (walker.next(line)) {
    const std::string_view text = trimmed(line);
    if (text.empty() || text.front() == '%') continue;
    if (Status status = read_sizes(text, at_line(path, walker.number()), header); !status.ok()) return status;
    return header;
  }
  return refuse("truncated-file", "the file ends before its size line", at_line(path, walker.number()),
                "write or transfer the file again");
}

}  // namespace

void warn_unfinished_line(bool ended, const std::string& path, Warnings& warnings) {
  if (ended) return;
  warnings.push_back(
      {"unfinished-line",
       "the last line has no line end: if the file was cut there, its last number may be wrong. "
       "End the file with a line end to silence this",
       path});
}

Result<RawMatrix> read_matrix_market(const ReadTask& task) {
  LineWalker walker(task.source.text());
  auto header = read_header(walker, task.path(), task.options.role);
  if (!header.ok()) return header.status();
  const Offset first_line = walker.number() + 1;
  if (header->array) {
    auto raw = read_diagonal_body(task, walker.rest(), first_line, header->rows, header->whole_numbers);
    if (raw.ok()) raw->format = "Matrix Market, array, taken as a diagonal";
    return raw;
  }
  if (Status status = check_memory(header->rows, 0, task.most_bytes, task.path()); !status.ok())
    return status;

  RawMatrix raw;
  raw.rows = static_cast<Index>(header->rows);
  raw.declared_symmetric = header->symmetric;
  raw.format = std::string("Matrix Market, coordinate ") + (header->whole_numbers ? "integer " : "real ") +
               (header->symmetric ? "symmetric" : "general");
  EntryRules rules;
  rules.rows = raw.rows;
  rules.whole_numbers = header->whole_numbers;
  rules.announced = header->entries;
  rules.dofs = task.options.dofs;
  const TextBody body{walker.rest(), first_line};
  auto parsed = parse_entries(body, rules, task.path(), task.most_bytes, task.digest, task.pool);
  if (!parsed.ok()) return parsed.status();
  raw.entries = std::move(parsed->entries);
  raw.lines_of = [body, rules](EntryPlace place) { return lines_of_entry(body, rules, place); };
  warn_unfinished_line(parsed->final_line_ended, task.path(), raw.warnings);
  return raw;
}

}  // namespace stanchion
