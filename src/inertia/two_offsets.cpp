#include "inertia/two_offsets.hpp"

#include <algorithm>
#include <cmath>
#include <cstdio>
#include <utility>

#include "base/fault_words.hpp"
#include "extended/factorize.hpp"
#include "inertia/factor_kind.hpp"
#include "sparse/product.hpp"

namespace stanchion {
namespace {

/// First guesses of c over ||A_s||_inf: a few times the bounds usually seen, so that one factorization is
/// enough.
constexpr double kDefiniteGuess = 0x1p-40, kGeneralGuess = 0x1p-32;
/// Where factors are thin, bounds are small, and eigenvalues lie close: a large c would leave some undecided.
constexpr double kThinGuess = 0x1p-36;
/// Where only the positive ones are counted a gap was chosen to count in, and room is better spent: larger to
/// begin with, and again after a bound that was larger still.
constexpr double kThinSideGuess = 0x1p-34, kSideMargin = 8.0;
/// A shift of this share of the matrix lies amid the spectrum, where pivots grow and bounds with them, but
/// eigenvalues lie apart by the norm over n on average: c may be that over kApart, up to kDeepGuess.
constexpr double kDeepShare = 0x1p-5, kApart = 1024, kDeepGuess = 0x1p-24;
constexpr double kExtendedDefiniteGuess = 0x1p-88, kExtendedGeneralGuess = 0x1p-84;
/// A retry takes this many times the bound just reported: a changed offset moves the bound a little.
constexpr double kMargin = 2.0;
/// A resolution this many times its bounds is worth sharpening when zeros were left.
constexpr double kSharpenAbove = 8.0, kSharpenDeepAbove = 3.0;
constexpr int kMostRounds = 3;

/// Three digits, not less than `value`.
std::string rounded_up(double value) {
  char text[32];
  std::snprintf(text, sizeof(text), "%.2e", value * 1.005);
  return text;
}

class OffsetScheme {
 public:
  OffsetScheme(const Analysis& analysis, const ShiftedMatrix& matrix, const OffsetOptions& options,
               ThreadPool& pool)
      : analysis_(analysis), matrix_(matrix), options_(options), pool_(pool), rows_(analysis.tree.rows) {}

  Result<CertifiedInertia> run() {
    Certificate& certificate = found_.certificate;
    certificate.method = "offsets";
    certificate.precision = options_.extended ? "extended" : "double";
    if (rows_ == 0) {
      certificate.level = Level::kProved;
      return found_;
    }
    norm_ = std::max(infinity_norm(matrix_, &pool_), 0x1p-500);
    double offset = options_.resolution ? *options_.resolution : norm_ * guess(options_.definite_first);
    if (!options_.resolution) offset = std::max(offset, kMargin * options_.data_error);
    if (options_.definite_first) {
      auto settled = try_definite(offset);
      if (!settled.ok()) return settled.status();
      if (*settled) return found_;
      if (options_.definite_only) {
        give_up("the attempt without pivoting did not show the matrix definite");
        return found_;
      }
      if (!options_.resolution) offset = std::max(offset, norm_ * guess(false));
    }
    return options_.all_positive_but ? positive_side(offset) : both_offsets(offset);
  }

 private:
  struct Run {
    bool stopped = false, breakdown = false;
    double offset = 0, bound = 0;
    Index negative = 0;
  };

  /// True when what the shift adds is no small part of the matrix.
  bool is_deep() const {
    if (matrix_.coefficients.size() < 2 || matrix_.coefficients.back() == 0) return false;
    ShiftedMatrix added = matrix_;
    added.coefficients.front() = 0;
    return infinity_norm(added, &pool_) >= kDeepShare * norm_;
  }

  /// Of c over the norm; for general matrices it settles, too, whether the shift lies amid the spectrum.
  double guess(bool definite) {
    if (options_.extended) return definite ? kExtendedDefiniteGuess : kExtendedGeneralGuess;
    if (definite) return kDefiniteGuess;
    deep_ = is_deep();
    if (deep_) return std::clamp(1 / (kApart * static_cast<double>(rows_)), kGeneralGuess, kDeepGuess);
    if (!has_thin_factor(analysis_)) return kGeneralGuess;
    return options_.all_positive_but ? kThinSideGuess : kThinGuess;
  }

  double sharpen_above() const { return deep_ ? kSharpenDeepAbove : kSharpenAbove; }

  /// One factorization of A_s - offset I; its bound includes the data's own error.
  Result<Run> factor(double offset, bool definite) {
    ShiftedMatrix shifted = matrix_;
    shifted.offset = offset;
    FactorOptions factor_options = options_.factor;
    factor_options.definite = definite;
    const bool keep = options_.keep != nullptr && offset > 0 && !options_.extended;
    if (keep) options_.keep->reset();  // the memory of the one before
    factor_options.keep_factor = keep;
    auto result = options_.extended ? factorize_extended(analysis_, shifted, factor_options, pool_)
                                    : factorize(analysis_, shifted, factor_options, pool_);
    if (!result.ok()) return result.status();
    if (Status sound = check_fault(analysis_, *result); !sound.ok()) return sound;
    ++found_.factorizations;
    found_.delayed_pivots = std::max(found_.delayed_pivots, result->delayed_pivots);
    found_.two_by_two_pivots = std::max(found_.two_by_two_pivots, result->two_by_two_pivots);
    found_.peak_bytes = std::max(found_.peak_bytes, result->peak_bytes);
    found_.seconds += result->seconds;
    Run run{result->stopped, result->breakdown || !std::isfinite(result->error_bound), offset,
            result->error_bound + options_.data_error, static_cast<Index>(result->signs.negative)};
    if (!run.stopped && !run.breakdown) {
      found_.certificate.runs.push_back({offset, run.negative, run.bound});
      found_.certificate.error_bound = std::max(found_.certificate.error_bound.value_or(0), run.bound);
    }
    if (keep && !run.stopped && !run.breakdown)
      options_.keep->emplace(KeptFactorization{offset, std::move(*result)});
    return run;
  }

  /// True when positive definiteness was proved without pivoting.
  Result<bool> try_definite(double& offset) {
    for (int attempt = 0; attempt < 2; ++attempt) {
      auto run = factor(offset, true);
      if (!run.ok()) return run.status();
      if (run->stopped || run->breakdown) return false;
      if (offset > run->bound) {
        settle(rows_, 0, offset, run->bound);
        return true;
      }
      if (options_.resolution) return false;
      offset = kMargin * run->bound;
    }
    return false;
  }

  /// Records n - k positives and m negatives at resolution `offset`.
  void settle(Index positive, Index negative, double offset, double bound_below) {
    found_.inertia = {negative, rows_ - positive - negative, positive, 0};
    found_.certificate.level = Level::kProved;
    found_.certificate.resolution = offset;
    if (positive == rows_) {
      const double above = smallest_eigenvalue_bound(offset, bound_below);
      double largest_scale = 0;
      for (const double s : *matrix_.scale) largest_scale = std::max(largest_scale, s);
      found_.certificate.smallest_eigenvalue_above = above;
      // Rounded down once more: the square and the quotient may each round up.
      found_.certificate.smallest_eigenvalue_of_k_above =
          above / (largest_scale * largest_scale) * (1 - 0x1p-50);
    }
  }

  void give_up(std::string because) {
    found_.inertia = {0, 0, 0, rows_};
    found_.certificate.level = Level::kNone;
    found_.unresolved_because = std::move(because);
  }

  /// n - k are positive; a smaller offset when that leaves more undecided than expected and can help.
  Result<CertifiedInertia> positive_side(double offset) {
    for (int round = 0; round < kMostRounds; ++round) {
      auto below = factor(offset, false);
      if (!below.ok()) return below.status();
      if (below->breakdown) break;
      const bool holds = offset > below->bound;
      if (holds && (found_.certificate.level == Level::kNone || below->negative < found_.inertia.undecided)) {
        settle(rows_ - below->negative, 0, offset, below->bound);
        found_.inertia.undecided = std::exchange(found_.inertia.zero, 0);
      }
      if (holds &&
          (below->negative <= *options_.all_positive_but || offset <= sharpen_above() * below->bound))
        break;
      offset = (holds ? kMargin : kSideMargin) * below->bound;
    }
    if (found_.certificate.level == Level::kNone) give_up("no offset above the error bound was found");
    return found_;
  }

  Result<CertifiedInertia> both_offsets(double offset) {
    bool have_answer = false;
    for (int round = 0; round < kMostRounds; ++round) {
      auto below = factor(offset, false);
      if (!below.ok()) return below.status();
      if (!options_.resolution && !have_answer && !below->breakdown && below->bound >= offset) {
        offset = kMargin * below->bound;
        continue;
      }
      if (!below->breakdown && below->negative == 0 && offset > below->bound) {  // nothing below: definite
        settle(rows_, 0, offset, below->bound);
        return found_;
      }
      auto above = factor(-offset, false);
      if (!above.ok()) return above.status();
      const double bound = std::max(below->bound, above->bound);
      if (below->breakdown || above->breakdown) {
        if (!have_answer)
          give_up("the factorization broke down: entries overflow or no usable pivot is left");
        return found_;
      }
      if (offset <= bound) {
        if (have_answer) return found_;
        if (options_.resolution) {
          give_up("the resolution asked for is below the error bound " + rounded_up(bound) +
                  "; ask for at least twice that");
          return found_;
        }
        offset = kMargin * bound;
        continue;
      }
      if (below->negative < above->negative) {
        return Status::internal("the counts at the two offsets contradict their error bounds (" +
                                std::to_string(below->negative) + " < " + std::to_string(above->negative) +
                                "): " + kMachineOrProgram);
      }
      settle(rows_ - below->negative, above->negative, offset, below->bound);
      have_answer = true;
      const bool worth_sharpening = found_.inertia.zero > 0 && !options_.resolution &&
                                    (deep_ || options_.sharpen) && offset > sharpen_above() * bound;
      if (!worth_sharpening) return found_;
      offset = kMargin * bound;
    }
    if (!have_answer) give_up("no offset above the error bound was found; the bound grew with every retry");
    return found_;
  }

  const Analysis& analysis_;
  const ShiftedMatrix& matrix_;
  const OffsetOptions& options_;
  ThreadPool& pool_;
  Index rows_;
  double norm_ = 0;    ///< of A_s
  bool deep_ = false;  ///< the shift lies amid the spectrum
  CertifiedInertia found_;
};

}  // namespace

Result<CertifiedInertia> certify_by_offsets(const Analysis& analysis, const ShiftedMatrix& matrix,
                                            const OffsetOptions& options, ThreadPool& pool) {
  return OffsetScheme(analysis, matrix, options, pool).run();
}

Verdict verdict_of(const Inertia& inertia, Level level) {
  if (level == Level::kNone || inertia.undecided > 0) return Verdict::kUnresolved;
  if (inertia.negative > 0 && inertia.positive > 0) return Verdict::kIndefinite;
  if (inertia.zero == 0)
    return inertia.negative > 0 ? Verdict::kNegativeDefinite : Verdict::kPositiveDefinite;
  return inertia.negative > 0 ? Verdict::kNegativeSemidefinite : Verdict::kPositiveSemidefinite;
}

}  // namespace stanchion
