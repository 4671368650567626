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

void append(std::vector<ResidualPair>& all, std::vector<ResidualPair> more) {
  for (ResidualPair& pair : more) all.push_back(std::move(pair));
}

double worst(const std::vector<ResidualPair>& pairs) {
  double most = 0;
  for (const ResidualPair& pair : pairs) most = std::max(most, pair.radius / std::fabs(pair.theta));
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
  const Offset doubles = Offset{order} * (most + 2 * wanted + 8 * kV);
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
  while (found.leading < found.list.size() && found.list[found.leading].close) ++found.leading;
  return found;
}

double ModeSearch::largest() {
  const std::vector<RitzValue>& all = lanczos_->ritz_values();
  return all.empty() ? 0 : std::fabs(all.front().value);
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
    next_look = lanczos_->steps() + std::max<Index>(2, lanczos_->columns() / 100);  // a look costs columns^3
  }
}

Result<std::vector<ResidualPair>> ModeSearch::pairs_of(const std::vector<Candidate>& list, std::size_t many) {
  std::vector<ResidualPair> pairs;
  constexpr auto kV = static_cast<std::size_t>(kBlockVectors);
  for (std::size_t first = 0; first < many; first += kV) {
    if (interrupted()) return Status::interrupted();
    std::vector<RitzValue> chosen;
    for (std::size_t k = first; k < std::min(first + kV, many); ++k) chosen.push_back(list[k].ritz);
    append(pairs, residual_pairs(base_.base, base_.second, lanczos_->vectors(chosen),
                                 static_cast<Index>(chosen.size())));
  }
  // A step of inverse iteration towards the largest would lead away from values inside.
  if (!centre_ && !pairs.empty() && worst(pairs) > request_.bracket.width / 3) refine(pairs);
  return pairs;
}

void ModeSearch::refine(std::vector<ResidualPair>& pairs) {
  constexpr auto kV = static_cast<std::size_t>(kBlockVectors);
  for (const ResidualPair& pair : pairs) {
    if (!(std::fabs(pair.theta) > 0) || !std::isfinite(pair.radius)) return;
  }
  const auto better = refined_coordinates(base_.base, base_.second, pairs);
  std::vector<ResidualPair> fresh;
  const std::size_t rows = better.empty() ? 0 : better.front().size();
  for (std::size_t first = 0; first < better.size(); first += kV) {
    const std::size_t count = std::min(kV, better.size() - first);
    std::vector<double> block(rows * kV, 0.0);
    for (std::size_t v = 0; v < count; ++v) {
      for (std::size_t i = 0; i < rows; ++i) block[i * kV + v] = better[first + v][i];
    }
    append(fresh, residual_pairs(base_.base, base_.second, block, static_cast<Index>(count)));
  }
  if (worst(fresh) < worst(pairs)) pairs = std::move(fresh);
}

}  // namespace stanchion
