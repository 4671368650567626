// Certified counts of a pencil at any shift, with what K and M must be for a count to be one of values.
#pragma once

#include <optional>
#include <string>
#include <utility>
#include <vector>

#include "engine/prepared_pencil.hpp"
#include "spectrum/staircase.hpp"

namespace stanchion {

/// What the numbers of a pencil count.
enum class CountKind {
  kBelow,     ///< values strictly below the shift
  kFromZero,  ///< values between 0 and the shift, on either side: K is certified definite
  kAbove,     ///< values above an origin < 0 and strictly below the shift: K - origin M is certified definite
  kDirections  ///< negative directions of the matrix at the shift, nothing else
};

/// A pencil read, analysed and judged. Refers to the request, the context, the pool and the outcome it is
/// given, where it books time, work, risk and warnings; one document, one counter.
class PencilCounter {
 public:
  PencilCounter(const Request& request, const RunContext& context, ThreadPool& pool, Outcome& outcome)
      : request_(request), context_(context), pool_(pool), outcome_(outcome) {}

  /// Analyses the pencil and looks at M. Errors: those of reading, analysing and factoring.
  Status prepare(ModelInput model);

  /// Settles what counts mean: K certified definite, or M semidefinite, or neither, with a warning; where
  /// neither holds an origin below 0 is looked for (kAbove), below which a count is one of directions. Call
  /// after prepare(); the safety question calls it only when it has to. Again: nothing more.
  Status judge();

  /// Taken as judged: K is definite by `why` (both ends of a line definite, say).
  void accept_definite(const Certificate& why);

  CountKind kind() const { return kind_; }
  /// What keeps counts from being counts of values, to be said before them; none where nothing does.
  const std::vector<std::string>& reservations() const { return reservations_; }

  /// The count at one shift, charged to the document's risk.
  Result<ShiftCount> count(double shift);

  /// The inertia at one shift, K expected to be definite there or not, and the count that it makes.
  Result<CertifiedInertia> inertia_at(double shift, bool definite_first);
  ShiftCount count_of(double shift, const CertifiedInertia& found) {
    return count_from(shift, found, outcome_.warnings);
  }

  /// At most how many values lie between the origin and `shift` (kBelow: below it), or at the shift itself;
  /// nothing where none is certified, or counts are not of values. Half the cost of count() when `expected`
  /// is the number. `room`: an estimate of the smallest positive eigenvalue there, in units of the scaled
  /// matrix.
  Result<std::optional<Index>> at_most(double shift, Index expected, std::optional<double> room);

  /// As count(), with a risk of its own, as event `number` of the document (from 1, each used once);
  /// everything is booked in `scratch`. For shifts side by side, each with a pool of its own; `share` of the
  /// memory each.
  Result<ShiftCount> count_apart(double shift, Index number, int share, ThreadPool& pool,
                                 Outcome& scratch) const;

  /// Takes what `scratch` has booked into the document.
  void merge(const Outcome& scratch);

  /// A count as a fact about the number of values; kDirections: nothing. Value number k lies where the number
  /// grows from k - 1 to k; those below 0 have numbers from 0 downwards when the kind is kFromZero.
  std::optional<CountFact> fact(const ShiftCount& count) const;

  PreparedPencil& pencil() { return *pencil_; }
  const PreparedPencil& pencil() const { return *pencil_; }

  /// The coefficient of the second matrix at a shift: f, -f or -s.
  double factor_of(double shift) const;
  /// Counts are of the structure on its constraints: the multipliers were taken off.
  bool constrained() const { return multipliers_ > 0; }
  /// Where counting begins: 0, or with kAbove a shift below 0.
  double origin() const { return origin_; }
  /// No value lies between the origin and itself. Only with kFromZero and kAbove.
  CountFact fact_at_origin() const;
  bool two_sided() const { return kind_ == CountKind::kFromZero; }
  /// Of K when judged definite, of M or of K on the massless dofs: what every count also rests on.
  const Certificate& base() const { return base_; }
  /// K's own inertia, when judge() looked at it.
  const std::optional<CertifiedInertia>& stiffness() const { return stiffness_; }
  /// A lower bound of S K S, when judged definite by a proof; else 0.
  double stiffness_bound() const { return stiffness_bound_; }
  bool mass_semidefinite() const { return mass_semidefinite_; }

  void warn(const char* code, std::string message);
  void reserve(const char* code, const std::string& statement, const std::string& remedy = {});

 private:
  void look_at_multipliers(const ModelInput& model);
  Status judge_mass(const ModelInput& model);
  Status judge_massless(const ModelInput& model, const std::vector<Index>& massless);
  Result<CertifiedInertia> certify_apart(ModelInput part);
  Status look_for_common_null_vectors();
  Status judge_stiffness();
  Result<bool> look_for_origin();
  Status certify_mass();
  double data_error(const PreparedPencil& pencil, double factor) const;
  CountKind kind_at(double shift) const;
  std::string meaning(double shift) const;
  std::string meaning_on_all(double shift) const;
  ShiftCount count_from(double shift, const CertifiedInertia& found, Warnings& warnings) const;
  void rest_on(ShiftCount& count, const Certificate& own) const;
  std::optional<std::pair<double, double>> band(double shift, const Certificate& certificate) const;

  const Request& request_;
  const RunContext& context_;
  ThreadPool& pool_;
  Outcome& outcome_;
  std::optional<PreparedPencil> pencil_;
  CountKind kind_ = CountKind::kDirections;
  bool judged_ = false;
  std::vector<std::string> reservations_;
  bool mass_semidefinite_ = false, mass_diagonal_ = false, massless_singular_ = false, mass_judged_ = false;
  double stiffness_bound_ =
      0;               ///< S K S is at least this, when certified definite; kAbove: S (K - origin M) S
  double origin_ = 0;  ///< kAbove: values below it are not counted
  Index negative_on_massless_ = 0;  ///< or taken off for the multipliers
  bool common_null_ = false;        ///< K and G have null vectors in common
  Index multipliers_ = 0;           ///< 0: none, or they do not border K alone
  Certificate base_;
  std::optional<CertifiedInertia> stiffness_;
};

}  // namespace stanchion
