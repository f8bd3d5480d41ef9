#pragma once

#include <optional>
#include <span>
#include <string>
#include <string_view>
#include <utility>
#include <vector>

#include "stillmass/base/interval.hpp"

#include "cli/values.hpp"

namespace stillmass::cli {

/// The command line, checked against the table of options.
class Arguments {
 public:
  std::string command;             ///< empty: none was given
  std::vector<std::string> files;  ///< what follows the command
  bool help = false;
  bool version = false;

  bool has(std::string_view option) const { return text(option).has_value(); }
  std::optional<std::string> text(std::string_view option) const;
  std::vector<std::string> all(std::string_view option) const;
  std::optional<double> number(std::string_view option) const;
  std::optional<int> whole(std::string_view option) const;
  std::optional<UncertainNumber> estimate(std::string_view option) const;
  std::optional<base::Interval> range(std::string_view option) const;  ///< LO:HI; a plain number gives lo == hi
  std::vector<double> numbers(std::string_view option) const;
  /// Every option as given, in order, without the dashes: for the record.
  const std::vector<std::pair<std::string, std::string>>& given() const { return given_; }

  void add(std::string option, std::string value) { given_.emplace_back(std::move(option), std::move(value)); }

 private:
  std::vector<std::pair<std::string, std::string>> given_;
};

/// Throws `Error` of kind `usage` for an unknown command or option, a missing or broken argument.
Arguments parse(std::span<const char* const> words);

}  // namespace stillmass::cli
