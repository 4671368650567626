#include "model/claim_radius.hpp"

#include <fmt/format.h>

#include <cstdlib>
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

}  // namespace

bool needs_ends(const ShiftCount& claimed, const ShiftCount& found) {
  return claimed.no_eigenvalue_within && !(found.no_eigenvalue_within >= claimed.no_eigenvalue_within);
}

ClaimComparison compare_radius(const ShiftCount& claimed, const ShiftCount& found, const ShiftCount* low,
                               const ShiftCount* high) {
  if (!needs_ends(claimed, found)) return {{}, Agreement::kAgreed, {}, {}, {}};
  const auto result = [](Agreement agreement, std::string why) {
    return ClaimComparison{{}, agreement, {}, {}, std::move(why)};
  };
  const double radius = *claimed.no_eigenvalue_within;
  const bool looked = low != nullptr && high != nullptr && low->certificate.level != Level::kNone &&
                      high->certificate.level != Level::kNone;
  if (!looked || !(low->shift < claimed.shift && claimed.shift < high->shift)) {
    return result(Agreement::kNotRepeated,
                  fmt::format("that no eigenvalue lies within {} the second path does not show", radius));
  }
  const Between inside = between(*low, *high);
  const bool some = counts_directions(claimed) ? inside.least > 0 || inside.most < 0 : inside.least > 0;
  if (some) {
    return result(Agreement::kContradicted,
                  fmt::format("an eigenvalue lies within {} of the shift, against the certificate", radius));
  }
  if (inside.most == 0 && !counts_directions(claimed)) return result(Agreement::kAgreed, {});
  return result(Agreement::kNotRepeated,
                fmt::format("that no eigenvalue lies within {} the second path cannot tell", radius));
}

}  // namespace stanchion
