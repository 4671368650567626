#include "engine/mass_facts.hpp"

namespace stanchion {

MassFacts inspect_mass(const SymmetricMatrix& mass) {
  MassFacts facts;
  std::vector<char> present(static_cast<std::size_t>(mass.rows), 0);
  for (Index j = 0; j < mass.rows; ++j) {
    for (Offset k = mass.column_start[j]; k < mass.column_start[Offset{j} + 1]; ++k) {
      if (mass.value[k] == 0) continue;
      present[static_cast<std::size_t>(j)] = present[static_cast<std::size_t>(mass.row[k])] = 1;
      if (mass.row[k] != j) {
        facts.diagonal = false;
      } else if (mass.value[k] < 0) {
        facts.non_negative = false;
      }
    }
  }
  for (Index i = 0; i < mass.rows; ++i) {
    if (!present[static_cast<std::size_t>(i)]) facts.massless.push_back(i);
  }
  return facts;
}

}  // namespace stanchion
