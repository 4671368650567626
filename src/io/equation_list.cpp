#include "io/equation_list.hpp"

#include <algorithm>

#include "io/csv.hpp"
#include "io/detect.hpp"
#include "io/place.hpp"
#include "io/small_file.hpp"

namespace stanchion {
namespace {

/// Number of fields in the first line that holds any.
int fields_of_first_line(std::string_view text) {
  LineWalker walker(text);
  std::string_view line;
  while (walker.next(line)) {
    const std::string_view content = trimmed(line);
    if (content.empty() || content.front() == '#' || content.front() == '%') continue;
    return count_fields(content, separator_of(content));
  }
  return 0;
}

void read_numbers(std::string_view text, const std::string& path, Index rows, std::vector<Index>& equations,
                  Status& status) {
  CsvReader csv(text, path, {{"equation", true}});
  std::vector<std::string_view> fields;
  while (csv.next(fields)) {
    Offset equation = 0;
    if (!csv.whole(fields[0], "an equation number", equation)) break;
    if (equation < 1 || equation > rows) {
      csv.fail(
          "index-out-of-range",
          "there is no equation " + std::to_string(equation) + "; the matrix has " + std::to_string(rows),
          "number equations from 1, in the numbering of the matrix file");
      break;
    }
    equations.push_back(static_cast<Index>(equation - 1));
  }
  status = csv.status();
}

void read_names(std::string_view text, const std::string& path, Index rows, const DofMap& dofs,
                std::vector<Index>& equations, Status& status) {
  CsvReader csv(text, path, {{"node", true}, {"dof", true}});
  std::vector<std::string_view> fields;
  while (csv.next(fields)) {
    Offset node = kNoNode;
    if (!fields[0].empty() && !csv.whole(fields[0], "a node number", node)) break;
    const auto equation = dofs.find(node, fields[1]);
    if (!equation || *equation >= rows) {
      csv.fail("unknown-dof",
               "the dof map has no dof \"" + excerpt(fields[1]) + "\" at node " + excerpt(fields[0]),
               "check the node number and the dof name against the --dofs file");
      break;
    }
    equations.push_back(*equation);
  }
  status = csv.status();
}

Result<std::vector<Index>> parse(std::string_view text, const std::string& path, Index rows,
                                 const DofMap* dofs, Warnings& warnings) {
  std::vector<Index> equations;
  Status status;
  const int fields = fields_of_first_line(text);
  if (fields <= 1) {
    read_numbers(text, path, rows, equations, status);
  } else if (dofs == nullptr) {
    return Status::bad_input("no-dof-map", "the list names nodes and dofs, and no dof map is given", path,
                             "give the map with --dofs, or list equation numbers");
  } else {
    read_names(text, path, rows, *dofs, equations, status);
  }
  if (!status.ok()) return status;
  if (equations.empty()) {
    return Status::bad_input("empty-file", "the list names no equation", path,
                             "list at least one equation, or leave the option out");
  }
  std::sort(equations.begin(), equations.end());
  const auto last = std::unique(equations.begin(), equations.end());
  if (last != equations.end()) {
    warnings.push_back({"repeated-equation",
                        counted(equations.end() - last, "line names", "lines name") +
                            " an equation that is listed already; each was used once. Check that no other "
                            "equation was meant",
                        path});
    equations.erase(last, equations.end());
  }
  return equations;
}

}  // namespace

Result<std::vector<Index>> read_equation_list(const std::string& path, Index rows, const DofMap* dofs,
                                              Warnings& warnings) {
  return with_small_file(path,
                         [&](std::string_view text) { return parse(text, path, rows, dofs, warnings); });
}

}  // namespace stanchion
