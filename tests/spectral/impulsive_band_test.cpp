#include "stillmass/spectral/impulsive_band.hpp"

#include <algorithm>
#include <array>
#include <cmath>
#include <limits>

#include "stillmass/base/error.hpp"

#include "spectral/bearing_signals.hpp"
#include "spectral/kurtosis_limit.hpp"
#include "support/catch.hpp"
#include "support/memory_reader.hpp"

using namespace stillmass;
using spectral::BandSearch;
using tests::MemoryReader;

namespace {

constexpr double rate = 25600.0;

BandSearch search(const MemoryReader& reader, const spectral::BandSearchOptions& options = {}, unsigned threads = 1) {
  spectral::BandSearchConsumer consumer(reader.recording(), all_frames(reader), {0}, options);
  const std::array<recording::Consumer*, 1> one{&consumer};
  base::Context context;
  context.threads = threads;
  recording::run_pass(reader, all_frames(reader), one, context, "bands");
  return consumer.searches().front();
}

BandSearch search(std::vector<double> x, double rate_hz, const spectral::BandSearchOptions& options = {}) {
  return search(MemoryReader(rate_hz, {{"a", std::move(x)}}), options);
}

std::vector<double> machine_noise(double seconds, std::uint64_t seed) {
  auto x = tests::noise(static_cast<std::size_t>(seconds * rate), seed);
  for (int h = 1; h <= 5; ++h) tests::add_tone(x, rate, 24.63 * h, 5.0, h);
  return x;
}

const spectral::BandKurtosis& band_with(const BandSearch& s, double hz, double width) {
  return *std::find_if(s.bands.begin(), s.bands.end(), [&](const spectral::BandKurtosis& band) {
    return band.band_hz.contains(hz) && std::abs(band.band_hz.width() - width) < 1.0;
  });
}

}  // namespace

TEST_CASE("the band chosen for a flaw of a bearing lies on its ringing") {
  for (const double peak : {1.0, 1.5, 3.0, 10.0}) {  // noise of 1 over the whole range, harmonics of 5 below it
    for (const double ringing : {2600.0, 3200.0, 6100.0}) {
      auto x = machine_noise(10.0, 5);
      tests::Blows blows;
      blows.peak = peak;
      blows.ringing_hz = ringing;
      tests::add_blows(x, rate, blows, 9);
      const auto found = search(std::move(x), rate);
      CAPTURE(peak, ringing);
      REQUIRE(chosen_band(found));
      // Its edge may part the resonance: within the half-power bandwidth, 2 zeta f.
      CHECK(std::abs(chosen_band(found)->band_hz.clamped(ringing) - ringing) < 2.0 * blows.damping * ringing);
      CHECK(chosen_band(found)->kurtosis > chosen_band(found)->limit);
    }
  }
}

TEST_CASE("in narrow bands a steady tone has kurtosis -1, noise 0") {
  // |x| of one tone is constant: mean |x|^4 = (mean |x|^2)^2. Of complex Gaussian noise E|x|^4 = 2 (E|x|^2)^2.
  auto x = tests::noise(static_cast<std::size_t>(20 * rate), 6);
  tests::add_tone(x, rate, 3000.0, 30.0);
  const auto s = search(std::move(x), rate);
  CHECK(band_with(s, 3000.0, 562.5).kurtosis == Approx(-1.0).margin(0.01));
  const auto& noise = band_with(s, 7000.0, 562.5);
  // Standard deviation of one stretch 2 / sqrt n; four of them.
  CHECK(std::abs(noise.kurtosis) < 4.0 * 2.0 / std::sqrt(562.5 * 2.0 * 0.8));
  CHECK_FALSE(s.chosen);
}

TEST_CASE("the limit of the kurtosis is exceeded by complex noise as often as it says") {
  // Truth: the definition on independent complex Gaussian numbers.
  const numeric::Random random(3);
  for (const auto& [n, stretches, chance] :
       {std::tuple<std::size_t, std::size_t, double>{300, 1, 0.02}, {1000, 1, 0.02}, {200, 5, 0.02}, {200, 4, 0.02}}) {
    const double limit = spectral::kurtosis_limit(static_cast<double>(n), stretches, chance);
    constexpr std::size_t trials = 3000;
    std::size_t above = 0;
    for (std::size_t t = 0; t < trials; ++t) {
      std::vector<double> values;
      for (std::size_t s = 0; s < stretches; ++s) {
        double second = 0.0, fourth = 0.0;
        for (std::size_t i = 0; i < n; ++i) {
          const double square = -std::log(random.uniform(t * 10 + s, static_cast<std::uint32_t>(i)));
          second += square;
          fourth += square * square;
        }
        values.push_back(static_cast<double>(n) * fourth / (second * second) - 2.0);
      }
      std::sort(values.begin(), values.end());
      if (values[(stretches - 1) / 2] > limit) ++above;
    }
    CAPTURE(n, stretches);
    // Expected 60, standard deviation 7.7; a limit somewhat too high costs little, one too low calls noise a flaw.
    CHECK(above <= 60 + 4 * 8);
    CHECK(above >= 20);
  }
}

TEST_CASE("noise, white or coloured, is called impulsive no more often than the chance allows") {
  spectral::BandSearchOptions options;
  options.false_chance = 0.05;
  std::size_t white = 0, coloured = 0, strict = 0;
  constexpr std::size_t trials = 150;
  constexpr double slow = 12800.0;
  for (std::size_t t = 0; t < trials; ++t) {
    auto x = tests::noise(static_cast<std::size_t>(4 * slow), 40, t);
    if (search(x, slow, options).chosen) ++white;
    if (search(x, slow).chosen) ++strict;
    double a = 0.0, b = 0.0;  // a mode at 2500 Hz with 1 % damping
    const double omega = 2.0 * std::numbers::pi * 2500.0 / slow;
    for (double& v : x) {
      v += 2.0 * std::exp(-0.01 * omega) * std::cos(omega) * a - std::exp(-0.02 * omega) * b;
      b = a;
      a = v;
    }
    if (search(x, slow, options).chosen) ++coloured;
  }
  // At 5 %: 7.5 of 150 expected, standard deviation 2.7.
  CHECK(white <= 18);
  CHECK(coloured <= 18);
  CHECK(white + coloured >= 1);
  CHECK(strict <= 2);  // 0.15 expected at one in a thousand
}

TEST_CASE("a single thump chooses no band and is named") {
  auto x = machine_noise(12.0, 7);
  std::vector<double> thump(static_cast<std::size_t>(0.1 * rate), 0.0);
  tests::Blows blow;
  blow.per_second = 1.0;
  blow.peak = 200.0;
  tests::add_blows(thump, rate, blow, 1);
  const auto at = static_cast<std::size_t>(7.3 * rate);
  for (std::size_t i = 0; i < thump.size(); ++i) x[at + i] += thump[i];
  const auto s = search(std::move(x), rate);
  CHECK(band_with(s, 3200.0, 3000.0).strongest > 50.0);
  CHECK(band_with(s, 3200.0, 3000.0).strongest_at_s == Approx(7.0));  // the stretch from 6 to 8 s
  REQUIRE_FALSE(chosen_band(s));
  CHECK(chosen_band(s).refusal().code == "no-impulsive-band");
  CHECK(chosen_band(s).refusal().seen.find("7.0 s") != std::string::npos);
}

TEST_CASE("a rate that leaves less than an octave above 1 kHz is refused, one that leaves more is not") {
  const auto at_4k = search(tests::noise(40000, 8), 4000.0);
  CHECK(at_4k.bands.empty());
  REQUIRE_FALSE(chosen_band(at_4k));
  CHECK(chosen_band(at_4k).refusal().code == "rate-too-low");
  CHECK(chosen_band(at_4k).refusal().measure.find("5120") != std::string::npos);
  const auto at_5k = search(tests::noise(52000, 8), 5200.0);
  CHECK(at_5k.bands.size() == 3);  // 1031 Hz: whole, halves
  CHECK(chosen_band(at_5k).refusal().code == "no-impulsive-band");
}

TEST_CASE("a range narrower than the least width holds no band") {
  const auto s = search(tests::noise(60000, 8), 6000.0, {.least_width_hz = 2000.0});
  CHECK(s.bands.empty());
  CHECK(chosen_band(s).refusal().code == "rate-too-low");
}

TEST_CASE("a recording of a few samples is refused and nothing worse") {
  for (const std::size_t frames : {1, 2, 7, 30, 1000}) {
    const auto s = search(tests::noise(frames, 8), rate);
    CHECK(chosen_band(s).refusal().code == "recording-too-short");
  }
}

TEST_CASE("a recording of less than three stretches is refused") {
  auto x = machine_noise(1.2, 5);
  tests::add_blows(x, rate, {.peak = 10.0}, 9);
  const auto s = search(std::move(x), rate);
  REQUIRE_FALSE(chosen_band(s));
  CHECK(chosen_band(s).refusal().code == "recording-too-short");
}

TEST_CASE("of a long recording a bounded part is looked at, spread over all of it") {
  constexpr double slow = 6000.0;
  auto x = tests::noise(static_cast<std::size_t>(200 * slow), 9);
  tests::Blows blows;
  blows.ringing_hz = 1700.0;
  blows.peak = 3.0;
  tests::add_blows(x, slow, blows, 9);
  const MemoryReader reader(slow, {{"a", x}});
  const spectral::BandSearchConsumer consumer(reader.recording(), all_frames(reader), {0});
  const auto& plan = consumer.plan();
  CHECK(static_cast<double>(plan.blocks()) * static_cast<double>(plan.length()) / slow < 40.0);
  CHECK(plan.runs().back().last() > static_cast<std::int64_t>(199.0 * slow));
  const auto s = search(reader);
  CHECK(s.stretches == 15);
  REQUIRE(chosen_band(s));
  CHECK(chosen_band(s)->band_hz.contains(1700.0));
}

TEST_CASE("threads and chunks change no bit of the search, missing samples and gaps keep out") {
  const auto frames = static_cast<std::size_t>(recording::pass_range_frames) * 2 + 5000;
  auto x = tests::noise(frames, 10);
  tests::add_blows(x, rate, {.peak = 3.0}, 9);
  const MemoryReader whole(rate, {{"a", x}});
  const MemoryReader cut(rate, {{"a", x}}, {}, 777);
  const auto a = search(whole), b = search(whole, {}, 3), c = search(cut, {}, 2);
  REQUIRE(a.chosen);
  for (std::size_t i = 0; i < a.bands.size(); ++i) {
    CHECK(a.bands[i].kurtosis == b.bands[i].kurtosis);
    CHECK(a.bands[i].kurtosis == c.bands[i].kurtosis);
    CHECK(a.bands[i].limit == b.bands[i].limit);
  }
  // A jump to another level at a gap and a burst that is marked as missing would both be thumps.
  auto y = tests::noise(frames, 11);
  for (std::size_t i = frames / 2; i < frames; ++i) y[i] += 1e4;
  for (std::size_t i = 1000; i < 1010; ++i) y[i] = std::numeric_limits<double>::quiet_NaN();
  const auto half = static_cast<std::int64_t>(frames / 2);
  const MemoryReader gap(rate, {{"a", y}}, {{0, half, 0.0}, {half, static_cast<std::int64_t>(frames) - half, 100.0}},
                         5000);
  const auto g = search(gap);
  CHECK_FALSE(g.chosen);
  for (const auto& band : g.bands) CHECK(band.strongest < 3.0 * band.limit);
}

TEST_CASE("a faulty search is refused before any sample is read") {
  const MemoryReader reader(rate, {{"a", std::vector<double>(100, 0.0)}});
  const auto& r = reader.recording();
  CHECK_THROWS_AS(spectral::BandSearchConsumer(r, {0, 100}, {1}), base::Error);
  spectral::BandSearchOptions options;
  options.least_width_hz = 0.0;
  CHECK_THROWS_AS(spectral::BandSearchConsumer(r, {0, 100}, {0}, options), base::Error);
  options = {};
  options.lowest_hz = std::numeric_limits<double>::quiet_NaN();
  CHECK_THROWS_AS(spectral::BandSearchConsumer(r, {0, 100}, {0}, options), base::Error);
}
