// How often `check` is wrong, both ways, on signals that the tests make themselves. Seeds and limits stand here.
#include <cmath>
#include <functional>
#include <map>
#include <numbers>

#include "stillmass/numeric/statistics.hpp"
#include "stillmass/step/check.hpp"

#include "statistics/site_signal.hpp"
#include "support/catch.hpp"

using namespace stillmass;
using namespace stillmass::tests;
using base::Code;

namespace {

constexpr double pi = std::numbers::pi;
constexpr int clean_recordings = 250;
constexpr int most_false_alarms = clean_recordings / 50;
constexpr int faulty_recordings = 20;  // of each fault and size
constexpr int least_found = 19;

step::CheckResult checked(const MemoryReader& reader) {
  base::Context context;
  context.threads = 2;
  return step::check(reader, {}, context);
}

bool has(const std::vector<base::Finding>& findings, Code code) {
  return std::any_of(findings.begin(), findings.end(), [&](const auto& each) { return each.code == code; });
}

double seconds(const SiteSignal& signal) { return static_cast<double>(signal.samples.size()) / signal.rate_hz; }

struct Found {
  int found = 0;
  int timed = 0;  // with a time that meets the fault
  std::string missed;
};

struct Span {
  double from_s = 0.0;
  double to_s = 0.0;
};

// Puts a fault into steady signals and counts how often `code` is found. `fault` changes the signal before it is stored
// and says when it happens. Signals shorter than `least_s` are passed over.
Found found_in(Code code, const std::function<Span(SiteSignal&, std::uint64_t)>& fault, double least_s = 0.0) {
  Found result;
  int tried = 0;
  for (std::uint64_t seed = 1; tried < faulty_recordings; ++seed) {
    SiteSignal signal = steady_signal(seed);
    if (seconds(signal) < least_s) continue;
    ++tried;
    const Span span = fault(signal, seed);
    const MemoryReader reader(signal.rate_hz, {stored(signal, "a", seed)});
    const auto result_of = checked(reader);
    bool is_found = false;
    bool is_timed = false;
    for (const base::Finding& each : result_of.channels[0].findings) {
      if (each.code != code) continue;
      is_found = true;
      is_timed = each.from_s && *each.from_s <= span.to_s && *each.to_s >= span.from_s;
    }
    result.found += is_found ? 1 : 0;
    result.timed += is_timed ? 1 : 0;
    if (!is_found) result.missed += " " + std::to_string(seed);
  }
  return result;
}

}  // namespace

TEST_CASE("clean recordings raise a false alarm less often than one in fifty") {
  std::map<std::string_view, int> alarms;
  int alarmed = 0;
  for (std::uint64_t seed = 1000; seed < 1000 + clean_recordings; ++seed) {
    const SiteSignal signal = site_signal(seed);
    const MemoryReader reader(signal.rate_hz, {stored(signal, "a", seed)});
    const auto result = checked(reader);
    for (const base::Finding& each : result.channels[0].findings) {
      ++alarms[base::text(each.code).name];
      UNSCOPED_INFO("seed " << seed << " kind " << static_cast<int>(signal.kind) << ": " << base::text(each.code).name
                            << ": " << each.text);
    }
    alarmed += result.verdict == step::Verdict::good ? 0 : 1;
  }
  for (const auto& [name, count] : alarms) UNSCOPED_INFO(name << ": " << count);
  CHECK(alarmed <= most_false_alarms);
}

TEST_CASE("an amplifier's flat tops are found below full scale, with noise on them") {
  for (const double share : {0.05, 0.01, 0.003}) {  // of the samples
    const auto found = found_in(Code::overload, [&](SiteSignal& signal, std::uint64_t seed) {
      const auto noise = normal_noise(signal.samples.size(), seed + 11);
      std::vector<double> sizes = signal.samples;
      for (double& v : sizes) v = std::abs(v);
      const double top = numeric::quantile(std::move(sizes), 1.0 - share);
      for (std::size_t i = 0; i < signal.samples.size(); ++i) {
        double& v = signal.samples[i];
        v = std::clamp(v, -top, top) + 2e-4 * top * noise[i];
      }
      return Span{0.0, seconds(signal)};
    });
    INFO("tops of " << 100.0 * share << " % of the samples, missed:" << found.missed);
    // Tops of one or two samples cannot be told from round ones.
    CHECK(found.found >= (share < 0.005 ? 12 : least_found));
    CHECK(found.timed == found.found);
  }
}

TEST_CASE("a signal cut off at full scale is found") {
  for (const double level : {0.4, 0.6, 0.8}) {
    const auto found = found_in(Code::clipped, [&](SiteSignal& signal, std::uint64_t) {
      signal.range = level * signal.peak();
      return Span{0.0, seconds(signal)};
    });
    INFO("range at " << level << " of the peak, missed:" << found.missed);
    CHECK(found.found >= least_found);
  }
}

TEST_CASE("dropouts of a loose cable are found with their time, as zeros and as noise") {
  for (const double length : {0.2, 0.5, 1.0}) {
    for (const bool is_zero : {true, false}) {
      const auto found = found_in(Code::dropout, [&](SiteSignal& signal, std::uint64_t) {
        const double at = 0.4 * seconds(signal);
        for (std::size_t i = 0; i < signal.samples.size(); ++i) {
          const double t = static_cast<double>(i) / signal.rate_hz;
          if (t >= at && t < at + length) signal.samples[i] *= is_zero ? 0.0 : 1e-3;
        }
        return Span{at, at + length};
      });
      INFO("for " << length << " s " << (is_zero ? "to zero" : "to noise") << ", missed:" << found.missed);
      CHECK(found.found >= least_found - (is_zero ? 0 : 3));
      CHECK(found.timed == found.found);
    }
  }
}

TEST_CASE("a sensor that settles after power-up is found with its time") {
  for (const double size : {1.0, 5.0, 20.0}) {
    const auto found = found_in(Code::drift, [&](SiteSignal& signal, std::uint64_t) {
      const double height = size * signal.rms();
      const double time = 0.08 * seconds(signal);
      for (std::size_t i = 0; i < signal.samples.size(); ++i) {
        signal.samples[i] += height * std::exp(-static_cast<double>(i) / signal.rate_hz / time);
      }
      signal.range += height;
      return Span{0.0, time};
    });
    INFO(size << " times the r.m.s. value, missed:" << found.missed);
    CHECK(found.found >= least_found);
    CHECK(found.timed == found.found);
  }
}

TEST_CASE("thermal noise that integration would blow up is found as a low-frequency slope") {
  for (const double size : {1.0, 3.0, 10.0}) {
    const auto found = found_in(
        Code::low_frequency_slope,
        [&](SiteSignal& signal, std::uint64_t seed) {
          const auto noise = normal_noise(signal.samples.size(), seed + 12);
          std::vector<double> walk(signal.samples.size());
          double level = 0.0;
          double sum = 0.0;
          const double keep = std::exp(-2.0 * pi * 0.2 / signal.rate_hz);
          for (std::size_t i = 0; i < walk.size(); ++i) {
            level = keep * level + noise[i];
            walk[i] = level;
            sum += level * level;
          }
          const double factor = 3.0 * size * signal.rms() / std::sqrt(sum / static_cast<double>(walk.size()));
          for (std::size_t i = 0; i < walk.size(); ++i) signal.samples[i] += factor * walk[i];
          signal.range += 10.0 * size * signal.rms();
          return Span{0.0, 0.0};
        },
        20.0);  // a slope is told from a machine's lines by two octaves of fine lines below them
    INFO(size << ", missed:" << found.missed);
    // Where the machine turns at 8 Hz the slope cannot be told from its lines.
    CHECK(found.found >= (size < 2.0 ? 14 : 16));
  }
}

TEST_CASE("spikes are found with their time") {
  for (const double size : {20.0, 50.0, 200.0}) {
    const auto found = found_in(Code::spikes, [&](SiteSignal& signal, std::uint64_t) {
      const double height = size * signal.rms();
      const double at = 0.6 * seconds(signal);
      signal.samples[static_cast<std::size_t>(at * signal.rate_hz)] += height;
      signal.range += height;
      return Span{at - 0.01, at + 0.01};
    });
    INFO(size << " times the r.m.s. value, missed:" << found.missed);
    CHECK(found.found >= least_found);
    CHECK(found.timed == found.found);
  }
}

TEST_CASE("interference that a filter has made a few samples long is found with its time") {
  for (const double size : {15.0, 50.0}) {
    const auto found = found_in(Code::spikes, [&](SiteSignal& signal, std::uint64_t) {
      const double height = size * signal.rms();
      for (const double part : {0.2, 0.55, 0.8}) {
        const auto at = static_cast<std::size_t>(part * static_cast<double>(signal.samples.size()));
        for (int i = 0; i < 6; ++i) {  // a decaying ringing, as of a steep filter
          signal.samples[at + static_cast<std::size_t>(i)] += height * std::cos(1.9 * i) * std::exp(-0.5 * i);
        }
      }
      signal.range += height;
      return Span{0.19 * seconds(signal), 0.81 * seconds(signal)};
    });
    INFO(size << " times the r.m.s. value, missed:" << found.missed);
    CHECK(found.found >= 17);  // a run of resonance can hide them
    CHECK(found.timed == found.found);
  }
}

TEST_CASE("hum of the mains is found by its harmonics") {
  for (const double share : {0.35, 0.7, 1.4}) {  // r.m.s., of the signal's
    const auto found = found_in(Code::mains_hum, [&](SiteSignal& signal, std::uint64_t seed) {
      const double supply = seed % 2 == 0 ? 49.98 : 60.01;
      const double base = share * signal.rms() * std::sqrt(2.0);
      for (std::size_t i = 0; i < signal.samples.size(); ++i) {
        const double a = 2.0 * pi * supply * static_cast<double>(i) / signal.rate_hz;
        signal.samples[i] += base * (0.8 * std::sin(a) + 0.5 * std::sin(3.0 * a + 1.0) + 0.3 * std::sin(5.0 * a + 2.0));
      }
      signal.range += 2.0 * base;
      return Span{0.0, 0.0};
    });
    INFO(share << " of the r.m.s. value, missed:" << found.missed);
    CHECK(found.found >= least_found);
  }
}

TEST_CASE("a range far too large leaves few steps or their noise") {
  for (const double steps : {1.0, 3.0, 8.0}) {  // peak of the signal
    int found = 0;
    for (std::uint64_t seed = 1; seed <= faulty_recordings; ++seed) {
      SiteSignal signal = steady_signal(seed);
      signal.bits = 16;
      signal.range = signal.peak() / steps * 32768.0;
      auto channel = stored(signal, "a", seed);
      for (std::size_t i = 0; i < channel.samples.size(); ++i) {
        channel.samples[i] = std::nearbyint(signal.samples[i] / *channel.stored_step) * *channel.stored_step;
      }
      const auto result = checked(MemoryReader(signal.rate_hz, {channel}));
      const auto& findings = result.channels[0].findings;
      found += has(findings, Code::few_bits) || has(findings, Code::no_signal) || has(findings, Code::near_noise_floor);
    }
    INFO("a peak of " << steps << " steps");
    CHECK(found >= least_found);
  }
}

TEST_CASE("a sensor's own noise and nothing else is near the noise floor") {
  int found = 0;
  for (std::uint64_t seed = 1; seed <= faulty_recordings; ++seed) {
    SiteSignal signal = steady_signal(seed);
    const auto noise = filtered_noise(signal.samples.size(), seed);
    for (std::size_t i = 0; i < noise.size(); ++i) signal.samples[i] = 0.002 * noise[i];
    signal.range = 0.1;
    const auto result = checked(MemoryReader(signal.rate_hz, {stored(signal, "a", seed)}));
    found += has(result.channels[0].findings, Code::near_noise_floor);
  }
  CHECK(found >= least_found);
}

TEST_CASE("a recorder without an anti-alias filter is suspected") {
  for (const double size : {1.0, 3.0, 10.0}) {
    const auto found = found_in(Code::aliasing_suspected, [&](SiteSignal& signal, std::uint64_t seed) {
      const auto noise = normal_noise(signal.samples.size(), seed + 13);
      const double level = size * signal.rms();
      for (std::size_t i = 0; i < signal.samples.size(); ++i) {
        signal.samples[i] += level * noise[i];
      }
      signal.range += 5.0 * level;
      return Span{0.0, 0.0};
    });
    INFO("broad-band noise of " << size << " times the r.m.s. value, missed:" << found.missed);
    CHECK(found.found >= least_found);
  }
}

TEST_CASE("one sensor on two inputs is found, whatever the gain, and two sensors are not taken for one") {
  for (const double gain : {1.0, -0.5, 9.80665}) {
    int found = 0;
    for (std::uint64_t seed = 1; seed <= faulty_recordings; ++seed) {
      const SiteSignal signal = steady_signal(seed);
      SiteSignal second = signal;
      for (double& v : second.samples) v *= gain;
      second.range *= std::abs(gain);
      const auto result =
          checked(MemoryReader(signal.rate_hz, {stored(signal, "a", seed), stored(second, "b", seed + 100)}));
      found += has(result.channels[1].findings, Code::identical_channels);
    }
    INFO("gain " << gain);
    CHECK(found >= least_found);
  }
  int wrong = 0;
  for (std::uint64_t seed = 1; seed <= faulty_recordings; ++seed) {
    const SiteSignal signal = steady_signal(seed);
    SiteSignal second = signal;  // a neighbouring point: the same lines, its own noise
    const auto noise = filtered_noise(signal.samples.size(), seed + 7);
    const double rms = signal.rms();
    for (std::size_t i = 0; i < noise.size(); ++i) second.samples[i] = 0.8 * second.samples[i] + 0.1 * rms * noise[i];
    const auto result =
        checked(MemoryReader(signal.rate_hz, {stored(signal, "a", seed), stored(second, "b", seed + 100)}));
    wrong += has(result.channels[1].findings, Code::identical_channels);
  }
  CHECK(wrong == 0);
}

TEST_CASE("a tacho that is dead or exchanged with a sensor is found, a sound one is not") {
  int dead = 0;
  int swapped = 0;
  int wrong = 0;
  for (std::uint64_t seed = 1; seed <= faulty_recordings; ++seed) {
    const SiteSignal signal = steady_signal(seed);
    const double speed = 10.0 + static_cast<double>(seed);
    MemoryChannel pulses{"tacho", std::vector<double>(signal.samples.size()), base::Quantity::pulse,
                         recording::Role::tacho};
    MemoryChannel silent = pulses;
    const auto noises = normal_noise(signal.samples.size(), seed + 14);
    for (std::size_t i = 0; i < pulses.samples.size(); ++i) {
      const double turn = speed * static_cast<double>(i) / signal.rate_hz;
      const double noise = 0.01 * noises[i];
      pulses.samples[i] = (turn - std::floor(turn) < 0.08 ? 4.8 : 0.1) + noise;
      silent.samples[i] = 0.1 + noise;
    }
    const MemoryChannel vibration = stored(signal, "a", seed);
    const auto sound = checked(MemoryReader(signal.rate_hz, {vibration, pulses}));
    for (const auto& channel : sound.channels) {
      wrong += channel.findings.empty() ? 0 : 1;
      for (const auto& each : channel.findings)
        UNSCOPED_INFO(seed << ": " << base::text(each.code).name << ": " << each.text);
    }
    dead += has(checked(MemoryReader(signal.rate_hz, {vibration, silent})).channels[1].findings, Code::no_pulses);

    MemoryChannel as_tacho = vibration;
    as_tacho.role = recording::Role::tacho;
    as_tacho.quantity = base::Quantity::pulse;
    MemoryChannel as_vibration = pulses;
    as_vibration.role = recording::Role::vibration;
    as_vibration.quantity = base::Quantity::acceleration;
    const auto exchanged = checked(MemoryReader(signal.rate_hz, {as_vibration, as_tacho}));
    swapped += has(exchanged.channels[0].findings, Code::channels_swapped);
  }
  CHECK(dead >= least_found);
  CHECK(swapped >= least_found);
  CHECK(wrong <= 1);
}

TEST_CASE("units wrong by a great factor are suspected") {
  for (const double factor : {1e4, 1e6}) {
    for (const bool too_much : {true, false}) {
      const auto found = found_in(Code::unit_suspected, [&](SiteSignal& signal, std::uint64_t) {
        const double by = (too_much ? factor : 1.0 / factor / 100.0) * 3.0 / signal.rms();
        for (double& v : signal.samples) v *= by;
        signal.range *= by;
        return Span{0.0, 0.0};
      });
      INFO("factor " << factor << ", missed:" << found.missed);
      CHECK(found.found >= least_found);
    }
  }
  // The earth's acceleration in the stated unit gives a factor of 9.81 away, where the sensor measures down to 0 Hz.
  const auto gravity = found_in(Code::unit_suspected, [&](SiteSignal& signal, std::uint64_t) {
    const double rms = signal.rms();
    for (double& v : signal.samples) v = 1.0 + 0.01 * v / rms;
    signal.range = 4.0;
    return Span{0.0, 0.0};
  });
  CHECK(gravity.found >= least_found);
}

TEST_CASE("a sensor that rings on its mounting within the used band is found") {
  for (const double q : {8.0, 15.0, 30.0}) {
    int found = 0;
    int tried = 0;
    for (std::uint64_t seed = 1; seed <= 60 && tried < faulty_recordings; ++seed) {
      SiteSignal signal = steady_signal(seed);
      if (signal.rate_hz < 12800.0) continue;
      ++tried;
      // Response of a mass on its mounting's stiffness to the motion of the spot: 1 / (1 - r^2 + i r / q).
      const double f = 900.0 + 60.0 * static_cast<double>(tried);
      const double w = 2.0 * pi * f / signal.rate_hz;
      const double r = std::exp(-w / (2.0 * q));
      const double c = 2.0 * r * std::cos(w * std::sqrt(1.0 - 1.0 / (4.0 * q * q)));
      const double gain = 1.0 - c + r * r;  // 1 at 0 Hz
      double y1 = 0.0;
      double y2 = 0.0;
      for (double& v : signal.samples) {
        const double y = gain * v + c * y1 - r * r * y2;
        y2 = y1;
        y1 = y;
        v = y;
      }
      signal.range = 2.0 * signal.peak();
      const auto result = checked(MemoryReader(signal.rate_hz, {stored(signal, "a", seed)}));
      found += has(result.channels[0].findings, Code::mounting_resonance);
    }
    INFO("q " << q << ", of " << tried);
    CHECK(found >= tried * 3 / 4);
  }
}
