// The demo skid and its committed recordings.
#include <algorithm>
#include <cmath>

#include "stillmass/simulate/simulate.hpp"
#include "stillmass/simulate/truth.hpp"

#include "oracle/wav_samples.hpp"
#include "support/catch.hpp"
#include "support/demo.hpp"
#include "support/temporary_folder.hpp"

using namespace stillmass;

namespace {

simulate::SkidFile demo() { return simulate::read_skid_file(tests::demo_file("skid.toml")); }

oracle::WavSamples committed(const char* name) { return oracle::wav_samples(tests::read_file(tests::demo_file(name))); }

// One channel of an interleaved file, as fractions of full scale.
std::vector<double> channel(const oracle::WavSamples& wav, std::size_t number) {
  std::vector<double> values;
  for (std::size_t i = number; i < wav.counts.size(); i += static_cast<std::size_t>(wav.channels)) {
    values.push_back(std::ldexp(static_cast<double>(wav.counts[i]), 1 - wav.bits));
  }
  return values;
}

}  // namespace

TEST_CASE("the demo skid rocks crosswise just below its running speed, with little damping") {
  const auto truth = simulate::truth_of(demo());
  REQUIRE(truth.points[0] == "pump-de-h");
  CHECK(truth.stopped.size() >= 4);
  int near = 0;
  for (const auto& mode : truth.stopped) {
    if (std::abs(mode.frequency_hz - 24.633) > 5.0) continue;
    ++near;
    CHECK(mode.frequency_hz == Approx(23.8).margin(0.05));
    CHECK(mode.damping_ratio == 0.009);
    CHECK(mode.modal_mass_kg(0) == Approx(280.0).margin(6.0));
  }
  CHECK(near == 1);
}

TEST_CASE("the demo skid shakes at 7 to 8 mm/s for running speed alone, and its absorber brings it below 2.8 mm/s") {
  const auto truth = simulate::truth_of(demo());
  CHECK(truth.before.overall_rms[0] > 7e-3);
  CHECK(truth.before.overall_rms[0] < 8e-3);
  CHECK(std::hypot(truth.before.lines_rms[0], truth.before.broadband_rms[0]) == Approx(1.1e-3).margin(0.2e-3));
  REQUIRE(truth.after);
  for (const double after : truth.after->overall_rms) CHECK(after < 2.8e-3);
  CHECK(*truth.travel_peak_m < 4e-3);
  // The impeller itself is well balanced: e w below 6.3 mm/s for a rotor of 65 kg (ISO 21940-11, grade G 6.3).
  CHECK(demo().forces[0].unbalance_kg_m / 65.0 * 2.0 * 3.14159265 * demo().drive.speed_hz < 6.3e-3);
}

TEST_CASE("the committed demo recordings are small") {
  std::uintmax_t total = 0;
  for (const auto& plan : demo().recordings) {
    const auto size = std::filesystem::file_size(tests::demo_file(plan.file.c_str()));
    CHECK(size < 4'000'000);
    total += size;
  }
  CHECK(total < 12'000'000);
}

TEST_CASE("a demo recording made again gives the committed samples within one unit in the last place") {
  // The coast-down: speed, forces, sensors, tacho. scripts/make-demo-data --check compares them all.
  const auto file = demo();
  REQUIRE(file.recordings[1].file == "coast-down.wav");
  const auto made = simulate::samples_of(file, 1);
  const auto kept = committed("coast-down.wav");
  REQUIRE(kept.channels == static_cast<int>(made.channels.size()));
  for (std::size_t c = 0; c < made.channels.size(); ++c) {
    const auto old = channel(kept, c);
    REQUIRE(old.size() == made.channels[c].size());
    double worst = 0.0;
    for (std::size_t n = 0; n < old.size(); ++n) worst = std::max(worst, std::abs(old[n] - made.channels[c][n]));
    CHECK(worst * 32768.0 < 1.5);  // half a unit of rounding, one of the mathematical library
  }
}

TEST_CASE("the demo's hammer test has nine blows, a double hit and an overload") {
  const auto wav = committed("hammer.wav");
  CHECK(wav.rate_hz == 2048);
  const auto force = channel(wav, 0);
  std::vector<std::size_t> starts;
  for (std::size_t n = 1; n < force.size(); ++n) {
    if (force[n] > 0.1 && force[n - 1] <= 0.1) starts.push_back(n);
  }
  CHECK(starts.size() == 10);
  const auto close = [](std::size_t a, std::size_t b) { return b - a < 205; };  // within 0.1 s
  CHECK(std::adjacent_find(starts.begin(), starts.end(), close) != starts.end());
  const auto at_full_scale = std::count(force.begin(), force.end(), 1.0 - std::ldexp(1.0, -23));
  CHECK(at_full_scale >= 3);
  const auto response = channel(wav, 1);
  CHECK(*std::max_element(response.begin(), response.end()) < 0.9);
}

TEST_CASE("the demo's coast-down ends at rest, with as many tacho pulses as turns") {
  const auto tacho = channel(committed("coast-down.wav"), 3);
  int pulses = 0;
  std::size_t last = 0;
  for (std::size_t n = 1; n < tacho.size(); ++n) {
    if (tacho[n] > 0.4 && tacho[n - 1] <= 0.4) {
      ++pulses;
      last = n;
    }
  }
  // 8 s at 24.6 turns a second, and the turns of the coast-down: w0 T ln(1 / cos(atan(w0 / c))) / 2 pi = 24.1.
  CHECK(pulses == Approx(8.0 * 24.633 + 24.1).margin(1.5));
  CHECK(static_cast<double>(last) / 4096.0 < 13.0);
}
