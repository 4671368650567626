#include "io/preflight.hpp"

#include <algorithm>
#include <cmath>
#include <new>
#include <unordered_map>

#include "io/connected_parts.hpp"
#include "io/place.hpp"
#include "io/shortest.hpp"
#include "model/numbers.hpp"

namespace stanchion {
namespace {

constexpr std::size_t kPlacesShown = 5;
/// Above this ratio double precision cannot hold the soft and the stiff end of one sum together.
constexpr double kWideSpread = 1e12;
/// A diagonal entry so many times those of its neighbours holds a dof by force.
constexpr double kPenalty = 1e9;
/// Medians of the diagonals of two parts this many decades apart speak of different units.
constexpr double kUnitDecades = 5;
constexpr Index kLeastPart = 12;  ///< rows of a part that is compared with others

/// Counts rows of one kind and keeps the first few.
struct Finding {
  Offset count = 0;
  std::vector<Index> first;

  void add(Index row) {
    if (++count <= static_cast<Offset>(kPlacesShown)) first.push_back(row);
  }
};

class Inspector {
 public:
  explicit Inspector(const PreflightSubject& subject) : subject_(subject), matrix_(subject.matrix) {}

  Preflight run() {
    look_at_rows();
    classify();
    report_rows();
    report_penalties();
    report_spread();
    report_parts();
    report_sign();
    return std::move(result_);
  }

 private:
  void look_at_rows() {
    const auto rows = static_cast<std::size_t>(matrix_.rows);
    diagonal_.assign(rows, 0.0);
    coupled_.assign(rows, 0);
    for (Index column = 0; column < matrix_.rows; ++column) {
      for (Offset k = matrix_.column_start[column]; k < matrix_.column_start[Offset{column} + 1]; ++k) {
        const Index row = matrix_.row[k];
        if (row == column) {
          diagonal_[static_cast<std::size_t>(column)] = matrix_.value[k];
        } else if (matrix_.value[k] != 0) {
          coupled_[static_cast<std::size_t>(row)] = coupled_[static_cast<std::size_t>(column)] = 1;
        }
      }
    }
  }

  void classify() {
    std::vector<char> multiplier(static_cast<std::size_t>(matrix_.rows), 0);
    if (subject_.multipliers != nullptr) {
      for (const Index row : *subject_.multipliers) multiplier[static_cast<std::size_t>(row)] = 1;
    }
    if (subject_.dofs != nullptr && subject_.dofs->equations() == matrix_.rows) {
      for (const Index row : subject_.dofs->multipliers()) multiplier[static_cast<std::size_t>(row)] = 1;
    }
    PreflightFacts& facts = result_.facts;
    alone_.assign(static_cast<std::size_t>(matrix_.rows), 0);
    for (Index row = 0; row < matrix_.rows; ++row) {
      const auto at = static_cast<std::size_t>(row);
      const double d = diagonal_[at];
      if (coupled_[at] == 0 && d == 0) {
        empty_.add(row);
        alone_[at] = 1;
      } else if (coupled_[at] == 0 && d == 1) {
        identity_.add(row);
        alone_[at] = 1;
      } else if (coupled_[at] == 0 && d > 0) {
        ++stamped_[d];
      } else if (d == 0 && multiplier[at] == 0) {
        zero_.add(row);
      } else if (d < 0 && multiplier[at] == 0) {
        negative_.add(row);
      }
      if (d <= 0 || alone_[at] != 0) continue;
      if (facts.least_diagonal == 0 || d < facts.least_diagonal) facts.least_diagonal = d, least_row_ = row;
      if (d > facts.greatest_diagonal) facts.greatest_diagonal = d, greatest_row_ = row;
    }
    facts.empty_rows = empty_.count;
    facts.identity_rows = identity_.count;
    facts.zero_diagonals = zero_.count;
    facts.negative_diagonals = negative_.count;
    std::vector<double> sizes;
    sizes.reserve(diagonal_.size());
    for (const double d : diagonal_) {
      if (d != 0) sizes.push_back(std::fabs(d));
      facts.positive_diagonals += d > 0 ? 1 : 0;
    }
    if (sizes.empty()) return;
    const auto middle = sizes.begin() + static_cast<std::ptrdiff_t>(sizes.size() / 2);
    std::nth_element(sizes.begin(), middle, sizes.end());
    facts.median_diagonal = *middle;
  }

  Index number(Index row) const {
    return subject_.original != nullptr ? (*subject_.original)[static_cast<std::size_t>(row)] : row;
  }

  std::string name(Index row) const {
    std::string text = "row " + std::to_string(number(row) + 1);
    if (subject_.dofs != nullptr && row < subject_.dofs->equations()) {
      text += " (" + subject_.dofs->describe(row) + ")";
    }
    return text;
  }

  std::string names(const Finding& finding) const {
    std::string text;
    for (const Index row : finding.first) text += (text.empty() ? "" : "; ") + name(row);
    const Offset rest = finding.count - static_cast<Offset>(finding.first.size());
    if (rest > 0) text += "; and " + grouped(rest) + " more";
    return text;
  }

  void report(const char* code, const Finding& finding, const char* one, const char* many,
              const std::string& advice) {
    if (finding.count == 0) return;
    result_.warnings.push_back({code,
                                counted(finding.count, one, many) + ": " + names(finding) + ". " + advice,
                                at_row(subject_.path, number(finding.first.front()))});
  }

  void report_rows() {
    if (subject_.role == MatrixRole::kSecond) return;
    const bool mass = subject_.role == MatrixRole::kMass;
    if (!mass) {
      report("empty-rows", empty_, "row is empty", "rows are empty",
             "Each is a dof without any stiffness, and a zero direction: connect it, or hold it (--fix)");
      report("zero-diagonal", zero_, "row has a zero diagonal entry", "rows have a zero diagonal entry",
             "The matrix cannot be definite there: name constraint equations with --multipliers, or give the "
             "dof "
             "its stiffness");
      report("identity-rows", identity_, "row holds nothing but a diagonal 1",
             "rows hold nothing but a diagonal 1",
             "Held dofs are often written so; each counts as one positive eigenvalue. Leave them out of the "
             "analysis with --strike-held");
    }
    report("negative-diagonal", negative_, "row has a negative diagonal entry",
           "rows have a negative diagonal entry",
           mass ? "A mass matrix cannot have one: check signs and units"
                : "The matrix is not positive definite: check the sign of the element or spring there");
  }

  /// Held dofs written as the same number on a diagonal of its own, or as one that drowns its neighbours.
  void report_penalties() {
    if (subject_.role != MatrixRole::kStiffness) return;
    Finding same;
    for (Index row = 0; row < matrix_.rows; ++row) {
      const auto at = static_cast<std::size_t>(row);
      if (coupled_[at] != 0 || diagonal_[at] <= 0 || diagonal_[at] == 1) continue;
      if (stamped_[diagonal_[at]] > 1) same.add(row);
    }
    report("stamped-rows", same, "row holds nothing but a diagonal entry",
           "rows hold nothing but a diagonal entry that "
           "others repeat",
           "Held dofs are sometimes written so; each counts as one positive eigenvalue. Strike them out "
           "with --fix");
    std::vector<double> beside(diagonal_.size(), 0.0);
    for (Index column = 0; column < matrix_.rows; ++column) {
      for (Offset k = matrix_.column_start[column]; k < matrix_.column_start[Offset{column} + 1]; ++k) {
        const Index row = matrix_.row[k];
        if (row == column || matrix_.value[k] == 0) continue;
        double &own = beside[static_cast<std::size_t>(column)],
               &other = beside[static_cast<std::size_t>(row)];
        own = std::max(own, diagonal_[static_cast<std::size_t>(row)]);
        other = std::max(other, diagonal_[static_cast<std::size_t>(column)]);
      }
    }
    Finding penalties;
    for (Index row = 0; row < matrix_.rows; ++row) {
      const auto at = static_cast<std::size_t>(row);
      if (beside[at] > 0 && diagonal_[at] > kPenalty * beside[at]) penalties.add(row);
    }
    report("penalty-rows", penalties,
           "row has a diagonal entry a thousand million times those it is coupled with",
           "rows have diagonal entries a thousand million times those they are coupled with",
           "A dof held or tied by a penalty? It costs digits: strike it out (--fix) or use a constraint "
           "equation");
  }

  /// Most of a stiffness matrix's diagonal is positive, whatever the structure.
  void report_sign() {
    const PreflightFacts& facts = result_.facts;
    if (subject_.role != MatrixRole::kStiffness || facts.negative_diagonals <= facts.positive_diagonals)
      return;
    result_.warnings.push_back(
        {"sign-of-stiffness",
         "more diagonal entries are negative (" + grouped(facts.negative_diagonals) + ") than positive (" +
             grouped(facts.positive_diagonals) +
             "). Written with the other sign, or a geometric stiffness in place of K? Check which "
             "file was given, and its sign",
         subject_.path});
  }

  void report_spread() {
    const PreflightFacts& facts = result_.facts;
    if (subject_.role != MatrixRole::kStiffness || facts.least_diagonal <= 0) return;
    const double spread = facts.greatest_diagonal / facts.least_diagonal;
    if (spread < kWideSpread) return;
    result_.warnings.push_back(
        {"diagonal-spread",
         "the positive diagonal entries spread over a factor " +
             (std::isfinite(spread) ? number_text(spread) : std::string("of more than 1e308")) + ", from " +
             number_text(facts.least_diagonal) + " at " + name(least_row_) + " to " +
             number_text(facts.greatest_diagonal) + " at " + name(greatest_row_) +
             ". Look for penalty stiffnesses and mixed units; use constraint equations in place of penalties",
         at_row(subject_.path, number(greatest_row_))});
  }

  void report_parts() {
    if (subject_.role != MatrixRole::kStiffness) return;
    const ConnectedParts parts = find_parts(matrix_, alone_, subject_.dofs);
    result_.facts.parts = parts.count;
    if (parts.count <= 1) return;
    report_units(parts);
    std::string text;
    for (std::size_t i = 0; i < parts.first_rows.size(); ++i) {
      text += (i == 0 ? "" : "; ") + grouped(parts.sizes[i]) +
              (parts.sizes[i] == 1 ? " row from " : " rows from ") + name(parts.first_rows[i]);
    }
    const Index rest = parts.count - static_cast<Index>(parts.first_rows.size());
    if (rest > 0) text += "; and " + grouped(rest) + " more";
    const bool by_node = subject_.dofs != nullptr && subject_.dofs->equations() == matrix_.rows;
    result_.warnings.push_back(
        {"disconnected-parts",
         "the matrix falls into " + grouped(parts.count) + " parts that share no entry: " + text + ". " +
             (by_node ? "Each must be supported by itself: tie the parts together or hold each of them"
                      : "Each must be supported by itself; dofs of one node that do not act on each other "
                        "(in-plane "
                        "and bending) are such parts too, which --dofs would tell apart"),
         at_row(subject_.path, number(parts.first_rows[1]))});
  }

  /// Parts whose stiffnesses lie many decades apart were likely written in different units.
  void report_units(const ConnectedParts& parts) {
    std::vector<std::vector<double>> of_part(static_cast<std::size_t>(parts.count));
    for (Index row = 0; row < matrix_.rows; ++row) {
      const auto at = static_cast<std::size_t>(row);
      if (parts.part_of_row[at] < 0 || diagonal_[at] <= 0) continue;
      const bool named = subject_.dofs != nullptr && subject_.dofs->equations() == matrix_.rows;
      if (named && subject_.dofs->dof(row)[0] != 'u') continue;  // moments have another unit by right
      of_part[static_cast<std::size_t>(parts.part_of_row[at])].push_back(diagonal_[at]);
    }
    double least = 0, most = 0;
    std::size_t soft = 0, stiff = 0;
    for (std::size_t part = 0; part < of_part.size(); ++part) {
      auto& values = of_part[part];
      if (values.size() < static_cast<std::size_t>(kLeastPart)) continue;
      const auto middle = values.begin() + static_cast<std::ptrdiff_t>(values.size() / 2);
      std::nth_element(values.begin(), middle, values.end());
      if (least == 0 || *middle < least) least = *middle, soft = part;
      if (*middle > most) most = *middle, stiff = part;
    }
    if (least <= 0 || most < std::pow(10.0, kUnitDecades) * least) return;
    const auto first_of = [&](std::size_t part) {
      const auto at = std::find(parts.part_of_row.begin(), parts.part_of_row.end(), static_cast<Index>(part));
      return static_cast<Index>(at - parts.part_of_row.begin());
    };
    result_.warnings.push_back(
        {"units-by-part",
         "the part from " + name(first_of(soft)) + " has diagonal entries about " + number_text(least) +
             ", the part from " + name(first_of(stiff)) + " about " + number_text(most) +
             ". Parts written in different units? Check them before they are tied together",
         at_row(subject_.path, number(first_of(soft)))});
  }

  const PreflightSubject& subject_;
  const SymmetricMatrix& matrix_;
  Preflight result_;
  std::vector<double> diagonal_;
  std::vector<char> coupled_, alone_;
  Finding empty_, identity_, zero_, negative_;
  std::unordered_map<double, Index> stamped_;  ///< value of an uncoupled diagonal entry -> rows that have it
  Index least_row_ = 0, greatest_row_ = 0;
};

}  // namespace

Result<Preflight> preflight(const PreflightSubject& subject) try {
  return Inspector(subject).run();
} catch (const std::bad_alloc&) {
  return Status::resource_limit("out-of-memory", "no memory left to inspect the matrix", subject.path,
                                "use a machine with more memory");
}

Status check_dof_map_size(const DofMap& dofs, const std::string& dofs_path, const SymmetricMatrix& matrix,
                          const std::string& matrix_path) {
  if (dofs.equations() == matrix.rows) return {};
  const bool shorter = dofs.equations() < matrix.rows;
  return Status::bad_input(
      "dof-map-size",
      "the dof map lists " + grouped(dofs.equations()) + " equations, " + matrix_path + " has " +
          grouped(matrix.rows) + ": the map is too " + (shorter ? "short" : "long"),
      dofs_path,
      shorter ? "list every equation of the matrix, held ones and multipliers too"
              : "export map and matrix from the same model; for triplet text with empty last "
                "rows give --rows");
}

}  // namespace stanchion
