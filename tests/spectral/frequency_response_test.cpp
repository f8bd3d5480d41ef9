#include "stillmass/spectral/frequency_response.hpp"

#include <cmath>
#include <complex>
#include <numbers>

#include "stillmass/base/error.hpp"
#include "stillmass/spectral/quantity.hpp"

#include "spectral/signals.hpp"
#include "support/catch.hpp"
#include "support/memory_reader.hpp"

using namespace stillmass;
using spectral::HitBlock;
using spectral::HitWindows;
using tests::MemoryReader;
using Complex = std::complex<double>;

namespace {

constexpr double rate = 1024.0;

/// y[t] = x[t] - 0.5 x[t - 1]: H = 1 - 0.5 exp(-i omega / rate).
std::vector<double> filtered(const std::vector<double>& x) {
  std::vector<double> y(x);
  for (std::size_t t = 1; t < x.size(); ++t) y[t] -= 0.5 * x[t - 1];
  return y;
}
Complex filter_response(double f) { return 1.0 - 0.5 * std::polar(1.0, -2.0 * std::numbers::pi * f / rate); }

/// One blow of a half sine on a one-degree-of-freedom system, as a discrete recursion whose response is known exactly:
/// y[t] = 2 r cos(theta) y[t-1] - r^2 y[t-2] + x[t], poles r exp(+-i theta), r = exp(-decay / rate).
struct Blow {
  std::vector<double> force, response;
};
constexpr double natural_hz = 40.0;
Complex oscillator(double f, double decay) {
  const double r = std::exp(-decay / rate);
  const double theta = 2.0 * std::numbers::pi * natural_hz / rate;
  const Complex z = std::polar(1.0, -2.0 * std::numbers::pi * f / rate);
  return 1.0 / (1.0 - 2.0 * r * std::cos(theta) * z + r * r * z * z);
}
Blow blow(std::size_t n, double decay, double peak, std::size_t at) {
  const double r = std::exp(-decay / rate);
  const double theta = 2.0 * std::numbers::pi * natural_hz / rate;
  Blow b{std::vector<double>(n, 0.0), std::vector<double>(n, 0.0)};
  for (std::size_t i = 0; i < 8; ++i)
    b.force[at + i] = peak * std::sin(std::numbers::pi * (static_cast<double>(i) + 0.5) / 8.0);
  for (std::size_t t = 2; t < n; ++t) {
    b.response[t] = 2.0 * r * std::cos(theta) * b.response[t - 1] - r * r * b.response[t - 2] + b.force[t];
  }
  return b;
}

}  // namespace

TEST_CASE("a filter's response is found with its sign of phase") {
  const auto x = tests::noise(1024 * 200, 31);
  const MemoryReader reader(rate, {{"in", x, base::Quantity::force}, {"out", filtered(x)}});
  const auto h =
      spectral::frequency_responses(reader, all_frames(reader), {0, {1}}, {.block_frames = 1024}, {}).front();
  CHECK(h.input_quantity == base::Quantity::force);
  for (std::size_t k = 10; k < 500; k += 7) {
    // What a delay of one sample leaks between blocks of 1024: below 0.1 % of |x|.
    CHECK(std::abs(h.h1[k] - filter_response(h.frequency(k))) < 2e-3);
    CHECK(std::abs(h.h2[k] - filter_response(h.frequency(k))) < 2e-3);
    CHECK(h.coherence[k] > 0.9999);
  }
  CHECK(std::arg(h.h1[100]) > 0.0);  // the filter leads
}

TEST_CASE("noise in the output lowers H2's trust, noise in the input H1's") {
  const auto x = tests::noise(1024 * 400, 32);
  auto noisy_in = x, noisy_out = filtered(x);
  const auto n = tests::noise(x.size(), 32, 1);
  for (std::size_t i = 0; i < x.size(); ++i) {
    noisy_in[i] += 0.5 * n[i];
    noisy_out[i] += 0.5 * n[i];
  }
  const MemoryReader reader(rate, {{"in", x}, {"out", noisy_out}, {"noisy in", noisy_in}, {"clean out", filtered(x)}});
  const auto out = spectral::frequency_responses(reader, all_frames(reader), {0, {1}}, {.block_frames = 512}, {})[0];
  const auto in = spectral::frequency_responses(reader, all_frames(reader), {2, {3}}, {.block_frames = 512}, {})[0];
  double h1_out = 0.0, h2_out = 0.0, h1_in = 0.0, h2_in = 0.0;
  for (std::size_t k = 20; k < 240; ++k) {
    const double truth = std::abs(filter_response(out.frequency(k)));
    h1_out += std::abs(out.h1[k]) / truth / 220.0;
    h2_out += std::abs(out.h2[k]) / truth / 220.0;
    h1_in += std::abs(in.h1[k]) / truth / 220.0;
    h2_in += std::abs(in.h2[k]) / truth / 220.0;
  }
  CHECK(h1_out == Approx(1.0).epsilon(0.005));
  CHECK(h2_out > 1.1);
  CHECK(h1_in == Approx(1.0 / 1.25).epsilon(0.005));  // Gxx is 1 + 0.25 too large
  CHECK(h2_in == Approx(1.0).epsilon(0.005));
}

TEST_CASE("blows give the oscillator's response exactly when it rings out within the block") {
  const double decay = 12.0;
  std::vector<Blow> blows{blow(4096, decay, 100.0, 40), blow(4096, decay, 70.0, 40)};
  const std::vector<HitBlock> hits{{blows[0].force, blows[0].response}, {blows[1].force, blows[1].response}};
  const auto h = spectral::hit_response(hits, rate, base::Quantity::acceleration, HitWindows{32, {}, 0.0, {}});
  CHECK(h.blocks == 2);
  CHECK(h.averages == Approx(2.0));
  for (std::size_t k = 0; k < 400; ++k) {
    CHECK(std::abs(h.h1[k] - oscillator(h.frequency(k), decay)) < 1e-9 * std::abs(oscillator(natural_hz, decay)));
    CHECK(h.coherence[k] == Approx(1.0).epsilon(1e-9));
  }
}

TEST_CASE("the exponential window moves the poles by 1/tau and does nothing else") {
  // decay 2/s does not ring out in 1 s; with tau = 0.08 s the block sees an oscillator of decay 2 + 1/tau.
  const double decay = 2.0, tau = 0.08;
  const auto b = blow(1024, decay, 100.0, 20);
  const std::vector<HitBlock> hits{{b.force, b.response}};
  const auto h = spectral::hit_response(hits, rate, base::Quantity::velocity, HitWindows{16, {}, 0.0, tau});
  CHECK(h.decay_s == tau);
  CHECK(h.coherence.empty());
  for (std::size_t k = 0; k < 200; ++k) {
    // What is left at the end of the block: exp(-14.5) = 5e-7 of the start.
    CHECK(std::abs(h.h1[k] - oscillator(h.frequency(k), decay + 1.0 / tau)) <
          2e-6 * std::abs(oscillator(natural_hz, decay + 1.0 / tau)));
  }
}

TEST_CASE("a sensor's offset and the noise after the blow do not reach the response") {
  const double decay = 12.0;
  const auto clean = blow(4096, decay, 100.0, 40);
  auto b = clean;
  const auto n = tests::noise(4096, 35);
  for (std::size_t i = 0; i < 4096; ++i) {
    b.force[i] += 7.0 + (i > 60 ? n[i] : 0.0);
    b.response[i] -= 3.0;
  }
  const std::vector<HitBlock> hits{{b.force, b.response}};
  const HitWindows windows{
      .pre_trigger = 32, .force_s = 55.0 / rate, .force_fall_s = 5.0 / rate, .decay_s = std::nullopt};
  const auto h = spectral::hit_response(hits, rate, base::Quantity::acceleration, windows);
  for (std::size_t k = 0; k < 400; ++k) {
    CHECK(std::abs(h.h1[k] - oscillator(h.frequency(k), decay)) < 1e-8 * std::abs(oscillator(natural_hz, decay)));
  }
}

TEST_CASE("streamed blows are the blows in memory") {
  std::vector<double> force(20000, 0.0), response(20000, 0.0);
  const auto b = blow(4096, 12.0, 100.0, 40);
  const std::vector<std::int64_t> starts{500, 7000, 13000, 17000};
  for (const std::int64_t start : {500, 7000, 13000}) {
    for (std::size_t i = 0; i < 4096; ++i) {
      force[static_cast<std::size_t>(start) + i] += b.force[i];
      response[static_cast<std::size_t>(start) + i] += b.response[i];
    }
  }
  const MemoryReader reader(rate, {{"hammer", force, base::Quantity::force, recording::Role::force}, {"a", response}},
                            {}, 999);
  const HitWindows windows{.pre_trigger = 30, .force_s = 0.1, .force_fall_s = 0.01, .decay_s = 0.5};
  const auto streamed = spectral::hit_responses(reader, starts, 4096, {0, {1}}, windows, {});
  const std::vector<HitBlock> hits(3, HitBlock{b.force, b.response});
  const auto held = spectral::hit_response(hits, rate, base::Quantity::acceleration, windows);
  REQUIRE(streamed.size() == 1);
  CHECK(streamed[0].blocks == 3);  // the fourth leaves the recording
  CHECK(streamed[0].input == "hammer");
  for (std::size_t k = 0; k < held.h1.size(); ++k)
    CHECK(std::abs(streamed[0].h1[k] - held.h1[k]) < 1e-12 * std::abs(oscillator(natural_hz, 12.0)));
}

TEST_CASE("faulty hits and windows are refused") {
  const std::vector<double> a(16, 0.0), b(15, 0.0);
  const std::vector<HitBlock> unequal{{a, b}}, none;
  CHECK_THROWS_AS(spectral::hit_response(unequal, rate, base::Quantity::acceleration, {}), base::Error);
  CHECK_THROWS_AS(spectral::hit_response(none, rate, base::Quantity::acceleration, {}), base::Error);
  const std::vector<HitBlock> fine{{a, a}};
  const HitWindows no_decay{.pre_trigger = 0, .force_s = std::nullopt, .force_fall_s = 0.0, .decay_s = 0.0};
  CHECK_THROWS_AS(spectral::hit_response(fine, rate, base::Quantity::acceleration, no_decay), base::Error);
  CHECK(spectral::decay_for(2.0) == Approx(0.43429).epsilon(1e-4));
}

TEST_CASE("accelerance, mobility and receptance are one response") {
  const auto b = blow(4096, 12.0, 100.0, 40);
  const std::vector<HitBlock> hits{{b.force, b.response}};
  const auto accelerance = spectral::hit_response(hits, rate, base::Quantity::acceleration, {});
  const auto receptance = spectral::as_quantity(accelerance, base::Quantity::displacement);
  const auto mobility = spectral::as_quantity(receptance, base::Quantity::velocity);
  const std::size_t k = 160;
  const Complex s(0.0, 2.0 * std::numbers::pi * accelerance.frequency(k));
  CHECK(std::abs(receptance.h1[k] - accelerance.h1[k] / (s * s)) < 1e-14 * std::abs(accelerance.h1[k]));
  CHECK(std::abs(mobility.h1[k] - accelerance.h1[k] / s) < 1e-14 * std::abs(accelerance.h1[k]));
  CHECK(receptance.h1[0] == 0.0);
  CHECK(mobility.output_quantity == base::Quantity::velocity);
}
