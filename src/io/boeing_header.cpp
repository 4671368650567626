#include "io/boeing_header.hpp"

#include <limits>

#include "io/matrix_formats.hpp"
#include "io/number.hpp"
#include "io/place.hpp"

namespace stanchion {
namespace {

/// Up to `most` whole numbers separated by blanks; how many were found, -1 when a word is no number.
int read_numbers(std::string_view text, Offset* numbers, int most) {
  const char* p = text.data();
  const char* const end = p + text.size();
  int found = 0;
  for (; found < most; ++found) {
    p = skip_blanks(p, end);
    if (p == end) break;
    if (scan_whole(p, end, numbers[found]) != NumberFault::kNone || numbers[found] < 0) return -1;
  }
  return found;
}

bool is_type_code(std::string_view line) {
  if (line.size() < 14) return false;
  const std::string code = lower_case(line.substr(0, 3));
  if (std::string_view("rcpiq").find(code[0]) == std::string_view::npos) return false;
  if (std::string_view("suhzr").find(code[1]) == std::string_view::npos) return false;
  return (code[2] == 'a' || code[2] == 'e') && trimmed(line.substr(3, 11)).empty();
}

Status check_type(const BoeingHeader& header, const std::string& place) {
  const std::string shown = "the matrix type is \"" + header.type + "\": ";
  const char field = header.type[0], symmetry = header.type[1];
  if (header.type[2] == 'e') {
    return Status::bad_input(
        "unassembled-matrix", shown + "element by element, not assembled", place,
        "assemble it first, or write the elements as triplet text, where they are summed");
  }
  if (field == 'p' || field == 'q') {
    return Status::bad_input("pattern-matrix", shown + "a pattern without values", place,
                             "export the matrix with its values (type rsa)");
  }
  if (field == 'c') {
    return Status::bad_input("complex-matrix", shown + "complex", place, "export the real stiffness");
  }
  if (symmetry == 'z') {
    return Status::bad_input("skew-symmetric", shown + "skew-symmetric; it has no inertia", place,
                             "export the symmetric stiffness");
  }
  if (symmetry == 'h') {
    return Status::bad_input("hermitian-matrix", shown + "hermitian", place,
                             "export a real symmetric matrix");
  }
  if (header.rows != header.columns) {
    return Status::bad_input("not-square",
                             "the matrix has " + std::to_string(header.rows) + " rows and " +
                                 std::to_string(header.columns) + " columns",
                             place, "export the square matrix");
  }
  if (header.rows == 0) {
    return Status::bad_input("empty-matrix", "the matrix has no rows", place, "export the matrix again");
  }
  if (header.rows > std::numeric_limits<Index>::max() - 1) {
    return Status::bad_input("too-many-rows", std::to_string(header.rows) + " rows are more than 2147483646",
                             place, "check the header");
  }
  return {};
}

class HeaderReader {
 public:
  HeaderReader(LineWalker& walker, const std::string& path) : walker_(walker), path_(path) {}

  Result<BoeingHeader> read() {
    std::string_view line;
    if (!walker_.next(line) || !walker_.next(line)) return boeing_truncated(walker_, path_);
    if (Status status = read_counts(line); !status.ok()) return status;
    if (!walker_.next(line)) return boeing_truncated(walker_, path_);
    if (Status status = read_type_and_sizes(line); !status.ok()) return status;
    if (!walker_.next(line)) return boeing_truncated(walker_, path_);
    if (Status status = read_format(line, 0, 16, false, header_.pointers); !status.ok()) return status;
    if (Status status = read_format(line, 16, 16, false, header_.indices); !status.ok()) return status;
    if (Status status = read_format(line, 32, 20, true, header_.values); !status.ok()) return status;
    if (header_.right_side_lines > 0 && !walker_.next(line)) return boeing_truncated(walker_, path_);
    return std::move(header_);
  }

 private:
  std::string place() const { return at_line(path_, walker_.number()); }

  Status fault(const std::string& message) const {
    return Status::bad_input(
        "bad-header", message, place(),
        "write the header as the Rutherford-Boeing format asks: title, line counts, type and "
        "sizes, Fortran formats");
  }

  Status read_counts(std::string_view line) {
    Offset lines[5] = {0, 0, 0, 0, 0};
    if (read_numbers(line, lines, 5) < 4) return fault("the second line does not hold its line counts");
    header_.pointer_lines = lines[1];
    header_.index_lines = lines[2];
    header_.value_lines = lines[3];
    header_.right_side_lines = lines[4];
    return {};
  }

  Status read_type_and_sizes(std::string_view line) {
    header_.type = lower_case(line.substr(0, 3));
    Offset sizes[3] = {0, 0, 0};
    if (read_numbers(line.substr(3), sizes, 3) < 3) return fault("the third line does not hold its sizes");
    header_.rows = sizes[0];
    header_.columns = sizes[1];
    header_.entries = sizes[2];
    if (Status status = check_type(header_, place()); !status.ok()) return status;
    if (header_.value_lines > 0 || header_.entries == 0) return {};
    return Status::bad_input("pattern-matrix", "the file holds no values", place(),
                             "export the matrix with its values");
  }

  Status read_format(std::string_view line, std::size_t begin, std::size_t size, bool real,
                     FortranFormat& format) {
    const std::string_view text = begin < line.size() ? line.substr(begin, size) : std::string_view();
    const auto parsed = parse_fortran_format(text);
    if (!parsed || (!real && parsed->real)) {
      return Status::bad_input(
          "bad-format", "the Fortran format \"" + excerpt(trimmed(text)) + "\" is not understood", place(),
          real ? "use one repeated field such as (3E26.18)" : "use one repeated field such as (8I10)");
    }
    format = *parsed;
    return {};
  }

  LineWalker& walker_;
  const std::string& path_;
  BoeingHeader header_;
};

}  // namespace

Status boeing_truncated(const LineWalker& walker, const std::string& path) {
  return Status::bad_input("truncated-file", "the file ends too early", at_line(path, walker.number()),
                           "write or transfer the file again");
}

Result<BoeingHeader> read_boeing_header(LineWalker& walker, const std::string& path) {
  return HeaderReader(walker, path).read();
}

bool looks_like_boeing(std::string_view text) {
  LineWalker walker(text);
  std::string_view line;
  for (int skipped = 0; skipped < 2; ++skipped) {
    if (!walker.next(line)) return false;
  }
  Offset counts[5];
  return read_numbers(line, counts, 5) >= 4 && walker.next(line) && is_type_code(line);
}

}  // namespace stanchion
