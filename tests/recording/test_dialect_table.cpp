// Small texts as loggers, spreadsheets and scripts write them, and what must be read from each. The expected values are
// those that a person reads in the text.
#include <string>
#include <vector>

#include <fmt/format.h>

#include "stillmass/recording/reader.hpp"

#include "recording/reading.hpp"
#include "support/catch.hpp"

using namespace stillmass;
using namespace stillmass::tests;

namespace {

struct Row {
  const char* claim;
  std::string text;
  const char* written;  // separator and decimal sign
  const char* times;    // as the output states them
  double rate_hz;
  const char* channels;             // names with units; "?" for a unit that nothing states
  std::vector<double> first, last;  // samples of the first and the last row, in the channel's unit
  double told_rate_hz = 0.0;        // with --rate
};

std::string utf16(std::string_view latin1, bool big_endian, bool mark) {
  std::string out = !mark ? "" : (big_endian ? "\xFE\xFF" : "\xFF\xFE");
  for (const char c : latin1) out += big_endian ? std::string{'\0', c} : std::string{c, '\0'};
  return out;
}

// Two lines a row: the text, what is expected of it.
// clang-format off
const std::vector<Row>& rows() {
  static const std::vector<Row> all{
      // separators and decimal signs
      {"comma, point", "t [s],a [g]\n0.0,1\n0.1,2.5\n0.2,-3\n",
       "comma, decimal point", "column 1 [s]", 10, "a[g]", {1}, {-3}},
      {"semicolon, point", "t [s];a [g]\n0.0;1\n0.1;2.5\n0.2;-3\n",
       "semicolon, decimal point", "column 1 [s]", 10, "a[g]", {1}, {-3}},
      {"semicolon, comma", "t [s];a [g]\n0,0;1\n0,1;2,5\n0,2;-3,5\n",
       "semicolon, decimal comma", "column 1 [s]", 10, "a[g]", {1}, {-3.5}},
      {"tab, point", "t [s]\ta [g]\n0.0\t1\n0.1\t2.5\n0.2\t-3\n",
       "tab, decimal point", "column 1 [s]", 10, "a[g]", {1}, {-3}},
      {"tab, comma", "t [s]\ta [g]\n0,0\t1\n0,1\t2,5\n0,2\t-3\n",
       "tab, decimal comma", "column 1 [s]", 10, "a[g]", {1}, {-3}},
      {"blanks, point", "t a b\n0.0  1   5\n0.1  2.5 6\n0.2 -3   7\n",
       "blanks, decimal point", "column 1 [s, assumed]", 10, "a[?] b[?]", {1, 5}, {-3, 7}},
      {"blanks, comma", "t a\n0,0  1\n0,1  2,5\n0,2 -3\n",
       "blanks, decimal comma", "column 1 [s, assumed]", 10, "a[?]", {1}, {-3}},
      {"comma, comma, in quotes", "\"t [s]\",\"a [g]\"\n\"0,0\",\"1,5\"\n\"0,1\",\"2,5\"\n\"0,2\",\"-3,5\"\n",
       "comma, decimal comma", "column 1 [s]", 10, "a[g]", {1.5}, {-3.5}},
      {"exponents", "t [s],a [g]\n0.0E+0,1.0e-3\n1.0E-1,2.0e-3\n2.0E-1,-3.0E-03\n",
       "comma, decimal point", "column 1 [s]", 10, "a[g]", {1e-3}, {-3e-3}},
      {"trailing separators", "t [s];a [g];\n0.0;1;\n0.1;2;\n0.2;3;\n",
       "semicolon, decimal point", "column 1 [s]", 10, "a[g]", {1}, {3}},
      {"blanks around cells", "t [s] , a [g]\n 0.0 ,  1 \n 0.1 ,  2 \n 0.2 , -3 \n",
       "comma, decimal point", "column 1 [s]", 10, "a[g]", {1}, {-3}},
      // encodings and line ends
      {"byte order mark, CRLF", "\xEF\xBB\xBFt [s];x [\xC2\xB5m]\r\n0;1\r\n0.5;2\r\n1;3\r\n",
       "semicolon, decimal point", "column 1 [s]", 2, "x[um]", {1}, {3}},
      {"Latin-1", "t [\xB5s];Beschl. in m/s\xB2\n0;1\n500;2\n1000;3\n",
       "semicolon, decimal point", "column 1 [us]", 2000, "Beschl.[m/s2]", {1}, {3}},
      {"lone CR", "t [s];a [g]\r0.0;1\r0.1;2\r0.2;3\r",
       "semicolon, decimal point", "column 1 [s]", 10, "a[g]", {1}, {3}},
      {"UTF-16 LE with mark", utf16("t [s]\tx [\xB5m]\r\n0,0\t1\r\n0,1\t2\r\n0,2\t3\r\n", false, true),
       "tab, decimal comma", "column 1 [s]", 10, "x[um]", {1}, {3}},
      {"UTF-16 BE with mark", utf16("t [s]\ta [m/s\xB2]\n0.0\t1\n0.1\t2\n0.2\t3\n", true, true),
       "tab, decimal point", "column 1 [s]", 10, "a[m/s2]", {1}, {3}},
      {"UTF-16 LE without mark", utf16("t [s];a [g]\n0.0;1\n0.1;2\n0.2;3\n", false, false),
       "semicolon, decimal point", "column 1 [s]", 10, "a[g]", {1}, {3}},
      {"UTF-16 BE without mark", utf16("t [s];a [g]\n0.0;1\n0.1;2\n0.2;3\n", true, false),
       "semicolon, decimal point", "column 1 [s]", 10, "a[g]", {1}, {3}},
      {"UTF-16 cut in a code unit", utf16("t [s];a [g]\n0.0;1\n0.1;2\n0.2;3\n", false, true) + "7",
       "semicolon, decimal point", "column 1 [s]", 10, "a[g]", {1}, {3}},
      {"an end mark of old", "t [s];a [g]\n0.0;1\n0.1;2\n0.2;3\n\x1A",
       "semicolon, decimal point", "column 1 [s]", 10, "a[g]", {1}, {3}},
      // headers, names and units
      {"no header", "0.0,1,5\n0.1,2,6\n0.2,-3,7\n",
       "comma, decimal point", "column 1 [s, assumed]", 10, "channel 1[?] channel 2[?]", {1, 5}, {-3, 7}},
      {"a block above", "Logger,A7\nDate,2024-02-28\nSerial,0042\n\nt [s],a [g]\n0.0,1\n0.1,2\n0.2,3\n",
       "5 header lines", "column 1 [s]", 10, "a[g]", {1}, {3}},
      {"a row of units", "Time;Ax;v\ns;g;mm/s\n0.0;1;4\n0.1;2;5\n0.2;3;6\n",
       "2 header lines", "column 1 [s]", 10, "Ax[g] v[mm/s]", {1, 4}, {3, 6}},
      {"a row of units in brackets", "Time\tAx\n[ms]\t[m/s^2]\n0\t1\n5\t2\n10\t3\n",
       "2 header lines", "column 1 [ms]", 200, "Ax[m/s2]", {1}, {3}},
      {"brackets", "Time (s),Ax [g],acc_x (m/s^2),d{um}\n0.0,1,2,3\n0.1,4,5,6\n0.2,7,8,9\n",
       "comma", "column 1 [s]", 10, "Ax[g] acc_x[m/s2] d[um]", {1, 2, 3}, {7, 8, 9}},
      {"a unit behind a blank", "Time ms;Velocity mm/s;Weg \xC2\xB5m\n0;1;2\n10;3;4\n20;5;6\n",
       "semicolon", "column 1 [ms]", 100, "Velocity[mm/s] Weg[um]", {1, 2}, {5, 6}},
      {"a unit behind 'in'", "Zeit in ms;Beschl. in m/s\xC2\xB2\n0;1\n10;2\n20;3\n",
       "semicolon", "column 1 [ms]", 100, "Beschl.[m/s2]", {1}, {3}},
      {"a unit behind a comma", "Time, s;Ax, g\n0.0;1\n0.1;2\n0.2;3\n",
       "semicolon", "column 1 [s]", 10, "Ax[g]", {1}, {3}},
      {"a unit behind a stroke", "t/s;a/(m/s\xC2\xB2);v / (mm/s)\n0.0;1;4\n0.1;2;5\n0.2;3;6\n",
       "semicolon", "column 1 [s]", 10, "a[m/s2] v[mm/s]", {1, 4}, {3, 6}},
      {"a unit behind an underline", "time_ms,acc_x_g,vel_mm_s\n0,1,4\n5,2,5\n10,3,6\n",
       "comma", "column 1 [ms]", 200, "acc_x_g[g] vel_mm_s[mm/s]", {1, 4}, {3, 6}},
      {"a detector with the unit", "t [s],X (mm/s RMS),Y [g peak]\n0.0,1,4\n0.1,2,5\n0.2,3,6\n",
       "comma", "column 1 [s]", 10, "X RMS[mm/s] Y peak[g]", {1, 4}, {3, 6}},
      {"text behind the unit", "t [s],Ch1 [g] left\n0.0,1\n0.1,2\n0.2,3\n",
       "comma", "column 1 [s]", 10, "Ch1 left[g]", {1}, {3}},
      {"a single letter is a name", "t [s],Motor N\n0.0,1\n0.1,2\n0.2,3\n",
       "comma", "column 1 [s]", 10, "Motor N[?]", {1}, {3}},
      {"a minimum is no minute", "t [s],Speed min\n0.0,1\n0.1,2\n0.2,3\n",
       "comma", "column 1 [s]", 10, "Speed min[?]", {1}, {3}},
      {"a temperature T is no time", "t [s],T [\xC2\xB0" "C]\n0.0,20\n0.1,21\n0.2,22\n",
       "comma", "column 1 [s]", 10, "T[degC]", {20}, {22}},
      {"separators within quotes", "\"t [s]\",\"Pump, DE [g]\"\n0.0,1\n0.1,2\n0.2,3\n",
       "comma", "column 1 [s]", 10, "Pump, DE[g]", {1}, {3}},
      {"a line end within quotes", "\"Time\n[s]\",\"Acceleration\n[g]\"\n0.0,1\n0.1,2\n0.2,3\n",
       "comma, decimal point, 3 header lines", "column 1 [s]", 10, "Acceleration[g]", {1}, {3}},
      {"a separator stated for spreadsheets", "sep=;\nt [s];a [g]\n0.0;1\n0.1;2\n0.2;3\n",
       "semicolon, decimal point, 2 header lines", "column 1 [s]", 10, "a[g]", {1}, {3}},
      {"numbers in the header", "Channel;1;2\nGain;50;50\nUnit;g;V\nt [s];a;b\n0.0;1;4\n0.1;2;5\n0.2;3;6\n",
       "semicolon, decimal point, 4 header lines", "column 1 [s]", 10, "a[g] b[V]", {1, 4}, {3, 6}},
      {"comments with #", "# t [s], a [g]\n0.0,1\n# a note\n0.1,2\n0.2,3\n",
       "comma", "column 1 [s]", 10, "a[g]", {1}, {3}},
      {"comments with %", "% made by a script\n% t [s]   a [g]\n0.0 1\n0.1 2\n0.2 3\n",
       "blanks", "column 1 [s]", 10, "a[g]", {1}, {3}},
      {"comments with //", "// t [s];a [g]\n0.0;1\n// note\n0.1;2\n0.2;3\n",
       "semicolon", "column 1 [s]", 10, "a[g]", {1}, {3}},
      {"comments with ;", "; t [s], a [g]\n0.0,1\n; note\n0.1,2\n0.2,3\n",
       "comma", "column 1 [s]", 10, "a[g]", {1}, {3}},
      // times
      {"milliseconds", "millis,a [g]\n5000,1\n5002,2\n5004,3\n",
       "comma", "column 1 [ms]", 500, "a[g]", {1}, {3}},
      {"microseconds", "micros,a [g]\n0,1\n250,2\n500,3\n",
       "comma", "column 1 [us]", 4000, "a[g]", {1}, {3}},
      {"minutes", "Time (min),a [g]\n0.000,1\n0.005,2\n0.010,3\n",
       "comma", "column 1 [min]", 3.333, "a[g]", {1}, {3}},
      {"ISO 8601 with T and Z",
       "when,a [g]\n2024-02-28T23:59:59.50Z,1\n2024-02-28T23:59:59.75Z,2\n2024-02-29T00:00:00.00Z,3\n",
       "comma", "date and time in column 1", 4, "a[g]", {1}, {3}},
      {"ISO 8601 with an offset",
       "when;a [g]\n2024-02-28 23:59:59.50+01:00;1\n2024-02-28 23:59:59.75+01:00;2\n"
       "2024-02-29 00:00:00.00+01:00;3\n",
       "semicolon", "date and time in column 1", 4, "a[g]", {1}, {3}},
      {"points, decimal comma",
       "Zeit;a [g]\n28.02.2024 23:59:59,50;1,5\n28.02.2024 23:59:59,75;2,5\n29.02.2024 00:00:00,00;3,5\n",
       "semicolon, decimal comma", "date and time in column 1", 4, "a[g]", {1.5}, {3.5}},
      {"day first", "Time,a [g]\n31/03/2024 23:59:59.50,1\n31/03/2024 23:59:59.75,2\n01/04/2024 00:00:00.00,3\n",
       "comma", "date and time in column 1, day first", 4, "a[g]", {1}, {3}},
      {"month first, PM",
       "Time,a [g]\n03/31/2024 11:59:59.50 PM,1\n03/31/2024 11:59:59.75 PM,2\n04/01/2024 12:00:00.00 AM,3\n",
       "comma", "date and time in column 1, month first", 4, "a[g]", {1}, {3}},
      {"one day, order unknown",
       "Time,a [g]\n03/04/2024 10:00:00.50,1\n03/04/2024 10:00:00.75,2\n03/04/2024 10:00:01.00,3\n",
       "comma", "date and time in column 1", 4, "a[g]", {1}, {3}},
      {"a named month",
       "Time,a [g]\n28-Feb-2024 23:59:59.50,1\n28-Feb-2024 23:59:59.75,2\n29-Feb-2024 00:00:00.00,3\n",
       "comma", "date and time in column 1", 4, "a[g]", {1}, {3}},
      {"clock past midnight", "Uhrzeit,a [g]\n23:59:59.500000,1\n23:59:59.750000,2\n00:00:00.000000,3\n",
       "comma", "time of day in column 1", 4, "a[g]", {1}, {3}},
      {"a third colon", "Time,a [g]\n10:00:00:250,1\n10:00:00:500,2\n10:00:00:750,3\n",
       "comma", "time of day in column 1", 4, "a[g]", {1}, {3}},
      {"minutes and seconds", "Time,a [g]\n15:00.25,1\n15:00.50,2\n15:00.75,3\n",
       "comma", "time of day in column 1", 4, "a[g]", {1}, {3}},
      {"date and time apart",
       "Date,Time,a [g]\n31/12/2024,23:59:59.50,1\n31/12/2024,23:59:59.75,2\n01/01/2025,00:00:00.00,3\n",
       "comma", "time of day in column 2; column 1 (no numbers) left out", 4, "a[g]", {1}, {3}},
      {"date and time apart by blanks",
       "2024-12-31 23:59:59.50  1\n2024-12-31 23:59:59.75  2\n2025-01-01 00:00:00.00  3\n",
       "blanks", "time of day in column 2", 4, "channel 1[?]", {1}, {3}},
      {"epoch seconds", "timestamp,a [g]\n1700000000.00,1\n1700000000.25,2\n1700000000.50,3\n",
       "comma", "column 1 [s since 1970]", 4, "a[g]", {1}, {3}},
      {"epoch milliseconds", "ts,a [g]\n1700000000000,1\n1700000000010,2\n1700000000020,3\n",
       "comma", "column 1 [ms since 1970]", 100, "a[g]", {1}, {3}},
      {"epoch microseconds", "stamp,a [g]\n1700000000000000,1\n1700000000000500,2\n1700000000001000,3\n",
       "comma", "column 1 [us since 1970]", 2000, "a[g]", {1}, {3}},
      {"a unit from the rate", "time,a [g]\n0,1\n4,2\n8,3\n",
       "comma", "column 1 [ms, from the rate]", 250, "a[g]", {1}, {3}, 250},
      {"row numbers and a rate", "Sample,a [g]\n1,1\n2,2\n3,3\n",
       "comma", "times from the row numbers in column 1", 500, "a[g]", {1}, {3}, 500},
      {"no times and a rate", "a [g];b [g]\n1;-4\n2;5\n1.5;6\n",
       "semicolon", "no times", 500, "a[g] b[g]", {1, -4}, {1.5, 6}, 500},
      {"time in the last column", "a [g],t [s]\n1,0.0\n2,0.1\n3,0.2\n",
       "comma", "column 2 [s]", 10, "a[g]", {1}, {3}},
      {"coarse date before a finer clock",
       "Date Time;Elapsed [s];a [g]\n2024-02-28 10:00:00;0.0;1\n2024-02-28 10:00:00;0.1;2\n"
       "2024-02-28 10:00:00;0.2;3\n",
       "semicolon", "column 2 [s]; column 1 (times) left out", 10, "a[g]", {1}, {3}},
      {"a date that stands still before a finer time", "Date/Time;Rel. Time [s];a [g]\n2024-02-28 10:00:00;0.0;1\n"
       "2024-02-28 10:00:00;0.1;2\n2024-02-28 10:00:00;0.2;3\n",
       "semicolon", "column 2 [s]", 10, "a[g]", {1}, {3}},
      {"a column of remarks", "t [s],State,a [g]\n0.0,run,1\n0.1,run,2\n0.2,run,3\n",
       "comma", "column 1 [s]; column 2 (no numbers) left out", 10, "a[g]", {1}, {3}},
  };
  return all;
}

// clang-format on

std::string channels_of(const recording::Recording& recording) {
  std::string text;
  for (const recording::Channel& channel : recording.channels) {
    text += fmt::format("{}{}[{}]", text.empty() ? "" : " ", channel.name,
                        channel.unit_known ? channel.unit.name : std::string_view("?"));
  }
  return text;
}

}  // namespace

TEST_CASE("each way of writing a table is recognised, stated and read to the last sample") {
  CHECK(rows().size() >= 60);
  for (const Row& row : rows()) {
    INFO(row.claim);
    recording::OpenOptions options;
    if (row.told_rate_hz > 0.0) options.rate_hz = row.told_rate_hz;
    Opened csv(row.text, options);
    const auto& recording = csv.recording();
    INFO(recording.format);
    CHECK(recording.format.find(row.written) != std::string::npos);
    CHECK(recording.format.find(row.times) != std::string::npos);
    // Stamps since 1970 are held as doubles: 0.24 us apart.
    CHECK(recording.rate_hz == Approx(row.rate_hz).epsilon(1e-9));
    CHECK(channels_of(recording) == row.channels);
    CHECK(recording.segments.size() == 1);
    const auto samples = all_samples(*csv.reader);
    REQUIRE(samples.size() == row.first.size());
    for (std::size_t c = 0; c < samples.size(); ++c) {
      REQUIRE(samples[c].size() == 3);
      const double unit = recording.channels[c].factor;
      CHECK(samples[c].front() == Approx(row.first[c] * unit).epsilon(1e-14));  // one multiplication by the factor
      CHECK(samples[c].back() == Approx(row.last[c] * unit).epsilon(1e-14));
    }
    for (const auto code : {base::Code::gap, base::Code::uneven_times, base::Code::missing_values,
                            base::Code::odd_lines, base::Code::truncated}) {
      CHECK(found(recording.findings, code) == nullptr);
    }
  }
}
