// Dense fronts that are hard in one way each.
#pragma once

#include "dense/front_case.hpp"

namespace stanchion::test {

struct NamedFront {
  const char* name;
  Full matrix;
};

inline Full random_symmetric(Random& random, Index n) {
  return full_from(n, [&](Index, Index) { return uniform(random, -1, 1); });
}

/// Diagonally dominant, so positive definite.
inline Full positive_definite(Random& random, Index n) {
  return full_from(n, [&](Index i, Index j) { return i == j ? 1.0 * n : uniform(random, -1, 1); });
}

inline Full zero_diagonal(Random& random, Index n) {
  return full_from(n, [&](Index i, Index j) { return i == j ? 0.0 : uniform(random, -1, 1); });
}

/// [H B^T; B 0]: the last third are multipliers; shuffled so that they come anywhere.
inline Full arrow(Random& random, Index n) {
  std::vector<Index> where(static_cast<std::size_t>(n));
  for (Index i = 0; i < n; ++i) where[static_cast<std::size_t>(i)] = i;
  std::shuffle(where.begin(), where.end(), random);
  Full full(n);
  const Index multipliers = n / 3;
  for (Index j = 0; j < n; ++j) {
    for (Index i = j; i < n; ++i) {
      const bool both = j >= n - multipliers, coupled = i >= n - multipliers;
      const double value =
          both ? 0 : (coupled ? uniform(random, -1, 1) : (i == j ? 4 : uniform(random, -0.1, 0.1)));
      full.set(where[static_cast<std::size_t>(i)], where[static_cast<std::size_t>(j)], value);
    }
  }
  return full;
}

/// X J X^T with small integers, rank n / 2: exactly singular and exactly representable.
inline Full integer_of_half_rank(Random& random, Index n) {
  const Index rank = n / 2;
  std::vector<int> x(static_cast<std::size_t>(n) * static_cast<std::size_t>(std::max<Index>(rank, 1)));
  for (int& v : x) v = static_cast<int>(random() % 7) - 3;
  return full_from(n, [&](Index i, Index j) {
    int sum = 0;
    for (Index k = 0; k < rank; ++k) {
      const int sign = k % 3 == 0 ? -1 : 1;
      sum += sign * x[static_cast<std::size_t>(i * rank + k)] * x[static_cast<std::size_t>(j * rank + k)];
    }
    return static_cast<double>(sum);
  });
}

/// Leading diagonals so small that elimination without interchanges loses everything.
inline Full tiny_leading_diagonal(Random& random, Index n, double tiny) {
  return full_from(n, [&](Index i, Index j) {
    if (i == j) return i < (n + 1) / 2 ? tiny : uniform(random, 1, 2);
    return uniform(random, -1, 1);
  });
}

/// Candidates that are weak among themselves and strongly coupled to the rows below: they must wait.
inline Full weak_candidates(Random& random, Index n, Index candidates, double weakness) {
  return full_from(n, [&](Index i, Index j) {
    const double size = i < candidates && j % 2 == 0 ? weakness : 1;
    return size * uniform(random, -1, 1) + (i == j && j % 2 == 1 ? 8 : 0);
  });
}

/// Rows and columns scaled by 2^-20 to 2^20.
inline Full wild(Random& random, Index n) {
  std::vector<double> scale(static_cast<std::size_t>(n));
  for (double& s : scale) s = std::ldexp(1.0, static_cast<int>(random() % 41) - 20);
  return full_from(n, [&](Index i, Index j) {
    return uniform(random, -1, 1) * scale[static_cast<std::size_t>(i)] * scale[static_cast<std::size_t>(j)];
  });
}

inline std::vector<NamedFront> hard_fronts(Random& random, Index n, Index candidates) {
  std::vector<NamedFront> fronts;
  fronts.push_back({"positive definite", positive_definite(random, n)});
  fronts.push_back({"indefinite", random_symmetric(random, n)});
  fronts.push_back({"zero diagonal", zero_diagonal(random, n)});
  fronts.push_back({"arrow", arrow(random, n)});
  fronts.push_back({"integer of half rank", integer_of_half_rank(random, n)});
  fronts.push_back({"leading 1e-20", tiny_leading_diagonal(random, n, 1e-20)});
  fronts.push_back({"leading 2^-50", tiny_leading_diagonal(random, n, 0x1p-50)});
  fronts.push_back({"weak candidates", weak_candidates(random, n, candidates, 1e-6)});
  fronts.push_back({"hopeless candidates", weak_candidates(random, n, candidates, 1e-12)});
  fronts.push_back({"wild scales", wild(random, n)});
  return fronts;
}

}  // namespace stanchion::test
