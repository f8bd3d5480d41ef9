// The hidden command `manual`: texts for packagers and for README, all made from the tables of options and keys.
#include <fmt/format.h>

#include "stillmass/base/version.hpp"
#include "stillmass/survey/survey_file.hpp"

#include "cli/commands.hpp"
#include "cli/exit_code.hpp"
#include "cli/options.hpp"

namespace stillmass::cli {
namespace {

// Text for roff: a hyphen that is typed, no line that looks like a request.
std::string roff(std::string_view text) {
  std::string out;
  for (const char c : text) {
    if (c == '-' || c == '\\') out += '\\';
    out += c;
  }
  return out.starts_with('.') || out.starts_with('\'') ? "\\&" + out : out;
}

std::string man_page() {
  std::string out = fmt::format(
      ".TH STILLMASS 1 \"\" \"stillmass {}\"\n.SH NAME\nstillmass \\- from recordings of a machine that shakes to "
      "the absorber that stills it\n.SH SYNOPSIS\n.B stillmass\nCOMMAND FILE... [OPTIONS]\n.SH COMMANDS\n",
      base::version());
  for (const Command& command : all_commands()) {
    if (command.help.empty()) continue;
    out += fmt::format(".SS {} {}\n{}\n", command.name, roff(command.files), roff(command.help));
    for (const Option& option : all_options()) {
      if (!belongs(option, command.name)) continue;
      out += fmt::format(".TP\n.B {} {}\n{}\n", roff(option.name), roff(option.argument), roff(option.help));
    }
    if (!command.caution.empty()) out += fmt::format(".PP\n.B Caution:\n{}\n", roff(command.caution));
  }
  return out +
         ".SH EXIT STATUS\n0 done; 1 the recordings do not answer; 2 wrong usage or survey file; 3 a file cannot be "
         "read or "
         "written; 70 a fault of the program.\n";
}

std::string completion() {
  std::string commands;
  std::string cases;
  for (const Command& command : all_commands()) {
    if (command.help.empty()) continue;
    commands += (commands.empty() ? "" : " ") + std::string(command.name);
    std::string options;
    for (const Option& option : all_options()) {
      if (belongs(option, command.name)) options += (options.empty() ? "" : " ") + std::string(option.name);
    }
    cases += fmt::format("    {}) words=\"{}\" ;;\n", command.name, options);
  }
  return fmt::format(
      "_stillmass() {{\n  local current=\"${{COMP_WORDS[COMP_CWORD]}}\" words=\"\"\n"
      "  if [ \"$COMP_CWORD\" -eq 1 ]; then\n    COMPREPLY=($(compgen -W \"{} --help --version\" -- \"$current\"))\n   "
      " return\n  fi\n"
      "  case \"${{COMP_WORDS[1]}}\" in\n{}  esac\n"
      "  case \"$current\" in\n    -*) COMPREPLY=($(compgen -W \"$words --help\" -- \"$current\")) ;;\n"
      "    *) COMPREPLY=($(compgen -f -- \"$current\")) ;;\n  esac\n}}\ncomplete -o filenames -F _stillmass "
      "stillmass\n",
      commands, cases);
}

std::string_view type_name(base::KeyType type) {
  switch (type) {
    case base::KeyType::text:
      return "text";
    case base::KeyType::number:
      return "number";
    case base::KeyType::integer:
      return "whole number";
    case base::KeyType::flag:
      return "true/false";
    case base::KeyType::numbers:
      return "numbers";
    case base::KeyType::texts:
      return "texts";
    case base::KeyType::number_or_pair:
      return "number or [min, max]";
    case base::KeyType::table:
      return "table";
    case base::KeyType::tables:
      return "tables";
  }
  return "";
}

std::string key_reference() {
  std::string out = "| key | type | unit | default | meaning |\n| --- | --- | --- | --- | --- |\n";
  for (const base::Key& key : survey::survey_keys()) {
    std::string help(key.help);
    if (!key.allowed.empty()) {
      std::string allowed(key.allowed);
      for (std::size_t at = allowed.find('|'); at != std::string::npos; at = allowed.find('|'))
        allowed.replace(at, 1, ", ");
      help += (help.empty() ? "" : "; ") + ("one of " + allowed);
    }
    out += fmt::format("| `{}`{} | {} | {} | {} | {} |\n", key.path, key.required ? " (required)" : "",
                       type_name(key.type), key.unit, key.default_value, help);
  }
  return out;
}

}  // namespace

int run_manual(Session& session) {
  const std::string& wanted = session.arguments().files.front();
  if (wanted == "page") {
    session.print(man_page());
  } else if (wanted == "completion") {
    session.print(completion());
  } else if (wanted == "keys") {
    session.print(key_reference());
  } else {
    throw base::usage_error("", "manual knows page, completion and keys, not '" + wanted + "'");
  }
  return done;
}

}  // namespace stillmass::cli
