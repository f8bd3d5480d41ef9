#include <algorithm>
#include <cmath>
#include <numbers>

#include "stillmass/base/error.hpp"
#include "stillmass/numeric/random.hpp"
#include "stillmass/rotation/order_track.hpp"

#include "signals.hpp"
#include "support/catch.hpp"

using namespace stillmass;
using tests::all_frames;
using tests::MemoryReader;
using tests::sampled;

namespace {

constexpr double pi = std::numbers::pi;
constexpr double rate = 8192.0;
constexpr double duration = 20.0;
constexpr double f0 = 10.0;
constexpr double s = 2.0;

double turns_at(double t) { return f0 * t + 0.5 * s * t * t; }

rotation::SpeedCurve run_up() {
  rotation::Pulses pulses;
  for (int i = 0; turns_at(duration) > i; ++i) {
    pulses.turns.push_back(i);
    pulses.time_s.push_back((-f0 + std::sqrt(f0 * f0 + 2.0 * s * i)) / s);
  }
  return rotation::SpeedCurve(pulses);
}

MemoryReader vibration(std::vector<double> samples) { return {rate, {{"a", std::move(samples)}}}; }

std::vector<rotation::OrderTrack> tracks(const recording::Reader& reader, rotation::OrderOptions options,
                                         unsigned threads = 1) {
  base::Context context;
  context.threads = threads;
  return rotation::order_tracks(reader, all_frames(reader), run_up(), options, context);
}

double distance_deg(double a, double b) { return std::abs(std::remainder(a - b, 360.0)); }

}  // namespace

TEST_CASE("amplitude and phase of the orders of a run-up are those put in, each beside the others") {
  // 1x: 2 m/s2 peak, lag 40 deg; 2x: 0.5, lag 250; 5.4x: 1.0, lag 10; and a steady tone of 300 Hz across all.
  const auto reader = vibration(sampled(rate, duration, [](double t) {
    const double turn = 2.0 * pi * turns_at(t);
    const double deg = pi / 180.0;
    return 2.0 * std::cos(turn - 40.0 * deg) + 0.5 * std::cos(2.0 * turn - 250.0 * deg) +
           1.0 * std::cos(5.4 * turn - 10.0 * deg) + 0.05 * std::sin(2.0 * pi * 300.0 * t);
  }));
  rotation::OrderOptions options;
  options.orders = {1.0, 2.0, 5.4};
  options.turns_per_block = 10;
  const auto found = tracks(reader, options);
  REQUIRE(found.size() == 3);
  const double peak[] = {2.0, 0.5, 1.0};
  const double lag[] = {40.0, 250.0, 10.0};
  for (std::size_t o = 0; o < 3; ++o) {
    const rotation::OrderTrack& track = found[o];
    CHECK(track.order == options.orders[o]);
    CHECK(track.value.size() > 150);
    for (std::size_t i = 0; i < track.value.size(); ++i) {
      CHECK(track.amplitude_rms(i) == Approx(peak[o] / std::numbers::sqrt2).epsilon(0.01));
      CHECK(distance_deg(track.phase_lag_deg(i), lag[o]) < 2.0);
      CHECK(track.speed_hz[i] == Approx(f0 + s * track.time_s[i]).epsilon(3e-3));
      REQUIRE(track.sweep_hz_per_s[i]);
      CHECK(*track.sweep_hz_per_s[i] == Approx(s).epsilon(0.02));
    }
  }
}

TEST_CASE("the track of a resonance swept through slowly is its steady response, in velocity too") {
  // Unbalance on one mode at 24 Hz, 3 %: displacement, quasi-steady because the sweep is slow for it (eta = 0.03).
  const double fn = 24.0;
  const double zeta = 0.03;
  const double slow = 0.06;
  const double start = 21.0;
  const auto angle = [&](double t) { return start * t + 0.5 * slow * t * t; };
  const auto response = [&](double f) {  // acceleration over e: (2 pi f)^2 r^2 / (1 - r^2 + 2 i zeta r) * -1
    const double r = f / fn;
    const double w = 2.0 * pi * f;
    return -w * w * 1e-5 * r * r / std::complex<double>(1.0 - r * r, 2.0 * zeta * r);
  };
  const double length = 100.0;
  const auto signal = [&](double t) {
    return (response(start + slow * t) * std::polar(1.0, 2.0 * pi * angle(t))).real();
  };
  const MemoryReader reader(1024.0, {{"a", sampled(1024.0, length, signal)}});
  rotation::Pulses pulses;
  for (int i = 0; angle(length) > i; ++i) {
    pulses.turns.push_back(i);
    pulses.time_s.push_back((-start + std::sqrt(start * start + 2.0 * slow * i)) / slow);
  }
  const rotation::SpeedCurve curve(pulses);
  rotation::OrderOptions options;
  options.orders = {1.0};
  const auto track = rotation::order_tracks(reader, all_frames(reader), curve, options, {}).at(0);
  const auto velocity = rotation::in_quantity(track, base::Quantity::velocity);
  CHECK(velocity.quantity == base::Quantity::velocity);
  for (std::size_t i = 0; i < track.value.size(); ++i) {
    const double f = track.frequency(i);
    const auto truth = response(f) / std::numbers::sqrt2;
    CHECK(track.amplitude_rms(i) == Approx(std::abs(truth)).epsilon(0.01));
    CHECK(distance_deg(track.phase_lag_deg(i), -std::arg(truth) * 180.0 / pi) < 2.0);
    CHECK(velocity.amplitude_rms(i) == Approx(std::abs(truth) / (2.0 * pi * f)).epsilon(0.01));
    CHECK(distance_deg(velocity.phase_lag_deg(i), track.phase_lag_deg(i) + 90.0) < 1e-6);
  }
}

TEST_CASE("the noise beside an order is the error that noise makes in its amplitude") {
  const numeric::Random random(21);
  auto samples = sampled(rate, duration, [](double t) { return std::cos(2.0 * pi * turns_at(t)); });
  for (std::size_t i = 0; i < samples.size(); ++i) samples[i] += 0.5 * random.normal(i, 0);
  rotation::OrderOptions options;
  options.orders = {1.0};
  options.overlap = 0.0;
  const auto reader = vibration(std::move(samples));
  const auto track = tracks(reader, options).at(0);
  double error = 0.0;
  double stated = 0.0;
  for (std::size_t i = 0; i < track.value.size(); ++i) {
    error += std::norm(track.value[i] - 1.0 / std::numbers::sqrt2);
    stated += track.noise[i] * track.noise[i];
  }
  CHECK(track.value.size() > 60);
  CHECK(std::sqrt(error / stated) == Approx(1.0).epsilon(0.25));  // 70 blocks: 1/sqrt(70) = 12 % of one standard error
}

TEST_CASE("blocks with invalid samples and frequencies near the half rate are left out") {
  const auto signal = sampled(rate, duration, [](double t) { return std::cos(2.0 * pi * turns_at(t)); });
  rotation::OrderOptions options;
  options.orders = {1.0, 80.0};
  const auto whole = vibration(signal);
  const auto gapped = vibration(tests::without(signal, {80000, 80001}));
  const auto all = tracks(whole, options);
  const auto less = tracks(gapped, options);
  CHECK(less[0].value.size() < all[0].value.size());
  CHECK(less[0].value.size() + 6 > all[0].value.size());
  for (const double speed : all[1].speed_hz) CHECK(80.0 * speed < 0.4 * rate);
  CHECK(all[1].value.size() < all[0].value.size());
}

TEST_CASE("one and three threads give the same bits") {
  const auto reader = vibration(sampled(rate, duration, [](double t) {
    return std::cos(2.0 * pi * turns_at(t)) + 0.1 * std::sin(2.0 * pi * 777.0 * t);
  }));
  const auto one = tracks(reader, {}, 1);
  const auto three = tracks(reader, {}, 3);
  REQUIRE(one.size() == three.size());
  for (std::size_t i = 0; i < one.size(); ++i) {
    CHECK(one[i].value == three[i].value);
    CHECK(one[i].speed_hz == three[i].speed_hz);
  }
}

TEST_CASE("orders, overlap and quantity out of range are the caller's error") {
  const auto reader = vibration(sampled(rate, duration, [](double) { return 0.0; }));
  rotation::OrderOptions options;
  options.orders = {0.0};
  CHECK_THROWS_AS(tracks(reader, options), base::Error);
  options.orders = {1.0};
  options.overlap = 0.97;
  CHECK_THROWS_AS(tracks(reader, options), base::Error);
  CHECK_THROWS_AS(rotation::in_quantity(rotation::OrderTrack{}, base::Quantity::force), base::Error);
}
