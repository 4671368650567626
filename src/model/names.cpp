#include "model/names.hpp"

namespace stanchion {

const char* name_of(Verdict verdict) {
  switch (verdict) {
    case Verdict::kPositiveDefinite:
      return "positive_definite";
    case Verdict::kPositiveSemidefinite:
      return "positive_semidefinite";
    case Verdict::kNegativeSemidefinite:
      return "negative_semidefinite";
    case Verdict::kNegativeDefinite:
      return "negative_definite";
    case Verdict::kIndefinite:
      return "indefinite";
    case Verdict::kUnresolved:
      break;
  }
  return "unresolved";
}

const char* name_of(AuditVerdict verdict) {
  switch (verdict) {
    case AuditVerdict::kComplete:
      return "complete";
    case AuditVerdict::kMissing:
      return "missing";
    case AuditVerdict::kSurplus:
      return "surplus";
    case AuditVerdict::kMissingAndSurplus:
      return "missing_and_surplus";
    case AuditVerdict::kUnresolved:
      break;
  }
  return "unresolved";
}

const char* name_of(Level level) {
  switch (level) {
    case Level::kProved:
      return "proved";
    case Level::kStatistical:
      return "statistical";
    case Level::kNone:
      break;
  }
  return "none";
}

const char* name_of(Question question) {
  switch (question) {
    case Question::kCheck:
      return "check";
    case Question::kCount:
      return "count";
    case Question::kSweep:
      return "sweep";
    case Question::kBracket:
      return "bracket";
    case Question::kAudit:
      return "audit";
    case Question::kLocate:
      return "locate";
    case Question::kForecast:
      break;
  }
  return "forecast";
}

const char* name_of(Cause cause) {
  switch (cause) {
    case Cause::kLoosePart:
      return "loose_part";
    case Cause::kMechanism:
      return "mechanism";
    case Cause::kUnattachedDof:
      return "unattached_dof";
    case Cause::kMissingRotation:
      return "missing_rotational_stiffness";
    case Cause::kNegativeSpring:
      return "negative_spring";
    case Cause::kNegativePatch:
      return "negative_patch";
    case Cause::kUnstableWhole:
      return "unstable_as_a_whole";
    case Cause::kRedundantConstraint:
      return "redundant_constraint";
    case Cause::kNearMechanism:
      return "near_mechanism";
    case Cause::kOverStiffCoupling:
      return "over_stiff_coupling";
    case Cause::kUnresolved:
      break;
  }
  return "unresolved";
}

const char* name_of(Pencil pencil) {
  switch (pencil) {
    case Pencil::kStiffness:
      return "stiffness";
    case Pencil::kGeometric:
      return "geometric";
    case Pencil::kMass:
      break;
  }
  return "mass";
}

const char* name_of(Precision precision) {
  switch (precision) {
    case Precision::kAutomatic:
      return "automatic";
    case Precision::kSingle:
      return "single";
    case Precision::kDouble:
      return "double";
    case Precision::kExtended:
      break;
  }
  return "extended";
}

const char* name_of(StatusKind kind) {
  switch (kind) {
    case StatusKind::kOk:
      return "ok";
    case StatusKind::kBadUsage:
      return "bad-usage";
    case StatusKind::kBadInput:
      return "bad-input";
    case StatusKind::kResourceLimit:
      return "resource-limit";
    case StatusKind::kInterrupted:
      return "interrupted";
    case StatusKind::kInternal:
      break;
  }
  return "internal";
}

}  // namespace stanchion
