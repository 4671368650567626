#include "diagnose/local_accuracy.hpp"

#include <fmt/format.h>

#include <algorithm>
#include <cmath>
#include <numeric>
#include <tuple>

#include "base/counter_random.hpp"
#include "base/ranges.hpp"
#include "diagnose/held_motions.hpp"
#include "diagnose/shares.hpp"
#include "model/numbers.hpp"
#include "numeric/block_columns.hpp"

namespace stanchion {
namespace {

constexpr Index kVectors = 32;

struct PartsJudged {
  std::vector<char> judged;                       ///< by part
  Index negative = 0, open = 0, constrained = 0;  ///< equations left out, by the reason
};

PartsJudged parts_to_judge(const Evidence& e) {
  const auto parts = static_cast<std::size_t>(e.s.parts);
  PartsJudged result{std::vector<char>(parts, 1)};
  std::vector<Index> below =
      e.factor.negative_pivots(e.s.parts, [&](Index row) { return e.part_of_row(row); });
  std::vector<char> constrained(parts, 0);
  for (Index row = 0; row < e.s.rows; ++row) {
    if (e.is_multiplier(row)) constrained[static_cast<std::size_t>(e.part_of_row(row))] = 1;
  }
  // The factor is that of A - cI: the zero directions of a part count as negative there.
  for (const NodeMotion& motion : e.motions.of_nodes)
    --below[static_cast<std::size_t>(e.s.part_of[static_cast<std::size_t>(motion.node)])];
  for (const RepeatedConstraint& motion : e.motions.of_constraints)
    --below[static_cast<std::size_t>(e.part_of_row(motion.rows.front()))];
  for (std::size_t part = 0; part < parts; ++part) {
    const PartChoice& choice = e.choice[part];
    const bool negative = below[part] > static_cast<Index>(choice.zero.size());
    const bool open = !choice.zero_certain || below[part] < static_cast<Index>(choice.zero.size());
    if (!constrained[part] && !negative && !open) continue;
    result.judged[part] = 0;
    (constrained[part] ? result.constrained
     : negative        ? result.negative
                       : result.open) += e.s.part_rows[part];
  }
  return result;
}

/// The digits of every position; -1 for parts that are not judged.
std::vector<double> estimate(Evidence& e, const std::vector<char>& judged, const HeldMotions& held) {
  std::vector<double> sum(static_cast<std::size_t>(e.s.rows), 0.0);
  Columns w(e.s.rows, kBlockVectors);
  const auto for_rows = [&](const auto& work) {
    for_ranges(e.pool, e.s.rows, kBlockRowsAPiece, [&](Offset begin, Offset end) {
      for (auto i = static_cast<Index>(begin); i < end; ++i) work(i, w.row(i));
    });
  };
  for (Index done = 0; done < kVectors; done += kBlockVectors) {
    const CounterRandom random(e.in.seed, 0x616363757261ULL + static_cast<std::uint64_t>(done));
    for_rows([&](Index i, double* row) {
      const auto number = static_cast<std::uint64_t>(Offset{i} * kBlockVectors / 2);
      for (Index v = 0; v < kBlockVectors; v += 2)
        std::tie(row[v], row[v + 1]) = random.gaussians(number + static_cast<std::uint64_t>(v / 2));
    });
    e.factor.half_solve(w);
    held.apply(w);
    for_rows([&](Index i, const double* row) {
      for (Index v = 0; v < kBlockVectors; ++v) sum[static_cast<std::size_t>(i)] += row[v] * row[v];
    });
  }
  for (std::size_t i = 0; i < sum.size(); ++i) {
    // k_ii (K^-1)_ii is at least 1 for a positive definite matrix.
    const bool part_judged = judged[static_cast<std::size_t>(e.part_of_row(static_cast<Index>(i)))] != 0;
    sum[i] = part_judged ? std::log10(std::max(1.0, e.s.diagonal[i] * sum[i] / kVectors)) : -1;
  }
  return sum;
}

std::string note_of(const PartsJudged& parts, std::size_t held) {
  std::string note;
  const auto add = [&note](const std::string& text) { note += (note.empty() ? "" : " ") + text; };
  if (held > 0) {
    add(fmt::format(
        "{} at one equation that it moves: along a zero direction no digit is left, and the figures are "
        "those of the structure so held.",
        held == 1
            ? "The zero direction is held for this,"
            : fmt::format("{} zero directions are held for this, each", grouped(static_cast<Offset>(held)))));
  }
  if (parts.negative > 0) {
    add(fmt::format(
        "{} equations have no figure: their parts have negative directions, and the measure has a "
        "meaning for a definite matrix only. Clear those causes and ask again.",
        grouped(parts.negative)));
  }
  if (parts.open > 0) {
    add(fmt::format(
        "{} equations have no figure: their parts have directions that are not told apart from zero.",
        grouped(parts.open)));
  }
  if (parts.constrained > 0) {
    add(fmt::format(
        "{} equations have no figure: multipliers make the matrix of their parts indefinite, and the "
        "measure has a meaning for a definite one only. Eliminating the constraints from the model "
        "gives the figures.",
        grouped(parts.constrained)));
  }
  return note;
}

}  // namespace

void judge_local_accuracy(Evidence& e) {
  const PartsJudged parts = parts_to_judge(e);
  const bool any = std::any_of(parts.judged.begin(), parts.judged.end(), [](char j) { return j != 0; });
  if (!any) {
    e.out.accuracy_note = note_of(parts, 0);
    return;
  }
  const HeldMotions held(e, parts.judged);
  const std::vector<double> digits = estimate(e, parts.judged, held);
  e.out.accuracy_note = note_of(parts, held.rows().size());
  LocalAccuracy accuracy;
  accuracy.method = "estimated with Gaussian vectors";
  accuracy.vectors = kVectors;
  accuracy.attention = e.in.options.attention_digits;
  accuracy.alarm = e.in.options.alarm_digits;
  std::vector<Index> rows;
  std::vector<double> sorted;
  for (Index row = 0; row < e.s.rows; ++row) {
    const double d = digits[static_cast<std::size_t>(row)];
    if (d < 0) continue;
    rows.push_back(row);
    sorted.push_back(d);
  }
  if (rows.empty()) return;
  accuracy.equations = static_cast<Index>(rows.size());
  accuracy.worst = ranked(e.s, rows, sorted, kShownShares);
  std::sort(sorted.begin(), sorted.end());
  accuracy.typical = sorted[sorted.size() / 2];
  accuracy.largest = sorted.back();
  const auto bins = static_cast<std::size_t>(std::floor(2 * accuracy.largest)) + 1;
  for (std::size_t b = 0; b < bins; ++b) accuracy.histogram.emplace_back(0.5 * static_cast<double>(b), 0);
  for (const double d : sorted) ++accuracy.histogram[static_cast<std::size_t>(std::floor(2 * d))].second;
  accuracy.held_directions = static_cast<Index>(held.rows().size());
  for (std::size_t k = 0; k < std::min(held.rows().size(), kShownShares); ++k)
    accuracy.held.push_back(ranked(e.s, {held.rows()[k]}, {1.0}, 1).front());
  accuracy.by_node.assign(e.picture.picture.node.size(), -1);
  for (Index row = 0; row < e.s.rows; ++row) {
    const Index at = e.picture.at_node[static_cast<std::size_t>(e.s.node_of[static_cast<std::size_t>(row)])];
    if (at < 0) continue;
    float& most = accuracy.by_node[static_cast<std::size_t>(at)];
    most = std::max(most, static_cast<float>(digits[static_cast<std::size_t>(row)]));
  }
  e.out.accuracy = std::move(accuracy);
}

}  // namespace stanchion
