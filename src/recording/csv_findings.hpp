#pragma once

#include "stillmass/recording/recording.hpp"

#include "recording/csv_scan.hpp"
#include "recording/text_source.hpp"

namespace stillmass::recording {

/// Puts what the first pass found into the recording's findings, each with its times and the line of the file.
void note_scan(const CsvScan& scan, const TextSource& text, Recording& recording);

}  // namespace stillmass::recording
