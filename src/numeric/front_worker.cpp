#include "numeric/front_worker.hpp"

#include <algorithm>
#include <cmath>
#include <cstring>

#include "dense/pivot_sign.hpp"
#include "dense/trailing_update.hpp"

namespace stanchion {
namespace {

/// Covers the divisions by pivots (2 u for 1x1, 16 u for 2x2, both sides) and the roundings of the sums
/// themselves.
constexpr Index kPivotRoundings = 40;
/// Roundings of an image besides additions: D z (3), L times that (1), three additions of four products, a
/// unit more.
constexpr Index kImageRoundings = 8;

/// True when every column of the block lands at or below the place it comes from, so that it can move over
/// the children it has consumed, column by column, without a copy aside.
template <class Scalar>
bool moves_down(const BlockLowerOf<Scalar>& from, Index first, const BlockLowerOf<Scalar>& to) {
  for (Index j = 0; j < to.layout.order; ++j) {
    if (to.column(j, j) > from.column(first + j, first + j)) return false;
  }
  return true;
}

/// Copies rows and columns from `first` on, adding up row sums of absolute values (both triangles).
template <class Scalar>
void copy_columns(const BlockLowerOf<Scalar>& from, Index first, const BlockLowerOf<Scalar>& to,
                  std::vector<Scalar>& sums) {
  const Index order = to.layout.order;
  for (Index j = 0; j < order; ++j) {
    const Scalar* source = from.column(first + j, first + j);
    Scalar* target = to.column(j, j);
    const Scalar diagonal = source[0];
    target[0] = diagonal;
    const Scalar below =
        kernels_of<Scalar>().copy_with_abs_sums(source + 1, order - j - 1, target + 1, sums.data() + j + 1);
    sums[static_cast<std::size_t>(j)] += std::fabs(diagonal) + below;
  }
}

}  // namespace

template <class Scalar>
void Contribution<Scalar>::place(Scalar* numbers) {
  values = numbers;
  row_error = numbers + contribution_layout(order).size();
  row_sums = row_error + order;
  image = row_sums + order;
  image_error = image + order;
}

template <class Scalar>
FrontWorker<Scalar>::FrontWorker(Index rows, Offset arena_doubles) : arena_(arena_doubles), local_of_(rows) {}

template <class Scalar>
void FrontWorker<Scalar>::begin(FactorRun<Scalar>& run) {
  run_ = &run;
  signs.assign(static_cast<std::size_t>(run.analysis.tree.components), PivotSigns{});
  largest_row_error = 0;
  delayed_pivots = two_by_two_pivots = 0;
  stopped = breakdown = false;
  fault_row = -1;
  kept_memory = PageStore{};
  booked_doubles_ = booked_scratch_ = 0;
  run.memory.book(local_of_.size() * Offset{sizeof(Index)});
}

template <class Scalar>
void FrontWorker<Scalar>::finish(Offset kept_doubles) {
  run_->memory.book(-booked_doubles_ * Offset{sizeof(double)} - booked_scratch_ -
                    local_of_.size() * Offset{sizeof(Index)});
  run_ = nullptr;
  arena_.pop_to(arena_.top() - arena_.used());
  arena_.trim(kept_doubles);
}

template <class Scalar>
Status FrontWorker<Scalar>::book_arena() {
  const Offset change = arena_.high_water() - booked_doubles_;
  const Offset scratch = scratch_.numbers() * Offset{sizeof(Scalar)} - booked_scratch_;
  if (change == 0 && scratch == 0) return {};
  booked_doubles_ += change;
  booked_scratch_ += scratch;
  return run_->memory.book(change * Offset{sizeof(double)} + scratch) ? Status{}
                                                                      : run_->memory.limit_reached();
}

template <class Scalar>
Status FrontWorker<Scalar>::process(Index front, ThreadPool* team) {
  const FrontRows rows = list_rows(run_->analysis.tree, front, run_->waiting, label_, local_of_);
  const BlockLayout layout = front_layout(rows.order);
  Scalar* storage = push(layout.size());
  if (storage == nullptr) return run_->no_room();
  if (Status booked = book_arena(); !booked.ok()) return booked;
  const BlockLowerOf<Scalar> matrix{layout, storage};
  if (Status assembled = assemble(rows, matrix, team); !assembled.ok()) return assembled;

  // The children's blocks are in the front now; those on this stack lie right below it.
  Scalar* base = storage;
  for (const Index child : run_->analysis.tree.children(front)) {
    Contribution<Scalar>& done = run_->waiting[static_cast<std::size_t>(child)];
    if (!done.own && done.values != nullptr) base = std::min(base, done.values);
    if (done.own) run_->memory.book(-contribution_numbers(done.order) * Offset{sizeof(Scalar)});
    done = Contribution<Scalar>{};
  }
  const auto candidates = static_cast<std::size_t>(rows.candidates);
  diagonal_.resize(candidates);
  off_diagonal_.resize(candidates);
  kind_.resize(candidates);
  const FrontOf<Scalar> work{matrix,
                             rows.candidates,
                             {diagonal_.data(), off_diagonal_.data(), kind_.data()},
                             label_.data(),
                             row_error_.data(),
                             growth_.data(),
                             {sign_.data(), image_.data(), image_error_.data()}};
  const EliminationOptions options{run_->options.definite, run_->options.pivot_threshold,
                                   run_->factor != nullptr};
  const EliminationResult result = eliminate_front(work, options, scratch_, team);
  if (Status booked = book_arena(); !booked.ok()) return booked;
  const bool stuck = run_->analysis.tree.parent[front] < 0 && result.eliminated < rows.candidates;
  stopped = result.stopped;
  breakdown = result.not_finite || (stuck && !stopped);
  if (stopped || breakdown) {
    run_->abandon = true;
    return {};
  }
  const double gamma =
      Rounding<Scalar>::kUnit * static_cast<double>(result.longest_sum + result.additions +
                                                    std::min(rows.candidates, kTileWidth) + kPivotRoundings);
  bound_images(rows, result);
  count_pivots(rows, result, gamma);
  two_by_two_pivots += result.two_by_two;
  delayed_pivots += rows.candidates - result.eliminated;
  if (run_->factor != nullptr) {
    if (Status kept = keep_panel(rows, matrix, result.eliminated); !kept.ok()) return kept;
  }
  pack(rows, matrix, result, gamma, base);
  return {};
}

/// With p additions to an entry of the image and sums of depth q in L^T x the front adds at most
/// p u (|image| + 2 growth) + (q + kImageRoundings) u growth.
template <class Scalar>
void FrontWorker<Scalar>::bound_images(const FrontRows& rows, const EliminationResult& result) {
  const double of_image = Rounding<Scalar>::kUnit * result.image_additions;
  const double of_growth = 2 * of_image + Rounding<Scalar>::kUnit * (result.sign_sum_depth + kImageRoundings);
  for (Index k = 0; k < rows.order; ++k) {
    const auto i = static_cast<std::size_t>(k);
    image_error_[i] += static_cast<Scalar>(of_image * std::fabs(image_[i]) + of_growth * growth_[i]);
  }
}

/// Row `row` of the front is a pivot: its image is complete and may differ from A x by `bound` and the
/// roundings.
template <class Scalar>
void FrontWorker<Scalar>::check_image(Index row, double bound) {
  const auto i = static_cast<std::size_t>(row);
  const Index position = label_[i];
  const double allowed = run_->slack() * (bound + image_error_[i] + run_->probe.product_error[position]);
  if (!std::isfinite(allowed)) {
    // Nothing can be told from an image that overflowed.
    breakdown = true;
    run_->abandon = true;
  } else if (!(std::fabs(run_->probe.product[position] - image_[i]) <= allowed)) {
    fault_row = fault_row < 0 ? position : std::min(fault_row, position);
  }
}

template <class Scalar>
void FrontWorker<Scalar>::count_pivots(const FrontRows& rows, const EliminationResult& result, double gamma) {
  const Index eliminated = result.eliminated;
  const SignCount count = sign_of_pivots({diagonal_.data(), off_diagonal_.data(), kind_.data()}, eliminated);
  PivotSigns& total = signs[static_cast<std::size_t>(run_->analysis.tree.component[rows.front])];
  total.negative += count.negative;
  total.zero += count.zero;
  total.positive += count.positive;
  double largest_pivot = 0;
  for (Index k = 0; k < eliminated; ++k) {
    largest_pivot = std::max(largest_pivot, std::fabs(diagonal_[static_cast<std::size_t>(k)]));
  }
  // Underflow: every product or quotient may lose 2^-1075, seen through L and D of this front, and every
  // entry of an exact matrix that is scaled kExactError.
  const double tiny = Rounding<Scalar>::kUnderflow * rows.order * (1 + largest_pivot) +
                      ShiftedMatrix::kExactError * run_->matrix.family->rows;
  for (Index k = 0; k < eliminated; ++k) {
    const auto i = static_cast<std::size_t>(k);
    const double bound = row_error_[i] + gamma * growth_[i] + tiny;
    // A NaN must not pass for a small number.
    if (!(bound <= largest_row_error)) largest_row_error = std::isnan(bound) ? INFINITY : bound;
    check_image(k, bound);
  }
}

template <class Scalar>
Status FrontWorker<Scalar>::keep_panel(const FrontRows& rows, const BlockLowerOf<Scalar>& matrix,
                                       Index eliminated) {
  FactorFront& kept = run_->factor->fronts[static_cast<std::size_t>(rows.front)];
  kept.pivots = eliminated;
  kept.order = rows.order;
  const Offset entries = Offset{rows.order} * eliminated;
  const bool single = run_->options.store_single || sizeof(Scalar) == sizeof(float);
  if (!run_->memory.book(entries * (single ? Offset{sizeof(float)} : Offset{sizeof(double)}))) {
    return run_->memory.limit_reached();
  }
  if (single) {
    kept.lower_single = kept_memory.take<float>(entries);
  } else {
    kept.lower = kept_memory.take<double>(entries);
  }
  kept.diagonal = kept_memory.take<double>(eliminated);
  kept.off_diagonal = kept_memory.take<double>(eliminated);
  kept.kind = kept_memory.take<PivotKind>(eliminated);
  kept.position = kept_memory.take<Index>(rows.order);
  std::copy_n(label_.begin(), rows.order, kept.position.begin());
  for (Index k = 0; k < eliminated; ++k) {
    const Scalar* source = matrix.column(k, k) - k;
    const auto store = [&](auto* target) {
      using Stored = std::remove_reference_t<decltype(*target)>;
      std::fill(target, target + k, Stored{0});
      for (Index i = k + 1; i < rows.order; ++i) target[i] = static_cast<Stored>(source[i]);
      target[k] = 1;
    };
    if (single) {
      store(kept.lower_single.data() + Offset{k} * rows.order);
    } else {
      store(kept.lower.data() + Offset{k} * rows.order);
    }
    const auto at = static_cast<std::size_t>(k);
    kept.diagonal[at] = diagonal_[at];
    kept.off_diagonal[at] = off_diagonal_[at];
    kept.kind[at] = kind_[at];
  }
  return {};
}

template <class Scalar>
void FrontWorker<Scalar>::pack(const FrontRows& rows, const BlockLowerOf<Scalar>& matrix,
                               const EliminationResult& result, double gamma, Scalar* destination) {
  const Index eliminated = result.eliminated, order = rows.order - eliminated;
  pop_to(destination);
  if (order == 0) return;
  Contribution<Scalar>& out = run_->waiting[static_cast<std::size_t>(rows.front)];
  out.order = order;
  out.delayed.assign(label_.begin() + eliminated, label_.begin() + rows.candidates);
  const BlockLayout layout = contribution_layout(order);
  // Row sums go to scratch first because their final place may still hold entries.
  std::vector<Scalar>& sums = addend_sums_;
  sums.assign(static_cast<std::size_t>(order), 0);
  const BlockLowerOf<Scalar> to{layout, destination};
  if (moves_down(matrix, eliminated, to)) {
    copy_columns(matrix, eliminated, to, sums);
  } else {
    Buffer<Scalar> aside(layout.size());
    copy_columns(matrix, eliminated, BlockLowerOf<Scalar>{layout, aside.data()}, sums);
    std::memcpy(destination, aside.data(), static_cast<std::size_t>(layout.size()) * sizeof(Scalar));
  }
  out.place(push(contribution_numbers(order)));
  const double gamma_sum = Rounding<Scalar>::kUnit * static_cast<double>(result.additions + 2);
  for (Index i = 0; i < order; ++i) {
    const auto from = static_cast<std::size_t>(eliminated + i);
    const Scalar sum = sums[static_cast<std::size_t>(i)];
    out.row_error[i] = static_cast<Scalar>(row_error_[from] + gamma * growth_[from] + gamma_sum * sum);
    out.row_sums[i] = sum;
    out.image[i] = image_[from];
    out.image_error[i] = image_error_[from];
  }
}

template <class Scalar>
Status FrontWorker<Scalar>::detach(Index front) {
  Contribution<Scalar>& block = run_->waiting[static_cast<std::size_t>(front)];
  if (block.values == nullptr) return {};
  const Offset numbers = contribution_numbers(block.order);
  block.own = handed_on_.take<Scalar>(numbers);
  if (!run_->memory.book(numbers * Offset{sizeof(Scalar)})) return run_->memory.limit_reached();
  std::memcpy(block.own.get(), block.values, static_cast<std::size_t>(numbers) * sizeof(Scalar));
  block.place(block.own.get());
  arena_.pop_to(arena_.top() - arena_.used());
  return {};
}

template <class Scalar>
Status FrontWorker<Scalar>::trim() {
  arena_.trim();
  return book_arena();
}

template struct Contribution<double>;
template struct Contribution<float>;
template class FrontWorker<double>;
template class FrontWorker<float>;

}  // namespace stanchion
