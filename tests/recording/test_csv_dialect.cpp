#include <string>
#include <vector>

#include "stillmass/recording/reader.hpp"

#include "recording/reading.hpp"
#include "support/catch.hpp"

using namespace stillmass;
using namespace stillmass::tests;
using recording::OpenOptions;

namespace {

constexpr double g = base::standard_gravity;

struct Sample {
  std::string claim;
  std::string text;
  double rate_hz;
  std::vector<std::string> names;
  std::vector<std::string> units;            // empty: not known
  std::vector<std::vector<double>> samples;  // SI, planar
  std::string format;                        // part of it
};

std::string utf16(const std::string& latin1, bool big_endian) {
  std::string out = big_endian ? "\xFE\xFF" : "\xFF\xFE";
  for (const char c : latin1) {
    if (big_endian) out.push_back('\0');
    out.push_back(c);
    if (!big_endian) out.push_back('\0');
  }
  return out;
}

const std::vector<Sample>& samples() {
  static const std::vector<Sample> all{
      {"comma and point",
       "time [s],a [m/s2]\n0,1\n0.01,2.5\n0.02,-3\n",
       100,
       {"a"},
       {"m/s2"},
       {{1, 2.5, -3}},
       "CSV: comma, decimal point, 1 header line, time in column 1 [s]"},
      {"semicolon and comma",
       "t (s);x (mm/s)\n0,00;1,5\n0,01;2,5\n0,02;-3,5\n",
       100,
       {"x"},
       {"mm/s"},
       {{0.0015, 0.0025, -0.0035}},
       "semicolon, decimal comma"},
      {"tab, carriage returns, trailing tabs",
       "Time [s]\tF [N]\t\r\n0.0\t 1\t\r\n0.5\t+2\t\r\n1.0\t 3e1\t\r\n",
       2,
       {"F"},
       {"N"},
       {{1, 2, 30}},
       "tab"},
      {"blanks",
       "  0.000   1.5   -2\n  0.002   2.5   -3\n  0.004   3.5   -4\n",
       500,
       {"channel 1", "channel 2"},
       {"", ""},
       {{1.5, 2.5, 3.5}, {-2, -3, -4}},
       "blanks, decimal point, 0 header lines"},
      {"blanks and decimal comma",
       "0,000 1,5\n0,002 2,5\n0,004 3,5\n",
       500,
       {"channel 1"},
       {""},
       {{1.5, 2.5, 3.5}},
       "blanks, decimal comma"},
      {"comma and blank", "t, a in g\n0.0, 1\n0.1, 2\n0.2, 4\n", 10, {"a"}, {"g"}, {{g, 2 * g, 4 * g}}, "comma"},
      {"byte order mark",
       "\xEF\xBB\xBFtime [s];a [m/s\xC2\xB2]\n0.0;1\n0.1;2\n0.2;3\n",
       10,
       {"a"},
       {"m/s2"},
       {{1, 2, 3}},
       ""},
      {"Latin-1", "time [s];x [\xB5m]\n0.0;1\n0.1;2\n0.2;3\n", 10, {"x"}, {"um"}, {{1e-6, 2e-6, 3e-6}}, ""},
      {"UTF-16, little end first",
       utf16("time [s]\tx [\xB5m]\r\n0,0\t1\r\n0,1\t2\r\n0,2\t3\r\n", false),
       10,
       {"x"},
       {"um"},
       {{1e-6, 2e-6, 3e-6}},
       "tab, decimal comma"},
      {"UTF-16, big end first",
       utf16("time [s]\tx [g]\n0.0\t1\n0.1\t2\n0.2\t3\n", true),
       10,
       {"x"},
       {"g"},
       {{g, 2 * g, 3 * g}},
       ""},
      {"quotes",
       "\"time [s]\",\"a, left [g]\"\n\"0.0\",\"1\"\n\"0.1\",\"2\"\n\"0.2\",\"3\"\n",
       10,
       {"a, left"},
       {"g"},
       {{g, 2 * g, 3 * g}},
       ""},
      {"quotes around decimal commas",
       "\"0,0\",\"1,5\"\n\"0,1\",\"2,5\"\n\"0,2\",\"3,5\"\n",
       10,
       {"channel 1"},
       {""},
       {{1.5, 2.5, 3.5}},
       "comma, decimal comma"},
      {"comments",
       "# made by a logger\n# time [ms],a [g]\n0.0,1\n# a note\n100.0,2\n\n200.0,3\n",
       10,
       {"a"},
       {"g"},
       {{g, 2 * g, 3 * g}},
       "[ms]"},
      {"units in a row of their own",
       "Time,Ax,Ay\nms,g,mm/s\n0,1,1\n10,2,2\n20,3,3\n",
       100,
       {"Ax", "Ay"},
       {"g", "mm/s"},
       {{g, 2 * g, 3 * g}, {1e-3, 2e-3, 3e-3}},
       "2 header lines"},
      {"a unit for each channel, none for the time",
       "Time\ta\tb\n\tg\tV\n0.0\t1\t2\n0.1\t2\t3\n0.2\t3\t4\n",
       10,
       {"a", "b"},
       {"g", "V"},
       {{g, 2 * g, 3 * g}, {2, 3, 4}},
       "2 header lines"},
      {"a label before the units",
       "Serial,12\nUnit,g,V,\nX_Value,a,b,Comment\n0.0,1,2\n0.1,2,3,bump\n0.2,3,4\n",
       10,
       {"a", "b"},
       {"g", "V"},
       {{g, 2 * g, 3 * g}, {2, 3, 4}},
       "3 header lines"},
      {"a unit behind the name",
       "time_ms;Velocity mm/s\n0;1\n5;2\n10;3\n",
       200,
       {"Velocity"},
       {"mm/s"},
       {{1e-3, 2e-3, 3e-3}},
       ""},
      {"microseconds", "t [us],a\n0,1\n250,2\n500,3\n", 4000, {"a"}, {""}, {{1, 2, 3}}, "[us]"},
      {"date and time",
       "when,a [g]\n2024-02-28T23:59:59.5,1\n2024-02-28T23:59:59.75,2\n2024-02-29T00:00:00.0,3\n",
       4,
       {"a"},
       {"g"},
       {{g, 2 * g, 3 * g}},
       "date and time in column 1"},
      {"time of day and date apart",
       "Date;Time;a [g]\n2024-02-28;12:00:00,5;1\n2024-02-28;12:00:01,0;2\n2024-02-28;12:00:01,5;3\n",
       2,
       {"a"},
       {"g"},
       {{g, 2 * g, 3 * g}},
       "column 1 (no numbers) left out"},
      {"row numbers before the time",
       "No,Time [s],a [g]\n1,0.0,1\n2,0.1,2\n3,0.2,3\n",
       10,
       {"a"},
       {"g"},
       {{g, 2 * g, 3 * g}},
       "column 1 (row numbers) left out"},
      {"a second table beside the first",
       "Time,a [g],,Time,b [g]\n0,1,,0,5\n0.1,2,,0.1,6\n0.2,3,,0.2,7\n",
       10,
       {"a"},
       {"g"},
       {{g, 2 * g, 3 * g}},
       "second table"},
      {"only carriage returns", "time [s],a [g]\r0.0,1\r0.1,2\r0.2,3\r", 10, {"a"}, {"g"}, {{g, 2 * g, 3 * g}}, ""},
      {"no line end at the end", "time [s],a [g]\n0.0,1\n0.1,2\n0.2,3", 10, {"a"}, {"g"}, {{g, 2 * g, 3 * g}}, ""},
      {"epoch seconds",
       "timestamp,a [g]\n1700000000.00,1\n1700000000.25,2\n1700000000.50,3\n",
       4,
       {"a"},
       {"g"},
       {{g, 2 * g, 3 * g}},
       ""},
  };
  return all;
}

}  // namespace

TEST_CASE("text files are read as loggers write them") {
  for (const Sample& sample : samples()) {
    INFO(sample.claim);
    Opened csv(sample.text);
    const auto& recording = csv.recording();
    INFO(recording.format);
    CHECK(recording.format.find(sample.format) != std::string::npos);
    CHECK(recording.rate_hz == Approx(sample.rate_hz).epsilon(1e-12));
    REQUIRE(recording.channels.size() == sample.names.size());
    for (std::size_t c = 0; c < sample.names.size(); ++c) {
      CHECK(recording.channels[c].name == sample.names[c]);
      CHECK(recording.channels[c].unit_known == !sample.units[c].empty());
      if (!sample.units[c].empty()) CHECK(recording.channels[c].unit.name == sample.units[c]);
    }
    const auto read = all_samples(*csv.reader, 2);
    for (std::size_t c = 0; c < read.size(); ++c) {
      REQUIRE(read[c].size() == sample.samples[c].size());
      for (std::size_t i = 0; i < read[c].size(); ++i) {
        CHECK(read[c][i] == Approx(sample.samples[c][i]).epsilon(1e-14));  // one multiplication by the factor
      }
    }
    CHECK(found(recording.findings, base::Code::gap) == nullptr);
    CHECK(found(recording.findings, base::Code::uneven_times) == nullptr);
    CHECK(found(recording.findings, base::Code::missing_values) == nullptr);
  }
}

TEST_CASE("a header of any length is passed over") {
  std::string text;
  for (int i = 0; i < 20000; ++i) text += "Setting" + std::to_string(i) + "\tvalue\n";
  text += "time [s]\ta [g]\n";
  for (int i = 0; i < 300; ++i) text += std::to_string(0.001 * i) + "\t" + std::to_string(i) + "\n";
  Opened csv(text);
  CHECK(csv.recording().frames == 300);
  CHECK(csv.recording().rate_hz == 1000.0);
  CHECK(csv.recording().channels[0].name == "a");
}

TEST_CASE("a comma that may be a decimal sign is never guessed") {
  for (const char* text : {"1,5,2,5\n1,6,2,4\n1,7,2,3\n", "Ax,Ay\n1,5,2,5\n1,6,2,4\n1,7,2,3\n", "0,5\n0,6\n0,7\n"}) {
    const auto error = open_error(text);
    INFO(text);
    CHECK(error.kind == base::ErrorKind::file);
    CHECK(error.problem.find("may be a decimal sign") != std::string::npos);
  }
  const auto thousands = open_error("t [s]\ta [g]\n1,000\t2,500\n1,001\t2,600\n1,002\t2,700\n");
  CHECK(thousands.problem.find("thousands") != std::string::npos);
}

TEST_CASE("a name for each column settles what the commas are") {
  OpenOptions options;
  options.rate_hz = 100.0;
  Opened csv("a,b,c,d\n1,5,2,5\n1,6,2,4\n2,7,2,3\n", options);
  CHECK(csv.recording().channels.size() == 4);
  CHECK(all_samples(*csv.reader)[1] == std::vector<double>{5, 6, 7});
}

TEST_CASE("without times the rate must be given") {
  const std::string text = "a [g];b [g]\n1;2\n-1;3\n2;4\n";
  const auto error = open_error(text);
  CHECK(error.kind == base::ErrorKind::usage);
  CHECK(error.remedy.find("--rate") != std::string::npos);
  OpenOptions options;
  options.rate_hz = 250.0;
  Opened csv(text, options);
  CHECK(csv.recording().rate_hz == 250.0);
  CHECK(csv.recording().duration_s() == Approx(3.0 / 250.0));
  options.rate_hz = -1.0;
  CHECK(open_error(text, options).kind == base::ErrorKind::usage);
}

TEST_CASE("whole-number times without a unit need the rate, and get their unit from it") {
  const std::string text = "timestamp,a [g]\n1700000,1\n1700010,2\n1700020,3\n";
  CHECK(open_error(text).remedy.find("--rate") != std::string::npos);
  OpenOptions options;
  options.rate_hz = 100.0;
  CHECK(Opened(text, options).recording().rate_hz == Approx(100.0).epsilon(1e-9));
  options.rate_hz = 333.0;
  CHECK(open_error(text, options).kind == base::ErrorKind::usage);
}

TEST_CASE("a stated rate that contradicts the times is refused") {
  OpenOptions options;
  options.rate_hz = 1000.0;
  CHECK(open_error("time [s],a [g]\n0.0,1\n0.1,2\n0.2,3\n", options).kind == base::ErrorKind::usage);
}

TEST_CASE("text without a table is an error of the file") {
  for (const char* text : {"hello\nworld\n", "a letter, with commas,\nand more\n", "time,a\n0.0,1\n", "\n\n\n"}) {
    INFO(text);
    CHECK(open_error(text).kind == base::ErrorKind::file);
  }
  CHECK(open_error("PK\x03\x04zip").problem.find("spreadsheet") != std::string::npos);
  CHECK(open_error("time [s]\n0.0\n0.1\n0.2\n0.3\n").problem.find("no column of samples") != std::string::npos);
}

TEST_CASE("units of a channel come from the user where given, else from the file") {
  OpenOptions options;
  recording::ChannelSetting setting;
  setting.index = 1;
  setting.name = "hammer";
  setting.unit = base::unit_named("N");
  setting.scale = 22.2;
  options.channels = {setting};
  Opened csv("time [s],drive [V],a [g],tacho\n0.0,1,1,0\n0.1,2,1,1\n0.2,3,1,0\n", options);
  const auto& channels = csv.recording().channels;
  CHECK(channels[0].name == "hammer");
  CHECK(channels[0].role == recording::Role::force);
  CHECK(channels[0].factor == 22.2);
  CHECK(channels[1].factor == g);
  CHECK(channels[1].role == recording::Role::vibration);
  CHECK(channels[2].role == recording::Role::tacho);
  CHECK(found(csv.recording().findings, base::Code::unit_assumed) == nullptr);
}
