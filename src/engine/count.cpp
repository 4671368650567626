#include <algorithm>
#include <cmath>
#include <cstdio>

#include "base/clock.hpp"
#include "engine/prepared_pencil.hpp"

namespace stanchion {
namespace {

std::string number(double value) {
  char text[32];
  std::snprintf(text, sizeof(text), "%.10g", value);
  return text;
}

/// Rows where M is entirely absent, when M is diagonal; nothing when M has off-diagonal entries.
struct MassFacts {
  bool diagonal = true;
  bool non_negative = true;  ///< of the diagonal
  std::vector<Index> massless;
};

MassFacts inspect_mass(const SymmetricMatrix& mass) {
  MassFacts facts;
  std::vector<char> present(static_cast<std::size_t>(mass.rows), 0);
  for (Index j = 0; j < mass.rows; ++j) {
    for (Offset k = mass.column_start[j]; k < mass.column_start[Offset{j} + 1]; ++k) {
      if (mass.value[k] == 0) continue;
      present[static_cast<std::size_t>(j)] = present[static_cast<std::size_t>(mass.row[k])] = 1;
      if (mass.row[k] != j) {
        facts.diagonal = false;
      } else if (mass.value[k] < 0) {
        facts.non_negative = false;
      }
    }
  }
  for (Index i = 0; i < mass.rows; ++i) {
    if (!present[static_cast<std::size_t>(i)]) facts.massless.push_back(i);
  }
  return facts;
}

/// The rows and columns `keep` of a matrix.
SymmetricMatrix principal_submatrix(const SymmetricMatrix& matrix, const std::vector<Index>& keep) {
  std::vector<Index> number_of(static_cast<std::size_t>(matrix.rows), -1);
  for (std::size_t i = 0; i < keep.size(); ++i) number_of[static_cast<std::size_t>(keep[i])] = static_cast<Index>(i);
  std::vector<Triplet> entries;
  for (const Index j : keep) {
    for (Offset k = matrix.column_start[j]; k < matrix.column_start[Offset{j} + 1]; ++k) {
      const Index i = number_of[static_cast<std::size_t>(matrix.row[k])];
      if (i >= 0) entries.push_back({i, number_of[static_cast<std::size_t>(j)], matrix.value[k]});
    }
  }
  return from_triplets(static_cast<Index>(keep.size()), entries);
}

class Counter {
 public:
  Counter(const Request& request, const RunContext& context, ThreadPool& pool, Outcome outcome)
      : request_(request), context_(context), pool_(pool), outcome_(std::move(outcome)) {}

  Result<Outcome> run(ModelInput model) {
    outcome_.count.emplace();
    if (request_.pencil == Pencil::kMass) {
      if (Status status = judge_mass(model); !status.ok()) return status;
    }
    const bool alone = request_.pencil == Pencil::kStiffness;
    auto pencil = PreparedPencil::make(model, alone, request_, context_, pool_, outcome_);
    if (!pencil.ok()) return pencil.status();
    pencil_ = &*pencil;
    if (alone || mass_diagonal_) pencil_->set_second_bound_from_diagonal();
    if (request_.pencil == Pencil::kGeometric) {
      auto definite = pencil_->certify(0, true, 0, pool_, outcome_);
      if (!definite.ok()) return definite.status();
      base_ = definite->certificate;
      stiffness_bound_ = definite->certificate.smallest_eigenvalue_above.value_or(0);
      stiffness_definite_ = verdict_of(definite->inertia, definite->certificate.level) == Verdict::kPositiveDefinite;
      if (!stiffness_definite_) warn_not_definite(*definite);
    }
    if (request_.pencil == Pencil::kMass && !mass_semidefinite_) {
      if (Status status = certify_mass(); !status.ok()) return status;
    }
    for (const double shift : request_.shifts) {
      if (Status status = count_at(shift); !status.ok()) return status;
    }
    if (request_.pencil == Pencil::kGeometric && stiffness_definite_) {
      if (Status status = look_at_the_other_side(); !status.ok()) return status;
      say_convexity();
    }
    return std::move(outcome_);
  }

 private:
  void warn(const char* code, std::string message) {
    outcome_.warnings.push_back({code, std::move(message), outcome_.inputs.front().path});
  }

  void warn_not_definite(const CertifiedInertia& found) {
    warn("stiffness-not-definite",
         "K itself is not positive definite (" + std::to_string(found.inertia.negative) + " negative, " +
             std::to_string(found.inertia.zero) +
             " zero directions), so no count of critical factors follows; the inertia of K + f G is reported instead. "
             "Remedy: run `stanchion check` on K first");
  }

  /// M diagonal and non-negative is semidefinite for certain; where it is massless K must be definite.
  Status judge_mass(const ModelInput& model) {
    const MassFacts facts = inspect_mass(*model.second);
    mass_semidefinite_ = mass_diagonal_ = facts.diagonal && facts.non_negative;
    if (facts.massless.empty() || !mass_semidefinite_ || !model.added.empty()) {
      mass_semidefinite_ = mass_semidefinite_ && facts.massless.empty();
      return {};
    }
    ModelInput massless;
    massless.stiffness = principal_submatrix(model.stiffness, facts.massless);
    Outcome scratch = outcome_;  // the document's digests key the random vectors; its risk goes on
    scratch.work.factorizations = 0;
    auto pencil = PreparedPencil::make(massless, false, request_, context_, pool_, scratch);
    if (!pencil.ok()) return pencil.status();
    auto found = pencil->certify(0, true, 0, pool_, scratch);
    if (!found.ok()) return found.status();
    outcome_.work.factorizations += scratch.work.factorizations;
    outcome_.risk = scratch.risk;
    outcome_.events = std::move(scratch.events);
    if (found->certificate.level == Level::kNone || found->inertia.zero > 0) {
      mass_semidefinite_ = false;
      warn("massless-and-weightless",
           "K is singular (at the resolution) on the dofs without mass: K and M may have common null vectors, and "
           "then no count of eigenvalues exists; the inertia of K - s M is reported instead");
    }
    base_ = found->certificate;
    negative_on_massless_ = found->inertia.negative;
    return {};
  }

  /// M with off-diagonal entries: proved definite by a factorization of its own, or said to be unknown.
  Status certify_mass() {
    auto found = pencil_->certify_second(pool_, outcome_);
    if (!found.ok()) return found.status();
    base_ = found->certificate;
    mass_semidefinite_ = verdict_of(found->inertia, found->certificate.level) == Verdict::kPositiveDefinite;
    if (mass_semidefinite_) return {};
    warn("mass-not-definite",
         "M could not be certified positive definite, so the numbers are negative directions of K - s M, not counts of "
         "eigenvalues below s");
    return {};
  }

  std::string meaning(double shift) const {
    switch (request_.pencil) {
      case Pencil::kStiffness:
        return "eigenvalues of K strictly below the shift, in the mixed units of K";
      case Pencil::kMass:
        return mass_semidefinite_ ? "eigenvalues of K x = s M x strictly below the shift"
                                  : "negative directions of K - s M at the shift";
      case Pencil::kGeometric:
        break;
    }
    if (!stiffness_definite_) return "negative directions of K + f G at the shift";
    return shift < 0 ? "critical factors between the shift and 0" : "critical factors between 0 and the shift";
  }

  double factor_of(double shift) const {
    if (request_.pencil == Pencil::kGeometric) return request_.input.load_sign_minus ? -shift : shift;
    return -shift;
  }

  Result<ShiftCount> count_once(double shift) {
    const double factor = factor_of(shift);
    const double data_error = request_.digits ? pencil_->digits_error(factor, *request_.digits) : 0;
    const bool definite_first = request_.pencil == Pencil::kGeometric;
    auto found = pencil_->certify(factor, definite_first, data_error, pool_, outcome_);
    if (!found.ok()) return found.status();
    ShiftCount count;
    count.shift = shift;
    count.meaning = meaning(shift);
    count.certificate = found->certificate;
    count.method = found->certificate.method;
    const Inertia& inertia = found->inertia;
    if (found->certificate.level == Level::kNone) {
      count.below_range = {0, outcome_.rows_analysed};
      warn("unresolved", "at shift " + number(shift) + ": " + found->unresolved_because);
      return count;
    }
    const Index least = std::max<Index>(0, inertia.negative - negative_on_massless_);
    count.below_range = {least, least + inertia.zero};
    if (inertia.zero == 0) {
      count.below = least;
      rest_on(count, found->certificate);
      if (found->exclusion_radius > 0) count.no_eigenvalue_within = found->exclusion_radius;
    } else {
      count.holds_outside = band(shift, found->certificate);
      warn_at_eigenvalue(count, inertia.zero);
    }
    return count;
  }

  /// A count stands on its own certificate and on those of K or M that give it its meaning: the weakest counts, and the
  /// failure probabilities add up.
  void rest_on(ShiftCount& count, const Certificate& own) const {
    count.level = own.level;
    double failure = own.level == Level::kStatistical ? own.failure_probability.value_or(0) : 0;
    if (base_.level == Level::kStatistical) {
      count.level = Level::kStatistical;
      failure += base_.failure_probability.value_or(0);
    }
    if (count.level == Level::kStatistical) count.failure_probability = failure;
  }

  /// The interval around `shift` that must hold the eigenvalues between the two counts: A_s moves by at least mu a
  /// unit of shift (or kappa a unit of relative factor), and they lie within c + eta of zero.
  std::optional<std::pair<double, double>> band(double shift, const Certificate& certificate) const {
    if (!certificate.resolution || !certificate.error_bound) return std::nullopt;
    const double reach = (*certificate.resolution + *certificate.error_bound) * (1 + 0x1p-50);
    if (request_.pencil == Pencil::kGeometric) {
      const double relative = reach / stiffness_bound_ * (1 + 0x1p-50);
      if (!stiffness_definite_ || !(relative < 1)) return std::nullopt;
      const double inner = shift / (1 + relative), outer = shift / (1 - relative);
      return std::pair{widened(std::min(inner, outer), -1), widened(std::max(inner, outer), 1)};
    }
    if (!(pencil_->second_matrix_bound() > 0)) return std::nullopt;
    const double width = reach / pencil_->second_matrix_bound() * (1 + 0x1p-50);
    return std::pair{widened(shift - width, -1), widened(shift + width, 1)};
  }

  /// A few units in the last place outwards, for the roundings of the band itself.
  static double widened(double value, int direction) { return value + direction * std::fabs(value) * 0x1p-50; }

  void warn_at_eigenvalue(const ShiftCount& count, Index many) {
    std::string text = "at shift " + number(count.shift) + " the count lies between " +
                       std::to_string(count.below_range.first) + " and " + std::to_string(count.below_range.second);
    if (count.holds_outside) {
      const auto [low, high] = *count.holds_outside;
      text += "; " + std::to_string(many) + (many == 1 ? " eigenvalue lies" : " eigenvalues lie") + " within " +
              number(std::max(count.shift - low, high - count.shift)) + " of this shift";
    } else {
      text += ": an eigenvalue is too close to this shift to tell";
    }
    warn("shift-at-eigenvalue", text + ". Remedy: move the shift a little");
  }

  Status count_at(double shift) {
    auto count = count_once(shift);
    if (!count.ok()) return count.status();
    outcome_.count->counts.push_back(std::move(*count));
    return {};
  }

  /// A wrong sign of G must not read as safe: the mirror of the farthest shift on a side nobody asked about.
  Status look_at_the_other_side() {
    const auto [low, high] = std::minmax_element(request_.shifts.begin(), request_.shifts.end());
    if (*low < 0 && *high > 0) return {};
    const double mirror = *low < 0 ? -*low : -*high;
    if (mirror == 0) return {};
    const auto warnings = outcome_.warnings.size();
    auto other = count_once(mirror);
    if (!other.ok()) return other.status();
    outcome_.warnings.resize(warnings);
    const std::string span = mirror < 0 ? number(mirror) + " and 0" : "0 and " + number(mirror);
    if (other->below == 0) {
      outcome_.count->sentences.push_back("On the other side, between " + span + ", there is no critical factor.");
      return {};
    }
    const std::string many = other->below ? std::to_string(*other->below) : "up to " + std::to_string(other->below_range.second);
    outcome_.count->sentences.push_back("On the other side, between " + span + ", there are " + many +
                                        " critical factors: they count if the load can reverse, or if the sign of G is "
                                        "the other one (--load-sign minus).");
    warn("factors-on-the-other-side", "critical factors lie between " + span + " (" + many +
                                          "); make sure of the sign convention of G");
    return {};
  }

  /// K and K + f G both definite: definite at every factor between (a convex combination).
  void say_convexity() {
    double low = 0, high = 0;
    for (const ShiftCount& count : outcome_.count->counts) {
      if (count.level == Level::kNone || count.below != 0) continue;
      low = std::min(low, count.shift);
      high = std::max(high, count.shift);
    }
    if (low == high) return;
    outcome_.count->sentences.push_back("K + f G is positive definite at every f in [" + number(low) + ", " +
                                        number(high) + "], because it is at the ends (convexity).");
  }

  const Request& request_;
  const RunContext& context_;
  ThreadPool& pool_;
  Outcome outcome_;
  PreparedPencil* pencil_ = nullptr;
  bool stiffness_definite_ = false, mass_semidefinite_ = false, mass_diagonal_ = false;
  double stiffness_bound_ = 0;  ///< S K S is at least this, when certified definite
  Index negative_on_massless_ = 0;
  Certificate base_;  ///< of what gives the counts their meaning: K definite, M definite, K on the massless dofs
};

}  // namespace

Result<Outcome> run_count(const Request& request, const RunContext& context) {
  const Stopwatch watch;
  ThreadPool pool(threads_of(request));
  Outcome outcome = begin_outcome("count", request, Question::kCount);
  auto model = read_model(request, context, pool, outcome);
  if (!model.ok()) return model.status();
  auto result = Counter(request, context, pool, std::move(outcome)).run(std::move(*model));
  if (result.ok()) finish_outcome(*result, watch.seconds());
  return result;
}

}  // namespace stanchion
