#include <exception>
#include <memory>
#include <new>
#include <optional>
#include <string>

#include "model/exit_code.hpp"
#include "stanchion/stanchion.h"
#include "stanchion/stanchion.hpp"

using stanchion::Level;
using stanchion::Outcome;
using stanchion::Result;
using stanchion::Status;
using stanchion::Verdict;

struct stanchion_request {
  stanchion::Request request;
  stanchion::Listener listener;
  Status failure;  ///< of a setter: no memory for a copy
};

struct stanchion_answer {
  Status status;
  std::optional<Outcome> outcome;
  std::string text, json;
};

namespace {

static_assert(static_cast<int>(Verdict::kPositiveDefinite) == STANCHION_POSITIVE_DEFINITE);
static_assert(static_cast<int>(Verdict::kNegativeSemidefinite) == STANCHION_NEGATIVE_SEMIDEFINITE);
static_assert(static_cast<int>(Verdict::kUnresolved) == STANCHION_UNRESOLVED);
static_assert(static_cast<int>(Level::kNone) == STANCHION_LEVEL_NONE);
static_assert(static_cast<int>(Level::kProved) == STANCHION_LEVEL_PROVED);

/// Changes the request; what the change throws is kept for the question, for setters return nothing.
template <class Change>
void change(stanchion_request* handle, Change apply) noexcept {
  if (handle == nullptr) return;
  try {
    apply(*handle);
  } catch (const std::exception&) {
    handle->failure = Status(stanchion::StatusKind::kResourceLimit, "out-of-memory", "", "", "");
  }
}

/// Null clears a path.
std::optional<std::string> path_of(const char* path) {
  return path == nullptr ? std::nullopt : std::optional<std::string>(path);
}

void fill(stanchion_answer& answer, Result<Outcome> result) {
  answer.status = result.status();
  if (!result.ok()) return;
  answer.outcome = std::move(*result);
  answer.text = to_text(*answer.outcome);
  answer.json = to_json(*answer.outcome);
}

using Question = Result<Outcome> (*)(const stanchion::Request&, const stanchion::Listener&);

stanchion_answer* ask(const stanchion_request* handle, Question question) noexcept {
  std::unique_ptr<stanchion_answer> answer(new (std::nothrow) stanchion_answer);
  if (!answer) return nullptr;
  try {
    if (handle == nullptr) {
      answer->status =
          Status::bad_usage("missing-argument", "the request is null", "request", "make one first");
    } else if (!handle->failure.ok()) {
      answer->status = handle->failure;
    } else {
      stanchion::Request request = handle->request;
      if (request.input.geometric) request.pencil = stanchion::Pencil::kGeometric;
      if (request.input.mass && !request.input.geometric) request.pencil = stanchion::Pencil::kMass;
      fill(*answer, question(request, handle->listener));
    }
  } catch (const std::exception&) {
    answer->outcome.reset();
    answer->status = Status(stanchion::StatusKind::kResourceLimit, "out-of-memory", "", "", "");
  }
  return answer.release();
}

const stanchion::CheckOutcome* check_of(const stanchion_answer* answer) {
  return answer != nullptr && answer->outcome && answer->outcome->check ? &*answer->outcome->check : nullptr;
}

const stanchion::CountOutcome* count_of(const stanchion_answer* answer) {
  return answer != nullptr && answer->outcome && answer->outcome->count ? &*answer->outcome->count : nullptr;
}

template <class T>
void store(T* target, T value) {
  if (target != nullptr) *target = value;
}

}  // namespace

extern "C" {

stanchion_request* stanchion_request_new(void) {
  return new (std::nothrow) stanchion_request;
}
void stanchion_request_free(stanchion_request* request) {
  delete request;
}

void stanchion_set_stiffness(stanchion_request* request, const char* path) {
  change(request, [&](auto& it) { it.request.input.stiffness = path == nullptr ? "" : path; });
}
void stanchion_set_geometric(stanchion_request* request, const char* path) {
  change(request, [&](auto& it) { it.request.input.geometric = path_of(path); });
}
void stanchion_set_mass(stanchion_request* request, const char* path) {
  change(request, [&](auto& it) { it.request.input.mass = path_of(path); });
}
void stanchion_add_matrix(stanchion_request* request, const char* path, double factor) {
  change(request, [&](auto& it) { it.request.input.added.push_back({path == nullptr ? "" : path, factor}); });
}
void stanchion_set_dofs(stanchion_request* request, const char* path) {
  change(request, [&](auto& it) { it.request.input.dofs = path_of(path); });
}
void stanchion_set_fix(stanchion_request* request, const char* path) {
  change(request, [&](auto& it) { it.request.input.fix = path_of(path); });
}
void stanchion_set_multipliers(stanchion_request* request, const char* path) {
  change(request, [&](auto& it) { it.request.input.multipliers = path_of(path); });
}
void stanchion_add_shift(stanchion_request* request, double shift) {
  change(request, [&](auto& it) { it.request.shifts.push_back(shift); });
}
void stanchion_set_threads(stanchion_request* request, int threads) {
  change(request, [&](auto& it) { it.request.threads = threads; });
}
void stanchion_set_memory_cap(stanchion_request* request, int64_t bytes) {
  change(request, [&](auto& it) { it.request.memory_cap_bytes = bytes; });
}
void stanchion_set_resolution(stanchion_request* request, double resolution) {
  change(request, [&](auto& it) { it.request.resolution = resolution; });
}
void stanchion_set_digits(stanchion_request* request, int digits) {
  change(request, [&](auto& it) { it.request.digits = digits; });
}
void stanchion_set_progress(stanchion_request* request, int (*progress)(const char*, double, void*),
                            void* user) {
  change(request, [&](auto& it) {
    it.listener.progress = nullptr;
    if (progress == nullptr) return;
    it.listener.progress = [=](const char* stage, double fraction) {
      return progress(stage, fraction, user) != 0;
    };
  });
}

stanchion_answer* stanchion_check(const stanchion_request* request) {
  return ask(request, stanchion::check);
}
stanchion_answer* stanchion_count(const stanchion_request* request) {
  return ask(request, stanchion::count);
}
stanchion_answer* stanchion_forecast(const stanchion_request* request) {
  return ask(request, stanchion::forecast);
}
void stanchion_answer_free(stanchion_answer* answer) {
  delete answer;
}

int stanchion_status(const stanchion_answer* answer) {
  if (answer == nullptr) return STANCHION_BAD_USAGE;
  return stanchion::exit_code(answer->status.kind());
}
const char* stanchion_message(const stanchion_answer* answer) {
  return answer == nullptr ? "" : answer->status.message().c_str();
}
const char* stanchion_code(const stanchion_answer* answer) {
  return answer == nullptr ? "" : answer->status.code().c_str();
}
const char* stanchion_place(const stanchion_answer* answer) {
  return answer == nullptr ? "" : answer->status.place().c_str();
}
const char* stanchion_remedy(const stanchion_answer* answer) {
  return answer == nullptr ? "" : answer->status.remedy().c_str();
}

int stanchion_verdict(const stanchion_answer* answer) {
  const auto* check = check_of(answer);
  return check == nullptr ? STANCHION_UNRESOLVED : static_cast<int>(check->verdict);
}
int stanchion_level(const stanchion_answer* answer) {
  const auto* check = check_of(answer);
  return check == nullptr ? STANCHION_LEVEL_NONE : static_cast<int>(check->certificate.level);
}
int32_t stanchion_negative(const stanchion_answer* answer) {
  const auto* check = check_of(answer);
  return check == nullptr ? -1 : check->inertia.negative;
}
int32_t stanchion_zero(const stanchion_answer* answer) {
  const auto* check = check_of(answer);
  return check == nullptr ? -1 : check->inertia.zero;
}
int32_t stanchion_positive(const stanchion_answer* answer) {
  const auto* check = check_of(answer);
  return check == nullptr ? -1 : check->inertia.positive;
}
int32_t stanchion_undecided(const stanchion_answer* answer) {
  const auto* check = check_of(answer);
  return check == nullptr ? -1 : check->inertia.undecided;
}

size_t stanchion_counts(const stanchion_answer* answer) {
  const auto* count = count_of(answer);
  return count == nullptr ? 0 : count->counts.size();
}
int stanchion_count_at(const stanchion_answer* answer, size_t index, double* shift, int32_t* least,
                       int32_t* most, int* level) {
  if (index >= stanchion_counts(answer)) return 0;
  const auto& count = count_of(answer)->counts[index];
  store(shift, count.shift);
  store(least, count.below_range.first);
  store(most, count.below_range.second);
  store(level, static_cast<int>(count.level));
  return 1;
}

const char* stanchion_text(const stanchion_answer* answer) {
  return answer == nullptr ? "" : answer->text.c_str();
}
const char* stanchion_json(const stanchion_answer* answer) {
  return answer == nullptr ? "" : answer->json.c_str();
}

const char* stanchion_version(void) {
  return stanchion::program_version();
}

}  // extern "C"
