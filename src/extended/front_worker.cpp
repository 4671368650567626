#include "extended/front_worker.hpp"

#include <algorithm>
#include <cmath>
#include <cstring>

namespace stanchion {
namespace {

constexpr double kMostThreshold =
    0.35;  ///< above, a last front could be left with candidates that fit no pivot

/// Roundings of an image beyond one a pivot and one a row: (1) counts 3, D (L^T x) at most 4, and one of
/// second order.
constexpr double kImageRoundings = 8;

/// True when every column of every plane lands at or below the place it comes from and before what is still
/// to be moved, so that the block can move over the children it has consumed without a copy aside.
template <class Scalar>
bool moves_down(const ScalarBlock<Scalar>& from, Index first, const ScalarBlock<Scalar>& to) {
  const Index order = to.layout.order;
  for (Index j = 0; j < order; ++j) {
    const Strip<Scalar> source = from.column(first + j, first + j), target = to.column(j, j);
    for (Index plane = 0; plane < ScalarTraits<Scalar>::planes; ++plane) {
      if (target.data + plane * target.plane > source.data + plane * source.plane) return false;
    }
  }
  // The first plane must end before the second begins to be read.
  return ScalarTraits<Scalar>::planes == 1 ||
         to.data + to.layout.size() <= from.column(first, first).data + from.layout.size();
}

/// Copies rows and columns from `first` on, adding up row sums of absolute values (both triangles).
template <class Scalar>
void copy_columns(const ScalarBlock<Scalar>& from, Index first, const ScalarBlock<Scalar>& to, double* sums) {
  const Index order = to.layout.order;
  for (Index plane = 0; plane < ScalarTraits<Scalar>::planes; ++plane) {
    for (Index j = 0; j < order; ++j) {
      const Strip<Scalar> source = from.column(first + j, first + j), target = to.column(j, j);
      double* copied = target.data + plane * target.plane;
      std::memmove(copied, source.data + plane * source.plane,
                   static_cast<std::size_t>(order - j) * sizeof(double));
      if (plane > 0) continue;
      double column_sum = 0;
      for (Index i = 1; i < order - j; ++i) {
        const double size = std::fabs(copied[i]);
        column_sum += size;
        sums[j + i] += size;
      }
      sums[j] += std::fabs(copied[0]) + column_sum;
    }
  }
}

}  // namespace

template <class Scalar>
ScalarWorker<Scalar>::ScalarWorker(ScalarRun& run, Offset arena_doubles)
    : signs(static_cast<std::size_t>(run.analysis.tree.components)),
      run_(run),
      arena_(arena_doubles),
      local_of_(run.analysis.tree.rows) {
  run_.memory.book(local_of_.size() * Offset{sizeof(Index)});
}

template <class Scalar>
ScalarWorker<Scalar>::~ScalarWorker() {
  run_.memory.book(-(booked_doubles_ + booked_scratch_) * Offset{sizeof(double)} -
                   local_of_.size() * Offset{sizeof(Index)});
}

template <class Scalar>
Status ScalarWorker<Scalar>::book_arena() {
  const Offset change = arena_.high_water() - booked_doubles_,
               scratch = scratch_.scaled.size() - booked_scratch_;
  if (change == 0 && scratch == 0) return {};
  booked_doubles_ += change;
  booked_scratch_ += scratch;
  return run_.memory.book((change + scratch) * Offset{sizeof(double)}) ? Status{}
                                                                       : run_.memory.limit_reached();
}

/// The children's blocks are in the front now. Returns the lowest place on this stack that is free again.
template <class Scalar>
double* ScalarWorker<Scalar>::release_children(Index front, double* storage) {
  for (const Index child : run_.analysis.tree.children(front)) {
    WaitingBlock& done = run_.waiting[static_cast<std::size_t>(child)];
    if (done.own.empty() && done.values != nullptr) storage = std::min(storage, done.values);
    if (!done.own.empty()) run_.memory.book(-done.own.size() * Offset{sizeof(double)});
    done = WaitingBlock{};
  }
  return storage;
}

template <class Scalar>
ScalarElimination ScalarWorker<Scalar>::eliminate(const FrontRows& rows, const ScalarBlock<Scalar>& matrix,
                                                  ThreadPool* team) {
  const auto candidates = static_cast<std::size_t>(rows.candidates);
  diagonal_.resize(candidates);
  kind_.resize(candidates);
  const ScalarFront<Scalar> work{matrix,
                                 rows.candidates,
                                 kind_.data(),
                                 diagonal_.data(),
                                 label_.data(),
                                 row_error_.data(),
                                 growth_.data(),
                                 sign_.data(),
                                 {image_.data(), rows.order},
                                 image_error_.data()};
  const ScalarOptions options{run_.options.definite, std::min(run_.options.pivot_threshold, kMostThreshold),
                              false};
  return eliminate_scalar_front(work, options, scratch_, team);
}

template <class Scalar>
Status ScalarWorker<Scalar>::process(Index front, ThreadPool* team) {
  const FrontRows rows = list_rows(run_.analysis.tree, front, run_.waiting, label_, local_of_);
  const BlockLayout layout = front_layout(rows.order);
  double* storage = arena_.push(ScalarBlock<Scalar>::doubles(layout));
  if (storage == nullptr) return run_.no_room();
  if (Status booked = book_arena(); !booked.ok()) return booked;
  const ScalarBlock<Scalar> matrix{layout, storage};
  assemble(rows, matrix, team);
  double* base = release_children(front, storage);
  const ScalarElimination result = eliminate(rows, matrix, team);
  if (Status booked = book_arena(); !booked.ok()) return booked;
  const bool stuck = run_.analysis.tree.parent[front] < 0 && result.eliminated < rows.candidates;
  stopped = result.stopped;
  breakdown = result.not_finite || (stuck && !stopped);
  if (stopped || breakdown) {
    run_.abandon = true;
    return {};
  }
  bound_images(rows, result.eliminated);
  count_pivots(rows, result);
  two_by_two_pivots += result.two_by_two;
  delayed_pivots += rows.candidates - result.eliminated;
  return pack(rows, matrix, result.eliminated, base);
}

template <class Scalar>
void ScalarWorker<Scalar>::bound_images(const FrontRows& rows, Index eliminated) {
  for (Index k = 0; k < rows.order; ++k) {
    const auto i = static_cast<std::size_t>(k);
    image_error_[i] += kUnit * (eliminated * std::fabs(image_[i]) +
                                (eliminated + rows.order + kImageRoundings) * growth_[i]);
  }
}

/// Row `row` of the front is a pivot: its image is complete and may differ from A x by `bound` and the
/// roundings.
template <class Scalar>
void ScalarWorker<Scalar>::check_image(Index row, double bound) {
  const auto i = static_cast<std::size_t>(row);
  const Index position = label_[i];
  const double allowed = 1.001 * (bound + image_error_[i] + run_.probe.product_error[position]);
  if (!std::isfinite(allowed)) {
    // Nothing can be told from an image that overflowed.
    breakdown = true;
    run_.abandon = true;
    return;
  }
  const Strip<Scalar> image{image_.data(), static_cast<Offset>(row_error_.size())};
  const Strip<Scalar> product{run_.probe.product.data(), run_.matrix.family->rows};
  const Scalar difference = load(product, position) - load(image, row);
  if (!(std::fabs(head(difference)) <= allowed)) {
    fault_row = fault_row < 0 ? position : std::min(fault_row, position);
  }
}

template <class Scalar>
void ScalarWorker<Scalar>::count_pivots(const FrontRows& rows, const ScalarElimination& result) {
  PivotSigns& total = signs[static_cast<std::size_t>(run_.analysis.tree.component[rows.front])];
  const double gamma = growth_factor<Scalar>(result.eliminated);
  // Underflow of products and quotients, seen through L and D of this front: error_bound.md, section 5.
  const double tiny =
      0x1p-1060 * rows.order * (1.0 + result.eliminated) * (1 + result.largest_pivot) * result.largest_sum;
  for (Index k = 0; k < result.eliminated; ++k) {
    const auto i = static_cast<std::size_t>(k);
    switch (kind_[i]) {
      case PivotKind::kZero:
        ++total.zero;
        break;
      case PivotKind::kOne:
        ++(head(diagonal_[i]) < 0 ? total.negative : total.positive);
        break;
      case PivotKind::kTwoFirst:  // its determinant is negative
        ++total.negative;
        break;
      case PivotKind::kTwoSecond:
        ++total.positive;
        break;
    }
    const double bound = row_error_[i] + gamma * growth_[i] + tiny;
    // A NaN must not pass for a small number, nor give way to one.
    if (!(bound <= largest_row_error)) largest_row_error = std::isnan(bound) ? INFINITY : bound;
    check_image(k, bound);
  }
  for (std::size_t i = static_cast<std::size_t>(result.eliminated); i < row_error_.size(); ++i) {
    row_error_[i] += gamma * growth_[i] + tiny;
  }
}

template <class Scalar>
Status ScalarWorker<Scalar>::pack(const FrontRows& rows, const ScalarBlock<Scalar>& matrix, Index eliminated,
                                  double* destination) {
  const Index order = rows.order - eliminated;
  arena_.pop_to(destination);
  if (order == 0) return {};
  WaitingBlock& out = run_.waiting[static_cast<std::size_t>(rows.front)];
  out.order = order;
  out.delayed.assign(label_.begin() + eliminated, label_.begin() + rows.candidates);
  double* start = arena_.push(waiting_doubles(order));  // `destination` itself
  if (start == nullptr) return run_.no_room();
  out.place(start, kPlanes);
  const ScalarBlock<Scalar> to{contribution_layout(order), out.values};
  sums_.assign(static_cast<std::size_t>(order), 0);
  if (moves_down(matrix, eliminated, to)) {
    copy_columns(matrix, eliminated, to, sums_.data());
  } else {
    Buffer<double> aside(ScalarBlock<Scalar>::doubles(to.layout));
    copy_columns(matrix, eliminated, {to.layout, aside.data()}, sums_.data());
    std::memcpy(out.values, aside.data(), static_cast<std::size_t>(aside.size()) * sizeof(double));
  }
  const double gamma = handed_on_factor<Scalar>(eliminated);
  for (Index i = 0; i < order; ++i) {
    const double sum = sums_[static_cast<std::size_t>(i)];
    out.row_error[i] = row_error_[static_cast<std::size_t>(eliminated + i)] + gamma * sum;
    out.row_sums[i] = sum;
    const auto from = static_cast<std::size_t>(eliminated + i);
    out.image_error[i] = image_error_[from];
    for (Index plane = 0; plane < kPlanes; ++plane) {
      out.image[Offset{plane} * order + i] = image_[static_cast<std::size_t>(plane * rows.order) + from];
    }
  }
  return {};
}

template <class Scalar>
Status ScalarWorker<Scalar>::detach(Index front) {
  WaitingBlock& block = run_.waiting[static_cast<std::size_t>(front)];
  if (block.values == nullptr) return {};
  const Offset doubles = waiting_doubles(block.order);
  block.own = Buffer<double>(doubles);
  if (!run_.memory.book(doubles * Offset{sizeof(double)})) return run_.memory.limit_reached();
  std::memcpy(block.own.data(), block.values, static_cast<std::size_t>(doubles) * sizeof(double));
  block.place(block.own.data(), kPlanes);
  arena_.pop_to(arena_.top() - arena_.used());
  return {};
}

template class ScalarWorker<double>;
template class ScalarWorker<DoubleDouble>;

}  // namespace stanchion
