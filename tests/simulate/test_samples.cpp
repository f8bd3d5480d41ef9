// Whole recordings: are the samples those of the continuous motion?
#include <cmath>
#include <complex>
#include <numbers>

#include "stillmass/base/error.hpp"
#include "stillmass/simulate/simulate.hpp"
#include "stillmass/simulate/truth.hpp"

#include "oracle/one_degree.hpp"
#include "simulate/skids.hpp"
#include "support/catch.hpp"
#include "support/demo.hpp"
#include "support/temporary_folder.hpp"

using namespace stillmass;
using Complex = std::complex<double>;

namespace {

constexpr double two_pi = 2.0 * std::numbers::pi;

const std::string unbalance = R"(
[[force]]
kind = "unbalance"
body = "block"
at_m = [0, 0, 0]
unbalance_g_mm = 5000
phase_deg = 40
)";

const std::string absorber = R"(
[absorber]
point = "centre"
mass_kg = 5
frequency_hz = 18.05
damping_ratio = 0.01
)";

// Peak phasor of e^{i 2 pi f t} in the samples, over a whole number of turns.
Complex phasor(const std::vector<double>& samples, double f, double rate_hz) {
  Complex sum = 0.0;
  for (std::size_t n = 0; n < samples.size(); ++n)
    sum += samples[n] * std::polar(1.0, -two_pi * f * static_cast<double>(n) / rate_hz);
  return 2.0 * sum / static_cast<double>(samples.size());
}

double rms(const std::vector<double>& samples) {
  double sum = 0.0;
  for (const double x : samples) sum += x * x;
  return std::sqrt(sum / static_cast<double>(samples.size()));
}

// A force channel, and a single blow of 500 N and 9 ms at 1.0003 s.
const std::string one_blow = R"([[recording.channel]]
role = "force"
sensor = "force"
full_scale_v = 1
[hammer]
point = "centre"
peak_n = 500
tip_ms = 9
first_s = 1.0003
interval_s = 10
blows = 1
)";

std::vector<double> centre_of(const std::string& text) {
  return simulate::samples_of(tests::parsed(tests::one_body(text)), 0).channels[0];
}

}  // namespace

TEST_CASE("a steady recording holds the 1x amplitude and phase of the frequency-domain solution") {
  for (const bool fitted : {false, true}) {
    const auto text = unbalance + absorber + tests::recording("steady", 1000, 10, fitted ? "fitted = true\n" : "");
    const auto truth = simulate::truth_of(tests::parsed(tests::one_body(text)));
    const auto& line = (fitted ? *truth.after : truth.before).lines[0];
    const Complex expected = Complex{0.0, two_pi * 18.0} * line.velocity[0];
    const Complex seen = phasor(centre_of(text), 18.0, 1000.0);
    // Force interpolation 1e-6, filter ripple 7e-5, e^-12 of the start.
    CHECK(std::abs(seen - expected) < 2e-4 * std::abs(expected));
    CHECK((fitted ? *truth.after : truth.before).running_rms[0] ==
          Approx(std::abs(expected) / (two_pi * 18.0) / std::numbers::sqrt2).epsilon(1e-12));
  }
}

TEST_CASE("the absorber of the test skid takes most of the motion and its travel is in the truth") {
  const auto truth =
      simulate::truth_of(tests::parsed(tests::one_body(unbalance + absorber + tests::recording("steady", 1000, 1))));
  REQUIRE(truth.after);
  CHECK(truth.after->running_rms[0] < 0.2 * truth.before.running_rms[0]);
  // A tuned absorber carries the whole force: travel about F / (m w^2) = U / m.
  CHECK(*truth.travel_peak_m == Approx(5000e-6 / 5.0).epsilon(0.1));
}

TEST_CASE("beside the forcing lines a steady recording is silent to -80 dB: no alias, no image") {
  const auto text = unbalance + R"(
[[force]]
kind = "order"
body = "block"
at_m = [0, 0, 0]
multiple = 6
amplitude_n = [0, 50, 0]
)" + tests::recording("steady", 1000, 10);
  auto samples = centre_of(text);
  const double whole = rms(samples);
  for (const double f : {18.0, 108.0}) {
    const Complex line = phasor(samples, f, 1000.0);
    for (std::size_t n = 0; n < samples.size(); ++n) {
      samples[n] -= std::real(line * std::polar(1.0, two_pi * f * static_cast<double>(n) / 1000.0));
    }
  }
  CHECK(rms(samples) < 1e-4 * whole);
}

TEST_CASE("motion above half the recorder's rate does not fold into the recording") {
  // Order 30 at 18 Hz: 540 Hz. A recorder at 1000 Hz must not show it at 460 Hz; one at 4000 Hz shows it in full.
  const std::string force = R"(
[[force]]
kind = "order"
body = "block"
at_m = [0, 0, 0]
multiple = 30
amplitude_n = [0, 100, 0]
)";
  const auto seen = rms(centre_of(force + tests::recording("steady", 4000, 2)));
  CHECK(seen == Approx(1.0 / std::numbers::sqrt2).epsilon(0.01));  // above its mode the body is a mass: 100 N / 100 kg
  CHECK(rms(centre_of(force + tests::recording("steady", 1000, 2))) < 1e-4 * seen);
}

TEST_CASE("on the calibrator a sensor feels 10 m/s2 r.m.s. at 1000 rad/s, on a hung mass force over mass") {
  CHECK(rms(centre_of(tests::recording("calibrator", 2048, 6))) == Approx(10.0).epsilon(1e-3));
  const auto text = tests::recording("hung-mass", 2048, 6, "hung_mass_kg = 12.5\n") + one_blow;
  const auto samples = simulate::samples_of(tests::parsed(tests::one_body(text)), 0);
  for (std::size_t i = 0; i < samples.channels[0].size(); ++i) {
    CHECK(samples.channels[0][i] == Approx(samples.channels[1][i] / 12.5).margin(1e-3));
  }
}

TEST_CASE("a blow's response is the closed form of the half-sine blow on one degree of freedom") {
  const auto text = tests::recording("bump", 2048, 6) + one_blow;
  const auto samples = simulate::samples_of(tests::parsed(tests::one_body(text)), 0);
  const oracle::OneDegree mode{20.0, 0.02, 100.0};
  const oracle::HalfSine blow{1.0003, 500.0, 0.009};
  double worst = 0.0;
  double worst_force = 0.0;
  double largest = 0.0;
  for (std::size_t n = 0; n < samples.channels[0].size(); ++n) {
    const double t = static_cast<double>(n) / 2048.0;
    const double expected = blow.acceleration(mode, t);
    largest = std::max(largest, std::abs(expected));
    // The recorder's filter, 21 ms to either side, rounds the corners of the blow; away from them nothing differs.
    if (t < 0.97 || t > 1.04) {
      worst = std::max(worst, std::abs(samples.channels[0][n] - expected));
      worst_force = std::max(worst_force, std::abs(samples.channels[1][n] - blow.force(t)));
    }
  }
  CHECK(worst < 2e-4 * largest);
  CHECK(worst_force < 2e-4 * 500.0);
  double impulse = 0.0;
  for (const double force : samples.channels[1]) impulse += force / 2048.0;
  CHECK(impulse == Approx(2.0 / std::numbers::pi * 500.0 * 0.009).epsilon(1e-4));
}

TEST_CASE("broad-band motion has the r.m.s. value of its truth") {
  auto file = tests::parsed(tests::one_body(R"(
[[force]]
kind = "flow"
body = "block"
at_m = [0, 0, 0]
density_n_per_rthz = [0, 3, 0]
corner_hz = 60
)" + tests::recording("steady", 400, 300)));
  file.damping_ratios = {0.1};
  // r.m.s. velocity from the recorded acceleration by integrating its Fourier lines, naively, 10 to 100 Hz in blocks.
  const auto samples = simulate::samples_of(file, 0).channels[0];
  constexpr std::size_t block = 1600;
  double mean_square = 0.0;
  int blocks = 0;
  for (std::size_t from = 0; from + block <= samples.size(); from += block, ++blocks) {
    std::vector<double> part(block);
    for (std::size_t n = 0; n < block; ++n) {  // Hann, mean square 3/8
      part[n] = samples[from + n] * (1.0 - std::cos(two_pi * static_cast<double>(n) / block)) * 0.5;
    }
    for (int k = 40; k <= 400; ++k) {
      const double f = 0.25 * k;
      mean_square += 0.5 * std::norm(phasor(part, f, 400.0) / (two_pi * f)) / 0.375;
    }
  }
  const auto truth = simulate::truth_of(file, {10.0, 100.0});
  // Bandwidth 4 Hz times 300 s: 1 / (2 sqrt(1200 pi / 2)) = 1.2 % standard deviation.
  CHECK(std::sqrt(mean_square / blocks) == Approx(truth.before.broadband_rms[0]).epsilon(0.04));
}

TEST_CASE("a sensor's error, low corner and noise show in the samples as stated") {
  const auto text = unbalance + tests::recording("steady", 1000, 10);
  auto file = tests::parsed(tests::one_body(text));
  const Complex ideal = phasor(simulate::samples_of(file, 0).channels[0], 18.0, 1000.0);
  file.sensors[0].sensitivity_error = 0.03;
  file.sensors[0].low_corner_hz = 2.0;
  file.sensors[0].noise = 1e-3;
  const auto samples = simulate::samples_of(file, 0).channels[0];
  const Complex expected = ideal * 1.03 * Complex{0.0, 9.0} / Complex{1.0, 9.0};  // first-order high-pass, f/fc = 9
  CHECK(std::abs(phasor(samples, 18.0, 1000.0) / expected - 1.0) < 1e-3);
  auto rest = samples;
  const Complex line = phasor(samples, 18.0, 1000.0);
  for (std::size_t n = 0; n < rest.size(); ++n) {
    rest[n] -= std::real(line * std::polar(1.0, two_pi * 18.0 * static_cast<double>(n) / 1000.0));
  }
  CHECK(rms(rest) == Approx(1e-3 * std::sqrt(500.0)).epsilon(0.03));  // 10 000 samples: 0.7 %
}

TEST_CASE("the lag in the truth is that from the tacho's edge to the peak of the velocity") {
  auto text = unbalance + "[tacho]\nangle_deg = 35\nwidth = 0.5\n" + tests::recording("steady", 4000, 10) +
              "[[recording.channel]]\nrole = \"tacho\"\nsensor = \"pulse\"\nfull_scale_v = 2\n";
  const auto file = tests::parsed(tests::one_body(text));
  const auto samples = simulate::samples_of(file, 0);
  const Complex velocity = phasor(samples.channels[0], 18.0, 4000.0) / Complex{0.0, 1.0};
  // The pulse of half a turn is high around 90 degrees after its edge: its fundamental peaks there.
  const Complex pulse = phasor(samples.channels[1], 18.0, 4000.0);
  const double lag = (std::arg(pulse) + 0.5 * std::numbers::pi - std::arg(velocity)) * 360.0 / two_pi;
  const double expected = simulate::truth_of(file).before.running_lag_deg[0];
  CHECK(std::remainder(lag - expected, 360.0) == Approx(0.0).margin(0.02));
}

TEST_CASE("the same seed gives the same files on one thread and on several, another seed does not") {
  const std::string more = unbalance + R"(
[[force]]
kind = "flow"
body = "block"
at_m = [0, 0, 0]
density_n_per_rthz = [0, 1, 0]
)" + tests::recording("steady", 500, 1);
  auto second = tests::recording("steady", 500, 1);
  second.replace(second.find("a.wav"), 5, "b.csv");
  auto file = tests::parsed(tests::one_body(more + second));
  const tests::TemporaryFolder one;
  const tests::TemporaryFolder several;
  base::Context context;
  simulate::write_recordings(file, one.path(), context);
  context.threads = 3;
  const auto written = simulate::write_recordings(file, several.path(), context);
  REQUIRE(written.size() == 2);
  for (const char* name : {"a.wav", "b.csv"}) {
    CHECK(tests::read_file(one / name) == tests::read_file(several / name));
    CHECK(tests::read_file(one / name).size() > 1000);
  }
  const auto first_seed = simulate::samples_of(file, 0);
  file.seed = 4;
  CHECK(simulate::samples_of(file, 0).channels[0] != first_seed.channels[0]);
}

TEST_CASE("recordings in place are left as they are, before any long work") {
  const auto file = tests::parsed(tests::one_body(tests::recording("steady", 500, 1)));
  const tests::TemporaryFolder folder;
  tests::write_file(folder / "a.wav", "mine");
  CHECK_THROWS_AS(simulate::write_recordings(file, folder.path()), base::Error);
  CHECK(tests::read_file(folder / "a.wav") == "mine");
}

TEST_CASE("a stop request ends the simulation") {
  const auto file = tests::parsed(tests::one_body(tests::recording("steady", 500, 1000)));
  std::stop_source source;
  source.request_stop();
  base::Context context;
  context.stop = source.get_token();
  CHECK_THROWS_AS(simulate::samples_of(file, 0, context), base::Stopped);
}

TEST_CASE("a CSV recording is in the sensor's unit, on the steps of the recorder's bits") {
  auto plan = tests::recording("steady", 500, 1);
  plan.replace(plan.find("a.wav"), 5, "a.csv");
  plan.replace(plan.find("bits = 24"), 9, "bits = 8");
  const auto samples = simulate::samples_of(tests::parsed(tests::one_body(unbalance + plan)), 0);
  CHECK(samples.names == std::vector<std::string>{"centre [m/s2]"});
  for (const double x : samples.channels[0]) CHECK(x * 128.0 == std::round(x * 128.0));
}
