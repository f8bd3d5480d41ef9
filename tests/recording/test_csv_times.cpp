#include <cmath>
#include <numbers>

#include <fmt/format.h>

#include "stillmass/recording/reader.hpp"

#include "recording/reading.hpp"
#include "support/catch.hpp"

using namespace stillmass;
using namespace stillmass::tests;

namespace {

// Rows "time,value" with the given times.
std::string table(const std::vector<double>& times, int decimals, double (*value)(double)) {
  std::string text = "time [s],a [m/s2]\n";
  for (const double t : times) text += fmt::format("{:.{}f},{:.9f}\n", t, decimals, value(t));
  return text;
}

std::vector<double> even(std::size_t count, double rate_hz, double from = 0.0) {
  std::vector<double> times;
  for (std::size_t i = 0; i < count; ++i) times.push_back(from + static_cast<double>(i) / rate_hz);
  return times;
}

double ramp(double t) { return t; }
double tone(double t) { return std::sin(2.0 * std::numbers::pi * 3.0 * t); }

}  // namespace

TEST_CASE("the rate does not suffer from the resolution of the times") {
  // Steps of 156.25 us printed as 156 or 157 us: the median says 6410 Hz, the whole says 6400 Hz.
  Opened csv(table(even(20000, 6400.0), 6, ramp));
  CHECK(csv.recording().rate_hz == 6400.0);
  CHECK(csv.recording().findings.empty());
  // Steps of 0.2 ms printed in whole milliseconds.
  Opened coarse(table(even(20000, 5000.0), 3, ramp));
  CHECK(coarse.recording().rate_hz == Approx(5000.0).epsilon(1e-3));
  CHECK(coarse.recording().segments.size() == 1);
}

TEST_CASE("the rate of a short recording with coarse times is counted from change to change") {
  // 300 rows at 1024 Hz in hundredths of a second: the span says 1031 Hz or less well.
  std::vector<double> times;
  for (int i = 0; i < 300; ++i) times.push_back(std::floor(100.0 * i / 1024.0) / 100.0);
  Opened csv(table(times, 2, ramp));
  CHECK(csv.recording().segments.size() == 1);
  CHECK(csv.recording().rate_hz == Approx(1024.0).epsilon(1.0 / 280.0));  // good to one row of at least 280
  CHECK(found(csv.recording().findings, base::Code::uneven_times)->strength == base::Strength::weak);
}

TEST_CASE("a gap in the times begins a segment and is reported") {
  auto times = even(500, 1000.0);
  const auto later = even(300, 1000.0, 0.6);
  times.insert(times.end(), later.begin(), later.end());
  Opened csv(table(times, 6, ramp));
  const auto& recording = csv.recording();
  CHECK(recording.rate_hz == 1000.0);
  CHECK(recording.frames == 800);
  REQUIRE(recording.segments.size() == 2);
  CHECK(recording.segments[1].first_frame == 500);
  CHECK(recording.segments[1].frames == 300);
  CHECK(recording.segments[1].start_s == Approx(0.6).epsilon(1e-12));
  const auto* gap = found(recording.findings, base::Code::gap);
  REQUIRE(gap != nullptr);
  CHECK(*gap->from_s == Approx(0.499).epsilon(1e-9));
  CHECK(*gap->to_s == Approx(0.6).epsilon(1e-9));
  CHECK(recording.duration_s() == Approx(0.9).epsilon(1e-9));
  CHECK(recording.time_s(500) == Approx(0.6).epsilon(1e-9));
  CHECK(recording.frame_at(0.55) == 500);
  CHECK(recording.frame_at(0.25) == 250);

  recording::Chunk chunk;
  csv.reader->seek(490);
  REQUIRE(csv.reader->next(chunk, 1000));
  CHECK(chunk.frames == 10);  // a gap is never inside a chunk
  REQUIRE(csv.reader->next(chunk, 1000));
  CHECK(chunk.segment == 1);
  CHECK(chunk.channel(0)[0] == Approx(0.6).epsilon(1e-9));
}

TEST_CASE("many gaps are merged into a short list") {
  std::vector<double> times;
  for (int part = 0; part < 100; ++part) {
    const auto more = even(50, 100.0, part);
    times.insert(times.end(), more.begin(), more.end());
  }
  Opened csv(table(times, 4, ramp));
  CHECK(csv.recording().segments.size() == 100);
  CHECK(csv.recording().findings.size() == 20);
  CHECK(csv.recording().findings.back().text.find("79 more gaps") != std::string::npos);
}

TEST_CASE("times that jump back begin a segment and never run back") {
  auto times = even(100, 100.0, 50.0);
  const auto again = even(100, 100.0, 0.0);
  times.insert(times.end(), again.begin(), again.end());
  Opened csv(table(times, 4, ramp));
  REQUIRE(csv.recording().segments.size() == 2);
  CHECK(csv.recording().segments[1].start_s == Approx(1.0).epsilon(1e-9));
  CHECK(found(csv.recording().findings, base::Code::gap)->text.find("jump back") != std::string::npos);
}

TEST_CASE("jittered times are brought onto an even grid within the stated error") {
  std::vector<double> times;
  double t = 0.0;
  for (int i = 0; i < 6000; ++i) {
    times.push_back(t);
    t += 0.01 * (1.0 + 0.4 * std::sin(1.7 * i * i));  // steps of 6 to 14 ms
  }
  Opened csv(table(times, 6, tone));
  const auto& recording = csv.recording();
  CHECK(recording.rate_hz == Approx(100.0).epsilon(0.01));
  const auto* finding = found(recording.findings, base::Code::uneven_times);
  REQUIRE(finding != nullptr);
  CHECK(finding->text.find("alters a tone") != std::string::npos);
  const auto samples = all_samples(*csv.reader)[0];
  double worst = 0.0;
  for (std::size_t i = 3; i + 3 < samples.size(); ++i) {
    worst = std::max(worst, std::abs(samples[i] - tone(recording.time_s(static_cast<std::int64_t>(i)))));
  }
  // The bound of even_limit_hz at 3 Hz and steps of 14 ms, 0.004883 (2 pi 3 0.014)^6 = 1.7e-6; the times themselves are
  // rounded by up to 0.5 us, which a slope of 2 pi 3 /s turns into 9.4e-6, and the interpolation enlarges that by the
  // sum of the absolute weights, below 2 here.
  CHECK(worst < 2.1e-5);
}

TEST_CASE("an even grid is the same from every handle and chunk size") {
  std::vector<double> times;
  for (int i = 0; i < 20000; ++i) times.push_back(0.01 * i + 0.003 * std::sin(1.3 * i * i));
  Opened csv(table(times, 6, tone));
  const auto whole = all_samples(*csv.reader, 7000)[0];
  CHECK(all_samples(*csv.reader, 113)[0] == whole);
  auto second = csv.reader->second();
  recording::Chunk chunk;
  for (const std::int64_t at : {std::int64_t{15000}, std::int64_t{4096}, std::int64_t{0}, std::int64_t{8191}}) {
    second->seek(at);
    REQUIRE(second->next(chunk, 50));
    for (std::size_t i = 0; i < chunk.frames; ++i)
      CHECK(chunk.channel(0)[i] == whole[static_cast<std::size_t>(at) + i]);
  }
}

TEST_CASE("one late time stamp does not make a recording uneven") {
  auto times = even(5000, 1000.0);
  times[2500] += 0.0003;
  Opened csv(table(times, 6, ramp));
  CHECK(csv.recording().frames == 5000);
  const auto* finding = found(csv.recording().findings, base::Code::uneven_times);
  REQUIRE(finding != nullptr);
  CHECK(finding->strength == base::Strength::weak);
}

TEST_CASE("times through 32-bit floats are taken as even") {
  std::string text = "time [s],a [g]\n";
  for (int i = 0; i < 100000; ++i) {
    text += fmt::format("{:.10f},{}\n", static_cast<double>(static_cast<float>(i / 2000.0)), i % 7);
  }
  Opened csv(text);
  CHECK(csv.recording().frames == 100000);
  CHECK(csv.recording().rate_hz == Approx(2000.0).epsilon(1e-6));
  CHECK(found(csv.recording().findings, base::Code::uneven_times) == nullptr);
}

TEST_CASE("missing cells and NaN are held out and reported with their times") {
  Opened csv(
      "time [s],a [m/s2],b [m/s2]\n0.0,1,10\n0.1,,11\n0.2,,12\n0.3,4,NaN\n0.4,5,14\n0.5,6\n0.6,OVL,16\n0.7,8,17\n");
  const auto& recording = csv.recording();
  CHECK(recording.frames == 8);
  const auto valid = all_valid(*csv.reader, 3);
  REQUIRE(valid[0].size() == 3);
  CHECK(valid[0][0].end == 1);
  CHECK(valid[0][1].begin == 3);
  CHECK(valid[0][1].end == 6);
  CHECK(valid[0][2].begin == 7);
  REQUIRE(valid[1].size() == 3);
  CHECK(valid[1][1].begin == 4);
  CHECK(valid[1][1].end == 5);
  const auto samples = all_samples(*csv.reader);
  CHECK(samples[0] == std::vector<double>{1, 0, 0, 4, 5, 6, 0, 8});
  const auto* missing = found(recording.findings, base::Code::missing_values);
  REQUIRE(missing != nullptr);
  CHECK(missing->channel == "a");
  CHECK(*missing->from_s == Approx(0.1));
  CHECK(*missing->to_s == Approx(0.6));
  CHECK(missing->text.find("cells without a number: 3, in 2 places") == 0);
  const auto* nan = found(recording.findings, base::Code::not_a_number);
  REQUIRE(nan != nullptr);
  CHECK(nan->channel == "b");
  CHECK(*nan->from_s == Approx(0.3));
}

TEST_CASE("rows that lost their time are left out, and reading keeps in step") {
  std::string text = "time [s],a [m/s2]\n";
  for (int i = 0; i < 20000; ++i) {
    text += i == 7000 ? fmt::format(",{}\n", i) : fmt::format("{:.3f},{}\n", 0.001 * i, i);
  }
  Opened csv(text);
  CHECK(csv.recording().frames == 19999);
  CHECK(csv.recording().segments.size() == 2);
  const auto samples = all_samples(*csv.reader)[0];
  CHECK(samples[6999] == 6999.0);
  CHECK(samples[7000] == 7001.0);
  CHECK(samples.back() == 19999.0);
}

TEST_CASE("a comment at the start of a block and a half-readable time are seen by both passes") {
  // Blocks are read by 256 KiB: the comment is the last line, without a line end, and so a block of its own.
  std::string text = "time [s],a [m/s2]\n";
  for (int i = 0; i < 100; ++i) text += fmt::format("{:.3f},{}\n", 0.001 * i, i);
  Opened comment(text + "#0.100,5");
  CHECK(all_samples(*comment.reader)[0].size() == 100);
  Opened half(text + "0.1.00,5\n0.101,7\n");
  CHECK(half.recording().frames == 101);
  CHECK(all_samples(*half.reader)[0].back() == 7.0);
}

TEST_CASE("long text is read the same from every handle and chunk size") {
  std::string text = "time [s];a [m/s2];b [g]\n";
  for (int i = 0; i < 30000; ++i) {
    text += fmt::format("{:.4f};{};{}\n", 0.0005 * i, i, i % 977 == 0 ? "" : std::to_string(-i));
    if (i % 5000 == 0) text += "# a note\n";
  }
  Opened csv(text);
  CHECK(csv.recording().frames == 30000);
  const auto whole = all_samples(*csv.reader, 30000);
  CHECK(all_samples(*csv.reader, 777) == whole);
  for (std::size_t i = 0; i < 30000; ++i) {
    if (whole[0][i] != static_cast<double>(i)) FAIL("row " << i << " is out of place");
  }
  auto second = csv.reader->second();
  recording::Chunk chunk;
  for (const std::int64_t at : {std::int64_t{29999}, std::int64_t{4096}, std::int64_t{12345}, std::int64_t{12346}}) {
    second->seek(at);
    REQUIRE(second->next(chunk, 100));
    CHECK(chunk.channel(0)[0] == static_cast<double>(at));
  }
}
