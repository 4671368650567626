// How every function of the library reports failure: a Status, or a Result holding a value or a Status.
// Answers (singular, indefinite, unresolved) are not failures and never travel this way.
#pragma once

#include <optional>
#include <string>
#include <utility>
#include <vector>

namespace stanchion {

/// What kind of failure; decides the program's exit code (see exit_code in model/exit_code.hpp).
enum class StatusKind {
  kOk,
  kBadUsage,       ///< options that contradict each other or are out of range (exit 2)
  kBadInput,       ///< a file that cannot be read or does not hold what was asked (exit 2)
  kResourceLimit,  ///< memory cap, disk or time (exit 4)
  kInterrupted,    ///< the caller's cancellation token fired (exit 130)
  kInternal,       ///< our own mistake (exit 5)
};

/// Success, or one failure with everything a person needs to mend it.
class [[nodiscard]] Status {
 public:
  Status() = default;

  /// `code` is a short stable identifier such as "index-out-of-range"; `place` names file:line, row or entry.
  Status(StatusKind kind, std::string code, std::string message, std::string place = {},
         std::string remedy = {})
      : kind_(kind),
        code_(std::move(code)),
        message_(std::move(message)),
        place_(std::move(place)),
        remedy_(std::move(remedy)) {}

  static Status bad_input(std::string code, std::string message, std::string place, std::string remedy) {
    return {StatusKind::kBadInput, std::move(code), std::move(message), std::move(place), std::move(remedy)};
  }
  static Status bad_usage(std::string code, std::string message, std::string place, std::string remedy) {
    return {StatusKind::kBadUsage, std::move(code), std::move(message), std::move(place), std::move(remedy)};
  }
  static Status resource_limit(std::string code, std::string message, std::string place, std::string remedy) {
    return {StatusKind::kResourceLimit, std::move(code), std::move(message), std::move(place),
            std::move(remedy)};
  }
  static Status interrupted() {
    return {StatusKind::kInterrupted, "interrupted", "stopped on request; nothing was half-written", {}, {}};
  }
  static Status internal(std::string message, std::string place = {}) {
    return {StatusKind::kInternal, "internal", std::move(message), std::move(place),
            "this is a defect of the program: please report it with the command line"};
  }

  bool ok() const { return kind_ == StatusKind::kOk; }
  StatusKind kind() const { return kind_; }
  const std::string& code() const { return code_; }
  const std::string& message() const { return message_; }
  const std::string& place() const { return place_; }
  const std::string& remedy() const { return remedy_; }

  /// "place: message [code]\n  remedy: ...", for a terminal.
  std::string to_string() const {
    std::string text = place_.empty() ? message_ : place_ + ": " + message_;
    if (!code_.empty()) text += " [" + code_ + "]";
    if (!remedy_.empty()) text += "\n  remedy: " + remedy_;
    return text;
  }

 private:
  StatusKind kind_ = StatusKind::kOk;
  std::string code_, message_, place_, remedy_;
};

/// A value, or the Status that says why there is none.
template <class T>
class [[nodiscard]] Result {
 public:
  Result(T value) : value_(std::move(value)) {}            // NOLINT(google-explicit-constructor)
  Result(Status failure) : status_(std::move(failure)) {}  // NOLINT(google-explicit-constructor)

  bool ok() const { return value_.has_value(); }
  const Status& status() const { return status_; }
  T& value() & { return *value_; }
  const T& value() const& { return *value_; }
  T&& value() && { return std::move(*value_); }
  T& operator*() { return *value_; }
  const T& operator*() const { return *value_; }
  T* operator->() { return &*value_; }
  const T* operator->() const { return &*value_; }

 private:
  std::optional<T> value_;
  Status status_;
};

/// Something a person should know that did not stop the work.
struct Warning {
  std::string code;     ///< stable identifier, e.g. "duplicate-entries"
  std::string message;  ///< plain words
  std::string place;    ///< file:line, row, node and dof; may be empty
};
using Warnings = std::vector<Warning>;

}  // namespace stanchion
