// Gathers a front: entries of the matrix, then the children's contribution blocks in their fixed order.
#include "extended/front_assembly.hpp"

#include <algorithm>
#include <cmath>

#include "dense/trailing_update.hpp"
#include "numeric/fault_probe.hpp"

namespace stanchion {
namespace {

constexpr double kTiny = 0x1p-1074;
constexpr Index kScatterColumns = 64;  ///< columns of a contribution block added as one piece

/// Entry k of the family as a sum of exact products, scaled; see error_bound.md, section 4.
FormedEntry<DoubleDouble> form(const ShiftedMatrix& matrix, Offset k, Index row, Index column, DoubleDouble) {
  const auto& values = matrix.family->values;
  const auto& coefficients = matrix.coefficients;
  DoubleDouble sum = two_product(coefficients[0], values[0][k]);
  double magnitude = std::fabs(sum.hi);
  for (std::size_t t = 1; t < coefficients.size(); ++t) {
    const DoubleDouble term = two_product(coefficients[t], values[t][k]);
    magnitude += std::fabs(term.hi);
    sum = sum + term;
  }
  const double s_row = (*matrix.scale)[row], s_column = (*matrix.scale)[column];
  const auto terms = static_cast<double>(coefficients.size());
  const double rounding = (terms - 1) * ScalarTraits<DoubleDouble>::unit * magnitude * s_row * s_column;
  const double underflow = kTiny * (2 * terms * s_row * s_column + 2 * s_column + 2);
  return {scaled(scaled(sum, s_row), s_column), rounding + underflow};
}

FormedEntry<double> form(const ShiftedMatrix& matrix, Offset k, Index row, Index column, double) {
  return {matrix.entry(k, row, column), matrix.entry_error(k, row, column)};
}

/// Adds columns [begin, end) of the child to the front through `map` (child row -> front row).
template <class Scalar>
void scatter_columns(const WaitingBlock& child, const Index* map, const ScalarBlock<Scalar>& front,
                     Index begin, Index end) {
  const ScalarBlock<Scalar> from{contribution_layout(child.order), child.values};
  for (Index j = begin; j < end; ++j) {
    const Strip<Scalar> source = from.column(j, j);
    const Index to = map[j];
    if (child.delayed.empty()) {
      const Strip<Scalar> target = front.column(to, to);
      for (Index i = j; i < child.order; ++i) {
        const Index at = map[i] - to;
        store(target, at, load(target, at) + load(source, i - j));
      }
    } else {
      for (Index i = j; i < child.order; ++i) {
        const Index row = std::max(map[i], to), column = std::min(map[i], to);
        front.set(row, column, front.get(row, column) + load(source, i - j));
      }
    }
  }
}

}  // namespace

template <class Scalar>
FormedEntry<Scalar> form_entry(const ShiftedMatrix& matrix, Offset k, Index row, Index column) {
  FormedEntry<Scalar> entry = form(matrix, k, row, column, Scalar{});
  if (row == column && matrix.offset != 0) {
    Scalar offset;
    widen(matrix.offset, offset);
    entry.value = entry.value - offset;
    entry.error += ScalarTraits<Scalar>::unit * std::fabs(head(entry.value));
  }
  return entry;
}

template FormedEntry<double> form_entry(const ShiftedMatrix&, Offset, Index, Index);
template FormedEntry<DoubleDouble> form_entry(const ShiftedMatrix&, Offset, Index, Index);

template <class Scalar>
void ScalarWorker<Scalar>::add_matrix_entries(const FrontRows& rows, const ScalarBlock<Scalar>& matrix) {
  const MatrixFamily& family = *run_.matrix.family;
  const Index first = run_.analysis.tree.first_column[rows.front];
  for (Index j = 0; j < rows.own; ++j) {
    const Index position = first + j;
    for (Offset k = family.column_start[position]; k < family.column_start[Offset{position} + 1]; ++k) {
      const Index row = family.row[k], i = local_of_[row];
      const FormedEntry<Scalar> entry = form_entry<Scalar>(run_.matrix, k, row, position);
      // The pivots of a front and its rows below ascend, so this entry lies in the lower triangle.
      matrix.set(i, j, entry.value);
      const double size = std::fabs(head(entry.value));
      addend_sums_[static_cast<std::size_t>(i)] += size;
      row_error_[static_cast<std::size_t>(i)] += entry.error;
      if (i == j) continue;
      addend_sums_[static_cast<std::size_t>(j)] += size;
      row_error_[static_cast<std::size_t>(j)] += entry.error;
    }
  }
}

template <class Scalar>
ScalarProbe ScalarWorker<Scalar>::draw_probe(const ShiftedMatrix& matrix, std::uint64_t seed) {
  const MatrixFamily& family = *matrix.family;
  const Index rows = family.rows;
  ScalarProbe probe{draw_signs(rows, seed, matrix.offset), Buffer<double>(kPlanes * rows, 0.0),
                    Buffer<double>(rows, 0.0)};
  const Strip<Scalar> product{probe.product.data(), rows};
  // Multiplying by a sign is exact; every addition rounds by at most a unit of its result.
  const auto add = [&](Index row, Scalar entry, signed char sign) {
    const Scalar sum = load(product, row) + (sign < 0 ? -entry : entry);
    store(product, row, sum);
    probe.product_error[row] += kUnit * std::fabs(head(sum));
  };
  for (Index j = 0; j < rows; ++j) {
    for (Offset k = family.column_start[j]; k < family.column_start[Offset{j} + 1]; ++k) {
      const Index i = family.row[k];
      const Scalar entry = form_entry<Scalar>(matrix, k, i, j).value;
      add(j, entry, probe.sign[i]);
      if (i != j) add(i, entry, probe.sign[j]);
    }
  }
  return probe;
}

template <class Scalar>
void ScalarWorker<Scalar>::add_contribution(Index child, const ScalarBlock<Scalar>& matrix,
                                            ThreadPool* team) {
  const WaitingBlock& block = run_.waiting[static_cast<std::size_t>(child)];
  map_child_rows(run_.analysis.tree, child, block.delayed, local_of_, map_);
  for (Index i = 0; i < block.order; ++i) {
    const auto to = static_cast<std::size_t>(map_[static_cast<std::size_t>(i)]);
    row_error_[to] += block.row_error[i];
    addend_sums_[to] += block.row_sums[i];
    ++addends_[to];
    const Strip<Scalar> from{block.image, block.order},
        image{image_.data(), static_cast<Offset>(label_.size())};
    const auto row = static_cast<Offset>(to);
    const Scalar sum = load(image, row) + load(from, i);
    store(image, row, sum);
    image_error_[to] += block.image_error[i] + kUnit * std::fabs(head(sum));
  }
  const Index pieces = (block.order + kScatterColumns - 1) / kScatterColumns;
  for_each_piece(team, pieces, [&](Offset piece) {
    const Index begin = static_cast<Index>(piece) * kScatterColumns;
    scatter_columns(block, map_.data(), matrix, begin, std::min(begin + kScatterColumns, block.order));
  });
}

template <class Scalar>
void ScalarWorker<Scalar>::assemble(const FrontRows& rows, const ScalarBlock<Scalar>& matrix,
                                    ThreadPool* team) {
  const auto order = static_cast<std::size_t>(rows.order);
  row_error_.assign(order, 0);
  growth_.assign(order, 0);
  addend_sums_.assign(order, 0);
  addends_.assign(order, 0);
  image_.assign(order * static_cast<std::size_t>(kPlanes), 0);
  image_error_.assign(order, 0);
  sign_.clear();
  for (const Index position : label_) sign_.push_back(run_.probe.sign[position]);
  std::fill_n(matrix.data, ScalarBlock<Scalar>::doubles(matrix.layout), 0.0);
  add_matrix_entries(rows, matrix);
  for (const Index child : run_.analysis.tree.children(rows.front)) add_contribution(child, matrix, team);
  // Every addition to a row rounds a partial sum that is at most the sum of the addends' sizes.
  for (std::size_t i = 0; i < order; ++i)
    row_error_[i] += kUnit * static_cast<double>(addends_[i]) * addend_sums_[i];
}

// The rest of the class is instantiated in front_worker.cpp.
template ScalarProbe ScalarWorker<double>::draw_probe(const ShiftedMatrix&, std::uint64_t);
template ScalarProbe ScalarWorker<DoubleDouble>::draw_probe(const ShiftedMatrix&, std::uint64_t);
template void ScalarWorker<double>::assemble(const FrontRows&, const ScalarBlock<double>&, ThreadPool*);
template void ScalarWorker<double>::add_matrix_entries(const FrontRows&, const ScalarBlock<double>&);
template void ScalarWorker<double>::add_contribution(Index, const ScalarBlock<double>&, ThreadPool*);
template void ScalarWorker<DoubleDouble>::assemble(const FrontRows&, const ScalarBlock<DoubleDouble>&,
                                                   ThreadPool*);
template void ScalarWorker<DoubleDouble>::add_matrix_entries(const FrontRows&,
                                                             const ScalarBlock<DoubleDouble>&);
template void ScalarWorker<DoubleDouble>::add_contribution(Index, const ScalarBlock<DoubleDouble>&,
                                                           ThreadPool*);

}  // namespace stanchion
