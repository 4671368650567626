#include "model/claim_intervals.hpp"

#include <fmt/format.h>

#include <string>

namespace stanchion {
namespace {

/// Least and most number of eigenvalues between two shifts, from the counts at both.
struct Between {
  Offset least = 0, most = 0;
};

bool counts_from_zero(const ShiftCount& count) {
  return count.meaning.find(" between ") != std::string::npos;
}

bool counts_directions(const ShiftCount& count) {
  return count.meaning.find("negative directions") != std::string::npos;
}

Between between(const ShiftCount& low, const ShiftCount& high) {
  const auto [low_least, low_most] = low.below_range;
  const auto [high_least, high_most] = high.below_range;
  if (counts_from_zero(low) && low.shift < 0) {
    if (high.shift > 0) return {Offset{low_least} + high_least, Offset{low_most} + high_most};
    return {Offset{low_least} - high_most, Offset{low_most} - high_least};
  }
  return {Offset{high_least} - low_most, Offset{high_most} - low_least};
}

/// Width of a band over the resolution and error it comes from: a property of the pencil, nearly the same on
/// every path.
std::optional<double> relative_width(const ShiftCount& count) {
  const Certificate& certificate = count.certificate;
  if (!count.holds_outside || !certificate.resolution || !certificate.error_bound) return std::nullopt;
  const double reach = *certificate.resolution + *certificate.error_bound;
  return (count.holds_outside->second - count.holds_outside->first) / reach;
}

bool band_follows(const ShiftCount& claimed, const ShiftCount& found) {
  constexpr double kAlike =
      0.5;  // the bound on M or K that the width rests on differs a little from path to path
  const auto [low, high] = *claimed.holds_outside;
  const auto own = relative_width(claimed), other = relative_width(found);
  return low < claimed.shift && claimed.shift < high && own && other && *own >= kAlike * *other;
}

Index spread(const ShiftCount& count) {
  return count.below_range.second - count.below_range.first;
}

ClaimComparison result(Agreement agreement, std::string why) {
  return {{}, agreement, {}, {}, std::move(why)};
}

/// No eigenvalue inside, it is said.
ClaimComparison judge_empty(const ShiftCount& claimed, const Between& inside) {
  const double radius = *claimed.no_eigenvalue_within;
  const bool directions = counts_directions(claimed);
  if (inside.least > 0 || (directions && inside.most < 0)) {
    return result(Agreement::kContradicted,
                  fmt::format("an eigenvalue lies within {} of the shift, against the certificate", radius));
  }
  if (inside.most == 0 && !directions) return result(Agreement::kAgreed, {});
  return result(Agreement::kNotRepeated,
                fmt::format("that no eigenvalue lies within {} the second path cannot tell", radius));
}

/// As many eigenvalues inside as the count leaves open, it is said.
ClaimComparison judge_band(const ShiftCount& claimed, const Between& inside) {
  if (inside.most < spread(claimed)) {
    return result(Agreement::kContradicted,
                  "the interval around the shift holds fewer eigenvalues than the count leaves open");
  }
  if (inside.least >= spread(claimed)) return result(Agreement::kAgreed, {});
  return result(Agreement::kNotRepeated,
                "how many eigenvalues the interval around the shift holds the second path cannot tell");
}

}  // namespace

std::optional<std::pair<double, double>> open_interval(const ShiftCount& claimed, const ShiftCount& found) {
  if (claimed.no_eigenvalue_within && !(found.no_eigenvalue_within >= claimed.no_eigenvalue_within)) {
    const double inside = *claimed.no_eigenvalue_within * (1 - 0x1p-40);
    return std::pair{claimed.shift - inside, claimed.shift + inside};
  }
  if (claimed.holds_outside && spread(claimed) > 0 && !band_follows(claimed, found))
    return claimed.holds_outside;
  return std::nullopt;
}

ClaimComparison compare_intervals(const ShiftCount& claimed, const ShiftCount& found, const ShiftCount* low,
                                  const ShiftCount* high) {
  if (!open_interval(claimed, found)) return result(Agreement::kAgreed, {});
  const bool looked = low != nullptr && high != nullptr && low->certificate.level != Level::kNone &&
                      high->certificate.level != Level::kNone;
  if (!looked || !(low->shift < claimed.shift && claimed.shift < high->shift)) {
    return result(Agreement::kNotRepeated,
                  "what is said of the interval around the shift the second path does not show");
  }
  const Between inside = between(*low, *high);
  return claimed.no_eigenvalue_within ? judge_empty(claimed, inside) : judge_band(claimed, inside);
}

}  // namespace stanchion
