#pragma once

#include "stillmass/recording/text_options.hpp"

#include "recording/csv_dialect.hpp"

namespace stillmass::recording {

/// Finds out whether day or month comes first in dates such as 03/04/2024, where the user does not say it, from a
/// number above 12 in the first rows or the last one. While the date stays the same it does not matter. Throws `Error`
/// (usage) where it matters and nothing tells, (file) where the dates contradict each other.
void settle_date_order(CsvDialect& dialect, const TextSource& text, const TextOptions& options);

}  // namespace stillmass::recording
