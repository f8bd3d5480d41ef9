#include "stillmass/spectral/tone.hpp"

#include <algorithm>
#include <cmath>
#include <numbers>

#include "stillmass/spectral/family.hpp"
#include "stillmass/spectral/quantity.hpp"

#include "spectral/signals.hpp"
#include "support/catch.hpp"

using namespace stillmass;
using base::Quantity;
using spectral::Spectrum;
using spectral::Window;

namespace {

constexpr double rate = 2000.0;
constexpr Window all[] = {Window::rectangle, Window::hann, Window::hamming, Window::blackman_harris, Window::flat_top};

Spectrum spectrum(const std::vector<double>& x, Window window = Window::hann, std::size_t n = 2000) {
  return spectral::averaged_spectrum(x, rate, Quantity::acceleration, {.window = window, .block_frames = n});
}

std::vector<double> faint_noise(std::size_t n, double rms, std::uint64_t case_number = 0) {
  auto x = tests::noise(n, 51, case_number);
  for (double& v : x) v *= rms;
  return x;
}

}  // namespace

TEST_CASE("a tone in next to no noise is found to a thousandth of a line wherever it stands, with every window") {
  for (const Window window : all) {
    for (const double f : {100.0, 100.13, 100.25, 100.5, 100.77}) {
      auto x = faint_noise(40000, 1e-6);
      tests::add_tone(x, rate, f, 2.0, 0.3);
      const auto found = spectral::tones(spectrum(x, window), {.strongest = 1, .band_hz = {}});
      CAPTURE(spectral::name(window), f);
      REQUIRE(found.size() == 1);
      // The image at -f leaks 200 lines away: the rectangle's side lobes are 1/(200 pi) there, the others' far less.
      const bool leaks = window == Window::rectangle || window == Window::hamming;
      CHECK(std::abs(found[0].frequency.value - f) < (leaks ? 5e-3 : 1e-3));
      CHECK(found[0].amplitude_rms.value == Approx(2.0).epsilon(leaks ? 5e-3 : 1e-4));
      CHECK(found[0].breadth == Approx(1.0).epsilon(window == Window::rectangle ? 0.2 : 0.01));
    }
  }
}

TEST_CASE("the two-line formula for Hann is what the general one gives") {
  // (2 a - 1) / (a + 1), a the ratio of the greater neighbour to the peak.
  auto x = faint_noise(40000, 1e-6);
  tests::add_tone(x, rate, 212.31, 1.0);
  const auto s = spectrum(x);
  const double a = s.amplitude_rms(213) / s.amplitude_rms(212);
  const auto found = spectral::tones(s);
  REQUIRE(found.size() == 1);
  CHECK(found[0].frequency.value == Approx(212.0 + (2.0 * a - 1.0) / (a + 1.0)).epsilon(1e-7));
}

TEST_CASE("a tone off the line holds to 1e-4 of a line and 0.1 % beside strong tones and near both ends") {
  // Noise-free but for 1e-7. Distances in lines; the neighbour's amplitude over the tone's. Limits: the issue's own,
  // for neighbours beyond the window's lobe and one line. Measured: 3e-7 lines (Hann), 1.2e-5 (Hamming), 1e-8
  // (Blackman-Harris), 7e-7 (flat-top).
  struct Case {
    double frequency, distance, ratio;
  };
  const Case cases[] = {{300, 0, 0},   {6, 0, 0},       {990, 0, 0}, {300, 8.3, 1},
                        {300, 6.7, 3}, {300, 20.4, 10}, {8, 9.2, 5}};
  for (const Window window : {Window::hann, Window::hamming, Window::blackman_harris, Window::flat_top}) {
    for (const Case& c : cases) {
      for (int o = 0; o <= 10; ++o) {
        const double f = c.frequency + 0.1 * o;
        auto x = faint_noise(40000, 1e-7);
        tests::add_tone(x, rate, f, 1.0, 0.3 + o);
        if (c.ratio > 0.0) tests::add_tone(x, rate, f + c.distance, c.ratio, 1.7 * o);
        const auto found =
            spectral::tones(spectrum(x, window), {.strongest = 2, .band_hz = base::Interval{f - 2.5, f + 2.5}});
        CAPTURE(spectral::name(window), f, c.distance, c.ratio);
        REQUIRE(found.size() == 1);
        CHECK(std::abs(found[0].frequency.value - f) < 1e-4);
        CHECK(found[0].amplitude_rms.value == Approx(1.0).epsilon(1e-3));
        CHECK(std::abs(found[0].frequency.value - f) < 3.0 * *found[0].frequency.u + 1e-7);
      }
    }
  }
}

TEST_CASE("the rectangle holds to 1e-4 of a line where a tone stands alone, and beside others within its uncertainty") {
  for (int o = 0; o <= 10; ++o) {
    for (const double base_hz : {6.0, 300.0, 990.0}) {
      const double f = base_hz + 0.1 * o;
      auto x = faint_noise(40000, 1e-7);
      tests::add_tone(x, rate, f, 1.0, 0.3 + o);
      const auto alone = spectral::tones(spectrum(x, Window::rectangle), {.strongest = 1, .band_hz = {}});
      CAPTURE(f);
      REQUIRE(alone.size() == 1);
      CHECK(std::abs(alone[0].frequency.value - f) < 1e-4);
      CHECK(alone[0].amplitude_rms.value == Approx(1.0).epsilon(1e-3));
      if (base_hz != 300.0) continue;
      tests::add_tone(x, rate, f + 8.3, 1.0, 1.7 * o);
      const auto beside = spectral::tones(spectrum(x, Window::rectangle),
                                          {.strongest = 1, .band_hz = base::Interval{f - 1.5, f + 1.5}});
      REQUIRE(beside.size() == 1);
      CHECK(std::abs(beside[0].frequency.value - f) < 3.0 * *beside[0].frequency.u);
    }
  }
}

TEST_CASE("frequency and amplitude of tones in noise lie within their uncertainty as often as they should") {
  // Three levels of the tone, three overlaps, 40 recordings each, 360 a window (seeds 51 noise, 52 places): |error| <=
  // 2 u holds for 95.4 % of a normal error, known to 1.1 %. Accepted: 92 to 99 % (the claim takes the greater of two
  // estimates of noise, so is cautious); the rectangle's place is held to 92 % only: where a tone stands on its line
  // the neighbours do not tell on which side it stands.
  const numeric::Random random(52);
  for (const Window window : all) {
    int within_f = 0, within_a = 0, cases = 0;
    double f_pull = 0.0, a_pull = 0.0;
    for (const double overlap : {0.0, 0.5, 0.75}) {
      for (const double rms : {0.3, 1.0, 10.0}) {
        for (int i = 0; i < 40; ++i) {
          const auto c = static_cast<std::uint64_t>(cases);
          auto x = faint_noise(21000, 1.0, c);
          const double f = 100.0 + random.uniform(c, 0);
          tests::add_tone(x, rate, f, rms, 6.28 * random.uniform(c, 1));
          const auto s = spectral::averaged_spectrum(x, rate, Quantity::acceleration,
                                                     {.window = window, .overlap = overlap, .block_frames = 1000});
          const auto found = spectral::tones(s, {.strongest = 1, .band_hz = base::Interval{90, 112}});
          REQUIRE(found.size() == 1);
          const double df = (found[0].frequency.value - f) / *found[0].frequency.u;
          const double da = (found[0].amplitude_rms.value - rms) / *found[0].amplitude_rms.u;
          within_f += std::abs(df) <= 2.0;
          within_a += std::abs(da) <= 2.0;
          f_pull += df * df / 360.0;
          a_pull += da * da / 360.0;
          ++cases;
        }
      }
    }
    CAPTURE(spectral::name(window), within_f, within_a, std::sqrt(f_pull), std::sqrt(a_pull));
    CHECK(within_f >= 0.92 * cases);
    CHECK(within_a >= 0.92 * cases);
    CHECK(within_a <= 0.99 * cases);
    if (window == Window::rectangle) continue;
    CHECK(within_f <= 0.99 * cases);
    CHECK(std::sqrt(f_pull) == Approx(0.95).epsilon(0.13));
    CHECK(std::sqrt(a_pull) == Approx(0.95).epsilon(0.13));
  }
}

TEST_CASE("the uncertainty of a tone beside a strong one holds in noise") {
  // 300 recordings of a tone 7 lines beside one of ten times its amplitude: seeds 56 and 57; 92 to 99 % as above.
  const numeric::Random random(57);
  int within_f = 0, within_a = 0;
  constexpr int cases = 300;
  for (std::uint64_t c = 0; c < cases; ++c) {
    auto x = tests::noise(21000, 56, c);
    const double f = 200.0 + 2.0 * random.uniform(c, 0);
    tests::add_tone(x, rate, f, 2.0, 6.28 * random.uniform(c, 1));
    tests::add_tone(x, rate, f + 14.0, 20.0, 6.28 * random.uniform(c, 2));
    const auto found =
        spectral::tones(spectrum(x, Window::hann, 1000), {.strongest = 1, .band_hz = base::Interval{f - 4.0, f + 4.0}});
    REQUIRE(found.size() == 1);
    within_f += std::abs(found[0].frequency.value - f) <= 2.0 * *found[0].frequency.u;
    within_a += std::abs(found[0].amplitude_rms.value - 2.0) <= 2.0 * *found[0].amplitude_rms.u;
  }
  CAPTURE(within_f, within_a);
  CHECK(within_f >= 0.92 * cases);
  CHECK(within_f <= 0.99 * cases);
  CHECK(within_a >= 0.92 * cases);
  CHECK(within_a <= 0.99 * cases);
}

TEST_CASE("noise alone holds no tone") {
  // One line in a million is expected; 200 spectra of 1000 lines hold 0.2 of them. More than 2: chance below 0.2 %.
  std::size_t count = 0;
  for (std::uint64_t c = 0; c < 200; ++c) count += spectral::tones(spectrum(tests::noise(20000, 53, c))).size();
  CHECK(count <= 2);
}

TEST_CASE("the noise floor is the density of the noise, with tones in it or without") {
  auto x = tests::noise(200000, 54);
  for (const double f : {150.0, 160.0, 170.0, 180.0}) tests::add_tone(x, rate, f, 10.0);
  const auto s = spectrum(x);
  const auto floor = spectral::noise_floor(s);
  // White noise of variance 1 over 1000 Hz: 1e-3. A median of 49 lines of 187 averages: 1.3 %; tones fill 20 of 49
  // lines.
  CHECK(floor[700] == Approx(1e-3).epsilon(0.05));
  CHECK(floor[165] == Approx(1e-3).epsilon(0.10));
}

TEST_CASE("strong tones hide neither weak ones nor show their own side lobes") {
  auto x = faint_noise(40000, 1e-7);
  tests::add_tone(x, rate, 100.4, 10.0);
  tests::add_tone(x, rate, 131.2, 1e-3);
  tests::add_tone(x, rate, 400.5, 1.0);
  for (const Window window : {Window::hann, Window::blackman_harris, Window::flat_top}) {
    const auto found = spectral::tones(spectrum(x, window));
    CAPTURE(spectral::name(window));
    REQUIRE(found.size() == 3);
    CHECK(found[0].frequency.value == Approx(100.4).epsilon(1e-5));
    CHECK(found[1].frequency.value == Approx(400.5).epsilon(1e-5));
    CHECK(found[2].frequency.value == Approx(131.2).epsilon(1e-4));
    CHECK(found[2].amplitude_rms.value == Approx(1e-3).epsilon(0.02));
  }
}

TEST_CASE("the list is cut to the strongest, and to the band") {
  auto x = faint_noise(40000, 1e-3);
  for (int i = 1; i <= 6; ++i) tests::add_tone(x, rate, 100.0 * i, 0.1 * i);
  const auto s = spectrum(x);
  const auto three = spectral::tones(s, {.strongest = 3, .band_hz = {}});
  REQUIRE(three.size() == 3);
  CHECK(three[0].frequency.value == Approx(600.0));
  CHECK(three[2].frequency.value == Approx(400.0));
  CHECK(spectral::tones(s, {.band_hz = base::Interval{150.0, 350.0}}).size() == 2);
}

TEST_CASE("a tone of an integrated spectrum is the measured tone over 2 pi f, and low ones come first") {
  auto x = faint_noise(80000, 1e-4);
  tests::add_tone(x, rate, 10.37, 1.0);
  tests::add_tone(x, rate, 300.0, 2.0);
  const auto v = spectral::as_quantity(spectrum(x), Quantity::velocity);
  const auto found = spectral::tones(v);
  REQUIRE(found.size() == 2);
  CHECK(found[0].frequency.value == Approx(10.37).epsilon(1e-5));
  CHECK(found[0].amplitude_rms.value == Approx(1.0 / (2.0 * std::numbers::pi * 10.37)).epsilon(1e-4));
  CHECK(found[0].amplitude_rms.quantity == Quantity::velocity);
  CHECK(found[0].prominence > 1e4);
}

TEST_CASE("a resonance under noise is told from a tone by its scatter") {
  const auto n = tests::noise(200000, 55);
  std::vector<double> x(n.size(), 0.0);
  const double r = std::exp(-2.0 * std::numbers::pi * 1.0 / rate), theta = 2.0 * std::numbers::pi * 120.0 / rate;
  for (std::size_t t = 2; t < n.size(); ++t) x[t] = 2.0 * r * std::cos(theta) * x[t - 1] - r * r * x[t - 2] + n[t];
  tests::add_tone(x, rate, 300.0, 5.0);
  const auto found = spectral::tones(spectrum(x), {.strongest = 2, .band_hz = base::Interval{100.0, 350.0}});
  REQUIRE(found.size() == 2);
  const auto resonance = std::min_element(
      found.begin(), found.end(), [](const auto& a, const auto& b) { return a.frequency.value < b.frequency.value; });
  CHECK(std::abs(resonance->frequency.value - 120.0) < 2.0);
  CHECK(*resonance->spread > 0.7);
  const auto& tone = resonance == found.begin() ? found[1] : found[0];
  CHECK(tone.frequency.value == Approx(300.0).epsilon(1e-4));
  CHECK(*tone.spread < 0.2);
}

TEST_CASE("harmonics and side bands are gathered from the tones") {
  auto x = faint_noise(80000, 1e-3);
  for (int k = 1; k <= 4; ++k) tests::add_tone(x, rate, 24.63 * k, 1.0 / k);
  for (const double f : {400.0 - 24.63, 400.0, 400.0 + 24.63, 77.7}) tests::add_tone(x, rate, f, 0.2);
  const auto s = spectrum(x);
  const auto found = spectral::tones(s);
  REQUIRE(found.size() == 8);
  const base::Estimate turn{24.63, 0.005, std::nullopt, Quantity::frequency};
  const auto family = spectral::harmonics(found, turn, s.line_hz, 10);
  REQUIRE(family.size() == 4);
  for (int k = 1; k <= 4; ++k) {
    const auto& member = family[static_cast<std::size_t>(k) - 1];
    CHECK(member.number == k);
    CHECK(found[member.tone].frequency.value == Approx(24.63 * k).epsilon(1e-4));
  }
  const base::Estimate carrier{400.0, 0.01, std::nullopt, Quantity::frequency};
  const auto bands = spectral::side_bands(found, carrier, turn, s.line_hz);
  REQUIRE(bands.size() == 2);
  CHECK(bands[0].number == -1);
  CHECK(bands[1].number == 1);
  CHECK(spectral::harmonic_number(98.6, 24.63, 0.1) == 4);
  CHECK_FALSE(spectral::harmonic_number(98.6, 24.63, 0.01).has_value());
  CHECK_FALSE(spectral::harmonic_number(0.1, 24.63, 0.2).has_value());
}
