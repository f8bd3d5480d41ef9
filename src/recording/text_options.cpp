#include "stillmass/recording/text_options.hpp"

#include <algorithm>
#include <array>
#include <utility>

namespace stillmass::recording {
namespace {

template <typename T>
using Word = std::pair<std::string_view, T>;

constexpr auto separators =
    std::to_array<Word<char>>({{"comma", ','}, {"semicolon", ';'}, {"tab", '\t'}, {"blanks", ' '}});
constexpr auto decimals = std::to_array<Word<char>>({{"point", '.'}, {"comma", ','}});
constexpr auto time_units = std::to_array<Word<double>>(
    {{"s", 1.0}, {"ms", 1e-3}, {"us", 1e-6}, {"ns", 1e-9}, {"min", 60.0}, {"h", 3600.0}, {"d", 86400.0}});
constexpr auto date_orders = std::to_array<Word<bool>>({{"day-first", true}, {"month-first", false}});

template <typename T, std::size_t count>
std::optional<T> named(const std::array<Word<T>, count>& words, std::string_view word) {
  const auto found = std::find_if(words.begin(), words.end(), [&](const auto& each) { return each.first == word; });
  return found == words.end() ? std::nullopt : std::optional(found->second);
}

template <typename T, std::size_t count>
std::string_view name_of(const std::array<Word<T>, count>& words, T meant) {
  const auto found = std::find_if(words.begin(), words.end(), [&](const auto& each) { return each.second == meant; });
  return found == words.end() ? std::string_view() : found->first;
}

}  // namespace

std::optional<char> separator_named(std::string_view word) { return named(separators, word); }
std::optional<char> decimal_named(std::string_view word) { return named(decimals, word); }
std::optional<double> time_unit_named(std::string_view word) { return named(time_units, word); }
std::optional<bool> day_first_named(std::string_view word) { return named(date_orders, word); }

std::string_view separator_name(char separator) { return name_of(separators, separator); }
std::string_view decimal_name(char decimal) { return name_of(decimals, decimal); }
std::string_view time_unit_name(double unit_s) { return name_of(time_units, unit_s); }

}  // namespace stillmass::recording
