#include "engine/pencil_counter.hpp"

#include <algorithm>
#include <cmath>
#include <cstdio>

#include "engine/mass_facts.hpp"

namespace stanchion {
namespace {

/// Of an estimate of the smallest positive eigenvalue, what is taken as an offset.
constexpr double kPartOfRoom = 0x1p-2;

std::string number_text(double value) {
  char text[32];
  std::snprintf(text, sizeof(text), "%.10g", value);
  return text;
}

/// The rows that are not in the ascending list `rows`.
std::vector<Index> others(const std::vector<Index>& rows, Index all) {
  std::vector<Index> rest;
  auto next = rows.begin();
  for (Index i = 0; i < all; ++i) {
    if (next != rows.end() && *next == i) {
      ++next;
    } else {
      rest.push_back(i);
    }
  }
  return rest;
}

/// The rows and columns `keep` of a matrix.
SymmetricMatrix principal_submatrix(const SymmetricMatrix& matrix, const std::vector<Index>& keep) {
  std::vector<Index> number_of(static_cast<std::size_t>(matrix.rows), -1);
  for (std::size_t i = 0; i < keep.size(); ++i)
    number_of[static_cast<std::size_t>(keep[i])] = static_cast<Index>(i);
  std::vector<Triplet> entries;
  for (const Index j : keep) {
    for (Offset k = matrix.column_start[j]; k < matrix.column_start[Offset{j} + 1]; ++k) {
      const Index i = number_of[static_cast<std::size_t>(matrix.row[k])];
      if (i >= 0) entries.push_back({i, number_of[static_cast<std::size_t>(j)], matrix.value[k]});
    }
  }
  return from_triplets(static_cast<Index>(keep.size()), entries);
}

/// A few units in the last place outwards, for the roundings of the band itself, reckoned from `origin`.
double widened(double value, int direction, double origin = 0) {
  return value + direction * (std::fabs(value) + std::fabs(origin)) * 0x1p-50;
}

/// The one of two that says less; statements that need both fail when either does.
Certificate weaker(const Certificate& one, const Certificate& other) {
  if (one.level == Level::kProved) return other;
  if (other.level == Level::kProved) return one;
  Certificate both = one;
  both.failure_probability = one.failure_probability.value_or(0) + other.failure_probability.value_or(0);
  return both;
}

/// `always`: K and G have null vectors in common, and no shift is away from those.
std::string at_eigenvalue(const ShiftCount& count, Index many, bool always) {
  std::string text = "at shift " + number_text(count.shift) + " the count lies between " +
                     std::to_string(count.below_range.first) + " and " +
                     std::to_string(count.below_range.second);
  if (count.holds_outside) {
    const auto [low, high] = *count.holds_outside;
    text += "; " + std::to_string(many) + (many == 1 ? " eigenvalue lies" : " eigenvalues lie") + " within " +
            number_text(std::max(count.shift - low, high - count.shift)) + " of this shift";
  } else {
    text += ": an eigenvalue is too close to this shift to tell";
  }
  return text + ". Remedy: " +
         (always ? "support the model, or strike the directions without stiffness out with --fix; they are "
                   "there at every shift"
                 : "move the shift a little");
}

}  // namespace

void PencilCounter::warn(const char* code, std::string message) {
  outcome_.warnings.push_back({code, std::move(message), outcome_.inputs.front().path});
}

/// Warns of what keeps counts from being counts of values, and has it said before them.
void PencilCounter::reserve(const char* code, const std::string& statement, const std::string& remedy) {
  reservations_.push_back(statement + ".");
  warn(code, remedy.empty() ? statement : statement + ". Remedy: " + remedy);
}

/// A = [K B^T; B 0]: with q multipliers n-(A) - q is the number of negative directions on the constraints
/// when A is not singular, for B has full rank then, and lies in the same place of the range when it is
/// (Gould 1985; spectrum/residual_bound.md, 6). The second matrix must not touch the multipliers.
void PencilCounter::look_at_multipliers(const ModelInput& model) {
  if (model.multipliers.empty() || request_.pencil == Pencil::kStiffness) return;
  std::vector<char> is_multiplier(static_cast<std::size_t>(model.stiffness.rows), 0);
  for (const Index i : model.multipliers) is_multiplier[static_cast<std::size_t>(i)] = 1;
  const auto touches = [&](const SymmetricMatrix& matrix, int most) {
    for (Index j = 0; j < matrix.rows; ++j) {
      for (Offset k = matrix.column_start[j]; k < matrix.column_start[Offset{j} + 1]; ++k) {
        const auto i = static_cast<std::size_t>(matrix.row[k]);
        if (matrix.value[k] != 0 && is_multiplier[i] + is_multiplier[static_cast<std::size_t>(j)] > most)
          return true;
      }
    }
    return false;
  };
  bool apart = !touches(model.stiffness, 1) && !touches(*model.second, 0);
  for (const SymmetricMatrix& added : model.added) apart = apart && !touches(added, 1);
  if (apart) {
    multipliers_ = static_cast<Index>(model.multipliers.size());
    return;
  }
  warn(
      "multipliers-coupled",
      "multipliers act on each other, or the second matrix acts on them, so the structure on its constraints "
      "is not counted. Remedy: check the list given to --multipliers, or the dof map");
}

Status PencilCounter::prepare(ModelInput model) {
  look_at_multipliers(model);
  if (request_.pencil == Pencil::kMass) {
    if (Status status = judge_mass(model); !status.ok()) return status;
  }
  const bool alone = request_.pencil == Pencil::kStiffness;
  auto pencil = PreparedPencil::make(model, alone, request_, context_, pool_, outcome_);
  if (!pencil.ok()) return pencil.status();
  pencil_ = std::move(*pencil);
  if (alone || (mass_diagonal_ && mass_semidefinite_))
    pencil_->set_second_bound_from_diagonal(alone ? std::nullopt : request_.digits);
  return {};
}

Status PencilCounter::judge() {
  if (judged_) return {};
  judged_ = true;
  if (request_.pencil == Pencil::kStiffness) {
    kind_ = CountKind::kBelow;
    return {};
  }
  if (request_.pencil == Pencil::kMass && !mass_judged_) {
    if (Status status = certify_mass(); !status.ok()) return status;
  }
  if (request_.pencil == Pencil::kMass && (mass_semidefinite_ || massless_singular_)) {
    kind_ = mass_semidefinite_ ? CountKind::kBelow : CountKind::kDirections;
    return {};
  }
  return judge_stiffness();
}

void PencilCounter::accept_definite(const Certificate& why) {
  kind_ = CountKind::kFromZero;
  base_ = why;
}

/// M diagonal and non-negative is semidefinite for certain, and so is one that is definite on the dofs that
/// have mass; where it is massless K must not be singular.
Status PencilCounter::judge_mass(const ModelInput& model) {
  const MassFacts facts = inspect_mass(*model.second);
  mass_diagonal_ = facts.diagonal;
  mass_semidefinite_ = mass_judged_ = facts.diagonal && facts.non_negative;
  if (facts.massless.empty()) {
    mass_judged_ = mass_judged_ || facts.diagonal;
    return {};
  }
  if (!mass_judged_ && !facts.diagonal && facts.non_negative) {
    ModelInput massive;
    massive.stiffness = principal_submatrix(*model.second, others(facts.massless, model.second->rows));
    auto found = certify_apart(std::move(massive));
    if (!found.ok()) return found.status();
    base_ = found->certificate;
    mass_semidefinite_ = verdict_of(found->inertia, found->certificate.level) == Verdict::kPositiveDefinite;
  }
  mass_judged_ = true;
  if (!mass_semidefinite_) return {};
  if (!constrained() || static_cast<std::size_t>(multipliers_) != facts.massless.size())
    return judge_massless(model, facts.massless);
  // Exactly the multipliers have no mass: what they add is known for every shift.
  negative_on_massless_ = multipliers_;
  return {};
}

Status PencilCounter::judge_massless(const ModelInput& model, const std::vector<Index>& massless) {
  ModelInput part;
  part.stiffness = principal_submatrix(model.stiffness, massless);
  for (const SymmetricMatrix& added : model.added) part.added.push_back(principal_submatrix(added, massless));
  auto found = certify_apart(std::move(part));
  if (!found.ok()) return found.status();
  if (found->certificate.level == Level::kNone || found->inertia.zero > 0) {
    mass_semidefinite_ = false;
    massless_singular_ = true;
    const std::string reservation =
        "K is singular (at the resolution) on the dofs without mass: K and M may have common null vectors, "
        "and then no count of eigenvalues exists; the inertia of K - s M is reported instead";
    reserve("massless-and-weightless", reservation);
    return {};
  }
  base_ = base_.level == Level::kNone ? found->certificate : weaker(base_, found->certificate);
  negative_on_massless_ = found->inertia.negative;
  return {};
}

/// The inertia of a matrix of its own, on the document's risk.
Result<CertifiedInertia> PencilCounter::certify_apart(ModelInput part) {
  Outcome scratch = outcome_;  // the document's digests key the random vectors; its risk goes on
  scratch.work.factorizations = 0;
  scratch.warnings.clear();
  auto pencil = PreparedPencil::make(part, false, request_, context_, pool_, scratch);
  if (!pencil.ok()) return pencil.status();
  auto found = pencil->certify(0, true, data_error(*pencil, 0), pool_, scratch);
  if (!found.ok()) return found.status();
  outcome_.work.factorizations += scratch.work.factorizations;
  outcome_.risk = scratch.risk;
  outcome_.events = std::move(scratch.events);
  return found;
}

/// K certified definite makes counts of factors between 0 and f; anything else is said first.
Status PencilCounter::judge_stiffness() {
  auto definite = pencil_->certify(0, true, data_error(*pencil_, 0), pool_, outcome_);
  if (!definite.ok()) return definite.status();
  stiffness_ = *definite;
  base_ = definite->certificate;
  stiffness_bound_ = definite->certificate.smallest_eigenvalue_above.value_or(0);
  const Inertia& inertia = definite->inertia;
  const bool definite_on_constraints = constrained() && request_.pencil == Pencil::kGeometric &&
                                       definite->certificate.level != Level::kNone && inertia.zero == 0 &&
                                       inertia.undecided == 0 && inertia.negative == multipliers_;
  if (definite_on_constraints) {
    kind_ = CountKind::kFromZero;
    negative_on_massless_ = multipliers_;
    return {};
  }
  multipliers_ = 0;  // nothing is taken off: the numbers are those of the whole matrix
  if (verdict_of(inertia, definite->certificate.level) == Verdict::kPositiveDefinite) {
    kind_ = CountKind::kFromZero;
    if (request_.pencil == Pencil::kMass) {
      warn("mass-not-definite",
           "M could not be certified positive semidefinite; K is definite, so counts are of the eigenvalues "
           "between 0 "
           "and the shift, on either side of 0");
    }
    return {};
  }
  kind_ = CountKind::kDirections;
  if (request_.pencil == Pencil::kMass) {
    auto found = look_for_origin();
    if (!found.ok()) return found.status();
    if (*found) return {};
    const std::string reservation =
        "M could not be certified positive definite, so the numbers are negative directions of K - s M, not "
        "counts of eigenvalues below s";
    reserve("mass-not-definite", reservation);
    return {};
  }
  const std::string reservation = "K itself is not positive definite (" +
                                  std::to_string(definite->inertia.negative) + " negative, " +
                                  std::to_string(definite->inertia.zero) +
                                  " zero directions), so no count of critical factors follows; the inertia "
                                  "of K + f G is reported instead";
  reserve("stiffness-not-definite", reservation, "run `stanchion check` on K first");
  return definite->inertia.zero > 0 ? look_for_common_null_vectors() : Status{};
}

/// K - s M definite at one s < 0 makes counts of the values above that s, whatever M is
/// (spectrum/residual_bound.md, 6). So a free body whose M has null vectors of its own is counted. Powers of
/// ten, so that another path finds the same.
Result<bool> PencilCounter::look_for_origin() {
  const double size = pencil_->size_ratio();
  if (!(size > 0) || !std::isfinite(size)) return false;
  for (const int below : {6, 4, 2}) {
    char text[32];
    std::snprintf(text, sizeof(text), "-1e%d", static_cast<int>(std::floor(std::log10(size))) - below);
    const double origin = std::strtod(text, nullptr);
    if (!(origin < 0) || !std::isfinite(origin)) return false;
    auto definite = inertia_at(origin, true);
    if (!definite.ok()) return definite.status();
    if (verdict_of(definite->inertia, definite->certificate.level) != Verdict::kPositiveDefinite) continue;
    kind_ = CountKind::kAbove;
    origin_ = origin;
    base_ = definite->certificate;
    stiffness_bound_ = definite->certificate.smallest_eigenvalue_above.value_or(0);
    warn("mass-not-definite",
         "M could not be certified positive semidefinite, nor K definite; K - s M is definite at s = " +
             number_text(origin) + ", so counts are of the eigenvalues above that");
    return true;
  }
  return false;
}

/// Directions that are zero in K and in K + f G alike are zero in G, at the resolution: K + f G is then
/// singular at every f.
Status PencilCounter::look_for_common_null_vectors() {
  const double size = pencil_->size_ratio();
  if (!(size > 0) || !std::isfinite(size)) return {};
  // Two unrelated factors: an eigenvalue of the pencil at both by chance is not to be expected.
  Index common = stiffness_->inertia.zero;
  for (const double part : {0.1234567, -0.0789123}) {
    auto found = pencil_->certify(part * size, false, 0, pool_, outcome_);
    if (!found.ok()) return found.status();
    common = std::min(common, found->certificate.level == Level::kNone ? Index{0} : found->inertia.zero);
  }
  common_null_ = common > 0;
  if (!common_null_) return {};
  const std::string reservation =
      std::to_string(common) + (common == 1 ? " direction is" : " directions are") +
      " zero in K and in G alike (at the resolution): K + f G is singular at every f, so that no critical "
      "factor is defined";
  reserve("common-null-vectors", reservation, "support the model, or strike these directions out with --fix");
  return {};
}

/// M with off-diagonal entries: proved definite by a factorization of its own, or said to be unknown.
Status PencilCounter::certify_mass() {
  mass_judged_ = true;
  auto found = pencil_->certify_second(request_.digits, pool_, outcome_);
  if (!found.ok()) return found.status();
  mass_semidefinite_ = verdict_of(found->inertia, found->certificate.level) == Verdict::kPositiveDefinite;
  if (mass_semidefinite_) base_ = found->certificate;
  return {};
}

/// What --digits lets the entries of K + factor * second be off by; 0 where they count as exact.
double PencilCounter::data_error(const PreparedPencil& pencil, double factor) const {
  return request_.digits ? pencil.digits_error(factor, *request_.digits) : 0;
}

CountKind PencilCounter::kind_at(double shift) const {
  return kind_ == CountKind::kAbove && shift <= origin_ ? CountKind::kDirections : kind_;
}

std::string PencilCounter::meaning(double shift) const {
  const bool values = kind_at(shift) != CountKind::kDirections;
  return meaning_on_all(shift) + (values && constrained() ? ", of the structure on its constraints" : "");
}

std::string PencilCounter::meaning_on_all(double shift) const {
  const bool factors = request_.pencil == Pencil::kGeometric;
  switch (kind_at(shift)) {
    case CountKind::kFromZero:
      if (factors)
        return shift < 0 ? "critical factors between the shift and 0"
                         : "critical factors between 0 and the shift";
      return shift < 0 ? "eigenvalues of K x = s M x between the shift and 0"
                       : "eigenvalues of K x = s M x between 0 and the shift";
    case CountKind::kBelow:
      return request_.pencil == Pencil::kStiffness
                 ? "eigenvalues of K strictly below the shift, in the mixed units of K"
                 : "eigenvalues of K x = s M x strictly below the shift";
    case CountKind::kAbove:
      return "eigenvalues of K x = s M x above " + number_text(origin_) + " and strictly below the shift";
    case CountKind::kDirections:
      break;
  }
  return factors ? "negative directions of K + f G at the shift"
                 : "negative directions of K - s M at the shift";
}

double PencilCounter::factor_of(double shift) const {
  return second_factor(request_, shift);
}

Result<CertifiedInertia> PencilCounter::inertia_at(double shift, bool definite_first) {
  const double factor = factor_of(shift);
  return pencil_->certify(factor, definite_first, data_error(*pencil_, factor), pool_, outcome_);
}

Result<ShiftCount> PencilCounter::count(double shift) {
  auto found = inertia_at(shift, request_.pencil == Pencil::kGeometric);
  if (!found.ok()) return found.status();
  return count_from(shift, *found, outcome_.warnings);
}

/// All but k are positive at the shift, so at most k are not.
Result<std::optional<Index>> PencilCounter::at_most(double shift, Index expected,
                                                    std::optional<double> room) {
  if (kind_at(shift) == CountKind::kDirections) return std::optional<Index>{};
  if (room) *room *= kPartOfRoom;
  auto found = pencil_->certify_positive_side(factor_of(shift), expected + negative_on_massless_, room, pool_,
                                              outcome_);
  if (!found.ok()) return found.status();
  if (found->certificate.level == Level::kNone) return std::optional<Index>{};
  return std::optional(std::max<Index>(0, found->inertia.undecided - negative_on_massless_));
}

Result<ShiftCount> PencilCounter::count_apart(double shift, Index number, int share, ThreadPool& pool,
                                              Outcome& scratch) const {
  const double factor = factor_of(shift);
  auto found = pencil_->certify_apart(factor, request_.pencil == Pencil::kGeometric,
                                      data_error(*pencil_, factor), number, share, pool, scratch);
  if (!found.ok()) return found.status();
  return count_from(shift, *found, scratch.warnings);
}

void PencilCounter::merge(const Outcome& scratch) {
  pencil_->merge(scratch, outcome_);
}

ShiftCount PencilCounter::count_from(double shift, const CertifiedInertia& found, Warnings& warnings) const {
  ShiftCount count;
  count.shift = shift;
  count.meaning = meaning(shift);
  count.certificate = found.certificate;
  count.method = found.certificate.method;
  const Inertia& inertia = found.inertia;
  const std::string& place = outcome_.inputs.front().path;
  if (found.certificate.level == Level::kNone) {
    count.below_range = {0, outcome_.rows_analysed};
    warnings.push_back(
        {"unresolved", "at shift " + number_text(shift) + ": " + found.unresolved_because, place});
    return count;
  }
  const Index least = std::max<Index>(0, inertia.negative - negative_on_massless_);
  count.below_range = {least, least + inertia.zero};
  if (inertia.zero == 0) {
    count.below = least;
    rest_on(count, found.certificate);
    if (found.exclusion_radius > 0) count.no_eigenvalue_within = found.exclusion_radius;
    // What is said of the neighbourhood stays where counts are of values, so that two of them can confirm it.
    if (kind_at(shift) == CountKind::kAbove && count.no_eigenvalue_within) {
      count.no_eigenvalue_within = std::min(*count.no_eigenvalue_within, (shift - origin_) * (1 - 0x1p-50));
    }
  } else {
    count.holds_outside = band(shift, found.certificate);
    warnings.push_back({"shift-at-eigenvalue", at_eigenvalue(count, inertia.zero, common_null_), place});
  }
  return count;
}

/// A count stands on its own certificate and on those of K or M that give it its meaning: the weakest counts,
/// and the failure probabilities add up.
void PencilCounter::rest_on(ShiftCount& count, const Certificate& own) const {
  count.level = own.level;
  double failure = own.level == Level::kStatistical ? own.failure_probability.value_or(0) : 0;
  if (base_.level == Level::kStatistical) {
    count.level = Level::kStatistical;
    failure += base_.failure_probability.value_or(0);
  }
  if (count.level == Level::kStatistical) count.failure_probability = failure;
}

/// The interval around `shift` that must hold the eigenvalues between the two counts: A_s moves by at least
/// mu a unit of shift (or kappa a unit of relative factor), and they lie within c + eta of zero.
std::optional<std::pair<double, double>> PencilCounter::band(double shift,
                                                             const Certificate& certificate) const {
  if (!certificate.resolution || !certificate.error_bound) return std::nullopt;
  const double reach = (*certificate.resolution + *certificate.error_bound) * (1 + 0x1p-50);
  const CountKind kind = kind_at(shift);
  if (constrained()) return std::nullopt;  // no bound on K on the constraints
  if (kind == CountKind::kFromZero || kind == CountKind::kAbove) {
    const double relative = reach / stiffness_bound_ * (1 + 0x1p-50), far = shift - origin_;
    if (!(relative < 1)) return std::nullopt;
    const double inner = far / (1 + relative) + origin_, outer = far / (1 - relative) + origin_;
    return std::pair{widened(std::min(inner, outer), -1, origin_),
                     widened(std::max(inner, outer), 1, origin_)};
  }
  if (kind == CountKind::kDirections || !(pencil_->second_matrix_bound() > 0)) return std::nullopt;
  const double width = reach / pencil_->second_matrix_bound() * (1 + 0x1p-50);
  return std::pair{widened(shift - width, -1), widened(shift + width, 1)};
}

CountFact PencilCounter::fact_at_origin() const {
  return {origin_, 0, 0, std::nullopt, base_.level, base_.failure_probability.value_or(0)};
}

std::optional<CountFact> PencilCounter::fact(const ShiftCount& count) const {
  if (kind_at(count.shift) == CountKind::kDirections || count.certificate.level == Level::kNone)
    return std::nullopt;
  CountFact fact{count.shift,         count.below_range.first, count.below_range.second,
                 count.holds_outside, Level::kProved,          0};
  if (kind_ == CountKind::kFromZero && count.shift < 0) {
    fact.least = -count.below_range.second;
    fact.most = -count.below_range.first;
  }
  if (base_.level == Level::kStatistical || count.certificate.level == Level::kStatistical) {
    fact.level = Level::kStatistical;
    fact.failure_probability =
        count.certificate.failure_probability.value_or(0) + base_.failure_probability.value_or(0);
  }
  return fact;
}

}  // namespace stanchion
