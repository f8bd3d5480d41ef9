#include "stillmass/spectral/envelope.hpp"

#include <algorithm>
#include <array>
#include <cmath>
#include <complex>
#include <limits>
#include <numbers>

#include "stillmass/base/error.hpp"
#include "stillmass/spectral/family.hpp"

#include "spectral/bearing_signals.hpp"
#include "support/catch.hpp"
#include "support/memory_reader.hpp"

using namespace stillmass;
using spectral::Envelope;
using tests::MemoryReader;

namespace {

constexpr double rate = 25600.0;
constexpr double turns = 24.63;
constexpr double flaw = 3.5848 * turns;
constexpr std::array<std::size_t, 1> first{0};

Envelope in_band(const MemoryReader& reader, base::Interval band, spectral::SpectrumOptions lines = {},
                 unsigned threads = 1) {
  base::Context context;
  context.threads = threads;
  const auto all =
      spectral::envelopes(reader, all_frames(reader), first, {.spectrum = lines, .band_hz = band}, context);
  return *all.front().envelope;
}

Envelope in_band(std::vector<double> x, base::Interval band, spectral::SpectrumOptions lines = {}) {
  return in_band(MemoryReader(rate, {{"a", std::move(x)}}), band, lines);
}

/// Modulated carrier A (1 + m cos) cos.
std::vector<double> modulated(double seconds, double carrier_hz, double modulation_hz, double depth, double amplitude) {
  std::vector<double> x(static_cast<std::size_t>(seconds * rate));
  for (std::size_t i = 0; i < x.size(); ++i) {
    const double t = 2.0 * std::numbers::pi * static_cast<double>(i) / rate;
    x[i] = amplitude * (1.0 + depth * std::cos(modulation_hz * t + 0.7)) * std::cos(carrier_hz * t + 0.2);
  }
  return x;
}

std::vector<double> machine_noise(double seconds, std::uint64_t seed, std::uint64_t case_number = 0) {
  auto x = tests::noise(static_cast<std::size_t>(seconds * rate), seed, case_number);
  for (int h = 1; h <= 5; ++h) tests::add_tone(x, rate, turns * h, 5.0, h);
  return x;
}

bool near(double value, double expected, double relative) { return std::abs(value - expected) < relative * expected; }

}  // namespace

TEST_CASE("a modulated carrier gives its depth, its amplitude and its modulation frequency") {
  for (const double depth : {0.02, 0.3, 0.9}) {
    for (const double modulation : {25.0, 37.3, 213.77}) {
      const auto e = in_band(modulated(6.0, 3000.0, modulation, depth, 2.5), {2500.0, 3500.0});
      CAPTURE(depth, modulation);
      CHECK(e.mean.value == Approx(2.5).epsilon(1e-3));
      const auto lines = spectral::tones(e.spectrum);
      REQUIRE_FALSE(lines.empty());
      CHECK(lines[0].frequency.value == Approx(modulation).epsilon(1e-4));
      CHECK(spectral::modulation_depth(e, lines[0]).value == Approx(depth).epsilon(0.005));
    }
  }
}

TEST_CASE("an envelope spectrum is that of the naive analytic signal of its blocks") {
  // By the definition, with sums for transforms: band lines of the block weighted by the flanks, back to the time of
  // every sample, magnitude, less its weighted mean, weighted, transformed.
  using Complex = std::complex<double>;
  constexpr std::size_t n = 640;
  auto x = modulated(0.05, 3000.0, 160.0, 0.4, 1.0);
  tests::add_tone(x, rate, 3360.0, 0.1, 1.1);  // on the lower part of the upper flank
  tests::add_tone(x, rate, 50.0, 7.0);
  const base::Interval band{2400.0, 3400.0};
  const double flank = 125.0, line = rate / n;
  const auto w = spectral::samples(spectral::Window::hann, n);
  std::vector<double> expected(26, 0.0);
  const std::array<std::size_t, 3> starts{0, 320, 640};
  for (const std::size_t start : starts) {
    std::vector<Complex> analytic(n);
    for (std::size_t k = 1; k < n / 2; ++k) {
      const double f = static_cast<double>(k) * line;
      const auto side = [&](double inside) {
        return inside < -flank / 2
                   ? 0.0
                   : (inside > flank / 2 ? 1.0 : 0.5 + 0.5 * std::sin(std::numbers::pi * inside / flank));
      };
      const double gain = side(f - band.lo) * side(band.hi - f);
      if (gain == 0.0) continue;
      Complex sum;
      for (std::size_t t = 0; t < n; ++t) {
        sum += x[start + t] * std::polar(1.0, -2.0 * std::numbers::pi * static_cast<double>(k * t % n) / n);
      }
      for (std::size_t t = 0; t < n; ++t) {
        analytic[t] +=
            2.0 / n * gain * sum * std::polar(1.0, 2.0 * std::numbers::pi * static_cast<double>(k * t % n) / n);
      }
    }
    double mean = 0.0, weight = 0.0, norm = 0.0;
    for (std::size_t t = 0; t < n; ++t) {
      mean += w[t] * std::abs(analytic[t]);
      weight += w[t];
      norm += w[t] * w[t];
    }
    for (std::size_t k = 1; k < expected.size(); ++k) {
      Complex sum;
      for (std::size_t t = 0; t < n; ++t) {
        sum += w[t] * (std::abs(analytic[t]) - mean / weight) *
               std::polar(1.0, -2.0 * std::numbers::pi * static_cast<double>(k * t % n) / n);
      }
      expected[k] += 2.0 * std::norm(sum) / (rate * norm) / starts.size();
    }
  }
  const auto e = in_band(x, band, {.block_frames = n});
  REQUIRE(e.spectrum.blocks == starts.size());
  REQUIRE(e.spectrum.density.size() == expected.size());
  const double greatest = *std::max_element(expected.begin(), expected.end());
  // What the square root puts beyond half the rate of the envelope folds back: below 2e-4 of the greatest line.
  for (std::size_t k = 1; k < expected.size(); ++k) {
    CAPTURE(k);
    CHECK(std::abs(e.spectrum.density[k] - expected[k]) < 2e-4 * greatest);
  }
}

TEST_CASE("the strongest lines of an outer-ring flaw are its frequency and harmonics, at every strength") {
  // 3.5848 times the speed: nine balls, d/D = 0.2034, contact angle 0: 9/2 (1 - d/D).
  for (const double peak : {1.0, 1.5, 3.0, 10.0}) {
    auto x = machine_noise(10.0, 5);
    tests::add_blows(x, rate, {.peak = peak}, 9);
    const auto all =
        spectral::envelopes(MemoryReader(rate, {{"a", x}}), {0, static_cast<std::int64_t>(x.size())}, first, {}, {});
    CAPTURE(peak);
    REQUIRE(all[0].envelope);
    const Envelope& e = *all[0].envelope;
    CHECK(e.band_hz.contains(3200.0));
    CHECK(e.choice->kurtosis > e.choice->limit);
    const auto lines = spectral::tones(e.spectrum);
    REQUIRE(lines.size() >= 3);
    // 1 % of slip from blow to blow leaves the mean of 883 of them within 0.034 % (one standard deviation).
    CHECK(near(lines[0].frequency.value, flaw, 0.002));
    CHECK(near(lines[1].frequency.value, 2.0 * flaw, 0.002));
    CHECK(near(lines[2].frequency.value, 3.0 * flaw, 0.002));
    CHECK(spectral::modulation_depth(e, lines[0]).value > 0.1);
  }
}

TEST_CASE("an inner-ring flaw in and out of the load once a turn shows side bands at the speed") {
  auto x = machine_noise(10.0, 5);
  const double inner = 5.4152 * turns;
  tests::add_blows(x, rate, {.per_second = inner, .peak = 3.0, .modulation = 0.8}, 9);
  const auto all =
      spectral::envelopes(MemoryReader(rate, {{"a", x}}), {0, static_cast<std::int64_t>(x.size())}, first, {}, {});
  REQUIRE(all[0].envelope);
  const Envelope& e = *all[0].envelope;
  const auto lines = spectral::tones(e.spectrum);
  const auto carrier = std::find_if(lines.begin(), lines.end(),
                                    [&](const spectral::Tone& t) { return near(t.frequency.value, inner, 0.002); });
  REQUIRE(carrier != lines.end());
  const auto bands =
      spectral::side_bands(lines, carrier->frequency,
                           base::Estimate{turns, 0.02, std::nullopt, base::Quantity::frequency}, e.spectrum.line_hz, 1);
  CHECK(bands.size() == 2);
  CHECK(std::any_of(lines.begin(), lines.end(), [](const auto& t) { return near(t.frequency.value, turns, 0.002); }));
}

TEST_CASE("noise has no line in its envelope spectrum, and the mean envelope of its band") {
  std::size_t lines = 0;
  for (std::uint64_t i = 0; i < 20; ++i) {
    const auto e = in_band(machine_noise(10.0, 12, i), {3000.0, 5000.0});
    lines += spectral::tones(e.spectrum).size();
    // Rayleigh: mean = sqrt(pi / 2) times the standard deviation of the band. u comes from 19 blocks.
    const double expected = std::sqrt(std::numbers::pi / 2.0 * 2000.0 / (0.5 * rate) * 0.96875);
    CHECK(std::abs(e.mean.value - expected) < 5.0 * *e.mean.u);
    CHECK(*e.mean.u < 0.006 * expected);
    CHECK(std::abs(e.kurtosis) < 0.1);
  }
  CHECK(lines == 0);  // one line in a million of 1000 lines each
}

TEST_CASE("a gear-like carrier in noise gives the depth of its modulation within its uncertainty") {
  std::size_t within = 0;
  constexpr std::size_t trials = 40;
  for (std::uint64_t i = 0; i < trials; ++i) {
    auto x = modulated(10.0, 1600.0, 16.42, 0.2, 1.0);
    tests::add_tone(x, rate, 3200.0, 0.5);
    const auto noise = tests::noise(x.size(), 13, i);
    for (std::size_t n = 0; n < x.size(); ++n) x[n] += 0.2 * noise[n];
    const auto e = in_band(std::move(x), {1400.0, 1800.0});
    const auto lines = spectral::tones(e.spectrum);
    REQUIRE_FALSE(lines.empty());
    CHECK(near(lines[0].frequency.value, 16.42, 0.005));
    const auto depth = spectral::modulation_depth(e, lines[0]);
    // The envelope of a carrier in noise is larger by sigma^2 / (2 A): 0.06 % here.
    CHECK(depth.value == Approx(0.2).epsilon(0.02));
    if (std::abs(depth.value - 0.2) < 2.0 * *depth.u) ++within;
  }
  CHECK(within >= 33);  // of 40, 38 expected
}

TEST_CASE("threads and chunks change no bit of an envelope, gaps and missing samples keep out") {
  const auto frames = static_cast<std::size_t>(recording::pass_range_frames) * 2 + 5000;
  auto x = tests::noise(frames, 10);
  tests::add_blows(x, rate, {.peak = 3.0}, 9);
  x[frames / 3] = std::numeric_limits<double>::quiet_NaN();
  const MemoryReader whole(rate, {{"a", x}});
  const MemoryReader cut(rate, {{"a", x}}, {}, 777);
  const base::Interval band{2500.0, 4000.0};
  const auto a = in_band(whole, band), b = in_band(whole, band, {}, 3), c = in_band(cut, band, {}, 2);
  CHECK(a.spectrum.blocks == b.spectrum.blocks);
  CHECK(a.spectrum.density == b.spectrum.density);
  CHECK(a.spectrum.spread == c.spectrum.spread);
  CHECK(a.mean.value == c.mean.value);
  CHECK(a.kurtosis == b.kurtosis);

  // Two carriers in opposite phase to either side of a gap: a block over it would have a notch in its envelope.
  auto y = modulated(4.0, 3000.0, 40.0, 0.3, 1.0);
  const auto middle = y.size() / 2 + 137;
  for (std::size_t i = middle; i < y.size(); ++i) y[i] = -y[i];
  const auto m = static_cast<std::int64_t>(middle);
  const MemoryReader gap(rate, {{"a", y}}, {{0, m, 0.0}, {m, static_cast<std::int64_t>(y.size()) - m, 9.0}}, 1000);
  const auto e = in_band(gap, {2500.0, 3500.0}, {.block_frames = 12800});
  CHECK(e.spectrum.blocks == 7 + 6);
  CHECK(e.mean.value == Approx(1.0).epsilon(1e-3));
  CHECK(e.spectrum.spread[20] < 1e-3);
}

TEST_CASE("each channel has the envelope of its own band, in its own unit, or a refusal") {
  auto x = machine_noise(10.0, 5), y = machine_noise(10.0, 6), z = machine_noise(10.0, 7);
  tests::add_blows(x, rate, {.peak = 4.0}, 9);
  tests::add_blows(z, rate, {.ringing_hz = 7300.0, .peak = 4.0}, 9);
  const MemoryReader reader(rate, {{"x", x}, {"y", y}, {"z", z, base::Quantity::velocity}});
  const std::array<std::size_t, 3> all{2, 1, 0};
  const auto e = spectral::envelopes(reader, all_frames(reader), all, {}, {});
  REQUIRE(e.size() == 3);
  CHECK(e[0].channel == "z");
  CHECK(e[0].envelope->band_hz.contains(7300.0));
  CHECK(e[0].envelope->spectrum.quantity == base::Quantity::velocity);
  CHECK(e[0].envelope->mean.quantity == base::Quantity::velocity);
  CHECK(e[1].envelope.refusal().code == "no-impulsive-band");
  CHECK(e[1].search->bands.size() > 20);
  CHECK(e[2].envelope->band_hz.contains(3200.0));
  CHECK(e[2].envelope->channel == "x");
}

TEST_CASE("a faulty band or averaging is refused before any sample is read") {
  const MemoryReader reader(rate, {{"a", std::vector<double>(30000, 0.0)}});
  const auto& r = reader.recording();
  const auto with = [&](double lo, double hi, spectral::SpectrumOptions lines = {}) {
    return spectral::EnvelopeConsumer(r, {0, 30000}, {{0, {lo, hi}}}, {.spectrum = lines});
  };
  CHECK_NOTHROW(with(2000.0, 3000.0));
  CHECK_THROWS_AS(with(3000.0, 2000.0), base::Error);
  CHECK_THROWS_AS(with(2000.0, 13000.0), base::Error);
  CHECK_THROWS_AS(with(0.0, 1000.0), base::Error);
  CHECK_THROWS_AS(with(2000.0, 2002.0), base::Error);
  CHECK_THROWS_AS(with(std::numeric_limits<double>::quiet_NaN(), 3000.0), base::Error);
  CHECK_THROWS_AS(with(2000.0, 3000.0, {.averaging = spectral::Averaging::peak_hold}), base::Error);
  CHECK_THROWS_AS(spectral::EnvelopeConsumer(r, {0, 30000}, {{1, {2000.0, 3000.0}}}), base::Error);
  for (const double highest : {0.0, std::numeric_limits<double>::quiet_NaN()}) {
    CHECK_THROWS_AS(spectral::EnvelopeConsumer(r, {0, 30000}, {{0, {2000.0, 3000.0}}}, {.highest_hz = highest}),
                    base::Error);
  }
}
