// What spectra and other recordings become as facts for the diagnosis: only what stands out of its noise, all in one
// quantity.
#include <cmath>
#include <complex>
#include <numbers>

#include "stillmass/step/diagnosis.hpp"

#include "step/spectrum_signals.hpp"
#include "support/catch.hpp"

using namespace stillmass;

namespace {

step::ChannelSpectrum channel(const std::string& name, base::Quantity quantity) {
  step::ChannelSpectrum out;
  out.channel.name = name;
  out.channel.point = name;
  out.channel.unit = base::si_unit(quantity);
  out.measured.quantity = quantity;
  out.measured.density = {0.0, 1.0};
  out.measured.blocks = 1;
  return out;
}

rotation::SynchronousAverage average(base::Quantity quantity, std::complex<double> at_1x, double phase_u_deg) {
  rotation::SynchronousAverage out;
  out.quantity = quantity;
  out.blocks = 10;
  out.speed_hz = 25.0;
  rotation::SynchronousLine line;
  line.order = 1.0;
  line.value = at_1x;
  line.phase_u_deg = phase_u_deg;
  out.lines = {line};
  return out;
}

machine::TestOutcome power_cut_of(const std::vector<rotation::PowerCutVerdict>& verdicts) {
  step::SpectrumResult spectra;
  spectra.channels = {channel("a", base::Quantity::acceleration)};
  step::OtherTests others;
  for (const rotation::PowerCutVerdict verdict : verdicts) {
    rotation::PowerCut cut;
    cut.verdict = verdict;
    others.power_cuts.push_back({"a", cut});
  }
  return step::facts_of(spectra, {}, {}, others).channels.front().power_cut;
}

}  // namespace

TEST_CASE("phases against the tacho are of one quantity, whatever the sensors measure") {
  // The same motion at 25 Hz by an accelerometer and by a velocity sensor.
  const std::complex<double> velocity = std::polar(1e-3, 0.4);
  const std::complex<double> acceleration = velocity * std::complex<double>(0.0, 2.0 * std::numbers::pi * 25.0);
  step::SpectrumResult spectra;
  spectra.channels = {channel("a", base::Quantity::acceleration), channel("b", base::Quantity::velocity)};
  spectra.channels[0].synchronous = average(base::Quantity::acceleration, acceleration, 1.0);
  spectra.channels[1].synchronous = average(base::Quantity::velocity, velocity, 1.0);
  const machine::Facts facts = step::facts_of(spectra, {}, {});
  REQUIRE(facts.phases.size() == 2);
  CHECK(std::abs(facts.phases[0].ratio / facts.phases[1].ratio - 1.0) < 1e-9);
}

TEST_CASE("a synchronous line that does not stand out of its scatter gives no phase") {
  step::SpectrumResult spectra;
  spectra.channels = {channel("a", base::Quantity::acceleration)};
  spectra.channels[0].synchronous = average(base::Quantity::acceleration, {1e-3, 0.0}, 180.0);
  CHECK(step::facts_of(spectra, {}, {}).phases.empty());
}

TEST_CASE("a power cut that cannot tell takes nothing back of one that did") {
  using rotation::PowerCutVerdict;
  CHECK(power_cut_of({PowerCutVerdict::electrical, PowerCutVerdict::cannot_tell}) == machine::TestOutcome::confirmed);
  CHECK(power_cut_of({PowerCutVerdict::cannot_tell, PowerCutVerdict::mechanical}) == machine::TestOutcome::refuted);
  CHECK(power_cut_of({PowerCutVerdict::cannot_tell}) == machine::TestOutcome::not_made);
}

TEST_CASE("1x below the noise at the slow end of a run tells neither slow roll nor a turn of phase") {
  rotation::OrderTrack track;
  track.channel = "a";
  track.quantity = base::Quantity::velocity;
  for (int i = 0; i < 8; ++i) {
    track.time_s.push_back(i);
    track.speed_hz.push_back(4.0 + 3.0 * i);
    track.sweep_hz_per_s.emplace_back();
    track.value.emplace_back(std::polar(1e-3 * (1 + i), i == 0 ? 3.0 : 0.2));
    track.noise.push_back(1e-5);
  }
  step::RunupResult run;
  run.tracks = {track};
  step::SpectrumResult spectra;
  spectra.channels = {channel("a", base::Quantity::acceleration)};
  step::OtherTests others;
  others.run = &run;
  const auto seen = step::facts_of(spectra, {}, {}, others).channels.front().run;
  REQUIRE(seen);
  CHECK(seen->slow_roll);
  REQUIRE(seen->phase_change);
  CHECK(*seen->phase_change == Approx(2.8).margin(1e-6));
  run.tracks.front().noise.front() = 1.0;
  const auto lost = step::facts_of(spectra, {}, {}, others).channels.front().run;
  REQUIRE(lost);
  CHECK_FALSE(lost->slow_roll);
  CHECK_FALSE(lost->phase_change);
}

TEST_CASE("noise is what stands between the tones, and no tone of a speed that sways") {
  const numeric::Random random(5);
  std::vector<double> x(static_cast<std::size_t>(60.0 * tests::rate));
  double phase = 0.0;
  double sway = 0.0;  // standard deviation 1, correlated over 2 s
  for (std::size_t i = 0; i < x.size(); ++i) {
    sway += -sway / (2.0 * tests::rate) + 0.0156 * random.normal(1, static_cast<std::uint32_t>(i));
    phase += tests::two_pi * 24.6 * (1.0 + 0.001 * sway) / tests::rate;
    for (int k = 1; k <= 12; ++k) x[i] += std::cos(k * phase);
    x[i] += 3.0 * std::cos(50.0 * phase);
    x[i] += 0.5 * random.normal(2, static_cast<std::uint32_t>(i));
  }
  step::SpectrumRequest request;
  request.site = tests::two_pole_fan();
  request.site.machine->motor_poles = 4;
  request.site.machine->speed_hz = base::Interval{24.6, 24.6};
  const auto spectra = tests::analysed({{"fan-h", x}}, request);
  const machine::ChannelFacts facts = step::facts_of(spectra, request.site, {}).channels.front();
  // White acceleration of 0.5 m/s2 r.m.s. over 2048 Hz: over 1000 to 1600 Hz, and integrated from 10 to 1000 Hz.
  const double density = 0.25 / 2048.0;
  const double velocity = std::sqrt(density * (1.0 / 10.0 - 1.0 / 1000.0)) / tests::two_pi;
  REQUIRE(facts.noise_velocity);
  CHECK(*facts.noise_velocity == Approx(velocity).epsilon(0.15));
  REQUIRE(facts.noise_acceleration);
  // The mesh at 1230 Hz (2.1 m/s2 r.m.s.) wanders over as many lines as the floor is taken from, and lifts it a little.
  CHECK(*facts.noise_acceleration > 0.9 * std::sqrt(density * 600.0));
  CHECK(*facts.noise_acceleration < 1.6 * std::sqrt(density * 600.0));
}
