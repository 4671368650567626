// The `--dofs` file: equation,node,dof.
#include <algorithm>
#include <limits>
#include <new>
#include <numeric>
#include <tuple>

#include "io/csv.hpp"
#include "io/dof_map.hpp"
#include "io/place.hpp"
#include "io/small_file.hpp"

namespace stanchion {
namespace {

struct Line {
  Index equation;
  NodeNumber node;
  Offset line;
  std::string dof;
};

bool read_line(CsvReader& csv, const std::vector<std::string_view>& fields, Line& entry) {
  Offset equation = 0, node = kNoNode;
  if (!csv.whole(fields[0], "an equation number", equation)) return false;
  if (equation < 1 || equation >= std::numeric_limits<Index>::max()) {
    csv.fail("index-out-of-range", "there is no equation " + std::to_string(equation),
             "equations are numbered from 1");
    return false;
  }
  if (!fields[1].empty() && !csv.whole(fields[1], "a node number", node)) return false;
  if (!fields[1].empty() && node < 0) {
    csv.fail("index-out-of-range", "node " + std::to_string(node) + " is negative",
             "node numbers are 0 or more");
    return false;
  }
  if (fields[2].empty()) {
    csv.fail("missing-field", "the line has no dof", "each line must be: equation,node,dof");
    return false;
  }
  entry = {static_cast<Index>(equation - 1), node, csv.line(), std::string(fields[2])};
  return true;
}

/// Equations 1 to n, each once.
Status check_numbering(const std::vector<Line>& lines, const std::string& path) {
  for (std::size_t i = 0; i < lines.size(); ++i) {
    if (i > 0 && lines[i].equation == lines[i - 1].equation) {
      return Status::bad_input("duplicate-equation",
                               "equation " + std::to_string(lines[i].equation + 1) +
                                   " is listed twice, first in line " + std::to_string(lines[i - 1].line),
                               at_line(path, lines[i].line), "list each equation once");
    }
    if (lines[i].equation != static_cast<Index>(i)) {
      return Status::bad_input("missing-equation",
                               "equation " + std::to_string(i + 1) + " is not listed, equation " +
                                   std::to_string(lines[i].equation + 1) + " is",
                               at_line(path, lines[i].line), "list every equation from 1 to the last");
    }
  }
  return {};
}

void warn_of_duplicates(const std::vector<Line>& lines, const DofMap& map, const std::string& path,
                        Warnings& warnings) {
  std::vector<Index> order(lines.size());
  std::iota(order.begin(), order.end(), 0);
  std::sort(order.begin(), order.end(), [&](Index a, Index b) {
    return std::make_tuple(map.node(a), std::string_view(map.dof(a)), a) <
           std::make_tuple(map.node(b), std::string_view(map.dof(b)), b);
  });
  Offset repeated = 0;
  Index first = 0, second = 0;
  for (std::size_t i = 1; i < order.size(); ++i) {
    const Index a = order[i - 1], b = order[i];
    if (map.is_multiplier(b) || map.is_held(b) || map.node(a) != map.node(b) || map.dof(a) != map.dof(b))
      continue;
    if (repeated++ == 0) first = a, second = b;
  }
  if (repeated == 0) return;
  warnings.push_back({"duplicate-dof",
                      counted(repeated, "equation has", "equations have") +
                          " the node and dof of an earlier one, first " + map.describe(second) +
                          " at equations " + std::to_string(first + 1) + " and " +
                          std::to_string(second + 1) +
                          "; where a dof is named the first is meant. Give each dof of a node its own name",
                      at_line(path, lines[static_cast<std::size_t>(second)].line)});
}

Result<DofMap> parse(std::string_view text, const std::string& path, Warnings& warnings) {
  CsvReader csv(text, path, {{"equation", true}, {"node", true}, {"dof", true}});
  std::vector<std::string_view> fields;
  std::vector<Line> lines;
  while (csv.next(fields)) {
    Line entry;
    if (!read_line(csv, fields, entry)) break;
    lines.push_back(std::move(entry));
  }
  if (!csv.status().ok()) return csv.status();
  if (lines.empty()) {
    return Status::bad_input("empty-file", "the dof map lists no equations", path, "export the map again");
  }
  const auto before = [](const Line& a, const Line& b) { return a.equation < b.equation; };
  if (!std::is_sorted(lines.begin(), lines.end(), before))
    std::stable_sort(lines.begin(), lines.end(), before);
  if (Status status = check_numbering(lines, path); !status.ok()) return status;
  DofMap map;
  for (const Line& line : lines) map.append(line.node, line.dof);
  warn_of_duplicates(lines, map, path, warnings);
  return map;
}

}  // namespace

Result<DofMap> read_dof_map(const std::string& path, Warnings& warnings) {
  return with_small_file(path, [&](std::string_view text) { return parse(text, path, warnings); });
}

}  // namespace stanchion
