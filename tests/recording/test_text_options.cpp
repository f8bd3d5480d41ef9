// What the user says of a text file goes over what is recognised.
#include <string>

#include "stillmass/recording/reader.hpp"

#include "recording/reading.hpp"
#include "support/catch.hpp"

using namespace stillmass;
using namespace stillmass::tests;
using recording::OpenOptions;

namespace {

std::vector<double> first_row(Opened& csv) {
  std::vector<double> row;
  for (const auto& channel : all_samples(*csv.reader)) row.push_back(channel.front());
  return row;
}

}  // namespace

TEST_CASE("a stated separator or decimal sign settles a comma that may be both") {
  const std::string text = "1,5,2,5\n1,6,2,4\n1,7,2,3\n";
  OpenOptions options;
  options.rate_hz = 100.0;
  CHECK(open_error(text, options).remedy.find("--separator comma") != std::string::npos);
  options.text.separator = recording::separator_named("comma");
  Opened four(text, options);
  CHECK(first_row(four) == std::vector<double>{1, 5, 2, 5});
  const std::string one = "0,5\n0,6\n0,7\n";
  options.text = {};
  CHECK(open_error(one, options).problem.find("may be a decimal sign") != std::string::npos);
  options.text.decimal = recording::decimal_named("comma");
  options.text.time_column = 0;
  Opened single(one, options);
  CHECK(first_row(single) == std::vector<double>{0.5});
}

TEST_CASE("a stated decimal sign settles whether thousands are meant") {
  const std::string comma = "t [s]\ta [g]\n1,000\t2,500\n1,001\t2,600\n1,002\t2,700\n";
  OpenOptions options;
  CHECK(open_error(comma).remedy.find("--decimal comma") != std::string::npos);
  options.text.decimal = ',';
  CHECK(Opened(comma, options).recording().rate_hz == Approx(1000.0));
  const std::string point = "a [m/s2];b [m/s2]\n9.812;1.234\n9.804;1.235\n9.811;1.236\n";
  options = {};
  options.rate_hz = 100.0;
  CHECK(open_error(point, options).remedy.find("--decimal point") != std::string::npos);
  options.text.decimal = '.';
  Opened csv(point, options);
  CHECK(first_row(csv) == std::vector<double>{9.812, 1.234});
}

TEST_CASE("an option that does not fit the file is a clear error") {
  const std::string text = "t [s];a [g]\n0.0;1\n0.1;-2\n0.2;1.5\n";
  OpenOptions options;
  options.text.separator = '\t';
  CHECK(open_error(text, options).problem.find("written as the options say") != std::string::npos);
  for (const int column : {2, 3, 99}) {
    options = {};
    options.text.time_column = column;
    INFO(column);
    CHECK(open_error(text, options).kind == base::ErrorKind::usage);
  }
}

TEST_CASE("the time column and its unit are taken as stated") {
  const std::string text = "time,a [g],tick\n0,1,0\n10,2,400\n20,3,800\n";
  OpenOptions options;
  options.text.time_unit_s = recording::time_unit_named("ms");
  Opened milliseconds(text, options);
  CHECK(milliseconds.recording().rate_hz == Approx(100.0));
  CHECK(milliseconds.recording().format.find("[ms, as stated]") != std::string::npos);
  options.text.time_column = 3;
  options.text.time_unit_s = recording::time_unit_named("us");
  Opened ticks(text, options);
  CHECK(ticks.recording().rate_hz == Approx(2500.0));
  REQUIRE(ticks.recording().channels.size() == 1);
  CHECK(first_row(ticks) == std::vector<double>{base::standard_gravity});
  options = {};
  options.text.time_column = 0;
  options.rate_hz = 100.0;
  Opened none(text, options);
  CHECK(none.recording().format.find("no times") != std::string::npos);
  options = {};
  options.text.time_unit_s = recording::time_unit_named("d");
  Opened days("Time,a [g]\n45350.5,1\n45350.6,2\n45350.7,3\n", options);
  CHECK(days.recording().rate_hz == Approx(1.0 / 8640.0));
}

TEST_CASE("the second of two tables side by side is read by naming its column of times") {
  const std::string text = "Time,a [g],,Time,b [V]\n0,1,,0,5\n0.1,2,,0.2,6\n0.2,3,,0.4,7\n";
  CHECK(Opened(text).recording().format.find("--time-column 4 reads it") != std::string::npos);
  OpenOptions options;
  options.text.time_column = 4;
  Opened second(text, options);
  CHECK(second.recording().rate_hz == Approx(5.0));
  CHECK(first_row(second) == std::vector<double>{5});
  CHECK(second.recording().channels[0].name == "b");
}

TEST_CASE("dates across midnight ask for the order of day and month, and take it") {
  const std::string text = "time,a [g]\n03/04/2024 23:59:59.50,1\n03/04/2024 23:59:59.75,2\n04/04/2024 00:00:00.00,3\n";
  CHECK(open_error(text).remedy.find("--dates day-first") != std::string::npos);
  OpenOptions options;
  options.text.day_first = true;
  CHECK(Opened(text, options).recording().segments.size() == 1);
  options.text.day_first = false;  // the fourth of March, the fourth of April
  Opened other(text, options);
  REQUIRE(other.recording().segments.size() == 2);
  CHECK(other.recording().segments[1].start_s == Approx(30.0 * 86400.0 + 86400.0 - 86399.5).margin(1e-6));
}

TEST_CASE("row numbers show lost rows where a rate is given") {
  std::string text = "Sample,a [g]\n";
  for (int i = 0; i < 300; ++i) text += std::to_string(i < 200 ? i : i + 50) + "," + std::to_string(i % 7) + "\n";
  OpenOptions options;
  options.rate_hz = 1000.0;
  Opened csv(text, options);
  CHECK(csv.recording().rate_hz == 1000.0);
  REQUIRE(csv.recording().segments.size() == 2);
  CHECK(csv.recording().segments[1].start_s == Approx(0.25));
  const auto* gap = found(csv.recording().findings, base::Code::gap);
  REQUIRE(gap != nullptr);
  CHECK(gap->text.find("50 samples are missing") != std::string::npos);
}

TEST_CASE("a restarted logger without times begins a segment") {
  std::string text = "a [g];b [g]\n";
  for (int i = 0; i < 100; ++i) text += std::to_string(i % 7) + ";" + std::to_string(i % 5) + "\n";
  OpenOptions options;
  options.rate_hz = 100.0;
  Opened csv(text + text, options);
  CHECK(csv.recording().frames == 200);
  REQUIRE(csv.recording().segments.size() == 2);
  CHECK(csv.recording().segments[1].first_frame == 100);
  const auto* again = found(csv.recording().findings, base::Code::odd_lines);
  REQUIRE(again != nullptr);
  CHECK(again->text.find("the header stands again in line 102") == 0);
  CHECK(*again->from_s == Approx(1.0));
}

TEST_CASE("a gap among the first rows does not spoil the step") {
  std::string text = "t [s],a [g]\n";
  for (int part = 0; part < 3; ++part) {
    for (int i = 0; i < 40; ++i) text += std::to_string(100 * part + i) + "e-3," + std::to_string(i % 7) + "\n";
  }
  Opened csv(text);
  CHECK(csv.recording().rate_hz == Approx(1000.0));
  CHECK(csv.recording().segments.size() == 3);
}
