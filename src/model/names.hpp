// The words that documents use for enumerated values. They are part of the JSON contract: never change one.
#pragma once

#include "model/question.hpp"
#include "stanchion/outcome.hpp"
#include "stanchion/request.hpp"

namespace stanchion {

/// "positive_definite", "positive_semidefinite", ..., "unresolved".
const char* name_of(Verdict verdict);

/// "complete", "missing", "surplus", "missing_and_surplus" or "unresolved".
const char* name_of(AuditVerdict verdict);

/// "proved", "statistical" or "none".
const char* name_of(Level level);

/// "check", "count" or "forecast".
const char* name_of(Question question);

/// "loose_part", "mechanism", ..., "unresolved".
const char* name_of(Cause cause);

/// "stiffness", "geometric" or "mass".
const char* name_of(Pencil pencil);

/// "double" or "extended".
const char* name_of(Precision precision);

/// "bad-usage", "bad-input", ...: the group of a failure, for logs.
const char* name_of(StatusKind kind);

}  // namespace stanchion
