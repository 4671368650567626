// One front with everything it needs, and the check of its proved error bound in extended precision.
#pragma once

#include <gtest/gtest.h>

#include <cmath>
#include <functional>

#include "dense/blas.hpp"
#include "dense/eliminate.hpp"
#include "support/generators.hpp"

namespace stanchion::test {

/// Full symmetric matrix, column-major.
struct Full {
  Index order = 0;
  std::vector<double> value;

  explicit Full(Index n) : order(n), value(static_cast<std::size_t>(n) * static_cast<std::size_t>(n), 0.0) {}
  double operator()(Index i, Index j) const { return value[place(i, j)]; }
  void set(Index i, Index j, double v) { value[place(i, j)] = value[place(j, i)] = v; }
  std::size_t place(Index i, Index j) const {
    return static_cast<std::size_t>(j) * static_cast<std::size_t>(order) + static_cast<std::size_t>(i);
  }
};

/// Every entry of the lower triangle from `entry(i, j)`, i >= j.
inline Full full_from(Index order, const std::function<double(Index, Index)>& entry) {
  Full full(order);
  for (Index j = 0; j < order; ++j) {
    for (Index i = j; i < order; ++i) full.set(i, j, entry(i, j));
  }
  return full;
}

/// A front made of a full matrix; run() eliminates, the members then hold the outcome.
struct FrontCase {
  Full original;
  Index candidates;
  BlockLayout layout;
  std::vector<double> storage, diagonal, off_diagonal, row_error, growth;
  std::vector<PivotKind> kind;
  std::vector<Index> label;
  EliminationResult result;

  FrontCase(Full matrix, Index candidates_in)
      : original(std::move(matrix)), candidates(candidates_in), layout(front_layout(original.order)) {}

  Front front() {
    return {{layout, storage.data()},
            candidates,
            {diagonal.data(), off_diagonal.data(), kind.data()},
            label.data(),
            row_error.data(),
            growth.data()};
  }

  const EliminationResult& run(const EliminationOptions& options, ThreadPool* team = nullptr) {
    use_single_threaded_blas();
    const auto order = static_cast<std::size_t>(original.order), most = static_cast<std::size_t>(candidates);
    storage.assign(static_cast<std::size_t>(layout.size()), 0.0);
    for (Index j = 0; j < original.order; ++j) {
      for (Index i = j; i < original.order; ++i) front().matrix.at(i, j) = original(i, j);
    }
    diagonal.assign(most, 0);
    off_diagonal.assign(most, 0);
    kind.assign(most, PivotKind::kOne);
    row_error.assign(order, 0);
    growth.assign(order, 0);
    label.resize(order);
    for (std::size_t i = 0; i < order; ++i) label[i] = static_cast<Index>(i);
    EliminationScratch scratch;
    result = eliminate_front(front(), options, scratch, team);
    return result;
  }

  double at(Index i, Index j) { return front().matrix.at(std::max(i, j), std::min(i, j)); }
  double lower(Index i, Index k) { return i == k ? 1.0 : (i < k ? 0.0 : front().matrix.at(i, k)); }

  /// Row sums of |P F P^T - L D L^T - S|, in 64-bit mantissas. Needs keep_factor.
  std::vector<long double> row_errors() {
    const Index n = original.order, p = result.eliminated;
    const auto nn = static_cast<std::size_t>(n);
    std::vector<long double> l(nn * static_cast<std::size_t>(p)), w(l.size());
    for (Index k = 0; k < p; ++k) {
      for (Index i = 0; i < n; ++i)
        l[static_cast<std::size_t>(k) * nn + static_cast<std::size_t>(i)] = lower(i, k);
    }
    for (Index k = 0; k < p; ++k) {
      const auto kk = static_cast<std::size_t>(k);
      for (std::size_t i = 0; i < nn; ++i) {
        w[kk * nn + i] = l[kk * nn + i] * static_cast<long double>(diagonal[kk]);
        if (kind[kk] == PivotKind::kTwoFirst) w[kk * nn + i] += l[(kk + 1) * nn + i] * off_diagonal[kk];
        if (kind[kk] == PivotKind::kTwoSecond) w[kk * nn + i] += l[(kk - 1) * nn + i] * off_diagonal[kk - 1];
      }
    }
    std::vector<long double> sums(nn, 0.0L), column(nn);
    for (Index j = 0; j < n; ++j) {
      for (Index i = j; i < n; ++i) {
        column[static_cast<std::size_t>(i)] =
            static_cast<long double>(
                original(label[static_cast<std::size_t>(i)], label[static_cast<std::size_t>(j)])) -
            (j >= p ? static_cast<long double>(at(i, j)) : 0.0L);
      }
      for (Index k = 0; k < std::min(p, j + 2); ++k) {
        const long double factor = l[static_cast<std::size_t>(k) * nn + static_cast<std::size_t>(j)];
        if (factor == 0) continue;
        const long double* from = w.data() + static_cast<std::size_t>(k) * nn;
        for (Index i = j; i < n; ++i) column[static_cast<std::size_t>(i)] -= from[i] * factor;
      }
      for (Index i = j; i < n; ++i) {
        const long double error = std::fabs(column[static_cast<std::size_t>(i)]);
        sums[static_cast<std::size_t>(i)] += error;
        if (i != j) sums[static_cast<std::size_t>(j)] += error;
      }
    }
    return sums;
  }

  /// What src/numeric/front_worker.cpp claims for each row of a front whose assembly was exact.
  std::vector<double> claimed(bool with_schur_term = true) {
    constexpr double kUnit = 0x1p-53;
    const double gamma = kUnit * static_cast<double>(result.longest_sum + result.additions +
                                                     std::min(candidates, kTileWidth) + 40);
    const double gamma_sum = with_schur_term ? kUnit * static_cast<double>(result.additions + 2) : 0;
    double largest_pivot = 0;
    for (Index k = 0; k < result.eliminated; ++k) {
      largest_pivot = std::max(largest_pivot, std::fabs(diagonal[static_cast<std::size_t>(k)]));
    }
    std::vector<double> bound;
    for (Index i = 0; i < original.order; ++i) {
      const auto ii = static_cast<std::size_t>(i);
      double schur = 0;
      for (Index j = result.eliminated; i >= result.eliminated && j < original.order; ++j)
        schur += std::fabs(at(i, j));
      bound.push_back(1.001 * (row_error[ii] + gamma * growth[ii] + gamma_sum * schur) +
                      0x1p-1060 * original.order * (1 + largest_pivot));
    }
    return bound;
  }

  /// Largest share of the claimed bound that is used; fails where a row passes it.
  double expect_bound_holds() {
    const auto errors = row_errors();
    const auto bound = claimed();
    double used = 0;
    for (std::size_t i = 0; i < bound.size(); ++i) {
      EXPECT_LE(static_cast<double>(errors[i]), bound[i]) << "row " << i << " of " << original.order;
      if (bound[i] > 0) used = std::max(used, static_cast<double>(errors[i]) / bound[i]);
    }
    return used;
  }

  /// Largest |L| below the unit diagonal.
  double largest_multiplier() {
    double largest = 0;
    for (Index k = 0; k < result.eliminated; ++k) {
      for (Index i = k + 1; i < original.order; ++i) largest = std::max(largest, std::fabs(lower(i, k)));
    }
    return largest;
  }
};

/// Pivots, Schur complement, labels and bounds agree to the last bit.
inline void expect_same_outcome(FrontCase& a, FrontCase& b) {
  ASSERT_EQ(a.result.eliminated, b.result.eliminated);
  EXPECT_EQ(a.result.two_by_two, b.result.two_by_two);
  EXPECT_EQ(a.result.longest_sum, b.result.longest_sum);
  EXPECT_EQ(a.result.additions, b.result.additions);
  EXPECT_EQ(a.label, b.label);
  EXPECT_EQ(a.row_error, b.row_error);
  EXPECT_EQ(a.growth, b.growth);
  const auto p = static_cast<std::ptrdiff_t>(a.result.eliminated);
  EXPECT_TRUE(std::equal(a.diagonal.begin(), a.diagonal.begin() + p, b.diagonal.begin()));
  EXPECT_TRUE(std::equal(a.off_diagonal.begin(), a.off_diagonal.begin() + p, b.off_diagonal.begin()));
  EXPECT_TRUE(std::equal(a.kind.begin(), a.kind.begin() + p, b.kind.begin()));
  for (Index j = a.result.eliminated; j < a.original.order; ++j) {
    for (Index i = j; i < a.original.order; ++i) ASSERT_EQ(a.at(i, j), b.at(i, j)) << i << ", " << j;
  }
}

}  // namespace stanchion::test
