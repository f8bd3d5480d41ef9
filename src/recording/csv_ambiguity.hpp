#pragma once

#include <string>
#include <string_view>

#include "stillmass/recording/text_options.hpp"

#include "recording/csv_dialect.hpp"

namespace stillmass::recording {

/// Groups of three digits with signs between: two groups or more behind the first, or decimals behind another sign:
/// "1.234,5", "1,234,567".
bool is_grouped_number(std::string_view cell);
/// A number behind a minus sign of typesetting (U+2212).
bool has_typeset_minus(std::string_view cell, char decimal);

/// Throws `Error` (file, at `where`) for a comma or a point that may be a decimal sign as well as something else,
/// unless the user has said what it is: a guess would change the numbers. Numbers with a sign between thousands are
/// refused.
void refuse_ambiguity(const CsvDialect& dialect, const TextOptions& options, const std::string& where);

}  // namespace stillmass::recording
