// The questions a request can ask; which of its members must be present follows from it.
#pragma once

namespace stanchion {

enum class Question { kCheck, kCount, kSweep, kBracket, kAudit, kLocate, kForecast };

}  // namespace stanchion
