#include "engine/mode_search.hpp"

#include <algorithm>
#include <cmath>

#include "base/counter_random.hpp"
#include "engine/host.hpp"

namespace stanchion {
namespace {

/// Values this far below the largest are rounding, not values.
constexpr double kNoise = 1e-13;
/// What is left of the closeness inside the spectrum, where residuals weigh more than at its end.
constexpr double kInside = 1e-3;
/// Thetas stand apart when their gap is that many times their residuals; so many may be one group.
constexpr double kApart = 4;
constexpr std::size_t kMostTogether = 16;
/// Values are a crowd when they lie within this part of the lowest, apart from clusters.
constexpr double kCrowd = 0.1, kCluster = 1e-5;
/// Steps before that is looked at, and one more for four values: most models need no more.
constexpr Index kPatience = 16;

void append(std::vector<ResidualPair>& all, std::vector<ResidualPair> more) {
  for (ResidualPair& pair : more) all.push_back(std::move(pair));
}

double worst(const std::vector<ResidualPair>& pairs) {
  double most = 0;
  for (const ResidualPair& pair : pairs) most = std::max(most, pair.radius / std::fabs(pair.theta));
  return most;
}

struct Estimate {
  double theta = 0, residual = 0;
  std::size_t number = 0;
};

/// How far from its value each theta is expected to be: by its residual, or, for groups that stand apart, by
/// its spread and the square of the residual over the gap beside it. Estimates; `sharpen` proves.
std::vector<double> expected_errors(std::vector<Estimate> all, double apart) {
  std::vector<double> errors(all.size());
  std::sort(all.begin(), all.end(), [](const Estimate& a, const Estimate& b) { return a.theta < b.theta; });
  const auto meet = [&](const Estimate& a, const Estimate& b) {
    const double gap = b.theta - a.theta;
    return gap < kApart * (a.residual + b.residual) || gap < apart * std::fabs(b.theta);
  };
  for (std::size_t first = 0, end = 0; first < all.size(); first = end) {
    double squares = 0;
    for (end = first; end < all.size() && (end == first || meet(all[end - 1], all[end])); ++end)
      squares += all[end].residual * all[end].residual;
    const double below = first > 0 ? all[first].theta - all[first - 1].theta : INFINITY;
    const double above = end < all.size() ? all[end].theta - all[end - 1].theta : INFINITY;
    const double spread = (all[end - 1].theta - all[first].theta) / 2;
    const double together = spread + squares / std::min(below, above);
    for (std::size_t k = first; k < end; ++k)
      errors[all[k].number] = std::min(all[k].residual, end - first > kMostTogether ? INFINITY : together);
  }
  return errors;
}

/// The same for pairs, relative to their thetas: the worst.
double worst_expected(const std::vector<ResidualPair>& pairs, double apart) {
  std::vector<Estimate> all;
  for (std::size_t p = 0; p < pairs.size(); ++p) all.push_back({pairs[p].theta, pairs[p].radius, p});
  const std::vector<double> errors = expected_errors(all, apart);
  double most = 0;
  for (std::size_t p = 0; p < pairs.size(); ++p) most = std::max(most, errors[p] / std::fabs(pairs[p].theta));
  return most;
}

}  // namespace

ModeSearch::ModeSearch(PencilCounter& counter, SpectralBase& base, const Request& request,
                       const RunContext& context, ThreadPool& pool, Outcome& outcome)
    : counter_(counter),
      base_(base),
      request_(request),
      context_(context),
      pool_(pool),
      outcome_(outcome),
      rows_(base.second) {}

bool ModeSearch::interrupted() const {
  return context_.cancel != nullptr && context_.cancel->cancelled();
}

double ModeSearch::closeness() const {
  return 0.1 * request_.bracket.width * (centre_ ? kInside : 1);
}

/// Intervals may be sharpened by gaps: not inside the spectrum, where the pairs are of the inverse at a
/// shift, and not where the shapes themselves are asked for, whose error falls with the residual only.
bool ModeSearch::squares() const {
  return !strict_ && !centre_ && !request_.bracket.want_modes;
}

bool ModeSearch::look_closer() {
  if (squares()) {
    strict_ = true;
    return true;
  }
  if (lanczos_->whole()) return false;
  lanczos_->inject();
  return true;
}

void ModeSearch::start(Index wanted, const KeptValues& keep) {
  centre_.reset();
  inverse_.reset();
  make_space(
      [this](double* block) {  // M^-1 C M^-T
        base_.base.transposed_solve(block);
        rows_.times(block, work_.data(), pool_);
        std::copy(work_.begin(), work_.end(), block);
        base_.base.solve(block);
      },
      wanted, keep);
}

/// With B = M M^T: M^T (C - theta_0 B)^-1 M = (M^-1 C M^-T - theta_0)^-1. Products with M are left to B and
/// the solves: M^T = M^-1 B, M = B M^-T. C - theta_0 B is -theta_0 (K - sigma M), or theta_0 times minus
/// K + sigma G, sigma the value of theta_0. The middle of the range is that of the thetas, so that those
/// inside are the nearest.
Result<bool> ModeSearch::start_inside(double from, double to, Index wanted) {
  const double low = base_.theta_of(from), high = base_.theta_of(to);
  const double width = std::fabs(high - low);
  inverse_.reset();
  centre_.reset();
  double theta = 0;
  for (const double part : {0.0, 0.01, -0.02}) {  // a value may lie in the middle itself
    theta = low + (high - low) / 2 + part * width;
    auto made = counter_.pencil().shifted_inverse(counter_.factor_of(base_.shift_of(theta)), pool_, outcome_);
    if (!made.ok()) return made.status();
    inverse_ = std::move(*made);
    if (inverse_) break;
  }
  if (!inverse_) return false;
  centre_ = theta;
  if (!energy_) energy_.emplace(base_.base.matrix());
  make_space(
      [this](double* block) {
        base_.base.transposed_solve(block);
        energy_->times(block, work_.data(), pool_);
        std::copy(work_.begin(), work_.end(), block);
        inverse_->solve(block);
        energy_->times(block, work_.data(), pool_);
        const double scale = -1 / *centre_;
        for (std::size_t k = 0; k < work_.size(); ++k) block[k] = scale * work_[k];
        base_.base.solve(block);
      },
      wanted, {wanted + kBlockVectors, wanted + kBlockVectors});
  return true;
}

void ModeSearch::make_space(BlockLanczos::Operator apply, Index wanted, const KeptValues& keep) {
  constexpr Index kV = kBlockVectors;
  wanted_ = wanted;
  leading_ = 0;
  keep_ = keep;
  const Index order = rows_.rows();
  work_.resize(static_cast<std::size_t>(order) * static_cast<std::size_t>(kV));
  lanczos_.reset();
  const Offset room = counter_.pencil().free_bytes() / 2 / (Offset{order} * Offset{sizeof(double)} + 1);
  Offset most = std::max<Offset>(16 * kV, (5 * Offset{wanted} / 2 + 8 * kV + kV - 1) / kV * kV);
  most =
      std::min({most, std::max<Offset>(room / kV * kV, 6 * kV), std::max<Offset>(order / kV * kV, 6 * kV)});
  // The basis, vectors and work blocks, and the factor that a count at an end, or the shift inside, keeps
  // beside the base's.
  const Offset doubles = Offset{order} * (most + 3 * wanted + 8 * kV);
  outcome_.memory.forecast =
      std::max(outcome_.memory.forecast,
               resident_bytes() + with_allowance(doubles * Offset{sizeof(double)} +
                                                 counter_.pencil().analysis().forecast.peak_bytes_solve));
  lanczos_.emplace(std::move(apply), order, static_cast<Index>(most),
                   CounterRandom::combine(counter_.pencil().seed(), 0x5c31), pool_);
}

Candidates ModeSearch::candidates(Side side) {
  Candidates found;
  const std::vector<RitzValue>& all = lanczos_->ritz_values();
  if (all.empty()) return found;
  const double noise = kNoise * std::fabs(all.front().value);
  for (const RitzValue& ritz : all) {
    if (!(std::fabs(ritz.value) > noise)) continue;
    const double theta = centre_ ? *centre_ + 1 / ritz.value : ritz.value;
    if (!centre_ && side != Side::kBoth && (side == Side::kPositive) != (theta > 0)) continue;
    found.list.push_back({ritz, theta, ritz.residual <= closeness() * std::fabs(ritz.value)});
  }
  if (squares()) {
    std::vector<Estimate> estimates;
    for (std::size_t k = 0; k < found.list.size(); ++k)
      estimates.push_back({found.list[k].theta, found.list[k].ritz.residual, k});
    const std::vector<double> errors = expected_errors(std::move(estimates), closeness());
    for (std::size_t k = 0; k < found.list.size(); ++k) {
      Candidate& candidate = found.list[k];
      candidate.close = candidate.close || errors[k] <= closeness() * std::fabs(candidate.theta);
    }
  }
  while (found.leading < found.list.size() && found.list[found.leading].close) ++found.leading;
  leading_ = found.leading;
  return found;
}

bool ModeSearch::crowded(const Candidates& found, std::size_t wanted) const {
  if (wanted < 2 || found.list.size() < wanted || found.leading >= wanted / 2) return false;
  if (lanczos_->steps() < kPatience + static_cast<Index>(wanted) / 4) return false;
  const Candidate &first = found.list.front(), &last = found.list[wanted - 1];
  const double width = 1 - std::fabs(last.theta / first.theta);
  return width > kCluster && width < kCrowd && first.ritz.residual < 0.1 * width * std::fabs(first.theta);
}

bool ModeSearch::room_for_factor() const {
  const Offset vectors = Offset{rows_.rows()} * lanczos_->columns() * Offset{sizeof(double)};
  return counter_.pencil().analysis().forecast.peak_bytes_solve <= counter_.pencil().free_bytes() + vectors;
}

double ModeSearch::largest() {
  const std::vector<RitzValue>& all = lanczos_->ritz_values();
  return all.empty() ? 0 : std::fabs(all.front().value);
}

/// A look costs columns^3, and a step too many the time of a solve: near the end every step is looked at.
Index ModeSearch::steps_to_next_look() const {
  if (2 * leading_ > static_cast<std::size_t>(wanted_)) return 1;
  return std::max<Index>(2, lanczos_->columns() / 100);
}

Result<bool> ModeSearch::iterate(const std::function<bool()>& enough) {
  const Index most_steps = lanczos_->steps() + 40 + wanted_;
  Index next_look = lanczos_->steps() + std::max<Index>(3, wanted_ / kBlockVectors);
  for (;;) {
    if (interrupted()) return Status::interrupted();
    const bool more = lanczos_->steps() < most_steps && lanczos_->step(keep_);
    if (context_.progress)
      context_.progress("modes", std::min(1.0, lanczos_->steps() / (6.0 + wanted_ / 3.0)));
    if (more && lanczos_->steps() < next_look) continue;
    if (enough()) return true;
    if (!more) return false;
    next_look = lanczos_->steps() + steps_to_next_look();
  }
}

Result<std::vector<ResidualPair>> ModeSearch::pairs_of(const std::vector<Candidate>& list, std::size_t many) {
  std::vector<ResidualPair> pairs;
  ResidualWork work(base_.base, base_.second, request_.bracket.want_modes);
  constexpr auto kV = static_cast<std::size_t>(kBlockVectors);
  for (std::size_t first = 0; first < many; first += kV) {
    if (interrupted()) return Status::interrupted();
    std::vector<RitzValue> chosen;
    for (std::size_t k = first; k < std::min(first + kV, many); ++k) chosen.push_back(list[k].ritz);
    lanczos_->vectors(chosen, work_);
    append(pairs, work.pairs(work_, static_cast<Index>(chosen.size())));
  }
  // A step of inverse iteration towards the largest would lead away from values inside.
  const double expected = squares() ? worst_expected(pairs, closeness()) : worst(pairs);
  if (!centre_ && !pairs.empty() && expected > request_.bracket.width / 3) refine(work, pairs);
  return pairs;
}

void ModeSearch::refine(ResidualWork& work, std::vector<ResidualPair>& pairs) {
  constexpr auto kV = static_cast<std::size_t>(kBlockVectors);
  for (const ResidualPair& pair : pairs) {
    if (!(std::fabs(pair.theta) > 0) || !std::isfinite(pair.radius)) return;
  }
  const auto better = work.refined_coordinates(pairs);
  std::vector<ResidualPair> fresh;
  const std::size_t rows = better.empty() ? 0 : better.front().size();
  for (std::size_t first = 0; first < better.size(); first += kV) {
    const std::size_t count = std::min(kV, better.size() - first);
    std::vector<double> block(rows * kV, 0.0);
    for (std::size_t v = 0; v < count; ++v) {
      for (std::size_t i = 0; i < rows; ++i) block[i * kV + v] = better[first + v][i];
    }
    append(fresh, work.pairs(block, static_cast<Index>(count)));
  }
  if (worst(fresh) < worst(pairs)) pairs = std::move(fresh);
}

}  // namespace stanchion
