#include "diagnose/near_choice.hpp"

#include <algorithm>
#include <cmath>
#include <utility>

namespace stanchion {
namespace {

constexpr Index kMostColumns = 64;                ///< vectors of one part that are looked at together
constexpr Index kSpareColumns = 2;                ///< to see what lies behind the wanted ones
constexpr Index kFullOfWeak = 3 * kBlockVectors;  ///< so many are tried to see behind weak ones
/// A direction is told from the rest of the spectrum when the next one is so many times larger.
constexpr double kGap = 100;
constexpr double kSharpenAbove = 8;  ///< a resolution this many times its bound can be made smaller

bool full_of_weak(const Evidence& e) {
  for (const PartPairs& pairs : e.near.parts) {
    if (pairs.used < e.near.x.count || pairs.used == 0) continue;
    if (std::fabs(pairs.ritz.value.back()) < e.in.options.weak_below) return true;
  }
  return false;
}

/// Positive values below the level, up to the last gap behind which the rest begins.
void choose_weak(const Evidence& e, const Ritz& ritz, std::size_t begin, bool exhausted, PartChoice& choice) {
  std::size_t last = begin;
  for (std::size_t k = begin; k < ritz.value.size(); ++k) {
    const double value = ritz.value[k];
    if (!(value < e.in.options.weak_below) || value < 0) break;
    const bool settled = ritz.residual[k] < 0.1 * value;
    if (!settled) break;
    const bool gap =
        k + 1 < ritz.value.size() ? std::fabs(ritz.value[k + 1]) > kGap * value : exhausted && begin == 0;
    if (gap) last = k + 1;
  }
  for (std::size_t k = begin; k < last; ++k) choice.weak.push_back(static_cast<Index>(k));
}

}  // namespace

Index most_near_columns(Index zero) {
  return std::max(kFullOfWeak, whole_blocks(std::min(zero + kSpareColumns, kMostColumns)));
}

bool look_near_zero(Evidence& e) {
  const Index left = e.inertia.zero - e.motions.count();
  NearZeroOptions options;
  options.columns = whole_blocks(std::min(std::max<Index>(left, 0) + kSpareColumns, kMostColumns));
  options.wanted = std::max(e.in.options.weak_below, 2 * e.resolution);
  options.zero = 2 * e.resolution;
  options.seed = e.in.seed;
  const bool sharper = e.in.may_sharpen && e.inertia.zero > 0 && e.resolution > kSharpenAbove * e.bound();
  if (sharper) options.enough = {kSharpenAbove * e.bound(), e.resolution};
  for (;;) {
    Columns start = std::move(e.near.x);
    e.near = find_near_zero(e.s, e.in.matrix, e.factor, e.motions, options, std::move(start), e.pool);
    if (any_told_apart(e.near, options)) return true;
    if (e.near.cut_short) {  // by what extended precision does not bear out
      options.enough = {};
      continue;
    }
    // Weak directions that fill all columns of a part hide whether they stand apart.
    if (options.columns >= kFullOfWeak || !full_of_weak(e)) return false;
    options.columns += kBlockVectors;
  }
}

void choose_zero_and_weak(Evidence& e) {
  e.choice.resize(static_cast<std::size_t>(e.s.parts));
  for (const PartPairs& pairs : e.near.parts) {
    PartChoice& choice = e.choice[static_cast<std::size_t>(pairs.part)];
    const Ritz& ritz = pairs.ritz;
    const std::size_t n = ritz.value.size();
    std::size_t k = 0;
    double most = 0;
    for (; k < n && std::fabs(ritz.value[k]) <= e.resolution; ++k) {
      choice.zero.push_back(static_cast<Index>(k));
      most = std::max(most, std::fabs(ritz.value[k]) + ritz.residual[k]);
    }
    // Membership is certain when the next eigenvalue is far away, or there is none.
    const bool exhausted = n < static_cast<std::size_t>(e.near.x.count);
    if (!choice.zero.empty()) {
      const bool apart = k < n ? std::fabs(ritz.value[k]) - ritz.residual[k] > kGap * most : exhausted;
      // The vectors found are null vectors as far as double precision can tell.
      choice.zero_certain =
          apart && std::all_of(ritz.residual.begin(), ritz.residual.begin() + static_cast<std::ptrdiff_t>(k),
                               [&](double r) { return r <= e.resolution; });
    }
    choose_weak(e, ritz, k, exhausted, choice);
  }
}

}  // namespace stanchion
