#include <exception>
#include <new>

#include "engine/pipeline.hpp"
#include "model/validate.hpp"
#include "stanchion/stanchion.hpp"

namespace stanchion {
namespace {

using Engine = Result<Outcome> (*)(const Request&, const RunContext&);

/// The edge of the library: what third parties or the allocator throw becomes a Status here.
Result<Outcome> ask(Question question, Engine engine, const Request& request, const Listener& listener) {
  try {
    if (Status status = validate(request, question); !status.ok()) return status;
    CancellationToken token;
    RunContext context;
    context.cancel = &token;
    context.log = listener.log;
    context.on_count = listener.on_count;
    if (listener.progress) {
      context.progress = [&](const char* stage, double fraction) {
        if (!listener.progress(stage, fraction)) token.cancel();
      };
    }
    return engine(request, context);
  } catch (const std::bad_alloc&) {
    return Status::resource_limit("out-of-memory", "the machine gave no more memory", {},
                                  "set a memory cap to learn the need beforehand, or use a larger machine");
  } catch (const std::exception& error) {
    return Status::internal(error.what());
  }
}

}  // namespace

Result<Outcome> check(const Request& request, const Listener& listener) {
  return ask(Question::kCheck, run_check, request, listener);
}

Result<Outcome> count(const Request& request, const Listener& listener) {
  return ask(Question::kCount, run_count, request, listener);
}

Result<Outcome> locate(const Request& request, const Listener& listener) {
  return ask(Question::kLocate, run_locate, request, listener);
}

Result<Outcome> sweep(const Request& request, const Listener& listener) {
  return ask(Question::kSweep, run_sweep, request, listener);
}

Result<Outcome> bracket(const Request& request, const Listener& listener) {
  return ask(Question::kBracket, run_bracket, request, listener);
}

Result<Outcome> audit(const Request& request, const Listener& listener) {
  return ask(Question::kAudit, run_audit, request, listener);
}

Result<Outcome> forecast(const Request& request, const Listener& listener) {
  return ask(Question::kForecast, run_forecast, request, listener);
}

}  // namespace stanchion
