// The options of one command, declared by name with where their values go. The argument parser itself is used
// in command_line.cpp only.
#pragma once

#include <cstdint>
#include <functional>
#include <memory>
#include <optional>
#include <string>
#include <vector>

#include "model/option_table.hpp"
#include "stanchion/status.hpp"

namespace stanchion::cli {

/// Every target must outlive the parse. Options have one spelling each and are never abbreviated.
class Arguments {
 public:
  struct Parser;
  explicit Arguments(std::unique_ptr<Parser> parser);
  ~Arguments();

  /// Options declared from here on appear under this title in the help. Files named in them are read, or
  /// with `outputs` written.
  void group(const std::string& title, bool outputs = false);

  /// In the order of declaration; a `required` one that is missing is bad usage.
  void positional(const std::string& name, std::optional<std::string>& target, const std::string& value,
                  const std::string& help, bool required);
  /// All that follow; after every other positional.
  void positionals(const std::string& name, std::vector<std::string>& target, const std::string& value,
                   const std::string& help);
  void flag(const std::string& name, bool& target, const std::string& help);
  void text(const std::string& name, std::optional<std::string>& target, const std::string& value,
            const std::string& help);
  /// May be given several times.
  void texts(const std::string& name, std::vector<std::string>& target, const std::string& value,
             const std::string& help);
  void real(const std::string& name, std::optional<double>& target, const std::string& value,
            const std::string& help);
  void whole(const std::string& name, std::optional<std::int64_t>& target, const std::string& value,
             const std::string& help);
  /// Comma separated numbers, kept as typed; may be given several times.
  void numbers(const std::string& name, std::vector<std::string>& target, const std::string& value,
               const std::string& help);
  /// The option declared last, to say more about it: another key, another use.
  OptionEntry& last() { return table_.options.back(); }

  /// What was declared so far.
  const CommandTable& table() const { return table_; }

  /// Printed below the options.
  void closing(const std::string& text);

  /// After a command line that was refused: puts what was read of it where it belongs.
  void take_what_was_read();

  /// Turns the texts given for `real` and `whole` options into numbers; the first that is none is the
  /// failure.
  Status convert_numbers() const;

 private:
  void enter(const std::string& name, OptionKind kind, const std::string& value, const std::string& help,
             bool required = false);

  std::unique_ptr<Parser> parser_;
  std::vector<std::function<Status()>> conversions_;
  CommandTable table_;
  bool outputs_ = false;
};

/// `text` as a finite number, all of it; bad usage ("bad-number") naming `option` otherwise.
Result<double> parse_real(const std::string& option, const std::string& text);

/// `text` as a whole number, all of it; bad usage ("bad-number") naming `option` otherwise.
Result<std::int64_t> parse_whole(const std::string& option, const std::string& text);

}  // namespace stanchion::cli
