#include "cli/command_line.hpp"

#include <fmt/format.h>

#include <CLI/CLI.hpp>
#include <algorithm>
#include <cstdio>

#include "model/version.hpp"

namespace stanchion::cli {

/// The third-party parser of one command, kept out of the header.
struct Arguments::Parser {
  CLI::App* app;
  std::string group = "Options";
};

Arguments::Arguments(std::unique_ptr<Parser> parser) : parser_(std::move(parser)) {}
Arguments::~Arguments() = default;

void Arguments::group(const std::string& title) {
  parser_->group = title;
}

void Arguments::positional(const std::string& name, std::optional<std::string>& target,
                           const std::string& value, const std::string& help, bool required) {
  parser_->app->add_option(name, target, help)->type_name(value)->required(required);
}

void Arguments::positionals(const std::string& name, std::vector<std::string>& target,
                            const std::string& value, const std::string& help) {
  parser_->app->add_option(name, target, help)->type_name(value)->expected(-1);
}

void Arguments::flag(const std::string& name, bool& target, const std::string& help) {
  parser_->app->add_flag(name, target, help)->group(parser_->group)->disable_flag_override();
}

void Arguments::text(const std::string& name, std::optional<std::string>& target, const std::string& value,
                     const std::string& help) {
  parser_->app->add_option(name, target, help)->group(parser_->group)->type_name(value);
}

void Arguments::texts(const std::string& name, std::vector<std::string>& target, const std::string& value,
                      const std::string& help) {
  parser_->app->add_option(name, target, help)
      ->group(parser_->group)
      ->type_name(value)
      ->expected(1)
      ->multi_option_policy(CLI::MultiOptionPolicy::TakeAll);
}

void Arguments::real(const std::string& name, std::optional<double>& target, const std::string& value,
                     const std::string& help) {
  auto given = std::make_shared<std::optional<std::string>>();
  text(name, *given, value, help);
  conversions_.push_back([given, name, &target]() -> Status {
    if (!*given) return {};
    const auto number = parse_real(name, **given);
    if (number.ok()) target = *number;
    return number.status();
  });
}

void Arguments::whole(const std::string& name, std::optional<std::int64_t>& target, const std::string& value,
                      const std::string& help) {
  auto given = std::make_shared<std::optional<std::string>>();
  text(name, *given, value, help);
  conversions_.push_back([given, name, &target]() -> Status {
    if (!*given) return {};
    const auto number = parse_whole(name, **given);
    if (number.ok()) target = *number;
    return number.status();
  });
}

void Arguments::closing(const std::string& text) {
  parser_->app->footer(text);
}

Status Arguments::convert_numbers() const {
  for (const auto& conversion : conversions_) {
    if (Status status = conversion(); !status.ok()) return status;
  }
  return {};
}

namespace {

constexpr const char* kExitCodes =
    "Exit codes:\n"
    "  0  answered, and the good answer       3  unresolved: no certificate\n"
    "  1  answered, not the good answer       4  a limit: memory, disk or time\n"
    "  2  bad usage or bad input              5  a defect of the program\n"
    "  130 interrupted\n\n"
    "`stanchion COMMAND --help` lists the options of a command.";

constexpr const char* kHelpOfHelp = "print this help";

struct DeclaredCommand {
  Command* command;
  CLI::App* app;
  std::unique_ptr<Arguments> arguments;
};

std::string help_hint(const CLI::App& app, const std::vector<DeclaredCommand>& commands) {
  for (const auto& declared : commands) {
    if (app.got_subcommand(declared.app)) {
      return fmt::format("see stanchion {} --help", declared.command->name());
    }
  }
  return "see stanchion --help";
}

/// The parser's complaint in our form.
Status usage_failure(const CLI::ParseError& error, const CLI::App& app,
                     const std::vector<DeclaredCommand>& commands) {
  const std::string hint = help_hint(app, commands);
  const auto left = app.remaining(true);
  if (!left.empty()) {
    const std::string& first = left.front();
    const bool option = !first.empty() && first[0] == '-';
    const bool any_command = !app.get_subcommands().empty();
    const char* what = option        ? "no option of this command"
                       : any_command ? "one argument too many"
                                     : "no command";
    return Status::bad_usage("unknown-argument", fmt::format("'{}' is {}", first, what), "command line",
                             hint);
  }
  if (dynamic_cast<const CLI::RequiredError*>(&error) != nullptr) {
    return Status::bad_usage("missing-argument",
                             app.get_subcommands().empty() ? "no command was given" : error.what(),
                             "command line", hint);
  }
  return Status::bad_usage("bad-argument", error.what(), "command line", hint);
}

std::vector<DeclaredCommand> declare_all(CLI::App& app,
                                         const std::vector<std::unique_ptr<Command>>& commands) {
  std::vector<DeclaredCommand> declared;
  for (const auto& command : commands) {
    CLI::App* sub = app.add_subcommand(command->name(), command->summary());
    sub->set_help_flag("-h,--help", kHelpOfHelp);

    auto arguments = std::make_unique<Arguments>(std::make_unique<Arguments::Parser>(Arguments::Parser{sub}));
    command->declare(*arguments);
    declared.push_back({command.get(), sub, std::move(arguments)});
  }
  return declared;
}

}  // namespace

Result<int> run_command_line(const std::vector<std::unique_ptr<Command>>& commands,
                             const std::vector<std::string>& arguments) {
  CLI::App app(
      "Certified inertia of large sparse stiffness matrices: is the structure stable, how many\n"
      "buckling factors or frequencies lie below a value, and how sure is that.",
      program_name());
  app.set_version_flag("--version", fmt::format("{} {}", program_name(), program_version()),
                       "print name and version");
  app.set_help_flag("-h,--help", kHelpOfHelp);
  app.footer(kExitCodes);

  app.require_subcommand(1);
  app.get_formatter()->column_width(34);
  const auto declared = declare_all(app, commands);
  try {
    std::vector<std::string> reversed(arguments.rbegin(), arguments.rend());  // the order the parser wants
    app.parse(std::move(reversed));
  } catch (const CLI::Success& asked) {  // --help, --version
    app.exit(asked);
    return 0;
  } catch (const CLI::ParseError& error) {
    return usage_failure(error, app, declared);
  }
  for (const auto& entry : declared) {
    if (!app.got_subcommand(entry.app)) continue;
    if (Status status = entry.arguments->convert_numbers(); !status.ok()) return status;
    return entry.command->run(Call{arguments});
  }
  return Status::internal("no command was selected");
}

}  // namespace stanchion::cli
