#include "model/claim_facts.hpp"

#include <algorithm>
#include <cmath>
#include <limits>

namespace stanchion {
namespace {

constexpr double kInfinity = std::numeric_limits<double>::infinity();

/// c - e and c + e, rounded outwards.
double below(double offset, double error) {
  return std::nextafter(offset - error, -kInfinity);
}
double above(double offset, double error) {
  return std::nextafter(offset + error, kInfinity);
}

}  // namespace

Facts facts_of_runs(const Certificate& certificate) {
  Facts facts;
  for (const OffsetRun& run : certificate.runs) {
    if (!run.error_bound) continue;
    facts.least.push_back({above(run.offset, *run.error_bound), run.negative});
    facts.most.push_back({below(run.offset, *run.error_bound), run.negative});
  }
  return facts;
}

Facts facts_of_inertia(const Inertia& inertia, const Certificate& certificate, Index rows, bool signs_only) {
  Facts facts{{{0, inertia.negative}}, {{0, Offset{rows} - inertia.positive}}};
  if (signs_only || inertia.zero == 0 || !certificate.resolution) return facts;
  const double reach = above(*certificate.resolution, certificate.error_bound.value_or(0));
  facts.least.push_back({reach, Offset{inertia.negative} + inertia.zero});
  facts.most.push_back({-reach, Offset{rows} - inertia.positive - inertia.zero});
  return facts;
}

void append(Facts& facts, const Facts& more) {
  facts.least.insert(facts.least.end(), more.least.begin(), more.least.end());
  facts.most.insert(facts.most.end(), more.most.begin(), more.most.end());
}

bool cannot_both_be_true(const Facts& one, const Facts& other) {
  const auto clash = [](const std::vector<Fact>& least, const std::vector<Fact>& most) {
    return std::any_of(least.begin(), least.end(), [&](const Fact& a) {
      return std::any_of(most.begin(), most.end(),
                         [&](const Fact& b) { return a.at <= b.at && a.count > b.count; });
    });
  };
  return clash(one.least, other.most) || clash(other.least, one.most);
}

}  // namespace stanchion
