// Reading a JSON document that nobody vouches for: every member is looked at before it is used.
#pragma once

#include <fmt/format.h>

#include <cmath>
#include <cstdint>
#include <initializer_list>
#include <limits>
#include <nlohmann/json.hpp>
#include <optional>
#include <string>
#include <vector>

#include "stanchion/types.hpp"

namespace stanchion::json_parts {

/// What is wrong with a document; thrown by Member, caught by whoever reads the document.
struct BadMember {
  std::string message;
};

/// One value of the document with the way to it, for messages: "claims/0/inertia/negative".
class Member {
 public:
  Member(const nlohmann::json& value, std::string way) : value_(value), way_(std::move(way)) {}

  Member at(const std::string& key) const {
    const std::string way = way_.empty() ? key : way_ + "/" + key;
    if (!value_.is_object() || !value_.contains(key)) throw BadMember{fmt::format("'{}' is missing", way)};
    return {value_[key], way};
  }

  bool has(const std::string& key) const { return value_.is_object() && value_.contains(key); }

  std::vector<Member> items() const {
    if (!value_.is_array()) wrong("no list");
    std::vector<Member> list;
    for (std::size_t k = 0; k < value_.size(); ++k)
      list.emplace_back(value_[k], fmt::format("{}/{}", way_, k));
    return list;
  }

  bool is_null() const { return value_.is_null(); }

  std::string text() const {
    if (!value_.is_string()) wrong("no text");
    return value_.get<std::string>();
  }

  bool truth() const {
    if (!value_.is_boolean()) wrong("neither true nor false");
    return value_.get<bool>();
  }

  double real() const {
    if (!value_.is_number() || !std::isfinite(value_.get<double>())) wrong("no number");
    return value_.get<double>();
  }

  std::uint64_t natural() const {
    if (!value_.is_number_unsigned()) wrong("no whole number from 0");
    return value_.get<std::uint64_t>();
  }

  Index index() const {
    if (natural() > static_cast<std::uint64_t>(std::numeric_limits<Index>::max())) wrong("too large");
    return static_cast<Index>(natural());
  }

  /// One of the values whose names the documents use.
  template <class Enum>
  Enum named(std::initializer_list<Enum> values) const {
    for (const Enum value : values) {
      if (text() == name_of(value)) return value;
    }
    wrong("none of the known words");
  }

  [[noreturn]] void wrong(const char* what) const { throw BadMember{fmt::format("'{}' is {}", way_, what)}; }

 private:
  const nlohmann::json& value_;
  std::string way_;
};

/// Nothing for null, else what `read` makes of the member.
template <class Read>
auto unless_null(const Member& member, const Read& read) -> std::optional<decltype(read(member))> {
  if (member.is_null()) return std::nullopt;
  return read(member);
}

}  // namespace stanchion::json_parts
