// What a run is asked: plain data, validated by model/validate.hpp before the engine sees it.
#pragma once

#include <cstdint>
#include <optional>
#include <string>
#include <vector>

#include "stanchion/types.hpp"

namespace stanchion {

enum class Pencil {
  kStiffness,  ///< K alone; shifts are eigenvalues of K in its mixed units
  kGeometric,  ///< K + f G
  kMass,       ///< K - s M
};

enum class Precision {
  kAutomatic,  ///< double, and single where it is forecast faster and certifies itself
  kSingle,     ///< factored in single precision, certified in double by the relative test, or unresolved
  kDouble,
  kExtended,  ///< factored in double-double: slow, for what double cannot tell apart
};

/// One `--add FILE:factor`.
struct AddedMatrix {
  std::string path;
  double factor = 1;
};

/// How the files are to be read; common to every command.
struct InputRequest {
  std::string stiffness;
  std::optional<std::string> geometric, mass;
  std::vector<AddedMatrix> added;
  std::optional<std::string> dofs, nodes, axes, fix, multipliers;
  bool load_sign_minus = false;  ///< the second matrix was written for K - f G
  bool symmetric_part = false;
  bool strike_held = false;
  std::optional<int> base;    ///< 0 or 1, for triplet text
  std::optional<Index> rows;  ///< for triplet text with empty last rows
};

/// Unit of values and of the ends of ranges; inside everything is in the pencil's own (factor, or s =
/// omega^2).
enum class ValueUnit {
  kFactor,  ///< of K + f G, or eigenvalues of K itself
  kOmega2,  ///< s of K - s M
  kHertz,   ///< sqrt(s) / (2 pi), of K - s M
};

/// For sweep: where to count.
struct SweepRequest {
  double from = 0, to = 0;  ///< in the pencil's unit, from < to
  Index points = 0;         ///< at least 2, both ends included
  bool geometric = false;   ///< equal ratios instead of equal steps; both ends of one sign
  bool refine = false;      ///< new shifts where the count jumps
  double width = 1e-3;      ///< refine: until a jump is of one, or narrower than this relative width
};

/// Which factors of K + f G are asked.
enum class Side { kPositive, kNegative, kBoth };

enum class BracketMethod {
  kResidual,  ///< close estimates from one kept factor, rigorous residual intervals, counts at the ends
  kCounts,    ///< bisection by counts alone
};

/// For bracket: exactly one of `first` and a range (`from` and `to`; below B is the range from 0, or from
/// everything, to B).
struct BracketRequest {
  std::optional<Index> first;
  std::optional<double> from, to;  ///< in `unit`
  bool below = false;              ///< the range was given as one number: `to` (or, negative, `from`)
  Side side = Side::kPositive;
  ValueUnit unit = ValueUnit::kFactor;
  BracketMethod method = BracketMethod::kResidual;
  double width = 1e-8;      ///< relative width asked of a bracket
  bool safety = false;      ///< only whether there is none in the range
  bool want_modes = false;  ///< keep the mode shapes
};

/// For audit: somebody's list.
struct AuditRequest {
  std::string values;  ///< CSV: value, and optionally tolerance and label
  ValueUnit unit = ValueUnit::kFactor;
  std::optional<double> tolerance;  ///< relative half width of values that state none
  std::optional<double> from, to;   ///< range to be judged, in `unit`; absent: that of the list
  bool find_missing = false;
};

/// What `locate` and `check --locate` look for.
struct LocateOptions {
  Index most = 12;           ///< directions shown, at most
  double weak_below = 1e-7;  ///< energy ratio below which a positive direction counts as weak
  double attention_digits = 8, alarm_digits = 12;  ///< levels of the local accuracy, in digits lost
};

struct Request {
  InputRequest input;
  Pencil pencil = Pencil::kStiffness;
  std::vector<double> shifts;  ///< for count
  SweepRequest sweep;
  BracketRequest bracket;
  AuditRequest audit;
  std::vector<std::string> steps;  ///< check: matrices of one pattern after the first, a load path in order
  int threads = 0;                 ///< 0: all processors available
  std::optional<Offset> memory_cap_bytes;
  std::optional<double> resolution;
  double risk = 1e-6;
  std::optional<int> digits;
  std::uint64_t seed = 1;
  Precision precision = Precision::kAutomatic;
  bool want_witness = false;   ///< check: also look for x with x^T A x < 0 beyond its rounding
  bool want_location = false;  ///< check: also where the zero, negative and weak directions are
  LocateOptions locate;
  std::optional<std::string> analysis_store;  ///< folder where elimination orders are found and left
  bool second_path = false;  ///< another ordering and the plain kernels, to repeat a claim independently
};

}  // namespace stanchion
