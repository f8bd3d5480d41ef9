#include "cli/help.hpp"

#include <fmt/format.h>

#include "stillmass/base/version.hpp"
#include "stillmass/report/terminal.hpp"

#include "cli/options.hpp"

namespace stillmass::cli {
namespace {

constexpr std::size_t screen = 100;

std::string overview() {
  std::string out = fmt::format(
      "stillmass {}: from field recordings of a machine that shakes to the specification of the absorber that stills "
      "it\n\n"
      "  stillmass COMMAND FILE... [OPTIONS]\n\nCommands:\n",
      base::version());
  for (const Command& command : all_commands()) {
    if (command.help.empty()) continue;
    out += fmt::format("  {:<10}{:<14}{}\n", command.name, command.files,
                       report::wrapped(std::string(command.help), screen - 26, 26));
  }
  return out +
         "\n  stillmass COMMAND --help   the command's options\n"
         "  stillmass --version\n\n"
         "Exit codes: 0 done; 1 the recordings do not answer the question (the text says what to measure);\n"
         "2 wrong usage or survey file; 3 a file cannot be read or written; 70 a fault of the program.\n\n"
         "Site rules, local codes and licensed practice go before anything this program says.\n";
}

}  // namespace

std::string help_text(std::string_view wanted) {
  for (const Command& command : all_commands()) {
    if (command.name != wanted) continue;
    std::string out = fmt::format("stillmass {}{}{} [OPTIONS]\n  {}\n\nOptions:\n", command.name,
                                  command.files.empty() ? "" : " ", command.files, command.help);
    for (const Option& option : all_options()) {
      if (!belongs(option, command.name)) continue;
      const std::string name =
          std::string(option.name) + (option.argument.empty() ? "" : " " + std::string(option.argument));
      const std::string help = std::string(option.help) + (option.again ? "; may be given again" : "");
      if (name.size() < 27) {
        out += fmt::format("  {:<28}{}\n", name, report::wrapped(help, screen - 30, 30));
      } else {
        out += fmt::format("  {}\n{:30}{}\n", name, "", report::wrapped(help, screen - 30, 30));
      }
    }
    if (!command.caution.empty())
      out += "\nCaution: " + report::wrapped(std::string(command.caution), screen - 9, 9) + "\n";
    return out;
  }
  return overview();
}

}  // namespace stillmass::cli
