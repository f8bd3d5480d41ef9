#include "cli/arguments.hpp"

#include <algorithm>
#include <map>

#include <CLI/CLI.hpp>

#include "stillmass/base/error.hpp"
#include "stillmass/base/number.hpp"
#include "stillmass/base/text.hpp"

#include "cli/options.hpp"

namespace stillmass::cli {
namespace {

std::string_view without_dashes(std::string_view option) { return option.substr(2); }

bool is_command(std::string_view word) {
  const auto commands = all_commands();
  return std::any_of(commands.begin(), commands.end(), [&](const Command& command) { return command.name == word; });
}

[[noreturn]] void refuse_command(const std::string& word) {
  std::vector<std::string_view> names;
  for (const Command& command : all_commands()) names.push_back(command.name);
  const std::string_view meant = base::nearest_name(word, names);
  throw base::usage_error(
      "", "unknown command '" + word + "'",
      meant.empty() ? "stillmass --help lists the commands" : "did you mean '" + std::string(meant) + "'?");
}

// An option that this command does not have: the nearest one that it has, or whose it is.
void check_known(const std::string& word, const std::string& command) {
  if (!word.starts_with("--") || word.size() == 2) return;
  const std::string name = word.substr(0, word.find('='));
  std::vector<std::string_view> names;
  std::string elsewhere;
  for (const Option& option : all_options()) {
    if (belongs(option, command)) names.push_back(option.name);
    if (option.name == name && !belongs(option, command)) elsewhere = option.commands;
  }
  if (std::find(names.begin(), names.end(), name) != names.end()) return;
  const std::string_view meant = base::nearest_name(name, names);
  std::string remedy = "stillmass " + command + " --help lists them";
  if (!elsewhere.empty()) {
    std::replace(elsewhere.begin(), elsewhere.end(), ' ', ',');
    remedy = "it belongs to " + elsewhere;
  } else if (!meant.empty()) {
    remedy = "did you mean " + std::string(meant) + "?";
  }
  throw base::usage_error("", command + " has no option " + name, remedy);
}

}  // namespace

std::optional<std::string> Arguments::text(std::string_view option) const {
  for (const auto& [name, value] : given_) {
    if (name == without_dashes(option)) return value;
  }
  return {};
}

std::vector<std::string> Arguments::all(std::string_view option) const {
  std::vector<std::string> values;
  for (const auto& [name, value] : given_) {
    if (name == without_dashes(option)) values.push_back(value);
  }
  return values;
}

std::optional<double> Arguments::number(std::string_view option) const {
  const auto value = text(option);
  return value ? base::parse_number(*value) : std::nullopt;
}

std::optional<int> Arguments::whole(std::string_view option) const {
  const auto value = number(option);
  return value ? std::optional(static_cast<int>(*value)) : std::nullopt;
}

std::optional<UncertainNumber> Arguments::estimate(std::string_view option) const {
  const auto value = text(option);
  return value ? parse_estimate(*value) : std::nullopt;
}

std::optional<base::Interval> Arguments::range(std::string_view option) const {
  const auto value = text(option);
  if (!value) return {};
  if (const auto one = base::parse_number(*value)) return base::Interval{*one, *one};
  return parse_range(*value);
}

std::vector<double> Arguments::numbers(std::string_view option) const {
  std::vector<double> values;
  if (const auto list = text(option)) {
    for (const std::string_view each : base::split(*list, ','))
      values.push_back(base::parse_number(each).value_or(0.0));
  }
  return values;
}

Arguments parse(std::span<const char* const> words) {
  Arguments arguments;
  const auto asks = [&](std::string_view word) {
    return std::any_of(words.begin() + 1, words.end(), [&](const char* each) { return word == each; });
  };
  if (words.size() > 1 && !std::string_view(words[1]).starts_with("-")) {
    arguments.command = words[1];
    if (!is_command(arguments.command)) refuse_command(arguments.command);
  }
  arguments.help = words.size() < 2 || asks("--help") || asks("-h");
  arguments.version = arguments.command.empty() && asks("--version");
  if (arguments.help || arguments.version) return arguments;
  if (arguments.command.empty()) {
    throw base::usage_error("", "a command comes first", "stillmass --help lists the commands");
  }
  const std::string& command = arguments.command;
  for (std::size_t i = 2; i < words.size() && std::string_view(words[i]) != "--"; ++i) check_known(words[i], command);

  const auto commands = all_commands();
  const Command& chosen =
      *std::find_if(commands.begin(), commands.end(), [&](const Command& each) { return each.name == command; });
  CLI::App app;
  app.set_help_flag();
  std::map<std::string, std::vector<std::string>> values;
  std::map<std::string, bool> flags;
  for (const Option& option : all_options()) {
    if (!belongs(option, command)) continue;
    const std::string name(option.name);
    if (option.rule == Rule::flag) {
      app.add_flag(name, flags[name]);
      continue;
    }
    // Exactly one argument each, so that a file behind it is never swallowed.
    app.add_option(name, values[name])
        ->expected(1)
        ->multi_option_policy(CLI::MultiOptionPolicy::TakeAll)
        ->allow_extra_args(false);
  }
  if (chosen.most_files > 0) app.add_option("files", arguments.files);
  try {
    std::vector<std::string> rest(words.begin() + 2, words.end());
    std::reverse(rest.begin(), rest.end());
    app.parse(std::move(rest));
  } catch (const CLI::ParseError& error) {
    throw base::usage_error("", command + ": " + error.what(), "stillmass " + command + " --help shows how");
  }
  for (const Option& option : all_options()) {
    if (!belongs(option, command)) continue;
    const std::string name(option.name);
    if (option.rule == Rule::flag && flags[name]) arguments.add(std::string(without_dashes(name)), "true");
    if (!option.again && values[name].size() > 1) throw base::usage_error("", name + " is given more than once");
    for (const std::string& value : values[name]) {
      const std::string wrong = broken_rule(option, value);
      if (!wrong.empty()) throw base::usage_error("", name + " " + wrong + ", not '" + value + "'");
      arguments.add(std::string(without_dashes(name)), value);
    }
  }
  if (arguments.files.size() < chosen.least_files || arguments.files.size() > chosen.most_files) {
    throw base::usage_error(
        "", command + (chosen.most_files == 0 ? " takes no file" : " takes " + std::string(chosen.files)),
        "stillmass " + command + " --help shows how");
  }
  return arguments;
}

}  // namespace stillmass::cli
