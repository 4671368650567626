#include "diagnose/kept_factor.hpp"

#include <algorithm>
#include <cmath>

#include "base/ranges.hpp"

namespace stanchion {
namespace {

constexpr Index kV = kBlockVectors;
constexpr Offset kFrontsAPiece = 256;

/// Eigenvalues and the rotation (columns) of [a b; b c].
struct PairEigen {
  double value[2], cosine, sine;  ///< vectors (cosine, -sine) and (sine, cosine)
};

PairEigen pair_eigen(double a, double b, double c) {
  const double theta = (c - a) / (2 * b);
  const double t = (theta >= 0 ? 1.0 : -1.0) / (std::fabs(theta) + std::hypot(theta, 1.0));
  const double cosine = 1 / std::hypot(t, 1.0);
  return {{a - t * b, c + t * b}, cosine, t * cosine};
}

}  // namespace

void KeptFactor::scale(double* block, Power power) const {
  const auto of = [power](double d) {
    if (d == 0) return 0.0;
    if (power == Power::kInverse) return 1 / d;
    return power == Power::kAbsoluteInverse ? 1 / std::fabs(d) : 1 / std::sqrt(std::fabs(d));
  };
  const auto scale_front = [&](const FactorFront& front) {
    for (Index k = 0; k < front.pivots; ++k) {
      double* first = block + Offset{front.position[k]} * kV;
      if (front.kind[k] != PivotKind::kTwoFirst) {
        const double d = front.kind[k] == PivotKind::kZero ? 0.0 : of(front.diagonal[k]);
        for (Index v = 0; v < kV; ++v) first[v] *= d;
        continue;
      }
      double* second = block + Offset{front.position[k + 1]} * kV;
      const PairEigen e = pair_eigen(front.diagonal[k], front.off_diagonal[k], front.diagonal[k + 1]);
      const double f = of(e.value[0]), g = of(e.value[1]);
      for (Index v = 0; v < kV; ++v) {
        const double x = f * (e.cosine * first[v] - e.sine * second[v]);
        const double y = g * (e.sine * first[v] + e.cosine * second[v]);
        first[v] = e.cosine * x + e.sine * y;
        second[v] = e.cosine * y - e.sine * x;
      }
      ++k;
    }
  };
  for_ranges(pool_, static_cast<Offset>(factor_.fronts.size()), kFrontsAPiece, [&](Offset begin, Offset end) {
    for (Offset f = begin; f < end; ++f) scale_front(factor_.fronts[static_cast<std::size_t>(f)]);
  });
}

void KeptFactor::solve(Columns& x) {
  each_block(x, block_, [this](double* block) {
    solver_.forward(block);
    scale(block, Power::kInverse);
    solver_.backward(block);
  });
}

void KeptFactor::solve_absolute(Columns& x) {
  each_block(x, block_, [this](double* block) {
    solver_.forward(block);
    scale(block, Power::kAbsoluteInverse);
    solver_.backward(block);
  });
}

void KeptFactor::half_solve(Columns& x) {
  each_block(x, block_, [this](double* block) {
    scale(block, Power::kAbsoluteRoot);
    solver_.backward(block);
  });
}

void KeptFactor::each_negative_pivot(const std::function<void(Index position)>& use) const {
  for (const FactorFront& front : factor_.fronts) {
    for (Index k = 0; k < front.pivots; ++k) {
      const double a = front.diagonal[k];
      if (front.kind[k] != PivotKind::kTwoFirst) {
        if (front.kind[k] != PivotKind::kZero && a < 0) use(front.position[k]);
        continue;
      }
      const PairEigen e = pair_eigen(a, front.off_diagonal[k], front.diagonal[k + 1]);
      for (const double value : e.value) {
        if (value < 0) use(front.position[k]);
      }
      ++k;
    }
  }
}

Columns KeptFactor::lowest_pivot_vectors(Index most, Index* filled) {
  struct Candidate {
    double value;
    Index position[2];
    double entry[2];
  };
  std::vector<Candidate> found;
  for (const FactorFront& front : factor_.fronts) {
    for (Index k = 0; k < front.pivots; ++k) {
      const double a = front.diagonal[k];
      if (front.kind[k] != PivotKind::kTwoFirst) {
        if (a < 0) found.push_back({a, {front.position[k], -1}, {1, 0}});
        continue;
      }
      const PairEigen e = pair_eigen(a, front.off_diagonal[k], front.diagonal[k + 1]);
      const Index first = front.position[k], second = front.position[k + 1];
      if (e.value[0] < 0) found.push_back({e.value[0], {first, second}, {e.cosine, -e.sine}});
      if (e.value[1] < 0) found.push_back({e.value[1], {first, second}, {e.sine, e.cosine}});
      ++k;
    }
  }
  const auto keep = std::min(found.size(), static_cast<std::size_t>(most));
  std::partial_sort(found.begin(), found.begin() + static_cast<std::ptrdiff_t>(keep), found.end(),
                    [](const Candidate& x, const Candidate& y) {
                      return x.value != y.value ? x.value < y.value : x.position[0] < y.position[0];
                    });
  *filled = static_cast<Index>(keep);
  Columns x(factor_.rows, whole_blocks(std::max<Index>(1, *filled)));
  for (std::size_t c = 0; c < keep; ++c) {
    for (int s = 0; s < 2; ++s) {
      if (found[c].position[s] >= 0) x.row(found[c].position[s])[c] = found[c].entry[s];
    }
  }
  each_block(x, block_, [this](double* block) { solver_.backward(block); });
  return x;
}

}  // namespace stanchion
