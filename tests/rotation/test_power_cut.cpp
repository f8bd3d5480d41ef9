// Coast-downs with a known cut of the power: electrical forces end with the current, mechanical ones follow the speed.
#include <algorithm>
#include <cmath>
#include <numbers>

#include "stillmass/base/error.hpp"
#include "stillmass/numeric/random.hpp"
#include "stillmass/recording/reader.hpp"
#include "stillmass/rotation/power_cut.hpp"
#include "stillmass/rotation/runup.hpp"

#include "rotation/base_band.hpp"
#include "rotation/signals.hpp"
#include "rotation/stream_windows.hpp"
#include "support/catch.hpp"
#include "support/demo.hpp"

using namespace stillmass;
using namespace stillmass::tests;
using rotation::PowerCutVerdict;
using std::numbers::pi;

namespace {

constexpr double rate = 2048.0;
constexpr double cut_s = 8.0;
constexpr double duration_s = 16.0;

// A machine that is switched off at cut_s and then slows down as 1 / (1 + t / tau).
struct Coast {
  double speed_hz = 24.63;
  double tau_s = 6.0;
  bool cut = true;

  double speed(double t) const { return !cut || t < cut_s ? speed_hz : speed_hz / (1.0 + (t - cut_s) / tau_s); }
  double turns(double t) const {
    if (!cut || t < cut_s) return speed_hz * t;
    return speed_hz * (cut_s + tau_s * std::log(1.0 + (t - cut_s) / tau_s));
  }
  rotation::SpeedCurve curve() const {
    rotation::Pulses out;
    for (double turn = 0.0; turn < turns(duration_s); turn += 1.0) {
      double lo = 0.0;
      double hi = duration_s;
      for (int i = 0; i < 60; ++i) {
        const double middle = 0.5 * (lo + hi);
        (turns(middle) < turn ? lo : hi) = middle;
      }
      out.time_s.push_back(lo);
      out.turns.push_back(turn);
    }
    return rotation::SpeedCurve(out);
  }
};

// Peak amplitudes, m/s2: of the electrical line (ringing down with 50 ms once its force ends) and of orders.
struct Signal {
  double electrical = 0.0;
  double order = 4.06;
  double at_order = 0.0;
  double first = 1.0;
  double noise = 0.02;
};

MemoryReader recorded(const Coast& coast, const Signal& signal, std::uint64_t seed = 1) {
  const numeric::Random random(seed);
  auto samples = sampled(rate, duration_s, [&](double t) {
    const double slower = coast.speed(t) / coast.speed_hz;
    const double field = !coast.cut || t < cut_s ? 1.0 : std::exp(-(t - cut_s) / 0.05);
    return signal.electrical * field * std::cos(2.0 * pi * 100.02 * t + 0.3) +
           signal.at_order * slower * slower * std::cos(2.0 * pi * signal.order * coast.turns(t) + 1.0) +
           signal.first * slower * slower * std::cos(2.0 * pi * coast.turns(t)) +
           0.3 * slower * std::cos(2.0 * pi * 6.0 * coast.turns(t));
  });
  for (std::size_t i = 0; i < samples.size(); ++i) {
    samples[i] += signal.noise * random.normal(0, static_cast<std::uint32_t>(i));
  }
  return MemoryReader(rate, {{"a", std::move(samples)}});
}

rotation::PowerCut judged(const Coast& coast, const Signal& signal, std::uint64_t seed = 1) {
  const auto curve = coast.curve();
  const auto reader = recorded(coast, signal, seed);
  const auto answer = rotation::power_cut(reader, {}, &curve, {});
  REQUIRE(answer);
  INFO(answer->reason);
  return *answer;
}

}  // namespace

TEST_CASE("a line of the field ends when the power is cut, and nothing goes on at its order") {
  Coast coast;
  coast.tau_s = GENERATE(1.5, 6.0, 60.0);
  const auto cut = judged(coast, {.electrical = 0.2});
  CHECK(cut.verdict == PowerCutVerdict::electrical);
  CHECK(std::abs(cut.cut_s.value - cut_s) < 0.1);  // half a window, and the ring-down of 50 ms
  CHECK(cut.frequency.value == Approx(100.02).margin(0.02));
  CHECK(cut.before_rms.value == Approx(0.2 / std::sqrt(2.0)).epsilon(0.03));
  CHECK(cut.after_rms.value < 0.1 * cut.before_rms.value);
  CHECK(cut.followed_rms.value < 0.2 * cut.before_rms.value);
  CHECK(cut.fall_s.value < 0.35);
  CHECK(cut.speed_before_hz == Approx(24.63).epsilon(0.002));
  CHECK(cut.speed_after_fall_hz < cut.speed_before_hz);
  CHECK(cut.speed_after_fall_hz > 0.75 * cut.speed_before_hz);
  CHECK(cut.reason.find("fell to") != std::string::npos);
}

TEST_CASE("a mechanical line at the same frequency goes on with the speed") {
  Coast coast;
  coast.tau_s = GENERATE(0.5, 1.5, 6.0, 60.0);  // 0.5 s: as fast as the demo's pump
  const auto cut = judged(coast, {.order = 100.02 / 24.63, .at_order = 0.2});
  CHECK(cut.verdict == PowerCutVerdict::mechanical);
  CHECK(cut.followed_rms.value > 0.35 * cut.before_rms.value);  // it goes with the square of the speed
  CHECK(cut.reason.find("went on") != std::string::npos);
}

TEST_CASE("a whole order that falls on the line before the cut is told by what goes on") {
  Coast coast;
  coast.speed_hz = 25.005;  // 4x: 100.02 Hz
  CHECK(judged(coast, {.order = 4.0, .at_order = 0.2}).verdict == PowerCutVerdict::mechanical);
  CHECK(judged(coast, {.electrical = 0.2}).verdict == PowerCutVerdict::electrical);
}

TEST_CASE("2x of a two-pole motor beside the line leaves the question open") {
  Coast coast;
  coast.speed_hz = 49.4;  // 2x: 98.8 Hz
  const auto cut = judged(coast, {.electrical = 0.2, .order = 2.0, .at_order = 0.2});
  CHECK(cut.verdict == PowerCutVerdict::cannot_tell);
  CHECK(cut.reason.find("2x of the speed (98.80 Hz)") != std::string::npos);
  CHECK(judged(coast, {.electrical = 0.2, .order = 2.0, .at_order = 0.02}).verdict == PowerCutVerdict::electrical);
}

TEST_CASE("without a line before the cut there is nothing to tell") {
  const auto cut = judged(Coast{}, {.noise = 0.3});
  CHECK(cut.verdict == PowerCutVerdict::cannot_tell);
  CHECK(cut.reason.find("no line stands out") != std::string::npos);
}

TEST_CASE("half electrical, half mechanical is neither") {
  Coast coast;
  coast.tau_s = 60.0;
  const auto cut = judged(coast, {.electrical = 0.2, .order = 100.02 / 24.63, .at_order = 0.09});
  CHECK(cut.verdict == PowerCutVerdict::cannot_tell);
}

TEST_CASE("a machine that keeps its speed was not switched off") {
  Coast coast;
  coast.cut = false;
  const auto curve = coast.curve();
  const auto reader = recorded(coast, {.electrical = 0.2});
  const auto answer = rotation::power_cut(reader, {}, &curve, {});
  REQUIRE_FALSE(answer);
  CHECK(answer.refusal().code == "no-power-cut");
}

TEST_CASE("without a tacho the 1x line itself tells the speed, where it can be followed") {
  Coast coast;
  coast.tau_s = 20.0;
  rotation::PowerCutOptions options;
  const auto reader = recorded(coast, {.electrical = 0.2});
  CHECK(rotation::power_cut(reader, options, nullptr, {}).refusal().code == "no-tacho");
  options.speed_hz = 24.6;
  const auto answer = rotation::power_cut(reader, options, nullptr, {});
  REQUIRE(answer);
  CHECK(answer->verdict == PowerCutVerdict::electrical);
  CHECK(answer->cut_s.value == Approx(cut_s).margin(0.1));
  CHECK(answer->speed_before_hz == Approx(24.63).epsilon(0.003));
  const auto mechanical = recorded(coast, {.order = 100.02 / 24.63, .at_order = 0.2});
  CHECK(rotation::power_cut(mechanical, options, nullptr, {})->verdict == PowerCutVerdict::mechanical);
  options.speed_hz = 31.0;
  CHECK(rotation::power_cut(reader, options, nullptr, {}).refusal().code == "no-tacho");
}

TEST_CASE("the verdict holds over many noises, and near the noise it is not given") {
  Coast coast;
  coast.tau_s = GENERATE(0.5, 3.0, 20.0);
  int right = 0;
  int wrong = 0;
  for (std::uint64_t seed = 1; seed <= 40; ++seed) {
    const bool electrical = seed % 2 == 0;
    Signal signal{.noise = 0.25};
    (electrical ? signal.electrical : signal.at_order) = 0.2;
    signal.order = 100.02 / 24.63;
    const auto cut = judged(coast, signal, seed);
    if (cut.verdict == PowerCutVerdict::cannot_tell) continue;
    ++((cut.verdict == PowerCutVerdict::electrical) == electrical ? right : wrong);
  }
  CHECK(wrong == 0);
  CHECK(right >= 30);
}

TEST_CASE("a steady line is found beside the middle of the window, its true height and place") {
  const double off = GENERATE(0.0, 2.3, 5.0, -7.9);  // 5 Hz: one line of a window of 0.2 s
  const auto samples = sampled(2000.0, 8.0, [&](double t) { return std::cos(2.0 * pi * (100.0 + off) * t + 0.4); });
  const MemoryReader reader(2000.0, {{"a", samples}});
  const rotation::HannWindow window(400, 2000.0);
  std::vector<rotation::Reading> readings;
  rotation::stream_windows(reader, 0, all_frames(reader), 400, 100, {}, [&](std::int64_t first, auto x) {
    const double start = static_cast<double>(first) / 2000.0;
    readings.push_back({start + 0.1, window.at(x, 100.0, start), 0.0});
    return true;
  });
  const auto line = rotation::strongest(readings, {-8.0, 8.0}, window.lobe_hz(), [](double) { return false; });
  CHECK(line.off_hz == Approx(off).margin(0.02));
  CHECK(line.rms == Approx(std::numbers::sqrt2 / 2.0).epsilon(0.01));
}

TEST_CASE("no window sees a missing sample, and none is left out that does not") {
  const std::size_t chunk = GENERATE(37, 100, 1000, 100000);
  const MemoryReader reader(rate, {{"a", without(std::vector<double>(5000, 1.0), {2003, 2105})}}, {}, chunk);
  std::vector<std::int64_t> seen;
  rotation::stream_windows(reader, 0, {0, 5000}, 400, 100, {}, [&](std::int64_t first, std::span<const double> x) {
    seen.push_back(first);
    CHECK(std::count(x.begin(), x.end(), 1.0) == 400);
    return true;
  });
  std::vector<std::int64_t> right;
  for (std::int64_t first = 0; first + 400 <= 5000; first += 100) {
    if (first + 400 <= 2003 || first >= 2105) right.push_back(first);
  }
  CHECK(seen == right);
}

TEST_CASE("a channel that is not there and a frequency above the recording are the caller's errors") {
  const Coast coast;
  const auto curve = coast.curve();
  const auto reader = recorded(coast, {});
  rotation::PowerCutOptions options;
  options.channel = 1;
  CHECK_THROWS_AS(rotation::power_cut(reader, options, &curve, {}), base::Error);
  options.channel = 0;
  options.electrical_hz = 900.0;
  CHECK_THROWS_AS(rotation::power_cut(reader, options, &curve, {}), base::Error);
}

TEST_CASE("the demo's motor is switched off at 8 s, and its magnetic pull ends there") {
  // data/demo/skid.toml: switch_off_s = 8, a force at twice the line frequency (kind "line") on the frame. Channel 3 is
  // the motor's, 4 the tacho.
  recording::OpenOptions open;
  for (int index = 1; index <= 4; ++index) {
    recording::ChannelSetting setting;
    setting.index = index;
    setting.role = index == 4 ? recording::Role::tacho : recording::Role::vibration;
    if (index < 4) {
      setting.unit = base::unit_named("g");
      setting.scale = 10.0;
    }
    open.channels.push_back(setting);
  }
  const auto reader = recording::open(demo_file("coast-down.wav"), open);
  rotation::RunupSettings settings;
  settings.with_waterfall = false;
  const auto runup = rotation::runup(*reader, settings, {});
  REQUIRE(runup);
  rotation::PowerCutOptions options;
  options.channel = 2;
  const auto motor = rotation::power_cut(*reader, options, &runup->speed, {});
  REQUIRE(motor);
  INFO(motor->reason);
  CHECK(motor->verdict == PowerCutVerdict::electrical);
  CHECK(motor->cut_s.value == Approx(8.0).margin(0.1));
  CHECK(motor->frequency.value == Approx(100.0).margin(0.05));
  CHECK(motor->after_rms.value < 0.05 * motor->before_rms.value);
  CHECK(motor->fall_s.value < 0.2);

  options.channel = 0;  // the pump's: the line is faint, and the vane pass sweeps across 100 Hz 0.24 s after the cut
  const auto pump = rotation::power_cut(*reader, options, &runup->speed, {});
  REQUIRE(pump);
  INFO(pump->reason);
  CHECK(pump->verdict == PowerCutVerdict::electrical);
  CHECK(pump->cut_s.value == Approx(8.0).margin(0.1));
  CHECK_FALSE(pump->fall_s.u);  // hidden by the vane pass

  options.channel = 1;  // vertical: next to nothing of it
  const auto vertical = rotation::power_cut(*reader, options, &runup->speed, {});
  REQUIRE(vertical);
  CHECK(vertical->verdict == PowerCutVerdict::cannot_tell);

  // Without the tacho: the skid rings on at 24.66 Hz, right beside 1x, which hides how the speed falls.
  options.speed_hz = 1478.0 / 60.0;
  for (options.channel = 0; options.channel < 3; ++options.channel) {
    CHECK(rotation::power_cut(*reader, options, nullptr, {}).refusal().code == "no-tacho");
  }
}
