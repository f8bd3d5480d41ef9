#pragma once

#include <cstdint>
#include <optional>
#include <string>
#include <vector>

#include "stillmass/recording/channel.hpp"
#include "stillmass/recording/reader.hpp"

#include "recording/csv_dialect.hpp"
#include "recording/timestamp.hpp"

namespace stillmass::recording {

/// Where the time and the channels stand in the rows of a text file.
struct CsvTable {
  static constexpr int skip = -1;
  static constexpr int time = -2;

  char separator = ',';
  char decimal = '.';
  bool quoted = false;
  std::int64_t data_offset = 0;
  std::vector<int> targets;  ///< of each cell up to the last needed one: skip, time, or the channel's place
  bool has_time = false;
  bool time_is_stamp = false;  ///< dates or times of day, not numbers
  bool time_is_count = false;  ///< row numbers, which with the rate tell lost rows
  StampReading stamps;
  double time_to_s = 1.0;
  double time_resolution_s = 0.0;     ///< last printed digit
  bool single_precision = false;      ///< the times are those of 32-bit floats
  std::vector<double> first_times_s;  ///< of the first rows, for a first idea of the step
  std::size_t cells = 0;              ///< of a row, or of the header where that has more
  std::vector<std::string> header;    ///< lines above the first row
  std::vector<Channel> channels;      ///< names, units, roles as the header says
  std::string format;                 ///< what was recognised, for people
};

/// Reads header and first rows of the dialect. The rate that the user states settles the unit of whole-number times.
/// Throws `Error` (file) where there is no signal, and (usage) where the rate or the unit of the times is not known or
/// an option does not fit.
CsvTable describe_table(const CsvDialect& dialect, const TextSource& text, const OpenOptions& options);

}  // namespace stillmass::recording
