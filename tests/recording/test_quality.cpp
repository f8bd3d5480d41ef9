#include <array>
#include <cmath>
#include <numbers>
#include <random>

#include "stillmass/recording/overview.hpp"
#include "stillmass/recording/sample_quality.hpp"

#include "recording/reading.hpp"
#include "recording/wav_bytes.hpp"
#include "support/catch.hpp"

using namespace stillmass;
using namespace stillmass::tests;
using base::Code;
using recording::ChannelQuality;

namespace {

constexpr double pi = std::numbers::pi;

// A 16-bit signal of two tones and noise, a third of full scale.
std::vector<int> lively(std::size_t count) {
  std::vector<int> samples;
  std::minstd_rand random(7);
  for (std::size_t i = 0; i < count; ++i) {
    const double t = static_cast<double>(i);
    const double noise = static_cast<double>(random() % 2001) - 1000.0;
    samples.push_back(
        static_cast<int>(std::lround(6000.0 * std::sin(0.21 * t) + 3000.0 * std::sin(0.047 * t + 1.0) + noise)));
  }
  return samples;
}

recording::OpenOptions with_unit(const char* unit) {
  recording::OpenOptions options;
  recording::ChannelSetting setting;
  setting.unit = base::unit_named(unit);
  options.channels = {setting};
  return options;
}

ChannelQuality quality_of(const std::string& file, const char* unit = "m/s2") {
  Opened opened(file, with_unit(unit));
  return recording::sample_quality(*opened.reader, {0, opened.recording().frames}, {})[0];
}

bool has(const ChannelQuality& quality, Code code) { return found(quality.findings, code) != nullptr; }

}  // namespace

TEST_CASE("a good signal has no findings, and its numbers are those of a tone") {
  std::vector<int> samples;
  for (int i = 0; i < 10000; ++i) {
    samples.push_back(static_cast<int>(std::lround(3000.0 + 20000.0 * std::sin(2.0 * pi * 0.013 * i))));
  }
  const auto quality = quality_of(wav16(samples).file());
  CHECK(quality.findings.empty());
  CHECK(quality.samples == 10000);
  // 130 whole periods; rounding to a step adds 1/12 of it squared, nothing at this precision.
  CHECK(*quality.mean == Approx(3000.0 / 32768.0).epsilon(1e-4));
  CHECK(*quality.rms == Approx(20000.0 / 32768.0 / std::sqrt(2.0)).epsilon(1e-4));
  CHECK(*quality.peak == Approx(20000.0 / 32768.0).epsilon(1e-3));
  CHECK(*quality.crest_factor == Approx(std::sqrt(2.0)).epsilon(1e-3));
  CHECK(quality_of(wav16(lively(20000)).file()).findings.empty());
}

TEST_CASE("a signal that reaches the end of the range is clipped") {
  auto samples = lively(5000);
  for (int& sample : samples) sample = std::clamp(5 * sample, -32768, 32767);
  const auto quality = quality_of(wav16(samples).file());
  CHECK(has(quality, Code::clipped));
  CHECK_FALSE(has(quality, Code::overload));
  samples = lively(5000);
  samples[777] = 32767;  // a single touch proves nothing
  CHECK_FALSE(has(quality_of(wav16(samples).file()), Code::clipped));
}

TEST_CASE("flat tops below the range are an overload, rounded ones of a slow signal are not") {
  auto samples = lively(5000);
  for (int& sample : samples) sample = std::clamp(sample, -32768, 5000);
  const auto quality = quality_of(wav16(samples).file());
  CHECK(has(quality, Code::overload));
  CHECK_FALSE(has(quality, Code::clipped));

  std::vector<int> slow;  // tops of some ten equal samples
  for (int i = 0; i < 20000; ++i) slow.push_back(static_cast<int>(std::lround(900.0 * std::sin(0.005 * i))));
  CHECK(quality_of(wav16(slow).file()).findings.empty());
}

namespace {

// The number that stands behind `word` in a finding's text.
double number_after(const base::Finding& finding, const std::string& word) {
  const auto at = finding.text.find(word);
  REQUIRE(at != std::string::npos);
  return std::stod(finding.text.substr(at + word.size()));
}

}  // namespace

TEST_CASE("how far the mean settles or jumps, and when, is what was put in") {
  // Means by arithmetic: 8000 exp(-t / 2 s) has 8000 * 4 (1 - exp(-1/4)) in the first column of half a second.
  auto samples = lively(20000);
  for (std::size_t i = 0; i < samples.size(); ++i) {
    samples[i] += static_cast<int>(std::lround(8000.0 * std::exp(-0.0005 * static_cast<double>(i))));
  }
  const auto settling = quality_of(wav16(samples).file());
  const auto* settles = found(settling.findings, Code::drift);
  REQUIRE(settles != nullptr);
  CHECK(number_after(*settles, "settles by ") == Approx(-32000.0 * (1.0 - std::exp(-0.25)) / 32768.0).epsilon(0.03));
  CHECK(*settles->from_s == 0.0);
  CHECK(*settles->to_s == Approx(4.6).margin(1.0));  // a tenth is left after 2 s * ln 10

  samples = lively(20000);
  for (std::size_t i = 12345; i < samples.size(); ++i) samples[i] -= 5000;
  const auto jumping = quality_of(wav16(samples).file());
  const auto* jump = found(jumping.findings, Code::drift);
  REQUIRE(jump != nullptr);
  CHECK(number_after(*jump, "jumps by ") == Approx(-5000.0 / 32768.0).epsilon(0.05));
  CHECK(*jump->from_s <= 12.345);
  CHECK(*jump->to_s >= 12.345);
  CHECK(*jump->to_s - *jump->from_s <= 1.5);
}

TEST_CASE("a flat top's level and the count of its samples are what was put in") {
  std::vector<int> samples;
  std::minstd_rand random(5);
  int cut = 0;
  for (int i = 0; i < 20000; ++i) {
    const double x = 20000.0 * std::sin(0.1234 * i);
    cut += x > 15000.0 ? 1 : 0;
    samples.push_back(static_cast<int>(std::lround(std::min(x, 15000.0))) + static_cast<int>(random() % 9));
  }
  const auto quality = quality_of(wav16(samples).file());
  const auto* top = found(quality.findings, Code::overload);
  REQUIRE(top != nullptr);
  CHECK(number_after(*top, "near ") == Approx(15004.0 / 32768.0).epsilon(0.01));
  CHECK(number_after(*top, "value: ") == Approx(cut).epsilon(0.03));
}

TEST_CASE("a signal that repeats itself to the sample has few levels, not flat tops") {
  // What a generator gives a shaker: tones with a common period, sampled at the same instants in each.
  for (const int period : {20, 32, 45, 64, 320}) {
    std::vector<int> samples;
    for (int i = 0; i < 60000; ++i) {
      const double t = 2.0 * pi * (i % period) / period;
      samples.push_back(static_cast<int>(std::lround(6000.0 * std::sin(t) + 5000.0 * std::sin(2.0 * t + 1.0) +
                                                     (period > 100 ? 4000.0 * std::sin(13.0 * t) : 0.0))) +
                        (i * 7919) % 3);
    }
    const auto quality = quality_of(wav16(samples).file());
    for (const auto& each : quality.findings) UNSCOPED_INFO(period << ": " << each.text);
    CHECK_FALSE(has(quality, Code::overload));
  }
}

TEST_CASE("flat tops with the recorder's noise on them are an overload") {
  std::minstd_rand random(3);
  for (const double level : {0.5, 0.8, 0.95}) {
    std::vector<int> samples;
    for (int i = 0; i < 20000; ++i) {
      const double x = std::clamp(20000.0 * std::sin(0.1234 * i), -25000.0, 20000.0 * level);
      samples.push_back(static_cast<int>(std::lround(x)) + static_cast<int>(random() % 9));
    }
    const auto quality = quality_of(wav16(samples).file());
    INFO(level);
    CHECK(has(quality, Code::overload));
  }
}

TEST_CASE("a loose cable leaves exact zeros") {
  auto samples = lively(5000);
  std::fill(samples.begin() + 2000, samples.begin() + 2100, 0);
  const auto quality = quality_of(wav16(samples).file());
  const auto* dropout = found(quality.findings, Code::dropout);
  REQUIRE(dropout != nullptr);
  CHECK(*dropout->from_s == Approx(2.0));
  CHECK(*dropout->to_s == Approx(2.1));
  CHECK(quality.findings.size() == 1);
}

TEST_CASE("a ring-down that ends in silence has no dropout, nor the next blow a spike") {
  std::vector<int> samples;
  for (int blow = 0; blow < 4; ++blow) {
    for (int i = 0; i < 5000; ++i) {
      samples.push_back(static_cast<int>(std::lround(20000.0 * std::exp(-0.004 * i) * std::sin(0.3 * i))));
    }
  }
  const auto quality = quality_of(wav16(samples).file());
  for (const auto& each : quality.findings) UNSCOPED_INFO(each.text);
  CHECK(quality.findings.empty());
}

TEST_CASE("a value that stands still for long is a flat line") {
  auto samples = lively(5000);
  std::fill(samples.begin() + 3000, samples.begin() + 3400, samples[3000]);
  const auto quality = quality_of(wav16(samples).file());
  const auto* flat = found(quality.findings, Code::flat_line);
  REQUIRE(flat != nullptr);
  CHECK(*flat->from_s == Approx(3.0));
  CHECK(quality.findings.size() == 1);
}

TEST_CASE("single samples far off are spikes, a hammer's force has none") {
  auto samples = lively(5000);
  for (int& sample : samples) sample /= 20;
  for (const std::size_t at : {std::size_t{700}, std::size_t{2900}}) samples[at] = 25000;
  const auto quality = quality_of(wav16(samples).file());
  const auto* spikes = found(quality.findings, Code::spikes);
  REQUIRE(spikes != nullptr);
  CHECK(*spikes->from_s == Approx(0.7));
  CHECK(*spikes->to_s == Approx(2.901));
  CHECK(quality_of(wav16(samples).file(), "N").findings.empty());
}

TEST_CASE("a signal of a few steps wastes the range, one of two steps is none") {
  auto samples = lively(5000);
  for (int& sample : samples) sample /= 1000;
  CHECK(has(quality_of(wav16(samples).file()), Code::few_bits));
  for (int& sample : samples) sample /= 10;
  CHECK(has(quality_of(wav16(samples).file()), Code::no_signal));
  CHECK(has(quality_of(wav16(std::vector<int>(100, 5)).file()), Code::no_signal));
}

TEST_CASE("a tacho's pulses are no fault") {
  std::vector<int> samples;
  for (int i = 0; i < 5000; ++i) samples.push_back(i % 100 < 20 ? 32767 : 0);
  CHECK(quality_of(wav16(samples).file(), "tacho").findings.empty());
}

TEST_CASE("samples that are not numbers are counted and left out of the sums") {
  WavBytes wav;
  wav.tag = 3;
  wav.bits = 32;
  for (int i = 0; i < 1000; ++i) wav.add(i == 300 || i == 301 ? NAN : static_cast<float>(std::sin(0.1 * i)));
  const auto quality = quality_of(wav.file());
  CHECK(quality.samples == 998);
  CHECK(quality.missing == 2);
  const auto* nan = found(quality.findings, Code::not_a_number);
  REQUIRE(nan != nullptr);
  CHECK(*nan->from_s == Approx(0.3));
  CHECK(*nan->to_s == Approx(0.302));
  CHECK(std::isfinite(*quality.rms));
}

namespace {

// Runs a consumer over [0, frames) cut at the given frames, each part with its lookahead and in chunks of `frames`.
template <class C>
void run_cut(recording::Reader& reader, C& whole, const std::vector<std::int64_t>& cuts, std::size_t chunk_frames) {
  std::int64_t begin = 0;
  recording::Chunk chunk;
  for (const std::int64_t end : cuts) {
    auto partial = whole.fresh({begin, end});
    reader.seek(begin);
    const std::int64_t last = std::min(end + partial->lookahead(), reader.recording().frames);
    for (std::int64_t at = begin; at < last; at = chunk.range().end) {
      const std::int64_t stop = at < end ? end : last;
      REQUIRE(reader.next(chunk, std::min(chunk_frames, static_cast<std::size_t>(stop - at))));
      partial->take(chunk);
    }
    whole.merge(*partial);
    begin = end;
  }
}

std::string faulty_text() {
  // Every kind of fault, on purpose close to the cuts that the test makes; two gaps and missing cells.
  auto samples = lively(6000);
  for (std::size_t i = 0; i < samples.size(); ++i) samples[i] = std::min(samples[i], 7000);
  std::fill(samples.begin() + 980, samples.begin() + 1030, 0);
  std::fill(samples.begin() + 2000, samples.begin() + 2600, samples[2000]);
  samples[3000] = 90000;
  samples[2999] = -90000;
  samples[4000] = -80000;
  std::string text = "time [s],a [m/s2]\n";
  for (std::size_t i = 0; i < samples.size(); ++i) {
    const double t = 0.001 * static_cast<double>(i) + (i >= 3500 ? 0.5 : 0.0);
    text += std::to_string(t) + "," + (i % 1700 == 5 ? "" : std::to_string(samples[i])) + "\n";
  }
  return text;
}

bool same(const base::Finding& a, const base::Finding& b) {
  return a.code == b.code && a.text == b.text && a.from_s == b.from_s && a.to_s == b.to_s && a.evidence == b.evidence;
}

}  // namespace

TEST_CASE("however the pass is cut, findings and picture are the same") {
  Opened csv(faulty_text());
  const auto& recording = csv.recording();
  const std::int64_t frames = recording.frames;
  recording::SampleQuality once(recording);
  run_cut(*csv.reader, once, {frames}, 100000);
  const auto expected = once.result()[0];
  CHECK(expected.findings.size() >= 3);
  recording::Overview picture(recording, {0, frames}, 77);
  run_cut(*csv.reader, picture, {frames}, 100000);
  const auto drawn = picture.result();

  const std::vector<std::vector<std::int64_t>> ways{{1000, frames},
                                                    {1, 2, 3, frames},
                                                    {990, 1000, 1029, 1030, 2001, 2599, 2600, 2999, 3000, 3001, frames},
                                                    {5999, frames}};
  for (const auto& cuts : ways) {
    for (const std::size_t chunk : {std::size_t{3}, std::size_t{64}, std::size_t{5000}}) {
      recording::SampleQuality parts(recording);
      run_cut(*csv.reader, parts, cuts, chunk);
      const auto quality = parts.result()[0];
      REQUIRE(quality.findings.size() == expected.findings.size());
      for (std::size_t i = 0; i < quality.findings.size(); ++i) {
        INFO(quality.findings[i].text << " | " << expected.findings[i].text);
        CHECK(same(quality.findings[i], expected.findings[i]));
      }
      CHECK(quality.missing == expected.missing);
      CHECK(*quality.rms == Approx(*expected.rms).epsilon(1e-12));  // rounding of 6000 additions
      CHECK(*quality.mean == Approx(*expected.mean).epsilon(1e-12));

      recording::Overview redrawn(recording, {0, frames}, 77);
      run_cut(*csv.reader, redrawn, cuts, chunk);
      CHECK(redrawn.result().channels == drawn.channels);
    }
  }
}

TEST_CASE("one thread and four give the same bits") {
  Opened wav(wav16(lively(700000), 10000).file());
  const std::int64_t frames = wav.recording().frames;
  std::vector<std::vector<double>> numbers;
  std::vector<recording::OverviewPicture> pictures;
  for (const unsigned threads : {1U, 4U}) {
    base::Context context;
    context.threads = threads;
    double last = 0.0;
    context.progress = [&](std::string_view, double fraction) {
      CHECK(fraction >= last);
      last = fraction;
    };
    recording::SampleQuality quality(wav.recording());
    recording::Overview overview(wav.recording(), {0, frames}, 500);
    const std::array<recording::Consumer*, 2> consumers{&quality, &overview};
    recording::run_pass(*wav.reader, {0, frames}, consumers, context, "reading");
    CHECK(last == 1.0);
    const auto result = quality.result()[0];
    numbers.push_back({*result.mean, *result.rms, *result.peak});
    pictures.push_back(overview.result());
  }
  CHECK(numbers[0] == numbers[1]);
  CHECK(pictures[0].channels == pictures[1].channels);
}

TEST_CASE("a picture holds every extreme value in its column") {
  auto samples = lively(10000);
  samples[4321] = 32000;
  Opened wav(wav16(samples).file());
  recording::Overview overview(wav.recording(), {0, 10000}, 100);
  const std::array<recording::Consumer*, 1> consumers{&overview};
  recording::run_pass(*wav.reader, {0, 10000}, consumers, {}, "reading");
  const auto picture = overview.result();
  REQUIRE(picture.time_s.size() == 100);
  CHECK(picture.time_s[43] == Approx(4.3));
  REQUIRE(picture.channels[0][43].has_value());
  CHECK(picture.channels[0][43]->hi == 32000.0 / 32768.0);
}

TEST_CASE("a stop request ends a pass") {
  Opened wav(wav16(lively(10000)).file());
  std::stop_source stop;
  base::Context context;
  context.stop = stop.get_token();
  stop.request_stop();
  recording::SampleQuality quality(wav.recording());
  const std::array<recording::Consumer*, 1> consumers{&quality};
  CHECK_THROWS_AS(recording::run_pass(*wav.reader, {0, 10000}, consumers, context, "reading"), base::Stopped);
}
