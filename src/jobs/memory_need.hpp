// What a job is expected to need, before it runs.
#pragma once

#include <optional>
#include <string>

#include "jobs/job_request.hpp"
#include "stanchion/types.hpp"

namespace stanchion {

/// Bytes that the files of `request` hold; a file that is not there counts nothing.
Offset input_bytes(const JobRequest& request);

/// So much is allowed for without a forecast: a file this small cannot need much unless it is packed.
constexpr Offset kSmallInputBytes = Offset{2} << 20;

/// From the size of the inputs alone: exact enough for small ones, and for what a forecast itself needs.
Offset need_from_size(Offset bytes);

/// Whether directions are located, which takes vectors beside the factor.
bool locates(const JobRequest& request);

/// What of a forecast a request needs: requests of one model and one kind share a forecast.
enum class MemoryKind { kCount, kLocate, kBracket };
MemoryKind memory_kind(const JobRequest& request);

/// The request that asks for the forecast of `request`: the same model, no question.
JobRequest forecast_request(const JobRequest& request, const RequestRules& rules);

/// From the answer of a forecast (data/schemas/outcome-1.json); nothing when it holds none. Questions that
/// keep factors or mode shapes need more than one that only counts.
std::optional<Offset> need_from_forecast(const std::string& outcome, const JobRequest& request);

}  // namespace stanchion
