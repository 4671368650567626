#include "cli/manual.hpp"

#include <fmt/format.h>

#include <algorithm>

#include "model/version.hpp"

namespace stanchion::cli {
namespace {

/// Text for roff: no line can be taken for a request, and dashes stay dashes.
std::string roff(const std::string& text) {
  std::string out;
  bool line_begin = true;
  for (const char c : text) {
    if (line_begin && (c == '.' || c == '\'')) out += "\\&";
    line_begin = c == '\n';
    if (c == '\\') {
      out += "\\e";
    } else if (c == '-') {
      out += "\\-";
    } else {
      out += c;
    }
  }
  return out;
}

std::string heading(const std::string& name, const std::string& summary) {
  std::string title = name;
  std::transform(title.begin(), title.end(), title.begin(), [](unsigned char c) { return std::toupper(c); });
  return fmt::format(".TH {} 1 \"\" \"{} {}\" \"User Commands\"\n.SH NAME\n{} \\- {}\n", roff(title),
                     program_name(), program_version(), roff(name), roff(summary));
}

bool positional(const OptionEntry& option) {
  return option.kind == OptionKind::kPositional || option.kind == OptionKind::kPositionals;
}

/// "single quoted" for a shell.
std::string quoted(const std::string& text) {
  std::string out(1, '\'');
  for (const char c : text) {
    if (c == '\'') out += "'\\'";
    out.push_back(c);
  }
  out.push_back('\'');
  return out;
}

enum class Takes { kNothing, kFile, kFolder, kWord, kText };

Takes takes(const OptionEntry& option) {
  if (option.kind == OptionKind::kFlag) return Takes::kNothing;
  if (!choices_of(option).empty()) return Takes::kWord;
  if (option.value.rfind("FILE", 0) == 0) return Takes::kFile;
  if (option.value == "DIR" || option.value == "FOLDER") return Takes::kFolder;
  return Takes::kText;
}

}  // namespace

std::string man_page(const CommandTable& table) {
  std::string page = heading(fmt::format("{}-{}", program_name(), table.name), table.summary);
  page += fmt::format(".SH SYNOPSIS\n.B {} {}\n", program_name(), roff(table.name));
  for (const OptionEntry& option : table.options) {
    if (!positional(option)) continue;
    const char* several = option.kind == OptionKind::kPositionals ? " ..." : "";
    page += option.required ? fmt::format(".I {}{}\n", roff(option.name), several)
                            : fmt::format("[\\fI{}\\fR{}]\n", roff(option.name), several);
  }
  page += "[\\fIOPTIONS\\fR]\n.SH OPTIONS\n";
  std::string group = "Options";
  for (const OptionEntry& option : table.options) {
    if (!positional(option) && option.group != group) {
      group = option.group;
      page += fmt::format(".SS {}\n", roff(group));
    }
    page += fmt::format(".TP\n\\fB{}\\fR", roff(option.name));
    if (!option.value.empty() && option.value != option.name)
      page += fmt::format(" \\fI{}\\fR", roff(option.value));
    page += fmt::format("\n{}\n", roff(option.help));
  }
  page += ".TP\n\\fB\\-h\\fR, \\fB\\-\\-help\\fR\nprint the options\n";
  if (!table.closing.empty()) page += fmt::format(".SH NOTES\n.nf\n{}\n.fi\n", roff(table.closing));
  return page + fmt::format(".SH SEE ALSO\n.BR {} (1)\n", program_name());
}

std::string man_page(const std::vector<CommandTable>& commands) {
  std::string page = heading(program_name(), "certified inertia of large sparse stiffness matrices");
  page += fmt::format(".SH SYNOPSIS\n.B {}\n.I COMMAND\n[\\fIARGUMENTS\\fR]\n.SH COMMANDS\n", program_name());
  for (const CommandTable& table : commands) {
    page += fmt::format(".TP\n.BR {}\\-{} (1)\n{}\n", program_name(), roff(table.name), roff(table.summary));
  }
  page +=
      ".SH CONFIGURATION\nOptions that are not typed are taken from the environment (STANCHION_MEMORY_CAP "
      "for "
      "\\-\\-memory\\-cap), else from the file named by \\-\\-config or STANCHION_CONFIG, else from "
      "stanchion/config.json in XDG_CONFIG_HOME or /etc. \\-\\-print\\-config says which hold.\n"
      ".SH EXIT STATUS\n.TP\n0\nanswered, and the good answer\n.TP\n1\nanswered, and not the good answer\n"
      ".TP\n2\nbad usage or bad input\n.TP\n3\nunresolved: some asked statement has no certificate\n"
      ".TP\n4\na limit was met: memory, disk or time\n.TP\n5\na defect of the "
      "program\n.TP\n130\ninterrupted\n";
  return page;
}

std::string bash_completion(const std::vector<CommandTable>& commands) {
  std::string names, options, words;
  for (const CommandTable& table : commands) {
    if (!names.empty()) names.push_back(' ');
    names += table.name;
    std::string all = "--help";
    for (const OptionEntry& option : table.options) {
      if (positional(option)) continue;
      all.push_back(' ');
      all += option.name;
      const std::string place = fmt::format("    '{} {}')", table.name, option.name);
      switch (takes(option)) {
        case Takes::kWord:
          words += fmt::format("{} COMPREPLY=($(compgen -W {} -- \"$word\")); return ;;\n", place,
                               quoted(fmt::format("{}", fmt::join(choices_of(option), " "))));
          break;
        case Takes::kFile:
          words += fmt::format("{} compopt -o filenames; COMPREPLY=($(compgen -f -- \"$word\")); return ;;\n",
                               place);
          break;
        case Takes::kFolder:
          words += fmt::format("{} compopt -o filenames; COMPREPLY=($(compgen -d -- \"$word\")); return ;;\n",
                               place);
          break;
        case Takes::kText:
          words += place + " return ;;\n";
          break;
        case Takes::kNothing:
          break;
      }
    }
    options += fmt::format("    {}) options={} ;;\n", table.name, quoted(all));
  }
  return fmt::format(
      "# Completion of {0} for bash, made from the declarations of its options.\n"
      "_{0}() {{\n"
      "  local word=${{COMP_WORDS[COMP_CWORD]}} before=${{COMP_WORDS[COMP_CWORD-1]}} "
      "command=${{COMP_WORDS[1]}} "
      "options=\n"
      "  COMPREPLY=()\n"
      "  if ((COMP_CWORD == 1)); then\n"
      "    COMPREPLY=($(compgen -W {1} -- \"$word\"))\n"
      "    return\n"
      "  fi\n"
      "  case \"$command $before\" in\n{2}  esac\n"
      "  case \"$command\" in\n{3}  esac\n"
      "  if [[ $word == -* ]]; then\n"
      "    COMPREPLY=($(compgen -W \"$options\" -- \"$word\"))\n"
      "  else\n"
      "    compopt -o filenames 2>/dev/null\n"
      "    COMPREPLY=($(compgen -f -- \"$word\"))\n"
      "  fi\n"
      "}}\n"
      "complete -F _{0} {0}\n",
      program_name(), quoted(names + " --help --version"), words, options);
}

std::string zsh_completion(const std::vector<CommandTable>& commands) {
  const auto described = [](const std::string& text) {
    std::string out;
    for (const char c : text) {
      if (c == '\\' || c == '[' || c == ']' || c == ':') out.push_back('\\');
      out.push_back(c);
    }
    return out;
  };
  std::string names, cases;
  for (const CommandTable& table : commands) {
    names += fmt::format("    {}\n", quoted(table.name + ":" + table.summary));
    cases += fmt::format("    {})\n      _arguments \\\n", table.name);
    for (const OptionEntry& option : table.options) {
      if (positional(option)) continue;
      const char* repeat =
          option.kind == OptionKind::kTexts || option.kind == OptionKind::kNumbers ? "*" : "";
      std::string spec = fmt::format("{}{}[{}]", repeat, option.name, described(option.help));
      switch (takes(option)) {
        case Takes::kNothing:
          break;
        case Takes::kWord:
          spec += fmt::format(":word:({})", fmt::join(choices_of(option), " "));
          break;
        case Takes::kFile:
          spec += ":file:_files";
          break;
        case Takes::kFolder:
          spec += ":folder:_files -/";
          break;
        case Takes::kText:
          spec += ":value: ";
          break;
      }
      cases += fmt::format("        {} \\\n", quoted(spec));
    }
    cases += "        '*:file:_files' ;;\n";
  }
  return fmt::format(
      "#compdef {0}\n# Completion of {0} for zsh, made from the declarations of its options.\n"
      "_{0}() {{\n  local -a commands\n  commands=(\n{1}  )\n"
      "  if ((CURRENT == 2)); then\n    _describe command commands\n    return\n  fi\n"
      "  local command=$words[2]\n  shift words\n  ((CURRENT--))\n"
      "  case $command in\n{2}  esac\n}}\n_{0} \"$@\"\n",
      program_name(), names, cases);
}

std::string fish_completion(const std::vector<CommandTable>& commands) {
  std::string text = fmt::format("# Completion of {} for fish, made from the declarations of its options.\n",
                                 program_name());
  for (const CommandTable& table : commands) {
    text += fmt::format("complete -c {} -n __fish_use_subcommand -f -a {} -d {}\n", program_name(),
                        table.name, quoted(table.summary));
    for (const OptionEntry& option : table.options) {
      if (positional(option)) continue;
      text += fmt::format("complete -c {} -n '__fish_seen_subcommand_from {}' -l {} -d {}", program_name(),
                          table.name, option.name.substr(2), quoted(option.help));
      switch (takes(option)) {
        case Takes::kNothing:
          break;
        case Takes::kWord:
          text += fmt::format(" -x -a {}", quoted(fmt::format("{}", fmt::join(choices_of(option), " "))));
          break;
        case Takes::kFile:
          text += " -r -F";
          break;
        case Takes::kFolder:
          text += " -x -a '(__fish_complete_directories)'";
          break;
        case Takes::kText:
          text += " -x";
          break;
      }
      text += "\n";
    }
  }
  return text;
}

}  // namespace stanchion::cli
