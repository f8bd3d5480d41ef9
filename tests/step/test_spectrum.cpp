// The spectrum step on recordings made sample by sample: what it says must be what was put in.
#include <algorithm>
#include <cmath>
#include <numbers>

#include "stillmass/machine/bearing.hpp"
#include "stillmass/numeric/random.hpp"
#include "stillmass/step/spectrum.hpp"

#include "step/spectrum_signals.hpp"
#include "support/catch.hpp"
#include "support/memory_reader.hpp"

using namespace stillmass;
using tests::acceleration;
using tests::analysed;
using tests::Part;
using tests::rate;
using tests::two_pi;
using tests::two_pole_fan;

namespace {

const step::SpectralPeak* peak_of(const step::ChannelSpectrum& channel, double frequency, double within) {
  const auto at = std::find_if(channel.peaks.begin(), channel.peaks.end(), [&](const step::SpectralPeak& peak) {
    return std::abs(peak.tone.frequency.value - frequency) < within;
  });
  return at == channel.peaks.end() ? nullptr : &*at;
}

}  // namespace

TEST_CASE("twice the speed and twice the line frequency of a two-pole motor are told apart and named") {
  step::SpectrumRequest request;
  request.site = two_pole_fan();
  const std::vector<Part> parts = {{49.7, 1e-3, 0.3}, {99.4, 0.5e-3, 1.0}, {100.0, 0.2e-3, 2.0}};
  const auto result = analysed({{"fan-h", acceleration(60.0, parts, 0.02, 1)}}, request);
  const step::ChannelSpectrum& channel = result.channels.front();
  const auto* speed_line = peak_of(channel, 99.4, 0.05);
  const auto* line = peak_of(channel, 100.0, 0.05);
  REQUIRE(speed_line != nullptr);
  REQUIRE(line != nullptr);
  CHECK(speed_line->cause.text == "2x");
  CHECK(line->cause.text == "twice line frequency");
  CHECK(speed_line->tone.amplitude_rms.value == Approx(0.5e-3).epsilon(0.02));
  CHECK(line->tone.amplitude_rms.value == Approx(0.2e-3).epsilon(0.04));
  REQUIRE(result.speed);
  CHECK(std::abs(result.speed->value - 49.7) < 3.0 * *result.speed->u + 1e-4);
}

TEST_CASE("a background line is marked as such, given no force, and its level taken off in power") {
  step::SpectrumRequest request;
  request.site = two_pole_fan();
  const tests::MemoryReader stopped(rate, {{"fan-h", acceleration(40.0, {{31.0, 0.6e-3, 0.0}}, 0.02, 2)}});
  request.background.reader = &stopped;
  const std::vector<Part> parts = {{49.7, 0.8e-3, 0.3}, {31.0, 0.6e-3, 1.0}, {77.0, 0.1e-3, 0.0}};
  const auto result = analysed({{"fan-h", acceleration(60.0, parts, 0.02, 3)}}, request);
  const step::ChannelSpectrum& channel = result.channels.front();
  REQUIRE(channel.background);
  CHECK(channel.background->is_doubtful);  // 0.6 of 1.0
  REQUIRE(channel.background->machine);
  // sqrt(0.8^2 + 0.1^2) without the neighbour's 0.6 and the noise that both have
  CHECK(channel.background->machine->value == Approx(std::hypot(0.8e-3, 0.1e-3)).epsilon(0.02));
  const auto* neighbour = peak_of(channel, 31.0, 0.1);
  REQUIRE(neighbour != nullptr);
  CHECK(neighbour->in_background());
  CHECK(neighbour->cause.text == machine::background);
  CHECK_FALSE(neighbour->cause.forcing);
  const auto* own = peak_of(channel, 77.0, 0.1);
  REQUIRE(own != nullptr);
  CHECK_FALSE(own->in_background());
  CHECK(own->cause.text == machine::unexplained);
}

TEST_CASE("no zone where unit, recording or place do not allow one; typical ranges where only the support is missing") {
  const std::vector<Part> parts = {{49.7, 2e-3, 0.3}};
  step::SpectrumRequest request;
  request.site = two_pole_fan();
  const auto x = acceleration(20.0, parts, 0.02, 4);
  const auto severity = [&](tests::MemoryChannel channel) {
    auto result = analysed({std::move(channel)}, request);
    return std::move(result.channels.front());
  };

  const auto good = severity({"fan-h", x});
  REQUIRE(good.severity);
  CHECK(good.severity->verdict.zone == machine::Zone::b);  // 2.0 of 1.4, 2.8, 4.5 mm/s: ISO 10816-3 group 2 rigid
  CHECK_FALSE(severity({"frame", x}).severity);
  CHECK_FALSE(severity({"elsewhere", x}).severity);
  tests::MemoryChannel assumed{"fan-h", x};
  assumed.unit_known = false;
  CHECK(severity(assumed).severity.refusal().seen.find("assumed") != std::string::npos);
  tests::MemoryChannel cut{"fan-h", x};
  cut.stored_step = 0.001;
  cut.full_scale = 0.5;
  for (double& sample : cut.samples) sample = std::clamp(sample, -0.5, 0.499);
  const auto clipped = severity(cut);
  CHECK(clipped.severity.refusal().seen.find("unusable") != std::string::npos);
  CHECK(std::any_of(clipped.findings.begin(), clipped.findings.end(),
                    [](const base::Finding& each) { return each.code == base::Code::clipped; }));
  request.unusable = {"fan-h"};
  CHECK_FALSE(severity({"fan-h", x}).severity);
  request.unusable.clear();

  request.site.machine->foundation.reset();
  const auto unknown = severity({"fan-h", x});
  CHECK_FALSE(unknown.severity);
  REQUIRE(unknown.typical);
  CHECK(unknown.typical->place[0] == machine::Place::within);  // 0.71 to 4.5 mm/s
}

TEST_CASE("a recording that is not of the machine running steadily has spectra, but no severity and no causes") {
  step::SpectrumRequest request;
  request.site = two_pole_fan();
  request.site.plant.target = 1e-3;
  request.runs_steadily = false;
  const auto result = analysed({{"fan-h", acceleration(20.0, {{49.7, 2e-3, 0.3}}, 0.02, 10)}}, request);
  CHECK(result.channels.front().severity.refusal().seen.find("steadily") != std::string::npos);
  CHECK_FALSE(result.channels.front().plant);
  CHECK_FALSE(result.speed);
  CHECK(result.forcing.empty());
  CHECK(result.causes.empty());
  REQUIRE_FALSE(result.channels.front().peaks.empty());
  CHECK(result.channels.front().peaks.front().cause.text == machine::unexplained);
}

TEST_CASE("a signal that does not vary is said to be none") {
  const auto result = analysed({{"dead", std::vector<double>(8192, 0.5)}}, {});
  const auto& findings = result.channels.front().findings;
  CHECK(std::any_of(findings.begin(), findings.end(),
                    [](const base::Finding& each) { return each.code == base::Code::no_signal; }));
}

TEST_CASE("a speed that changes is said, and so are single shocks") {
  std::vector<double> sweep(static_cast<std::size_t>(60.0 * rate));
  double phase = 0.0;
  for (std::size_t i = 0; i < sweep.size(); ++i) {
    const double t = static_cast<double>(i) / rate;
    const double sway =
        std::sin(two_pi * t / 17.0) + std::sin(two_pi * t / 11.3 + 1.0) + std::sin(two_pi * t / 7.7 + 2.0);
    phase += two_pi * (50.0 + 0.5 * sway) / rate;
    sweep[i] = std::cos(phase) + 0.3 * std::cos(2.0 * phase + 1.0);
  }
  step::SpectrumRequest request;
  request.site = two_pole_fan();
  request.site.machine->supply = machine::Supply::drive;
  request.site.machine->speed_hz = base::Interval{45.0, 55.0};
  const auto has = [](const std::vector<base::Finding>& findings, base::Code code) {
    return std::any_of(findings.begin(), findings.end(), [&](const base::Finding& each) { return each.code == code; });
  };
  const auto swept = analysed({{"fan-h", sweep}}, request);
  CAPTURE(swept.speed.has_value(), swept.refusals.empty() ? std::string() : swept.refusals.front().seen,
          swept.refined_speed ? swept.refined_speed->wander : -1.0);
  CHECK(has(swept.findings, base::Code::speed_varies));
  const auto steady =
      analysed({{"fan-h", acceleration(60.0, {{49.7, 1e-3, 0.0}, {99.4, 3e-4, 1.0}}, 0.02, 11)}}, request);
  CHECK_FALSE(has(steady.findings, base::Code::speed_varies));
  CHECK_FALSE(has(steady.channels.front().findings, base::Code::single_shocks));

  auto blow = acceleration(20.0, {}, 0.01, 12);
  for (std::size_t i = 0; i < 400; ++i)
    blow[20000 + i] += 5.0 * std::exp(-0.02 * static_cast<double>(i)) * ((i % 20) < 10 ? 1 : -1);
  CHECK(has(analysed({{"fan-h", blow}}, request).channels.front().findings, base::Code::single_shocks));
}

TEST_CASE("1x beside a louder neighbour is parted with the whole length of the recording") {
  step::SpectrumRequest request;
  request.site = two_pole_fan();
  request.site.machine->motor_poles = 4;
  request.site.machine->speed_hz = base::Interval{24.7, 24.7};
  const tests::MemoryReader stopped(rate, {{"fan-h", acceleration(30.0, {{24.2, 3e-3, 0.0}}, 0.02, 13)}});
  request.background.reader = &stopped;
  const auto result =
      analysed({{"fan-h", acceleration(40.0, {{24.2, 3e-3, 0.0}, {24.7, 1e-3, 0.5}}, 0.02, 14)}}, request);
  REQUIRE(result.speed);
  CHECK(result.speed->value == Approx(24.7).margin(0.002));
  const auto* own = peak_of(result.channels.front(), 24.7, 0.02);
  REQUIRE(own != nullptr);
  CHECK(own->cause.text == "1x");
  CHECK(own->tone.amplitude_rms.value == Approx(1e-3).epsilon(0.01));
}

TEST_CASE("the support class follows from a measured natural frequency where none is declared") {
  step::SpectrumRequest request;
  request.site = two_pole_fan();
  request.site.machine->foundation.reset();
  modal::Mode mode;
  mode.point = "fan-h";
  mode.frequency = {31.0, 0.2, {}, base::Quantity::frequency};
  mode.damping_ratio = {0.02, {}, {}, base::Quantity::ratio};
  request.modes = {mode};
  const std::vector<Part> parts = {{49.7, 2e-3, 0.3}};
  const auto result = analysed({{"fan-h", acceleration(20.0, parts, 0.02, 5)}}, request);
  REQUIRE(result.channels.front().severity);
  CHECK(result.channels.front().severity->limits.support == machine::Support::flexible);
}

TEST_CASE("the worst point, the plant's limits and the phase between two channels are told") {
  step::SpectrumRequest request;
  request.site = two_pole_fan();
  request.site.plant.target = 1e-3;
  request.site.plant.alarm = 3e-3;
  const double quarter = 0.5 * std::numbers::pi;
  const auto result = analysed({{"fan-v", acceleration(60.0, {{49.7, 1e-3, 0.4 + quarter}}, 0.02, 6)},
                                {"fan-h", acceleration(60.0, {{49.7, 2e-3, 0.4}}, 0.02, 7)}},
                               request);
  REQUIRE(result.worst);
  CHECK(result.channels[*result.worst].channel.name == "fan-h");
  REQUIRE(result.channels[1].plant);
  CHECK(result.channels[1].plant->state == machine::PlantState::above_target);
  REQUIRE(result.shapes.size() == 1);
  const auto& shape = result.shapes.front().shape;
  CHECK(result.shapes.front().name == "1x");
  CHECK(shape.reference == "fan-h");  // it moves most
  const auto at = std::find_if(shape.points.begin(), shape.points.end(),
                               [](const spectral::Deflection& point) { return point.point == "fan-v"; });
  REQUIRE(at != shape.points.end());
  CHECK(at->magnitude.value == Approx(0.5).epsilon(0.01));
  REQUIRE(at->phase);
  CHECK(at->phase->value == Approx(quarter).margin(0.02));
}

TEST_CASE("harmonics are found without being told the speed") {
  step::SpectrumRequest request;
  std::vector<Part> parts;
  for (int k = 1; k <= 5; ++k) parts.push_back({k * 23.17, 1e-3 / k, 0.7 * k});
  const auto result = analysed({{"anything", acceleration(60.0, parts, 0.02, 8)}}, request);
  REQUIRE_FALSE(result.families.harmonics.empty());
  CHECK(result.families.harmonics.front().fundamental.value == Approx(23.17).margin(0.005));
  CHECK(result.families.harmonics.front().members.size() == 5);
  CHECK_FALSE(result.speed);
}

TEST_CASE("a stated speed names the orders without a survey, and a zoom shows its band in the quantity asked for") {
  step::SpectrumRequest request;
  request.speed_hz = 23.2;
  request.zoom_hz = base::Interval{20.0, 30.0};
  const auto result =
      analysed({{"anything", acceleration(60.0, {{23.17, 1e-3, 0.0}, {46.34, 0.5e-3, 0.0}}, 0.02, 9)}}, request);
  REQUIRE(result.speed);
  CHECK(result.speed->value == Approx(23.17).margin(0.003));
  CHECK(result.channels.front().peaks.front().cause.text == "1x");
  REQUIRE(result.channels.front().zoom);
  const spectral::ZoomSpectrum& zoom = *result.channels.front().zoom;
  CHECK(zoom.line_hz < 0.05);
  const auto highest = std::max_element(zoom.density.begin(), zoom.density.end()) - zoom.density.begin();
  const auto k = static_cast<std::size_t>(highest);
  CHECK(zoom.frequency(k) == Approx(23.17).margin(zoom.line_hz));
  CHECK(zoom.amplitude_rms(k) == Approx(1e-3).epsilon(0.16));  // Hann: up to 1.42 dB lower between two lines
}

TEST_CASE("blows of a flaw in a bearing's outer ring are found in the envelope and named") {
  constexpr double fast = 25600.0;
  constexpr double speed = 24.63;
  const numeric::Random random(5);
  std::vector<double> x(static_cast<std::size_t>(20.0 * fast));
  double next = 0.1;
  std::uint32_t blow = 0;
  while (next < 19.9) {  // 3.5848 a turn (6205, CHECKS F1), 1 % of slip; ringing at 3.2 kHz, 3 % damping
    const auto from = static_cast<std::size_t>(next * fast);
    for (std::size_t i = from; i < std::min(x.size(), from + 400); ++i) {
      const double t = static_cast<double>(i) / fast - next;
      if (t >= 0.0) x[i] += 8.0 * std::exp(-0.03 * two_pi * 3200.0 * t) * std::sin(two_pi * 3200.0 * t);
    }
    next += (1.0 + 0.01 * random.normal(1, blow++)) / (3.5848 * speed);
  }
  for (std::size_t i = 0; i < x.size(); ++i) {
    const double t = static_cast<double>(i) / fast;
    x[i] += 1.0 * random.normal(2, static_cast<std::uint32_t>(i)) + 3.0 * std::cos(two_pi * speed * t);
  }
  step::SpectrumRequest request;
  request.site.machine.emplace();
  request.site.machine->speed_hz = base::Interval{speed, speed};
  machine::Bearing bearing = *machine::bearing_named("6205");
  request.site.machine->bearings = {bearing};
  request.site.points = {{"de", "horizontal", true}};
  const tests::MemoryReader reader(fast, {{"de", x}});
  const auto result = step::spectrum(reader, request, {});
  REQUIRE(result.channels.front().envelope);
  REQUIRE(result.channels.front().envelope->envelope);
  const auto& found = *result.channels.front().envelope;
  CHECK(found.envelope->band_hz.contains(3200.0));
  REQUIRE_FALSE(found.peaks.empty());
  CHECK(found.peaks.front().cause.text.find("outer ring of bearing 6205") != std::string::npos);
  CHECK(std::any_of(result.causes.begin(), result.causes.end(),
                    [](const base::Finding& each) { return each.code == base::Code::bearing_damage; }));
}

TEST_CASE("lines that the speed spreads over several keep their cause") {
  const numeric::Random random(5);
  std::vector<double> x(static_cast<std::size_t>(60.0 * rate));
  double phase = 0.0;
  double sway = 0.0;  // standard deviation 1, correlated over 2 s
  for (std::size_t i = 0; i < x.size(); ++i) {
    sway += -sway / (2.0 * rate) + 0.0156 * random.normal(1, static_cast<std::uint32_t>(i));
    phase += two_pi * 24.6 * (1.0 + 0.003 * sway) / rate;
    for (const int k : {1, 2, 3, 6}) x[i] += (k == 6 ? 18.0 : 1.0) * std::cos(k * phase);
    x[i] += 0.05 * random.normal(2, static_cast<std::uint32_t>(i));
  }
  step::SpectrumRequest request;
  request.site = two_pole_fan();
  request.site.machine->speed_hz = base::Interval{24.6, 24.6};
  request.site.machine->motor_poles = 4;
  request.site.machine->vanes = 6;
  const auto result = analysed({{"fan-h", x}}, request);
  CHECK(result.channels.front().peaks.front().cause.text == "vane pass (6x)");
}
