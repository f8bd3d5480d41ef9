#include "recording/csv_findings.hpp"

#include <cstdint>
#include <string>
#include <utility>

#include <fmt/format.h>

#include "stillmass/base/number.hpp"

#include "recording/even_rows.hpp"

namespace stillmass::recording {
namespace {

std::string counted(std::int64_t count, std::string_view one, std::string_view many) {
  return fmt::format("{} {}", count, count == 1 ? one : many);
}

void note_bad_cells(base::Code code, const char* what, const BadCells& cells, const std::string& channel,
                    Recording& recording) {
  if (cells.cells == 0) return;
  base::Finding finding{
      code,
      fmt::format("{}: {}, in {}, {}line {}", what, cells.cells, counted(cells.places, "place", "places"),
                  cells.cells == 1 ? "" : "the first in ", cells.first_line),
      channel};
  finding.from_s = cells.first_s;
  finding.to_s = cells.last_s;
  for (const auto& place : cells.first_places_s) {
    finding.evidence.push_back(fmt::format("{} s to {} s", base::rounded(place[0], 6), base::rounded(place[1], 6)));
  }
  recording.findings.push_back(std::move(finding));
}

void note_lines(base::Code code, const OddLines& odd, std::string_view what, std::string_view then,
                base::Strength strength, Recording& recording) {
  if (odd.lines == 0) return;
  base::Finding finding{code, fmt::format("{} in line {}{}{}", what, odd.first_line,
                                          odd.lines == 1 ? "" : fmt::format(" and {} more", odd.lines - 1), then)};
  finding.from_s = odd.first_s;
  finding.to_s = odd.last_s;
  finding.strength = strength;
  recording.findings.push_back(std::move(finding));
}

void note_other_table(const OddLines& other, Recording& recording) {
  base::Finding finding{
      base::Code::odd_lines,
      fmt::format("a table of other columns follows and is left out, from line {} on", other.first_line)};
  finding.from_s = other.first_s;
  recording.findings.push_back(std::move(finding));
}

void note_padding(const TextSource& text, Recording& recording) {
  constexpr std::int64_t end_marks = 8;  // a few bytes may be an end mark
  if (text.padding() <= end_marks) return;
  base::Finding finding{base::Code::truncated,
                        fmt::format("the file ends in {} bytes of nothing, as after a loss of power", text.padding())};
  finding.from_s = recording.duration_s();
  recording.findings.push_back(std::move(finding));
}

}  // namespace

void note_scan(const CsvScan& scan, const TextSource& text, Recording& recording) {
  using base::Code;
  using base::Strength;
  recording.findings.insert(recording.findings.end(), scan.grid.findings.begin(), scan.grid.findings.end());
  if (!scan.grid.even) {
    recording.findings.back().text += fmt::format(
        "; the samples are brought to an even {} Hz by a polynomial of degree 5, which alters a tone by less "
        "than 1 % up to {} Hz",
        base::rounded(recording.rate_hz, 5), base::rounded(even_limit_hz(scan.grid.widest_step_s), 2));
  }
  note_lines(Code::odd_lines, scan.headers, "the header stands again", ": the logger was restarted", Strength::strong,
             recording);
  note_lines(Code::odd_lines, scan.texts, "text stands between the rows", "",
             scan.restarts.empty() ? Strength::weak : Strength::strong, recording);
  note_lines(Code::odd_lines, scan.too_long, "a row has more cells than columns, those are left out,", "",
             Strength::fair, recording);
  if (scan.other_table) note_other_table(*scan.other_table, recording);
  note_lines(Code::missing_values, scan.without_time, "a row has no time and is left out,", "", Strength::strong,
             recording);
  note_padding(text, recording);
  for (std::size_t c = 0; c < recording.channels.size(); ++c) {
    const std::string& name = recording.channels[c].name;
    note_bad_cells(Code::missing_values, "cells without a number", scan.missing[c], name, recording);
    note_bad_cells(Code::not_a_number, "samples that are not numbers", scan.not_a_number[c], name, recording);
  }
}

}  // namespace stillmass::recording
