#include "cli/witness_file.hpp"

#include "io/csv.hpp"
#include "io/dof_map.hpp"
#include "io/shortest.hpp"

namespace stanchion::cli {

Result<std::string> witness_table(const Witness& witness, const std::optional<std::string>& dofs) {
  std::optional<DofMap> map;
  if (dofs) {
    Warnings repeated;  // the run has given them already
    auto read = read_dof_map(*dofs, repeated);
    if (!read.ok()) return read.status();
    map = std::move(*read);
  }
  std::string text = "# x^T A x = " + number_text(witness.quadratic_form) + ", off by at most " +
                     number_text(witness.error_bound) + ": negative, so A is not positive definite\n";
  text += map ? "equation,node,dof,value\n" : "equation,value\n";
  for (std::size_t i = 0; i < witness.x.size(); ++i) {
    append_integer(text, i + 1);
    text += ',';
    if (map) {
      const auto equation = static_cast<Index>(i);
      if (map->node(equation) != kNoNode) append_integer(text, map->node(equation));
      text += ',' + csv_field(map->dof(equation)) + ',';
    }
    append_number(text, witness.x[i]);
    text += '\n';
  }
  return text;
}

}  // namespace stanchion::cli
