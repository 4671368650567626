#include "diagnose/near_zero.hpp"

#include <algorithm>
#include <cmath>
#include <cstdint>
#include <utility>

#include "base/counter_random.hpp"
#include "base/ranges.hpp"
#include "numeric/block_columns.hpp"

namespace stanchion {
namespace {

constexpr int kMostRounds = 8;
/// A residual that rounding alone explains, and the relative accuracy asked of a value above that.
constexpr double kRoundingResidual = 3e-15, kRelativeResidual = 1e-4;
constexpr double kRoughResidual = 0.1;  ///< of the first pair behind the gap
constexpr double kGapInSight = 20;      ///< estimates from above only bring values closer together

double between_minus_one_and_one(std::uint64_t word) {
  return static_cast<double>(static_cast<std::int64_t>(word)) * 0x1p-63;
}

/// `start`, and random columns after it: for an iteration uniform numbers are as good as any, and cheap.
Columns filled_up(Columns start, Index rows, Index count, std::uint64_t seed, ThreadPool& pool) {
  Columns x(rows, count);
  const CounterRandom random(seed, 0x6c6f63617465ULL + static_cast<std::uint64_t>(start.count));
  const Index fresh = count - start.count;  // a multiple of eight
  for_ranges(pool, rows, kBlockRowsAPiece, [&](Offset begin, Offset end) {
    for (auto i = static_cast<Index>(begin); i < end; ++i) {
      double* row = x.row(i);
      if (start.count > 0) std::copy_n(start.row(i), start.count, row);
      const auto number = static_cast<std::uint64_t>(Offset{i} * fresh / 2);
      for (Index v = 0; v < fresh; v += 2) {
        const auto [first, second] = random.words(number + static_cast<std::uint64_t>(v / 2));
        row[start.count + v] = between_minus_one_and_one(first);
        row[start.count + v + 1] = between_minus_one_and_one(second);
      }
    }
  });
  return x;
}

/// Pairs of a part that must settle: up to the last gap in sight, or up to what may be zero.
std::size_t pairs_to_settle(const PartPairs& pairs, Index columns, const NearZeroOptions& options) {
  const std::vector<double>& value = pairs.ritz.value;
  std::size_t last = 0;
  for (std::size_t k = 0; k < value.size() && std::fabs(value[k]) <= options.wanted; ++k) {
    const bool gap = k + 1 < value.size() ? std::fabs(value[k + 1]) > kGapInSight * std::fabs(value[k])
                                          : pairs.used < columns;
    if (gap || std::fabs(value[k]) <= options.zero) last = k + 1;
  }
  return last;
}

/// The largest residual among pairs that must settle, over what is asked of it. The one behind them only has
/// to show how far away it is.
double open_residual(const NearZero& found, const NearZeroOptions& options) {
  double most = 0;
  for (const PartPairs& pairs : found.parts) {
    const std::size_t last = pairs_to_settle(pairs, found.x.count, options);
    for (std::size_t k = 0; k < std::min(last + 1, pairs.ritz.value.size()) && last > 0; ++k) {
      const double asked = (k == last ? kRoughResidual : kRelativeResidual) * std::fabs(pairs.ritz.value[k]);
      most = std::max(most, pairs.ritz.residual[k] / std::max(kRoundingResidual, asked));
    }
  }
  return most;
}

/// Parts share no row: each is one thread's work.
template <class Work>
void each_part(NearZero& found, ThreadPool& pool, const Work& work) {
  pool.run(static_cast<Offset>(found.parts.size()),
           [&](Offset part, int) { work(found.parts[static_cast<std::size_t>(part)]); });
}

void orthonormalise_all(const Structure& s, NearZero& found, LongVector<double>& scratch, ThreadPool& pool) {
  scratch.resize(found.x.values.size());
  each_part(found, pool, [&](PartPairs& pairs) {
    const Offset before = s.first_of_part[static_cast<std::size_t>(pairs.part)];
    pairs.used = orthonormalise(found.x, s.part(pairs.part), scratch.data() + before * found.x.count);
  });
}

void project_all(const Structure& s, NearZero& found, Columns& product, ThreadPool& pool) {
  each_part(found, pool, [&](PartPairs& pairs) {
    pairs.ritz = project(found.x, product, s.part(pairs.part), pairs.used, true);
  });
}

}  // namespace

bool any_told_apart(const NearZero& found, const NearZeroOptions& options) {
  for (const PartPairs& pairs : found.parts) {
    for (std::size_t k = 0; k < pairs.ritz.value.size(); ++k) {
      if (options.enough.holds(std::fabs(pairs.ritz.value[k]), pairs.ritz.residual[k])) return true;
    }
  }
  return false;
}

NearZero find_near_zero(const Structure& structure, const ShiftedMatrix& matrix, KeptFactor& factor,
                        const LocalMotions& motions, const NearZeroOptions& options, Columns start,
                        ThreadPool& pool) {
  NearZero found;
  found.x = filled_up(std::move(start), structure.rows, options.columns, options.seed, pool);
  LongVector<double> scratch;
  Columns product;
  for (Index part = 0; part < structure.parts; ++part) found.parts.push_back({part, 0, {}});
  remove(motions, structure, found.x);
  double before = INFINITY;
  for (int round = 1; round <= kMostRounds; ++round) {
    found.rounds = round;
    factor.solve(found.x);
    remove(motions, structure, found.x);
    orthonormalise_all(structure, found, scratch, pool);
    if (round == 1) continue;
    multiply(matrix, found.x, product, pool);
    project_all(structure, found, product, pool);
    found.cut_short = any_told_apart(found, options);
    if (found.cut_short) break;
    const double open = open_residual(found, options);
    // The second round settles that nothing is near zero; a residual that falls no more is rounding.
    if (open <= 1 || (round > 2 && !(open < before / 2))) break;
    before = open;
  }
  LongVector<double>().swap(scratch);
  multiply_extended(matrix, found.x, product, pool);
  project_all(structure, found, product, pool);
  return found;
}

}  // namespace stanchion
