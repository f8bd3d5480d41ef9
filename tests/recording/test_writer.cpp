#include <cmath>
#include <limits>

#include "stillmass/base/error.hpp"
#include "stillmass/recording/writer.hpp"

#include "oracle/wav_samples.hpp"
#include "support/catch.hpp"
#include "support/temporary_folder.hpp"

using namespace stillmass;
using recording::Samples;

namespace {

const Samples two_channels{8192.0, {"a", "b"}, {{0.0, 0.5, -1.0}, {0.25, 1.0, -2.0}}};

}  // namespace

TEST_CASE("a 16-bit WAV holds rounded fractions of full scale, clipped at the ends") {
  const tests::TemporaryFolder folder;
  recording::write_wav(folder / "a.wav", two_channels, 16);
  const auto wav = oracle::wav_samples(tests::read_file(folder / "a.wav"));
  CHECK(wav.format == 1);
  CHECK(wav.bits == 16);
  CHECK(wav.channels == 2);
  CHECK(wav.rate_hz == 8192);
  CHECK(wav.counts == std::vector<std::int64_t>{0, 8192, 16384, 32767, -32768, -32768});
}

TEST_CASE("a 24-bit WAV holds every step of its 24 bits") {
  const tests::TemporaryFolder folder;
  const double step = 0x1p-23;
  recording::write_wav(folder / "a.wav", {1000.0, {}, {{step, -step, 0.4 * step, 0.6 * step, 1.0 - step, 7.0}}}, 24);
  const auto wav = oracle::wav_samples(tests::read_file(folder / "a.wav"));
  CHECK(wav.bits == 24);
  CHECK(wav.counts == std::vector<std::int64_t>{1, -1, 0, 1, 8388607, 8388607});
}

TEST_CASE("a float WAV holds the values as they are, beyond full scale too") {
  const tests::TemporaryFolder folder;
  recording::write_wav_float(folder / "a.wav", {51200.0, {}, {{0.1, -12.5, 1e-20}}});
  const auto wav = oracle::wav_samples(tests::read_file(folder / "a.wav"));
  CHECK(wav.format == 3);
  CHECK(wav.floats == std::vector<float>{0.1F, -12.5F, 1e-20F});
}

TEST_CASE("the same samples give the same bytes") {
  const tests::TemporaryFolder folder;
  recording::write_wav_float(folder / "a.wav", two_channels);
  recording::write_wav_float(folder / "b.wav", two_channels);
  const auto bytes = tests::read_file(folder / "a.wav");
  CHECK(bytes == tests::read_file(folder / "b.wav"));
  CHECK(bytes.find("PEAK") == std::string::npos);  // that chunk carries the time of day
}

TEST_CASE("a CSV is written as the logger's country writes numbers") {
  const tests::TemporaryFolder folder;
  recording::CsvStyle style;
  style.separator = ';';
  style.decimal = ',';
  style.header_lines = {"logger", "range;8 g"};
  style.time_decimals = 3;
  style.decimals = 2;
  recording::write_csv(folder / "a.csv", {500.0, {"x [g]", "y [g]"}, {{1.5, -0.001}, {-2.345678, 12345.0}}}, style);
  CHECK(tests::read_file(folder / "a.csv") ==
        "logger\nrange;8 g\ntime [s];x [g];y [g]\n0,000;1,50;-2,35\n0,002;0,00;12345,00\n");
}

TEST_CASE("a CSV may have no time column, no names, line ends of two characters and missing cells") {
  const tests::TemporaryFolder folder;
  recording::CsvStyle style;
  style.time_name = "";
  style.crlf = true;
  style.decimals = 1;
  const double missing = std::numeric_limits<double>::quiet_NaN();
  recording::write_csv(folder / "a.csv", {0.0, {}, {{1.0, missing}, {2.0, 3.0}}}, style);
  CHECK(tests::read_file(folder / "a.csv") == "1.0,2.0\r\n,3.0\r\n");
}

TEST_CASE("an existing file is never overwritten") {
  const tests::TemporaryFolder folder;
  for (const char* name : {"a.wav", "b.wav", "c.csv"}) tests::write_file(folder / name, "mine");
  CHECK_THROWS_AS(recording::write_wav(folder / "a.wav", two_channels, 16), base::Error);
  CHECK_THROWS_AS(recording::write_wav_float(folder / "b.wav", two_channels), base::Error);
  CHECK_THROWS_AS(recording::write_csv(folder / "c.csv", two_channels, {}), base::Error);
  for (const char* name : {"a.wav", "b.wav", "c.csv"}) CHECK(tests::read_file(folder / name) == "mine");
}

TEST_CASE("samples that no file of the kind can hold are refused and leave no file") {
  const tests::TemporaryFolder folder;
  const double missing = std::numeric_limits<double>::quiet_NaN();
  CHECK_THROWS_AS(recording::write_wav(folder / "a.wav", {1000.0, {}, {{missing}}}, 16), base::Error);
  CHECK_THROWS_AS(recording::write_wav(folder / "a.wav", {1000.5, {}, {{0.0}}}, 16), base::Error);
  CHECK_THROWS_AS(recording::write_wav(folder / "a.wav", {1000.0, {}, {{0.0}}}, 12), base::Error);
  CHECK_THROWS_AS(recording::write_wav(folder / "a.wav", {1000.0, {}, {{0.0}, {0.0, 0.0}}}, 16), base::Error);
  CHECK_THROWS_AS(recording::write_wav(folder / "a.wav", {1000.0, {}, {}}, 16), base::Error);
  CHECK_THROWS_AS(recording::write_csv(folder / "a.csv", {0.0, {"x"}, {{0.0}}}, {}), base::Error);
  CHECK_THROWS_AS(recording::write_csv(folder / "a.csv", {1.0, {"x", "y"}, {{0.0}}}, {}), base::Error);
  CHECK_THROWS_AS(recording::write_wav(folder.path() / "no" / "a.wav", two_channels, 16), base::Error);
  CHECK(std::filesystem::is_empty(folder.path()));
}
