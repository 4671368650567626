#include "cli/command_line.hpp"

#include <fmt/format.h>

#include <CLI/CLI.hpp>
#include <algorithm>
#include <cstdio>
#include <optional>

#include "cli/configuration.hpp"
#include "cli/terminal.hpp"
#include "model/version.hpp"

namespace stanchion::cli {

/// The third-party parser of one command, kept out of the header.
struct Arguments::Parser {
  CLI::App* app;
  std::string group = "Options";
};

Arguments::Arguments(std::unique_ptr<Parser> parser) : parser_(std::move(parser)) {}
Arguments::~Arguments() = default;

void Arguments::group(const std::string& title, bool outputs) {
  parser_->group = title;
  outputs_ = outputs;
}

namespace {

/// "--memory-cap" to "memory_cap".
std::string key_of(const std::string& name) {
  std::string key = name.substr(std::min(name.find_first_not_of('-'), name.size()));
  std::replace(key.begin(), key.end(), '-', '_');
  return key;
}

}  // namespace

void Arguments::enter(const std::string& name, OptionKind kind, const std::string& value,
                      const std::string& help, bool required) {
  OptionEntry entry{name, key_of(name), value, help, parser_->group, kind, OptionUse::kSetting, required};
  if (value.rfind("FILE", 0) == 0) entry.use = outputs_ ? OptionUse::kOutput : OptionUse::kInput;
  table_.options.push_back(std::move(entry));
}

void Arguments::positional(const std::string& name, std::optional<std::string>& target,
                           const std::string& value, const std::string& help, bool required) {
  enter(name, OptionKind::kPositional, value, help, required);
  parser_->app->add_option(name, target, help)->type_name(value)->required(required);
}

void Arguments::positionals(const std::string& name, std::vector<std::string>& target,
                            const std::string& value, const std::string& help) {
  enter(name, OptionKind::kPositionals, value, help);
  parser_->app->add_option(name, target, help)->type_name(value)->expected(-1);
}

void Arguments::flag(const std::string& name, bool& target, const std::string& help) {
  enter(name, OptionKind::kFlag, "", help);
  parser_->app->add_flag(name, target, help)->group(parser_->group)->disable_flag_override();
}

void Arguments::text(const std::string& name, std::optional<std::string>& target, const std::string& value,
                     const std::string& help) {
  enter(name, OptionKind::kText, value, help);
  parser_->app->add_option(name, target, help)->group(parser_->group)->type_name(value);
}

void Arguments::texts(const std::string& name, std::vector<std::string>& target, const std::string& value,
                      const std::string& help) {
  enter(name, OptionKind::kTexts, value, help);
  parser_->app->add_option(name, target, help)
      ->group(parser_->group)
      ->type_name(value)
      ->expected(1)
      ->multi_option_policy(CLI::MultiOptionPolicy::TakeAll);
}

void Arguments::numbers(const std::string& name, std::vector<std::string>& target, const std::string& value,
                        const std::string& help) {
  texts(name, target, value, help);
  last().kind = OptionKind::kNumbers;
}

void Arguments::real(const std::string& name, std::optional<double>& target, const std::string& value,
                     const std::string& help) {
  auto given = std::make_shared<std::optional<std::string>>();
  text(name, *given, value, help);
  last().kind = OptionKind::kReal;
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
  last().kind = OptionKind::kWhole;
  conversions_.push_back([given, name, &target]() -> Status {
    if (!*given) return {};
    const auto number = parse_whole(name, **given);
    if (number.ok()) target = *number;
    return number.status();
  });
}

void Arguments::closing(const std::string& text) {
  table_.closing = text;
  parser_->app->footer(text);
}

void Arguments::take_what_was_read() {
  for (CLI::Option* option : parser_->app->get_options()) {
    try {
      if (option->count() > 0) option->run_callback();
    } catch (const CLI::ParseError&) {  // this one is what was refused
    }
  }
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
    "`stanchion COMMAND --help` lists the options of a command. Options that are not typed come from the\n"
    "environment (STANCHION_MEMORY_CAP) or a file (--config FILE); --print-config says which hold.";

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

namespace {

/// Parses into the commands; nothing when one was selected, the exit code when help or version was printed.
Result<std::optional<int>> parse(CLI::App& app, const std::vector<DeclaredCommand>& declared,
                                 const std::vector<std::string>& arguments, bool may_print) {
  app.require_subcommand(1);
  try {
    std::vector<std::string> reversed(arguments.rbegin(), arguments.rend());  // the order the parser wants
    app.parse(std::move(reversed));
  } catch (const CLI::Success& asked) {  // --help, --version
    if (may_print) app.exit(asked);
    return std::optional<int>(0);
  } catch (const CLI::ParseError& error) {
    return usage_failure(error, app, declared);
  }
  return std::optional<int>();
}

const DeclaredCommand* selected(const CLI::App& app, const std::vector<DeclaredCommand>& declared) {
  for (const auto& entry : declared) {
    if (app.got_subcommand(entry.app)) return &entry;
  }
  return nullptr;
}

std::vector<CommandTable> tables_of(const std::vector<DeclaredCommand>& commands) {
  std::vector<CommandTable> tables;
  for (const auto& declared : commands) {
    CommandTable table = declared.arguments->table();
    table.name = declared.command->name();
    table.summary = declared.command->summary();
    table.requestable = declared.command->requestable();
    tables.push_back(std::move(table));
  }
  return tables;
}

/// Checks one argument vector against a command of its own.
Status check_arguments(CommandFactory all_commands, const std::vector<std::string>& arguments) {
  auto commands = all_commands();
  std::erase_if(commands, [&](const auto& command) {
    return arguments.empty() || !command->requestable() || command->name() != arguments.front();
  });
  CLI::App app;
  const auto declared = declare_all(app, commands);
  const auto parsed = parse(app, declared, arguments, false);
  if (!parsed.ok()) return parsed.status();
  const DeclaredCommand* asked = selected(app, declared);
  if (asked == nullptr) return Status::bad_usage("bad-argument", "this asks for help", "command line", "ask");
  if (Status status = asked->arguments->convert_numbers(); !status.ok()) return status;
  return asked->command->check_options();
}

}  // namespace

RequestRules request_rules(CommandFactory all_commands) {
  CLI::App app;
  const auto commands = all_commands();
  RequestRules rules;
  rules.commands = tables_of(declare_all(app, commands));
  rules.check = [all_commands](const std::vector<std::string>& arguments) {
    return check_arguments(all_commands, arguments);
  };
  return rules;
}

Result<int> run_command_line(CommandFactory all_commands, const std::vector<std::string>& typed) {
  CLI::App app(
      "Certified inertia of large sparse stiffness matrices: is the structure stable, how many\n"
      "buckling factors or frequencies lie below a value, and how sure is that.",
      program_name());
  app.set_version_flag("--version", fmt::format("{} {}", program_name(), program_version()),
                       "print name and version");
  app.set_help_flag("-h,--help", kHelpOfHelp);
  app.footer(kExitCodes);
  app.get_formatter()->column_width(34);
  const auto commands = all_commands();
  const auto declared = declare_all(app, commands);
  const auto refused = [&](const Status& why, const std::vector<std::string>& arguments) -> Result<int> {
    if (const DeclaredCommand* asked = selected(app, declared)) {
      asked->arguments->take_what_was_read();
      asked->command->refuse(why, Call{arguments, {}});
    }
    return why;
  };
  const auto configured = configure(tables_of(declared), typed);
  if (!configured.ok()) {
    (void)parse(app, declared, typed, false);  // for the places that it names
    return refused(configured.status(), typed);
  }
  const auto printed = parse(app, declared, configured->arguments, true);
  if (!printed.ok()) return refused(printed.status(), configured->arguments);
  if (*printed) return **printed;
  if (configured->print) {
    const Status shown = print_result(*configured->print);
    return shown.ok() ? Result<int>(0) : Result<int>(shown);
  }
  const DeclaredCommand* asked = selected(app, declared);
  if (asked == nullptr) return Status::internal("no command was selected");
  if (Status status = asked->arguments->convert_numbers(); !status.ok())
    return refused(status, configured->arguments);
  return asked->command->run(
      Call{configured->arguments, [all_commands] { return request_rules(all_commands); }});
}

}  // namespace stanchion::cli
