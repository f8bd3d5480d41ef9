#include "stillmass/spectral/deflection.hpp"

#include <algorithm>
#include <array>
#include <cmath>
#include <complex>
#include <limits>
#include <numbers>

#include "stillmass/base/error.hpp"

#include "spectral/signals.hpp"
#include "support/catch.hpp"
#include "support/memory_reader.hpp"

using namespace stillmass;
using spectral::DeflectionOptions;
using spectral::DeflectionShape;
using tests::all_frames;
using tests::MemoryReader;
using Complex = std::complex<double>;

namespace {

constexpr double rate = 1000.0;

/// Noise of an r.m.s. value with a tone of that complex ratio to cos(2 pi f t + 0.4), 1 r.m.s.
std::vector<double> channel(std::size_t frames, double f, Complex ratio, double noise, std::uint64_t seed,
                            std::uint64_t case_number = 0) {
  auto x = tests::noise(frames, seed, case_number);
  for (double& v : x) v *= noise;
  tests::add_tone(x, rate, f, std::abs(ratio), 0.4 + std::arg(ratio));
  return x;
}

base::Answer<DeflectionShape> shape(const recording::Reader& reader, double f, DeflectionOptions options = {}) {
  if (options.block_frames == 0) options.block_frames = 1000;
  const std::array<double, 1> one{f};
  return spectral::deflections(reader, all_frames(reader), one, options, {}).front();
}

const spectral::Deflection& at(const DeflectionShape& s, const std::string& point) {
  return *std::find_if(s.points.begin(), s.points.end(), [&](const auto& d) { return d.point == point; });
}

double angle_between(double a, double b) { return std::abs(std::remainder(a - b, 2.0 * std::numbers::pi)); }

}  // namespace

TEST_CASE("ratio and phase hold their uncertainty in noise, on and between lines, strong or weak") {
  struct Case {
    double f, noise;
    spectral::Window window;
  };
  const Complex truth = std::polar(0.5, 0.3);
  for (const auto& [f, noise, window] :
       {Case{25.0, 0.3, spectral::Window::hann}, Case{24.63, 0.3, spectral::Window::hann},
        Case{24.5, 4.0, spectral::Window::hann}, Case{25.2, 0.3, spectral::Window::flat_top},
        Case{24.63, 0.3, spectral::Window::rectangle}}) {
    constexpr std::size_t trials = 200;
    std::size_t magnitude_within = 0, phase_within = 0;
    Complex mean;
    for (std::uint64_t i = 0; i < trials; ++i) {
      const MemoryReader reader(
          rate, {{"r", channel(20000, f, 1.0, noise, 81, i)}, {"p", channel(20000, f, truth, noise, 82, i)}});
      const auto found = shape(reader, f, {.window = window, .reference = 0, .least_coherence = 0.1});
      REQUIRE(found);
      REQUIRE(found->points.size() == 2);
      const auto& d = found->points[1];
      mean += *d.ratio() / static_cast<double>(trials);
      if (d.magnitude.interval95()->contains(0.5)) ++magnitude_within;
      if (d.phase->interval95()->contains(0.3)) ++phase_within;
    }
    CAPTURE(f, noise, spectral::name(window), magnitude_within, phase_within);
    // 95 % of 200 are 190, standard deviation 3.1.
    CHECK(magnitude_within >= 179);
    CHECK(phase_within >= 179);
    CHECK(magnitude_within + phase_within <= 398);
    CHECK(std::abs(mean - truth) < 0.03 * 0.5);  // noise in the reference does not lower it
  }
}

TEST_CASE("five channels have their ratios and phases at each of several frequencies") {
  const std::array<Complex, 5> first{1.0, std::polar(0.5, 0.3), std::polar(2.0, 3.0), std::polar(0.1, -1.2), -0.7};
  const std::array<Complex, 5> second{0.2, 1.0, std::polar(0.4, 2.0), std::polar(0.9, -3.0), std::polar(0.3, 1.0)};
  std::vector<tests::MemoryChannel> channels;
  for (std::uint64_t c = 0; c < 5; ++c) {
    auto x = channel(40000, 24.63, first[c], 0.05, 83, c);
    tests::add_tone(x, rate, 123.15, std::abs(second[c]), std::arg(second[c]));
    tests::add_tone(x, rate, 31.0, 3.0);  // another machine
    channels.push_back({std::to_string(c), x});
  }
  const MemoryReader reader(rate, channels);
  const std::array<double, 2> frequencies{123.15, 24.63};
  const auto found =
      spectral::deflections(reader, all_frames(reader), frequencies, {.block_frames = 2000, .reference = 0}, {});
  REQUIRE(found[0]);
  REQUIRE(found[1]);
  CHECK(found[0]->asked_hz == 123.15);
  CHECK(found[1]->frequency.value == Approx(24.63).margin(0.02));
  for (const auto& [s, expected] : {std::pair{*found[1], first}, std::pair{*found[0], second}}) {
    CHECK(s.reference == "0");
    for (std::size_t c = 1; c < 5; ++c) {
      const Complex truth = expected[c] / expected[0];
      const auto& d = at(s, std::to_string(c));
      CHECK(std::abs(d.magnitude.value - std::abs(truth)) < 4.0 * *d.magnitude.u);
      CHECK(angle_between(d.phase->value, std::arg(truth)) < 4.0 * *d.phase->u);
      CHECK(*d.magnitude.u < 0.02 * std::abs(truth) + 0.01);
      CHECK(*d.coherence > 0.9);
    }
  }
}

TEST_CASE("a frequency that wanders by 0.05 percent costs no ratio") {
  constexpr double f = 380.0;  // 0.19 Hz to either side, lines a twelfth apart
  const std::array<Complex, 3> ratios{1.0, std::polar(0.5, 2.2), std::polar(1.4, -0.8)};
  std::vector<tests::MemoryChannel> channels;
  for (std::uint64_t c = 0; c < 3; ++c) {
    auto x = tests::noise(120000, 84, c);
    double phase = 0.0;
    for (std::size_t i = 0; i < x.size(); ++i) {
      const double t = static_cast<double>(i) / rate;
      phase += 2.0 * std::numbers::pi * f * (1.0 + 5e-4 * std::sin(2.0 * std::numbers::pi * 0.03 * t)) / rate;
      x[i] = 0.1 * x[i] + std::abs(ratios[c]) * std::cos(phase + std::arg(ratios[c]));
    }
    channels.push_back({std::to_string(c), x});
  }
  const auto found = shape(MemoryReader(rate, channels), f, {.block_frames = 12000, .reference = 0});
  REQUIRE(found);
  CHECK(std::abs(found->frequency.value - f) < 0.1);
  CHECK(*found->frequency.u == Approx(0.19 / std::numbers::sqrt2).epsilon(0.15));  // of a sine
  for (std::size_t c = 1; c < 3; ++c) {
    const auto& d = found->points[c];
    CHECK(std::abs(*d.ratio() - ratios[c]) < 4.0 * std::numbers::sqrt2 * *d.magnitude.u);
    CHECK(d.magnitude.value == Approx(std::abs(ratios[c])).epsilon(0.01));
    CHECK(*d.coherence > 0.98);
  }
}

TEST_CASE("what both channels feel beside the line does not bend the ratio") {
  // Broadband shaking that reaches the point with the ratio -2, under a line with the ratio 0.5.
  constexpr std::size_t frames = 200000;
  auto r = channel(frames, 24.63, 1.0, 1.5, 85), p = channel(frames, 24.63, 0.5, 0.05, 86);
  const auto common = channel(frames, 24.63, 0.0, 1.5, 85);
  for (std::size_t i = 0; i < frames; ++i) p[i] -= 2.0 * common[i];
  const auto found = shape(MemoryReader(rate, {{"r", r}, {"p", p}}), 24.63, {.reference = 0});
  REQUIRE(found);
  CHECK(std::abs(found->points[1].magnitude.value - 0.5) < 3.0 * *found->points[1].magnitude.u);
  CHECK(*found->points[1].magnitude.u < 0.05);
}

TEST_CASE("a strong line beside it on one side does not pass for noise") {
  std::vector<tests::MemoryChannel> channels;
  for (std::uint64_t c = 0; c < 2; ++c) {
    auto x = channel(60000, 50.0, c == 0 ? 1.0 : 0.5, 0.02, 87, c);
    tests::add_tone(x, rate, 57.0, c == 0 ? 20.0 : 30.0, 1.0);
    channels.push_back({c == 0 ? "r" : "p", x});
  }
  const auto found = shape(MemoryReader(rate, channels), 50.0, {.reference = 0});
  REQUIRE(found);
  CHECK(found->points[1].magnitude.value == Approx(0.5).epsilon(0.01));
}

TEST_CASE("without a name the reference of each frequency is the channel that stands out the most") {
  auto a = channel(20000, 24.63, 1.0, 0.1, 88, 0), b = channel(20000, 24.63, 5.0, 5.0, 88, 1),
       c = channel(20000, 24.63, 0.2, 0.1, 88, 2);
  tests::add_tone(c, rate, 123.15, 2.0);
  tests::add_tone(a, rate, 123.15, 0.5);
  const MemoryReader reader(rate, {{"a", a}, {"b", b}, {"c", c}});
  const std::array<double, 2> frequencies{24.63, 123.15};
  const auto found = spectral::deflections(reader, all_frames(reader), frequencies, {.block_frames = 1000}, {});
  CHECK(found[0]->reference == "a");  // 20 dB out of its noise; b moves more, 0 dB
  CHECK(found[1]->reference == "c");
  CHECK(at(*found[1], "c").magnitude.value == 1.0);
  CHECK(at(*found[1], "a").magnitude.value == Approx(0.25).epsilon(0.05));
}

TEST_CASE("a point without coherence is said and not given") {
  const MemoryReader reader(rate, {{"r", channel(20000, 24.63, 1.0, 0.1, 89)},
                                   {"still", channel(20000, 24.63, 1e-4, 1.0, 90)},
                                   {"p", channel(20000, 24.63, 0.5, 0.1, 91)}});
  const auto found = shape(reader, 24.63);
  REQUIRE(found);
  CHECK(found->points.size() == 2);
  REQUIRE(found->not_given.size() == 1);
  CHECK(found->not_given[0].point == "still");
  CHECK(found->not_given[0].why.code == "low-coherence");
  CHECK(found->not_given[0].why.seen.find("0.50") != std::string::npos);
}

TEST_CASE("with few blocks unrelated noise is not taken for coherent") {
  std::size_t given = 0;
  constexpr std::size_t trials = 300;
  for (std::uint64_t i = 0; i < trials; ++i) {
    const MemoryReader reader(
        rate, {{"r", channel(1500, 24.63, 1.0, 0.05, 92, i)}, {"p", channel(1500, 24.63, 0.0, 1.0, 93, i)}});
    const auto found = shape(reader, 24.63, {.reference = 0});
    REQUIRE(found);
    given += found->points.size() - 1;
  }
  CHECK(given <= 3);  // 0.3 expected
}

TEST_CASE("where no channel has a line there is no shape") {
  const MemoryReader reader(rate,
                            {{"a", channel(40000, 24.63, 1.0, 0.5, 94)}, {"b", channel(40000, 24.63, 1.0, 0.5, 95)}});
  const auto found = shape(reader, 80.0);
  REQUIRE_FALSE(found);
  CHECK(found.refusal().code == "no-line");
}

TEST_CASE("channels of another quantity are compared as the reference's; force and tacho stay out") {
  constexpr double omega = 2.0 * std::numbers::pi * 50.0;
  // v = 0.5 e^{0.2 i} times the reference's velocity, a_r / (i omega).
  const auto r = channel(20000, 50.0, 1.0, 0.01, 96);
  const auto v = channel(20000, 50.0, std::polar(0.5, 0.2) / Complex(0.0, omega), 0.01 / omega, 97);
  const auto x = channel(20000, 50.0, std::polar(3.0, -0.4) / (Complex(0.0, omega) * Complex(0.0, omega)),
                         0.01 / (omega * omega), 98);
  const MemoryReader reader(rate, {{"f", r, base::Quantity::force, recording::Role::force},
                                   {"r", r},
                                   {"v", v, base::Quantity::velocity},
                                   {"x", x, base::Quantity::displacement},
                                   {"t", r, base::Quantity::pulse, recording::Role::tacho}});
  const auto found = shape(reader, 50.0, {.reference = 1});
  REQUIRE(found);
  REQUIRE(found->points.size() == 3);
  CHECK(std::abs(*at(*found, "v").ratio() - std::polar(0.5, 0.2)) <
        4.0 * std::numbers::sqrt2 * *at(*found, "v").magnitude.u);
  CHECK(std::abs(*at(*found, "x").ratio() - std::polar(3.0, -0.4)) <
        4.0 * std::numbers::sqrt2 * *at(*found, "x").magnitude.u);
  CHECK(*at(*found, "x").magnitude.u < 0.02);
}

TEST_CASE("threads change no bit, a missing sample costs its own channel the blocks that hold it") {
  const auto frames = static_cast<std::size_t>(recording::pass_range_frames) + 100000;
  auto a = channel(frames, 24.63, 1.0, 0.2, 99, 0), b = channel(frames, 24.63, 0.5, 0.2, 99, 1),
       c = channel(frames, 24.63, 0.25, 0.2, 99, 2);
  const MemoryReader clean(rate, {{"a", a}, {"b", b}});
  c[300000] = std::numeric_limits<double>::quiet_NaN();
  const MemoryReader reader(rate, {{"a", a}, {"b", b}, {"c", c}}, {}, 999);
  const std::array<double, 1> f{24.63};
  base::Context three;
  three.threads = 3;
  const DeflectionOptions options{.block_frames = 1000, .reference = 0};
  const auto one = spectral::deflections(reader, all_frames(reader), f, options, {}).front();
  const auto many = spectral::deflections(reader, all_frames(reader), f, options, three).front();
  const auto without = spectral::deflections(clean, all_frames(clean), f, options, {}).front();
  for (std::size_t i = 0; i < 3; ++i) {
    CHECK(one->points[i].magnitude.value == many->points[i].magnitude.value);
    CHECK(one->points[i].magnitude.u == many->points[i].magnitude.u);
  }
  CHECK(*one->points[1].ratio() == *without->points[1].ratio());
  CHECK(std::abs(one->points[2].magnitude.value - 0.25) < 4.0 * *one->points[2].magnitude.u);
}

TEST_CASE("a single block gives ratios without uncertainty") {
  const MemoryReader reader(rate,
                            {{"a", channel(1000, 24.63, 1.0, 0.01, 100)}, {"b", channel(1000, 24.63, 0.5, 0.01, 101)}});
  const auto found = shape(reader, 24.63, {.reference = 0});
  REQUIRE(found);
  CHECK(found->points[1].magnitude.value == Approx(0.5).epsilon(0.01));
  CHECK_FALSE(found->points[1].magnitude.u);
  CHECK_FALSE(found->points[1].coherence);
}

TEST_CASE("sixty-four channels share one transform each and give their shape") {
  constexpr std::size_t count = 64;
  std::vector<tests::MemoryChannel> channels;
  for (std::uint64_t c = 0; c < count; ++c) {
    channels.push_back(
        {std::to_string(c), channel(10000, 24.63, std::sin(0.1 * (static_cast<double>(c) + 1.0)), 0.02, 102, c)});
  }
  const auto found = shape(MemoryReader(rate, channels), 24.63, {.reference = 15});
  REQUIRE(found);
  for (const auto& d : found->points) {
    const double truth = std::sin(0.1 * (std::stod(d.point) + 1.0)) / std::sin(1.6);
    CHECK(std::abs(*d.ratio() - truth) <= 6.0 * *d.magnitude.u);
  }
  CHECK(found->points.size() > 60);
}

TEST_CASE("a roved sensor against a fixed one gives one shape, whatever the level of each recording") {
  const std::array<Complex, 3> ratios{std::polar(0.5, 0.3), std::polar(2.0, 3.0), -0.7};
  std::vector<DeflectionShape> parts;
  for (std::uint64_t i = 0; i < 3; ++i) {
    const double f = 24.6 + 0.05 * static_cast<double>(i), level = std::pow(2.0, static_cast<double>(i));
    const MemoryReader reader(rate, {{"fixed", channel(20000, f, level, 0.05, 103, i)},
                                     {"p" + std::to_string(i), channel(20000, f, level * ratios[i], 0.05, 104, i)}});
    parts.push_back(*shape(reader, f, {.reference = 0}));
  }
  const auto whole = spectral::joined(parts);
  REQUIRE(whole);
  CHECK(whole->recordings == 3);
  CHECK(whole->sign_known);
  CHECK(whole->reference == "fixed");
  CHECK(whole->points.size() == 4);
  CHECK(whole->frequency.value == Approx(24.65).margin(0.02));
  CHECK(*whole->frequency.u > 0.02);
  for (std::size_t i = 0; i < 3; ++i) {
    const auto& d = at(*whole, "p" + std::to_string(i));
    CHECK(std::abs(*d.ratio() - ratios[i]) < 4.0 * std::numbers::sqrt2 * *d.magnitude.u);
  }
}

TEST_CASE("a point measured twice is the weighted mean, and said where the two disagree") {
  const auto part = [](double magnitude, double phase, double u) {
    DeflectionShape s;
    s.frequency = {25.0, 0.01, std::nullopt, base::Quantity::frequency};
    s.reference = "fixed";
    s.points.push_back({"fixed",
                        "1",
                        {1.0, 0.0, std::nullopt, base::Quantity::ratio},
                        base::Estimate{0.0, 0.0, std::nullopt, base::Quantity::angle},
                        std::nullopt});
    s.points.push_back({"p",
                        "2",
                        {magnitude, u, std::nullopt, base::Quantity::ratio},
                        base::Estimate{phase, u / magnitude, std::nullopt, base::Quantity::angle},
                        0.9});
    return s;
  };
  const std::vector<DeflectionShape> agree{part(1.0, 0.0, 0.1), part(1.1, 0.0, 0.2)};
  const auto a = spectral::joined(agree);
  // Weights 100 and 25: mean 1.02, 1 / sqrt 125.
  CHECK(at(*a, "p").magnitude.value == Approx(1.02).epsilon(1e-12));
  CHECK(*at(*a, "p").magnitude.u == Approx(1.0 / std::sqrt(125.0)).epsilon(1e-12));
  CHECK(a->points.size() == 2);
  CHECK(a->disagreeing.empty());
  const std::vector<DeflectionShape> opposed{part(1.0, 0.0, 0.1), part(1.0, std::numbers::pi, 0.1)};
  const auto b = spectral::joined(opposed);
  CHECK(b->disagreeing == std::vector<std::string>{"p"});
  CHECK(*at(*b, "p").magnitude.u > 0.5);
}

TEST_CASE("recordings at another speed or against another reference are not joined") {
  DeflectionShape a, b;
  a.reference = b.reference = "fixed";
  a.frequency.value = 25.0;
  b.frequency.value = 25.3;
  CHECK(spectral::joined(std::vector{a, b}).refusal().code == "frequencies-differ");
  CHECK(spectral::joined(std::vector{a, b}, 0.02));
  b.frequency.value = 25.0;
  b.reference = "other";
  CHECK(spectral::joined(std::vector{a, b}).refusal().code == "references-differ");
  b.reference = "fixed";
  b.sign_known = false;
  CHECK(spectral::joined(std::vector{a, b}).refusal().code == "references-differ");
  CHECK_THROWS_AS(spectral::joined({}), base::Error);
}

TEST_CASE(
    "one roved sensor without a reference gives magnitudes, says that it has no signs and that levels may differ") {
  const auto level = [](const char* point, double rms, double hz) {
    return spectral::RovedLevel{point,
                                {rms, 0.01 * rms, std::nullopt, base::Quantity::velocity},
                                {hz, 0.01, std::nullopt, base::Quantity::frequency}};
  };
  const std::vector levels{level("a", 2.0, 24.6), level("b", 4.0, 24.7), level("c", 1.0, 24.65)};
  const auto s = spectral::magnitudes_only(levels);
  REQUIRE(s);
  CHECK_FALSE(s->sign_known);
  CHECK_FALSE(s->levels_agree);
  CHECK(s->reference == "b");
  CHECK(s->recordings == 3);
  CHECK(at(*s, "a").magnitude.value == Approx(0.5));
  CHECK(*at(*s, "a").magnitude.u == Approx(0.5 * 0.01 * std::numbers::sqrt2));
  CHECK_FALSE(at(*s, "a").phase);
  CHECK_FALSE(at(*s, "a").ratio());
  CHECK(spectral::magnitudes_only(std::vector{level("a", 2.0, 24.6), level("b", 4.0, 26.7)}).refusal().code ==
        "frequencies-differ");
  CHECK_THROWS_AS(spectral::magnitudes_only(std::vector{level("a", 2.0, 24.6)}), base::Error);
}

TEST_CASE("a faulty request for deflections is refused before any sample is read") {
  const std::vector<double> x(10000, 0.0);
  const MemoryReader reader(rate, {{"a", x}, {"b", x}, {"f", x, base::Quantity::force, recording::Role::force}});
  const MemoryReader alone(rate, {{"a", x}});
  const auto with = [&](std::vector<double> f, DeflectionOptions options, const MemoryReader& of) {
    options.block_frames = 1000;
    return spectral::DeflectionConsumer(of.recording(), all_frames(of), std::move(f), options);
  };
  CHECK_NOTHROW(with({24.63}, {}, reader));
  CHECK_THROWS_AS(with({}, {}, reader), base::Error);
  CHECK_THROWS_AS(with({900.0}, {}, reader), base::Error);
  CHECK_THROWS_AS(with({1.0}, {}, reader), base::Error);
  CHECK_THROWS_AS(with({std::numeric_limits<double>::quiet_NaN()}, {}, reader), base::Error);
  CHECK_THROWS_AS(with({24.63}, {.reference = 2}, reader), base::Error);
  CHECK_THROWS_AS(with({24.63}, {.reference = 3}, reader), base::Error);
  CHECK_THROWS_AS(with({24.63}, {}, alone), base::Error);
  CHECK_THROWS_AS(with({24.63}, {.wander = std::numeric_limits<double>::quiet_NaN()}, reader), base::Error);
}

TEST_CASE("a shape over its greatest point keeps every ratio, and its uncertainties join") {
  spectral::DeflectionShape shape;
  shape.reference = "a";
  const auto point = [](const char* name, double magnitude, double u, double phase, std::optional<double> coherence) {
    spectral::Deflection d;
    d.point = name;
    d.magnitude = {magnitude, u, {}, base::Quantity::ratio};
    d.phase = base::Estimate{phase, magnitude > 0.0 ? u / magnitude : 0.0, {}, base::Quantity::angle};
    d.coherence = coherence;
    return d;
  };
  shape.points = {point("a", 1.0, 0.0, 0.0, {}), point("b", 4.0, 0.04, 2.0, 0.9), point("c", 2.0, 0.04, -3.0, 0.8)};
  const auto over = spectral::over_the_greatest(shape);
  CHECK(over.reference == "b");
  for (std::size_t i = 0; i < 3; ++i) {
    CHECK(std::abs(*over.points[i].ratio() - *shape.points[i].ratio() / *shape.points[1].ratio()) < 1e-12);
  }
  CHECK(*over.points[0].magnitude.u == Approx(0.25 * 0.01));  // 0 and 1 %
  CHECK(*over.points[2].magnitude.u == Approx(0.5 * std::hypot(0.02, 0.01)));
  CHECK(*over.points[2].coherence == Approx(0.72));
  CHECK_FALSE(over.points[1].coherence);
}
