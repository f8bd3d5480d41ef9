#pragma once

#include <string>

#include "recording/csv_dialect.hpp"

namespace stillmass::recording {

/// Throws `Error` (file, at `where`) for a comma that may be a decimal sign as well as something else: a guess would
/// change the numbers.
void refuse_ambiguity(const CsvDialect& dialect, const std::string& where);

}  // namespace stillmass::recording
