#include "io/strike.hpp"

#include <algorithm>
#include <new>

namespace stanchion {

Result<EquationMap> strike_map(Index rows, const std::vector<Index>& remove) try {
  EquationMap map;
  map.reduced.assign(static_cast<std::size_t>(rows), 0);
  for (const Index equation : remove) {
    if (equation < 0 || equation >= rows) {
      return Status::internal("an equation to strike is out of range",
                              "equation " + std::to_string(equation + 1));
    }
    map.reduced[static_cast<std::size_t>(equation)] = -1;
  }
  for (Index equation = 0; equation < rows; ++equation) {
    Index& number = map.reduced[static_cast<std::size_t>(equation)];
    if (number < 0) continue;
    number = map.rows();
    map.original.push_back(equation);
  }
  if (map.original.empty()) {
    return Status::bad_input("nothing-left", "every equation is fixed or held: no matrix is left", {},
                             "strike fewer equations (--fix, --strike-held)");
  }
  return map;
} catch (const std::bad_alloc&) {
  return Status::resource_limit("out-of-memory", "no memory left to strike equations", {},
                                "use a machine with more memory");
}

Result<SymmetricMatrix> strike(const SymmetricMatrix& matrix, const EquationMap& map, ThreadPool& pool) try {
  if (map.reduced.size() != static_cast<std::size_t>(matrix.rows)) {
    return Status::internal("the matrix and the map of its equations differ in size");
  }
  constexpr Index kColumnsPerPiece = 4096;
  const Index rows = map.rows();
  const Offset pieces = (Offset{rows} + kColumnsPerPiece - 1) / kColumnsPerPiece;
  SymmetricMatrix reduced{rows, Buffer<Offset>(Offset{rows} + 1, 0), {}, {}};
  const auto for_columns = [&](const auto& work) {
    pool.run(pieces, [&](Offset piece, int) {
      const auto begin = static_cast<Index>(piece * kColumnsPerPiece);
      const Index end = std::min<Index>(rows - begin, kColumnsPerPiece) + begin;
      for (Index column = begin; column < end; ++column) {
        const Index source = map.original[static_cast<std::size_t>(column)];
        work(column, matrix.column_start[source], matrix.column_start[Offset{source} + 1]);
      }
    });
  };
  const auto stays = [&](Offset k) { return map.reduced[static_cast<std::size_t>(matrix.row[k])]; };
  for_columns([&](Index column, Offset begin, Offset end) {
    Offset kept = 0;
    for (Offset k = begin; k < end; ++k) kept += stays(k) >= 0 ? 1 : 0;
    reduced.column_start[Offset{column} + 1] = kept;
  });
  for (Offset column = 0; column < rows; ++column) {
    reduced.column_start[column + 1] += reduced.column_start[column];
  }
  reduced.row = Buffer<Index>(reduced.column_start[rows]);
  reduced.value = Buffer<double>(reduced.column_start[rows]);
  for_columns([&](Index column, Offset begin, Offset end) {
    Offset at = reduced.column_start[column];
    for (Offset k = begin; k < end; ++k) {
      if (stays(k) < 0) continue;
      reduced.row[at] = stays(k);
      reduced.value[at++] = matrix.value[k];
    }
  });
  return reduced;
} catch (const std::bad_alloc&) {
  return Status::resource_limit("out-of-memory", "no memory left to strike equations", {},
                                "use a machine with more memory");
}

std::vector<Index> renumber(const std::vector<Index>& equations, const EquationMap& map) {
  std::vector<Index> kept;
  for (const Index equation : equations) {
    const Index number = map.reduced[static_cast<std::size_t>(equation)];
    if (number >= 0) kept.push_back(number);
  }
  return kept;
}

std::vector<Index> identity_rows(const SymmetricMatrix& matrix) {
  std::vector<bool> coupled(static_cast<std::size_t>(matrix.rows), false);
  std::vector<bool> one(static_cast<std::size_t>(matrix.rows), false);
  for (Index column = 0; column < matrix.rows; ++column) {
    for (Offset k = matrix.column_start[column]; k < matrix.column_start[Offset{column} + 1]; ++k) {
      const Index row = matrix.row[k];
      if (row == column) {
        one[static_cast<std::size_t>(column)] = matrix.value[k] == 1.0;
      } else if (matrix.value[k] != 0) {
        coupled[static_cast<std::size_t>(row)] = coupled[static_cast<std::size_t>(column)] = true;
      }
    }
  }
  std::vector<Index> found;
  for (Index row = 0; row < matrix.rows; ++row) {
    if (one[static_cast<std::size_t>(row)] && !coupled[static_cast<std::size_t>(row)]) found.push_back(row);
  }
  return found;
}

}  // namespace stanchion
