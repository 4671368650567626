// Writers of the small tables that accompany a matrix.
#include <new>

#include "io/csv.hpp"
#include "io/dof_map.hpp"
#include "io/equation_list.hpp"
#include "io/node_table.hpp"
#include "io/output_file.hpp"
#include "io/shortest.hpp"
#include "io/value_list.hpp"

namespace stanchion {

Status write_dof_map(const DofMap& map, const std::string& path) {
  OutputFile file(path, has_extension(path, ".gz"));
  file.write("equation,node,dof\n");
  for (Index equation = 0; equation < map.equations() && file.ok(); ++equation) {
    std::string line;
    append_integer(line, equation + 1);
    line += ',';
    if (map.node(equation) != kNoNode) append_integer(line, map.node(equation));
    line += ',' + csv_field(map.dof(equation)) + '\n';
    file.write(line);
  }
  return file.commit();
}

Status write_equation_list(const std::vector<Index>& equations, const std::string& path) {
  OutputFile file(path, has_extension(path, ".gz"));
  file.write("equation\n");
  for (const Index equation : equations) file.write(std::to_string(equation + 1) + "\n");
  return file.commit();
}

Status write_nodes(const NodeTable& nodes, const std::string& path) {
  OutputFile file(path, has_extension(path, ".gz"));
  file.write("node,x,y,z\n");
  for (Offset i = 0; i < nodes.size() && file.ok(); ++i) {
    std::string line;
    append_integer(line, nodes.node(i));
    for (const double coordinate : nodes.data(i)) {
      line += ',';
      append_number(line, coordinate);
    }
    line += '\n';
    file.write(line);
  }
  return file.commit();
}

Status write_values(const std::vector<ListedValue>& values, const std::string& path) {
  OutputFile file(path, has_extension(path, ".gz"));
  file.write("value,tolerance,label\n");
  for (const ListedValue& listed : values) {
    std::string line;
    append_number(line, listed.value);
    line += ',';
    if (listed.tolerance) append_number(line, *listed.tolerance);
    line += ',' + csv_field(listed.label) + '\n';
    file.write(line);
  }
  return file.commit();
}

}  // namespace stanchion
