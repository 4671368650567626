#include "io/detect.hpp"

#include <algorithm>

#include "io/matrix_formats.hpp"
#include "io/text_source.hpp"

namespace stanchion {
namespace {

Detected unknown(std::string code, std::string message, std::string remedy, Offset line = 0) {
  Detected found;
  found.code = std::move(code);
  found.message = std::move(message);
  found.remedy = std::move(remedy);
  found.line = line;
  return found;
}

bool is_binary(std::string_view text) {
  return text.substr(0, 4096).find('\0') != std::string_view::npos;
}

/// Characters of a line in which a misspelt header is looked for.
constexpr std::size_t kHeaderSearched = 80;

Detected by_fields(std::string_view text) {
  LineWalker walker(text);
  std::string_view line;
  while (walker.next(line)) {
    const std::string_view content = trimmed(line);
    // Read as triplets, the size line of a Matrix Market file would be an entry.
    if (lower_case(content.substr(0, kHeaderSearched)).find("matrixmarket") != std::string::npos) {
      return unknown("bad-header",
                     "the line \"" + excerpt(content) +
                         "\" looks like the header of a Matrix Market file, which must "
                         "be the first line and begin with %%MatrixMarket",
                     "start the file with: %%MatrixMarket matrix coordinate real symmetric", walker.number());
    }
    if (content.empty() || content.front() == '%' || content.front() == '#') continue;
    Detected found;
    found.separator = separator_of(content);
    switch (count_fields(content, found.separator)) {
      case 1:
        found.format = FileFormat::kOneColumn;
        return found;
      case 3:
        found.format = FileFormat::kTriplets;
        return found;
      case 5:
        found.format = FileFormat::kNodeKeyed;
        return found;
      default:
        return unknown(
            "unknown-format",
            "the file is in no format that is known here; its first line is \"" + excerpt(content) + "\"",
            "give Matrix Market, Rutherford-Boeing, SciPy .npz, HDF5, or text lines of row, column, "
            "value or of node, dof, node, dof, value",
            walker.number());
    }
  }
  return unknown("empty-file", "the file holds no data", "export the matrix again");
}

}  // namespace

char separator_of(std::string_view line) {
  for (const char separator : {';', '\t', ','}) {
    if (line.find(separator) != std::string_view::npos) return separator == '\t' ? char{0} : separator;
  }
  return 0;
}

int count_fields(std::string_view line, char separator) {
  if (separator != 0)
    return static_cast<int>(std::min<std::ptrdiff_t>(std::count(line.begin(), line.end(), separator), 1000)) +
           1;
  int fields = 0;
  bool inside = false;
  for (const char c : line) {
    const bool blank = c == ' ' || c == '\t' || c == '\r';
    if (!blank && !inside) ++fields;
    inside = !blank;
  }
  return fields;
}

bool is_hdf5(std::string_view bytes) {
  constexpr std::string_view kSignature("\x89HDF\r\n\x1a\n", 8);
  // A user block of 512, 1024, ... bytes may come first.
  for (std::size_t at = 0; at + 8 <= bytes.size(); at = at == 0 ? 512 : at * 2) {
    if (bytes.substr(at, 8) == kSignature) return true;
    if (at > (std::size_t{1} << 40)) break;
  }
  return false;
}

Detected detect_format(std::string_view text) {
  Detected found;
  if (text.empty()) return unknown("empty-file", "the file is empty", "export the matrix again");
  if (text.substr(0, 2) == "PK") {
    found.format = FileFormat::kZip;
  } else if (is_hdf5(text)) {
    found.format = FileFormat::kHdf5;
  } else if (lower_case(text.substr(0, 14)) == "%%matrixmarket") {
    found.format = FileFormat::kMatrixMarket;
  } else if (text.substr(0, 6) == "\x93NUMPY") {
    return unknown("dense-array", "this is a NumPy array, not a sparse matrix",
                   "save it with scipy.sparse.save_npz");
  } else if (is_binary(text)) {
    return unknown("unknown-format", "the file is binary and in no format that is known here",
                   "give Matrix Market, Rutherford-Boeing, SciPy .npz, HDF5, or text");
  } else if (looks_like_boeing(text)) {
    found.format = FileFormat::kBoeing;
  } else {
    return by_fields(text);
  }
  return found;
}

}  // namespace stanchion
