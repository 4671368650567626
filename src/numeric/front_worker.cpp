#include "numeric/front_worker.hpp"

#include <algorithm>
#include <cmath>
#include <cstring>

#include "dense/pivot_sign.hpp"
#include "dense/trailing_update.hpp"

namespace stanchion {
namespace {

constexpr double kUnit = 0x1p-53;
/// Covers the divisions by pivots (2 u for 1x1, 16 u for 2x2, both sides) and the roundings of the sums
/// themselves.
constexpr Index kPivotRoundings = 40;
/// Roundings of an image besides additions: D z (3), L times that (1), three additions of four products, a
/// unit more.
constexpr Index kImageRoundings = 8;

/// True when every column of the block lands at or below the place it comes from, so that it can move over
/// the children it has consumed, column by column, without a copy aside.
bool moves_down(const BlockLower& from, Index first, const BlockLower& to) {
  for (Index j = 0; j < to.layout.order; ++j) {
    if (to.column(j, j) > from.column(first + j, first + j)) return false;
  }
  return true;
}

/// Copies rows and columns from `first` on, adding up row sums of absolute values (both triangles).
void copy_columns(const BlockLower& from, Index first, const BlockLower& to, std::vector<double>& sums) {
  const Index order = to.layout.order;
  for (Index j = 0; j < order; ++j) {
    const double* source = from.column(first + j, first + j);
    double* target = to.column(j, j);
    const double diagonal = source[0];
    target[0] = diagonal;
    const double below =
        kernels().copy_with_abs_sums(source + 1, order - j - 1, target + 1, sums.data() + j + 1);
    sums[static_cast<std::size_t>(j)] += std::fabs(diagonal) + below;
  }
}

}  // namespace

void Contribution::place(double* doubles) {
  values = doubles;
  row_error = doubles + contribution_layout(order).size();
  row_sums = row_error + order;
  image = row_sums + order;
  image_error = image + order;
}

FrontWorker::FrontWorker(FactorRun& run, Offset arena_doubles)
    : signs(static_cast<std::size_t>(run.analysis.tree.components)),
      run_(run),
      arena_(arena_doubles),
      local_of_(run.analysis.tree.rows) {
  run_.memory.book(local_of_.size() * Offset{sizeof(Index)});
}

FrontWorker::~FrontWorker() {
  run_.memory.book(-(booked_doubles_ + booked_scratch_) * Offset{sizeof(double)} -
                   local_of_.size() * Offset{sizeof(Index)});
}

Status FrontWorker::book_arena() {
  const Offset change = arena_.high_water() - booked_doubles_;
  const Offset scratch = scratch_.doubles() - booked_scratch_;
  if (change == 0 && scratch == 0) return {};
  booked_doubles_ += change;
  booked_scratch_ += scratch;
  return run_.memory.book((change + scratch) * Offset{sizeof(double)}) ? Status{}
                                                                       : run_.memory.limit_reached();
}

Status FrontWorker::process(Index front, ThreadPool* team) {
  const FrontRows rows = list_rows(run_.analysis.tree, front, run_.children[static_cast<std::size_t>(front)],
                                   run_.waiting, label_, local_of_);
  const BlockLayout layout = front_layout(rows.order);
  double* storage = arena_.push(layout.size());
  if (storage == nullptr) return run_.memory.limit_reached();
  if (Status booked = book_arena(); !booked.ok()) return booked;
  const BlockLower matrix{layout, storage};
  if (Status assembled = assemble(rows, matrix, team); !assembled.ok()) return assembled;

  // The children's blocks are in the front now; those on this stack lie right below it.
  double* base = storage;
  for (const Index child : run_.children[static_cast<std::size_t>(front)]) {
    Contribution& done = run_.waiting[static_cast<std::size_t>(child)];
    if (done.own.empty() && done.values != nullptr) base = std::min(base, done.values);
    if (!done.own.empty()) run_.memory.book(-done.own.size() * Offset{sizeof(double)});
    done = Contribution{};
  }
  const auto candidates = static_cast<std::size_t>(rows.candidates);
  diagonal_.resize(candidates);
  off_diagonal_.resize(candidates);
  kind_.resize(candidates);
  const Front work{matrix,
                   rows.candidates,
                   {diagonal_.data(), off_diagonal_.data(), kind_.data()},
                   label_.data(),
                   row_error_.data(),
                   growth_.data(),
                   {sign_.data(), image_.data(), image_error_.data()}};
  const EliminationOptions options{run_.options.definite, run_.options.pivot_threshold,
                                   run_.factor != nullptr};
  const EliminationResult result = eliminate_front(work, options, scratch_, team);
  if (Status booked = book_arena(); !booked.ok()) return booked;
  const bool stuck = run_.analysis.tree.parent[front] < 0 && result.eliminated < rows.candidates;
  stopped = result.stopped;
  breakdown = result.not_finite || (stuck && !stopped);
  if (stopped || breakdown) {
    run_.abandon = true;
    return {};
  }
  const double gamma = kUnit * static_cast<double>(result.longest_sum + result.additions +
                                                   std::min(rows.candidates, kTileWidth) + kPivotRoundings);
  bound_images(rows, result);
  count_pivots(rows, result, gamma);
  two_by_two_pivots += result.two_by_two;
  delayed_pivots += rows.candidates - result.eliminated;
  if (run_.factor != nullptr) {
    if (Status kept = keep_panel(rows, matrix, result.eliminated); !kept.ok()) return kept;
  }
  pack(rows, matrix, result, gamma, base);
  return {};
}

/// With p additions to an entry of the image and sums of depth q in L^T x the front adds at most
/// p u (|image| + 2 growth) + (q + kImageRoundings) u growth.
void FrontWorker::bound_images(const FrontRows& rows, const EliminationResult& result) {
  const double of_image = kUnit * result.image_additions;
  const double of_growth = 2 * of_image + kUnit * (result.sign_sum_depth + kImageRoundings);
  for (Index k = 0; k < rows.order; ++k) {
    const auto i = static_cast<std::size_t>(k);
    image_error_[i] += of_image * std::fabs(image_[i]) + of_growth * growth_[i];
  }
}

/// Row `row` of the front is a pivot: its image is complete and may differ from A x by `bound` and the
/// roundings.
void FrontWorker::check_image(Index row, double bound) {
  const auto i = static_cast<std::size_t>(row);
  const Index position = label_[i];
  const double allowed = 1.001 * (bound + image_error_[i] + run_.probe.product_error[position]);
  if (!std::isfinite(allowed)) {
    // Nothing can be told from an image that overflowed.
    breakdown = true;
    run_.abandon = true;
  } else if (!(std::fabs(run_.probe.product[position] - image_[i]) <= allowed)) {
    fault_row = fault_row < 0 ? position : std::min(fault_row, position);
  }
}

void FrontWorker::count_pivots(const FrontRows& rows, const EliminationResult& result, double gamma) {
  const Index eliminated = result.eliminated;
  const SignCount count = sign_of_pivots({diagonal_.data(), off_diagonal_.data(), kind_.data()}, eliminated);
  PivotSigns& total = signs[static_cast<std::size_t>(run_.analysis.tree.component[rows.front])];
  total.negative += count.negative;
  total.zero += count.zero;
  total.positive += count.positive;
  double largest_pivot = 0;
  for (Index k = 0; k < eliminated; ++k) {
    largest_pivot = std::max(largest_pivot, std::fabs(diagonal_[static_cast<std::size_t>(k)]));
  }
  // Underflow: every product or quotient may lose 2^-1075, seen through L and D of this front.
  const double tiny = 0x1p-1060 * rows.order * (1 + largest_pivot);
  for (Index k = 0; k < eliminated; ++k) {
    const auto i = static_cast<std::size_t>(k);
    const double bound = row_error_[i] + gamma * growth_[i] + tiny;
    // A NaN must not pass for a small number.
    if (!(bound <= largest_row_error)) largest_row_error = std::isnan(bound) ? INFINITY : bound;
    check_image(k, bound);
  }
}

Status FrontWorker::keep_panel(const FrontRows& rows, const BlockLower& matrix, Index eliminated) {
  FactorFront& kept = run_.factor->fronts[static_cast<std::size_t>(rows.front)];
  kept.pivots = eliminated;
  kept.order = rows.order;
  const Offset entries = Offset{rows.order} * eliminated;
  const bool single = run_.options.store_single;
  if (!run_.memory.book(entries * (single ? Offset{sizeof(float)} : Offset{sizeof(double)}))) {
    return run_.memory.limit_reached();
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
    const double* source = matrix.column(k, k) - k;
    const auto store = [&](auto* target) {
      using Scalar = std::remove_reference_t<decltype(*target)>;
      std::fill(target, target + k, Scalar{0});
      for (Index i = k + 1; i < rows.order; ++i) target[i] = static_cast<Scalar>(source[i]);
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

void FrontWorker::pack(const FrontRows& rows, const BlockLower& matrix, const EliminationResult& result,
                       double gamma, double* destination) {
  const Index eliminated = result.eliminated, order = rows.order - eliminated;
  arena_.pop_to(destination);
  if (order == 0) return;
  Contribution& out = run_.waiting[static_cast<std::size_t>(rows.front)];
  out.order = order;
  out.delayed.assign(label_.begin() + eliminated, label_.begin() + rows.candidates);
  const BlockLayout layout = contribution_layout(order);
  // Row sums go to scratch first because their final place may still hold entries.
  std::vector<double>& sums = addend_sums_;
  sums.assign(static_cast<std::size_t>(order), 0);
  const BlockLower to{layout, destination};
  if (moves_down(matrix, eliminated, to)) {
    copy_columns(matrix, eliminated, to, sums);
  } else {
    Buffer<double> aside(layout.size());
    copy_columns(matrix, eliminated, {layout, aside.data()}, sums);
    std::memcpy(destination, aside.data(), static_cast<std::size_t>(layout.size()) * sizeof(double));
  }
  out.place(arena_.push(contribution_doubles(order)));
  const double gamma_sum = kUnit * static_cast<double>(result.additions + 2);
  for (Index i = 0; i < order; ++i) {
    const auto from = static_cast<std::size_t>(eliminated + i);
    const double sum = sums[static_cast<std::size_t>(i)];
    out.row_error[i] = row_error_[from] + gamma * growth_[from] + gamma_sum * sum;
    out.row_sums[i] = sum;
    out.image[i] = image_[from];
    out.image_error[i] = image_error_[from];
  }
}

Status FrontWorker::detach(Index front) {
  Contribution& block = run_.waiting[static_cast<std::size_t>(front)];
  if (block.values == nullptr) return {};
  const Offset doubles = contribution_doubles(block.order);
  block.own = Buffer<double>(doubles);
  if (!run_.memory.book(doubles * Offset{sizeof(double)})) return run_.memory.limit_reached();
  std::memcpy(block.own.data(), block.values, static_cast<std::size_t>(doubles) * sizeof(double));
  block.place(block.own.data());
  arena_.pop_to(arena_.top() - arena_.used());
  return {};
}

Status FrontWorker::trim() {
  arena_.trim();
  return book_arena();
}

}  // namespace stanchion
