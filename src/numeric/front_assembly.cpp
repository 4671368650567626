// Gathers a front: entries of the matrix, then the children's contribution blocks in their fixed order.
#include <algorithm>
#include <cmath>

#include "dense/trailing_update.hpp"
#include "numeric/front_worker.hpp"
#include "sparse/product.hpp"

namespace stanchion {
namespace {

constexpr double kUnit = Rounding<double>::kUnit;  // entries are formed in double
constexpr Index kScatterColumns = 64;              ///< columns of a contribution block added as one piece

/// Adds columns [begin, end) of the child to the front through `map` (child row -> front row). `run_end[i]`:
/// end of the rows from i on that stay next to each other.
template <class Scalar>
void scatter_columns(const Contribution<Scalar>& child, const Index* map, const Index* run_end,
                     const BlockLowerOf<Scalar>& front, Index begin, Index end) {
  const BlockLowerOf<Scalar> from{contribution_layout(child.order), child.values};
  for (Index j = begin; j < end; ++j) {
    const Scalar* source = from.column(j, j) - j;
    const Index to = map[j];
    Scalar* column = front.column(to, to) - to;
    for (Index i = j; i < child.order;) {
      const Index stop = run_end[i];
      if (map[i] >= to) {
        Scalar* target = column + (map[i] - i);
        for (; i < stop; ++i) target[i] += source[i];
      } else {  // a delayed column goes behind the pivots of the front
        for (; i < stop; ++i) front.at(to, map[i]) += source[i];
      }
    }
  }
}

/// As for_column_entries(), with what each entry may be off by.
template <class Use>
void for_entries_with_errors(const ShiftedMatrix& matrix, Index column, const Use& use) {
  const MatrixFamily& family = *matrix.family;
  const bool exact = matrix.exact();
  for (Offset k = family.column_start[column]; k < family.column_start[Offset{column} + 1]; ++k) {
    const Index row = family.row[k];
    double value = matrix.entry(k, row, column);
    double error = exact ? ShiftedMatrix::kExactError : matrix.entry_error(k, row, column);
    if (row == column && matrix.offset != 0) {
      value -= matrix.offset;
      error += kUnit * std::fabs(value);
    }
    use(row, value, error);
  }
}

}  // namespace

template <class Scalar>
void FrontWorker<Scalar>::add_matrix_entries(const FrontRows& rows, const BlockLowerOf<Scalar>& matrix) {
  const ShiftedMatrix& formed = run_->matrix;
  const Index first = run_->analysis.tree.first_column[rows.front];
  const Index* local = local_of_.data();
  Scalar *addend_sums = addend_sums_.data(), *row_error = row_error_.data();
  for (Index j = 0; j < rows.own; ++j) {
    const Index position = first + j;
    // The pivots of a front and its rows below ascend, so these entries lie in the lower triangle.
    Scalar* column = matrix.column(j, j) - j;
    Scalar sizes = 0, errors = 0;  // of the column
    const auto add = [&](Index i, double value) {
      column[i] = static_cast<Scalar>(value);
      const auto size = static_cast<Scalar>(std::fabs(value));
      sizes += size;
      if (i != j) addend_sums[i] += size;
    };
    if (sizeof(Scalar) == sizeof(double) && formed.exact()) {
      // What underflows is in kExactError a row (count_pivots).
      for_column_entries(formed, position, [&](Index row, double value) { add(local[row], value); });
      if (formed.offset != 0) errors = static_cast<Scalar>(kUnit) * std::fabs(column[j]);
    } else {
      for_entries_with_errors(formed, position, [&](Index row, double value, double error) {
        const Index i = local[row];
        add(i, value);
        if constexpr (!std::is_same_v<Scalar, double>) {
          error += Rounding<Scalar>::kUnit * std::fabs(value) + Rounding<Scalar>::kLeast;
        }
        const auto off = static_cast<Scalar>(error);
        errors += off;
        if (i != j) row_error[i] += off;
      });
    }
    addend_sums[j] += sizes;
    row_error[j] += errors;
  }
}

template <class Scalar>
void FrontWorker<Scalar>::add_contribution(const Contribution<Scalar>& child,
                                           const BlockLowerOf<Scalar>& matrix, ThreadPool* team) {
  map_child_rows(run_->analysis.tree, static_cast<Index>(&child - run_->waiting.data()), child.delayed,
                 local_of_, map_);
  for (Index i = 0; i < child.order; ++i) {
    const auto to = static_cast<std::size_t>(map_[static_cast<std::size_t>(i)]);
    row_error_[to] += child.row_error[i];
    addend_sums_[to] += child.row_sums[i];
    ++addends_[to];
    image_[to] += child.image[i];
    image_error_[to] +=
        child.image_error[i] + static_cast<Scalar>(Rounding<Scalar>::kUnit) * std::fabs(image_[to]);
  }
  run_end_.resize(map_.size());
  for (Index i = child.order; i-- > 0;) {
    const auto at = static_cast<std::size_t>(i);
    const bool joined = i + 1 < child.order && map_[at + 1] == map_[at] + 1;
    run_end_[at] = joined ? run_end_[at + 1] : i + 1;
  }
  const Index pieces = (child.order + kScatterColumns - 1) / kScatterColumns;
  for_each_piece(team, pieces, [&](Offset piece) {
    const Index begin = static_cast<Index>(piece) * kScatterColumns;
    scatter_columns(child, map_.data(), run_end_.data(), matrix, begin,
                    std::min(begin + kScatterColumns, child.order));
  });
}

template <class Scalar>
Status FrontWorker<Scalar>::assemble(const FrontRows& rows, const BlockLowerOf<Scalar>& matrix,
                                     ThreadPool* team) {
  const auto order = static_cast<std::size_t>(rows.order);
  row_error_.assign(order, 0);
  growth_.assign(order, 0);
  addend_sums_.assign(order, 0);
  addends_.assign(order, 0);
  image_.assign(order, 0);
  image_error_.assign(order, 0);
  sign_.resize(order);
  for (std::size_t i = 0; i < order; ++i) sign_[i] = run_->probe.sign[label_[i]];
  const BlockLayout& layout = matrix.layout;
  for_each_piece(team, layout.blocks(), [&](Offset block) {
    const auto b = static_cast<Index>(block);
    Scalar* begin = matrix.data + layout.block_offset(b);
    const Offset columns = layout.block_end(b) - layout.block_begin(b);
    std::fill(begin, begin + columns * layout.leading_dimension(b), Scalar{0});
  });
  add_matrix_entries(rows, matrix);
  for (const Index child : run_->analysis.tree.children(rows.front)) {
    add_contribution(run_->waiting[static_cast<std::size_t>(child)], matrix, team);
  }
  // Every addition to a row rounds a partial sum that is at most the sum of the addends' sizes.
  for (std::size_t i = 0; i < order; ++i)
    row_error_[i] +=
        static_cast<Scalar>(Rounding<Scalar>::kUnit * static_cast<double>(addends_[i])) * addend_sums_[i];
  return {};
}

template Status FrontWorker<double>::assemble(const FrontRows&, const BlockLowerOf<double>&, ThreadPool*);
template Status FrontWorker<float>::assemble(const FrontRows&, const BlockLowerOf<float>&, ThreadPool*);

}  // namespace stanchion
