#include "io/node_table.hpp"

#include <cmath>

#include "io/csv.hpp"
#include "io/place.hpp"
#include "io/shortest.hpp"
#include "io/small_file.hpp"

namespace stanchion {
namespace {

using Numbers9 = std::array<double, 9>;

/// Accepts cosines written with five decimals or more.
constexpr double kRightAngle = 1e-5;

bool check_axes(CsvReader& csv, const Numbers9& axes) {
  const auto dot = [&axes](std::size_t a, std::size_t b) {
    return axes[3 * a] * axes[3 * b] + axes[3 * a + 1] * axes[3 * b + 1] + axes[3 * a + 2] * axes[3 * b + 2];
  };
  static const char* const kNames[3] = {"x", "y", "z"};
  for (std::size_t a = 0; a < 3; ++a) {
    for (std::size_t b = a; b < 3; ++b) {
      const double wanted = a == b ? 1 : 0;
      if (std::fabs(dot(a, b) - wanted) <= kRightAngle) continue;
      const std::string what = a == b ? std::string("the ") + kNames[a] + " axis has length " +
                                            number_text(std::sqrt(dot(a, a))) + ", not 1"
                                      : std::string("the ") + kNames[a] + " and " + kNames[b] +
                                            " axes are not at right angles (cosine " +
                                            number_text(dot(a, b)) + ")";
      csv.fail("not-orthonormal", what,
               "write the rows of a rotation matrix: x, y and z axis of the node, with six decimals or more");
      return false;
    }
  }
  const double turn = axes[0] * (axes[4] * axes[8] - axes[5] * axes[7]) -
                      axes[1] * (axes[3] * axes[8] - axes[5] * axes[6]) +
                      axes[2] * (axes[3] * axes[7] - axes[4] * axes[6]);
  if (turn > 0) return true;
  csv.fail("left-handed-axes", "the axes are left-handed", "turn one of the three axes around");
  return false;
}

/// Reads `node` and the numbers that follow it; `check` judges each line.
template <class Table, class Check>
Result<Table> parse(std::string_view text, const std::string& path, const std::vector<CsvColumn>& columns,
                    const Check& check) {
  CsvReader csv(text, path, columns);
  Table table;
  std::vector<std::string_view> fields;
  while (csv.next(fields)) {
    Offset node = 0;
    if (!csv.whole(fields[0], "a node number", node)) break;
    if (node < 0) {
      csv.fail("index-out-of-range", "node " + std::to_string(node) + " is negative",
               "node numbers are 0 or more");
      break;
    }
    std::remove_cvref_t<decltype(table.data(0))> numbers{};
    bool read = true;
    for (std::size_t i = 0; i < numbers.size() && read; ++i) {
      const bool absent = fields[i + 1].empty() && !columns[i + 1].required;
      read = absent || csv.real(fields[i + 1], columns[i + 1].name, numbers[i]);
    }
    if (!read || !check(csv, numbers)) break;
    if (!table.append(node, numbers)) {
      csv.fail("duplicate-node", "node " + std::to_string(node) + " is listed twice", "list each node once");
      break;
    }
  }
  if (!csv.status().ok()) return csv.status();
  if (table.size() == 0) {
    return Status::bad_input("empty-file", "the file lists no nodes", path, "export the table again");
  }
  return table;
}

}  // namespace

Result<NodeTable> read_nodes(const std::string& path) {
  const std::vector<CsvColumn> columns{{"node", true}, {"x", true}, {"y", true}, {"z", false}};
  return with_small_file(path, [&](std::string_view text) {
    return parse<NodeTable>(text, path, columns,
                            [](CsvReader&, const std::array<double, 3>&) { return true; });
  });
}

Result<AxesTable> read_axes(const std::string& path) {
  const std::vector<CsvColumn> columns{{"node", true}, {"xx", true}, {"xy", true}, {"xz", true},
                                       {"yx", true},   {"yy", true}, {"yz", true}, {"zx", true},
                                       {"zy", true},   {"zz", true}};
  return with_small_file(
      path, [&](std::string_view text) { return parse<AxesTable>(text, path, columns, check_axes); });
}

}  // namespace stanchion
