#pragma once

#include <span>
#include <string>
#include <string_view>

namespace stillmass::cli {

/// What an option's argument must be.
enum class Rule {
  flag,  ///< no argument
  text,
  file,
  folder,
  choice,        ///< one of the words in `argument`, "a|b|c"
  whole_number,  ///< 1 or more
  column,        ///< 1 or more, or 0 for none
  number,        ///< any finite number
  positive,      ///< finite and above 0
  not_negative,
  fraction,           ///< 0 to below 1
  positive_estimate,  ///< V or V+-U, V above 0
  range,              ///< LO:HI, LO not above HI, both 0 or more
  value_or_range,     ///< a positive number or LO:HI
  number_list,        ///< positive numbers with commas between
  channel,            ///< INDEX=NAME[:UNIT[*SCALE]]
  added_mass,         ///< KG=FILE
  signed_range,       ///< LO:HI, LO not above HI
  auto_or_range,      ///< "auto" or LO:HI
};

/// One option of the command line. The help, the man page and the completion are made from these rows.
struct Option {
  std::string_view name;      ///< "--from"
  std::string_view argument;  ///< "S"; for a choice the words
  Rule rule = Rule::text;
  bool again = false;  ///< may be given more than once
  std::string_view help;
  std::string_view commands;  ///< words with blanks between: the commands it belongs to
};

/// One command of the program.
struct Command {
  std::string_view name;
  std::string_view files;  ///< what follows it: "RECORDING..."; empty: nothing
  std::size_t least_files = 0;
  std::size_t most_files = 0;
  std::string_view help;     ///< empty: a hidden command
  std::string_view caution;  ///< printed below the help; may be empty
};

std::span<const Option> all_options();
std::span<const Command> all_commands();
/// True where the option belongs to the command.
bool belongs(const Option& option, std::string_view command);
/// Empty where the text keeps the rule; else what is wrong: "must be a number above 0".
std::string broken_rule(const Option& option, std::string_view text);

}  // namespace stillmass::cli
