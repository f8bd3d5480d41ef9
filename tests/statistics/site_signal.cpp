#include "statistics/site_signal.hpp"

#include <algorithm>
#include <array>
#include <cmath>
#include <map>
#include <numbers>
#include <random>

#include "stillmass/numeric/random.hpp"

namespace stillmass::tests {
namespace {

constexpr double pi = std::numbers::pi;

// Draws in a row, so that each property of a signal has its own.
class Draws {
 public:
  explicit Draws(std::uint64_t seed) : random_(seed) {}
  double between(double lo, double hi) { return lo + (hi - lo) * random_.uniform(0, next_++); }
  double log_between(double lo, double hi) { return std::exp(between(std::log(lo), std::log(hi))); }
  template <class T, std::size_t n>
  T one_of(const std::array<T, n>& all) {
    return all[std::min(n - 1, static_cast<std::size_t>(between(0.0, static_cast<double>(n))))];
  }

 private:
  numeric::Random random_;
  std::uint32_t next_ = 0;
};

std::vector<double> white(std::size_t count, std::uint64_t seed, std::uint64_t which) {
  return normal_noise(count, seed * 1000 + which);
}

// Eighth-order Butterworth low pass at 0.39 of the rate (bilinear; textbook form, from memory).
void anti_alias(std::vector<double>& x) {
  const double k = std::tan(pi * 0.39);
  for (const int section : {0, 1, 2, 3}) {
    const double q = 1.0 / (2.0 * std::cos(pi * (2.0 * section + 1.0) / 16.0));
    const double norm = 1.0 / (1.0 + k / q + k * k);
    const double b = k * k * norm;
    const double a1 = 2.0 * (k * k - 1.0) * norm;
    const double a2 = (1.0 - k / q + k * k) * norm;
    double s1 = 0.0;
    double s2 = 0.0;
    for (double& v : x) {
      const double in = v;
      const double out = b * in + s1;
      s1 = 2.0 * b * in - a1 * out + s2;
      s2 = b * in - a2 * out;
      v = out;
    }
  }
}

// Acceleration of one degree of freedom under a force, by its impulse response at the samples (exact poles).
void add_mode(std::vector<double>& x, const std::vector<double>& force, double rate_hz, double f_hz, double damping,
              double gain) {
  const double w = 2.0 * pi * f_hz / rate_hz;
  const double r = std::exp(-damping * w);
  const double c = 2.0 * r * std::cos(w * std::sqrt(1.0 - damping * damping));
  double y1 = 0.0;
  double y2 = 0.0;
  for (std::size_t i = 0; i < x.size(); ++i) {
    const double y = force[i] + c * y1 - r * r * y2;
    x[i] += gain * (y - 2.0 * y1 + y2);  // second difference: acceleration
    y2 = y1;
    y1 = y;
  }
}

void high_pass(std::vector<double>& x, double rate_hz, double corner_hz) {
  const double a = std::exp(-2.0 * pi * corner_hz / rate_hz);
  double before = x.empty() ? 0.0 : x[0];
  double y = 0.0;
  for (double& v : x) {
    y = a * (y + v - before);
    before = v;
    v = y;
  }
}

double rms_of(const std::vector<double>& x) {
  double sum = 0.0;
  for (const double v : x) sum += v * v;
  return std::sqrt(sum / static_cast<double>(x.size()));
}

void scale(std::vector<double>& x, double factor) {
  for (double& v : x) v *= factor;
}

// The lines of a rotor at phase `turns` per sample, each with its own strength and phase.
void add_lines(std::vector<double>& x, const std::vector<double>& turns, double top_order, Draws& draws,
               const std::vector<double>& strength) {
  const int vanes = static_cast<int>(draws.between(4.0, 8.0));
  for (const double order : {1.0, 2.0, 3.0, 4.0, static_cast<double>(vanes), 2.0 * vanes}) {
    if (order > top_order) continue;
    const double amplitude = (order == 1.0 ? 1.0 : draws.log_between(0.02, 0.8));
    const double phase = draws.between(0.0, 2.0 * pi);
    for (std::size_t i = 0; i < x.size(); ++i) {
      x[i] += strength[i] * amplitude * std::cos(2.0 * pi * order * turns[i] + phase);
    }
  }
}

std::vector<double> turns_of(std::size_t count, double rate_hz, double from_hz, double to_hz, std::uint64_t seed) {
  const numeric::Random random(seed);
  std::vector<double> turns(count);
  double phase = 0.0;
  double wander = 0.0;  // a slow random walk of the speed
  for (std::size_t i = 0; i < count; ++i) {
    if (i % 1000 == 0) wander = 0.98 * wander + 0.0002 * random.normal(77, static_cast<std::uint32_t>(i / 1000));
    const double part = static_cast<double>(i) / static_cast<double>(count);
    phase += (from_hz + (to_hz - from_hz) * part) * (1.0 + wander) / rate_hz;
    turns[i] = phase;
  }
  return turns;
}

std::vector<double> blows(std::size_t count, double rate_hz, Draws& draws) {
  std::vector<double> force(count, 0.0);
  const double width_s = draws.log_between(0.001, 0.004);
  for (double at = 1.0; at < static_cast<double>(count) / rate_hz - 1.0; at += draws.between(2.0, 5.0)) {
    const double height = draws.between(0.5, 1.0);
    const auto first = static_cast<std::size_t>(at * rate_hz);
    const auto width = static_cast<std::size_t>(std::max(3.0, width_s * rate_hz));
    for (std::size_t i = 0; i < width && first + i < count; ++i) {
      force[first + i] += height * std::sin(pi * static_cast<double>(i) / static_cast<double>(width));
    }
  }
  return force;
}

SiteSignal make(std::uint64_t seed, SiteSignal::Kind kind) {
  Draws draws(seed);
  SiteSignal out;
  out.kind = kind;
  out.rate_hz = draws.one_of(std::array{1600.0, 2560.0, 3200.0, 4000.0, 5120.0, 6400.0, 12800.0, 25600.0});
  out.bits = draws.one_of(std::array{16, 24, 24});
  // The chain has been switched on for a while when the recording begins.
  const double lead_s = 1.5;
  const double seconds = lead_s + std::min(draws.between(10.0, 60.0), 110000.0 / out.rate_hz);
  const auto count = static_cast<std::size_t>(seconds * out.rate_hz);
  std::vector<double>& x = out.samples;
  x.assign(count, 0.0);

  // The structure: a few resonances, fed by the noise of flow or by blows.
  std::vector<double> force =
      kind == SiteSignal::Kind::blows ? blows(count, out.rate_hz, draws) : white(count, seed, 1);
  if (kind == SiteSignal::Kind::blows) {
    const auto other = white(count, seed, 2);
    for (std::size_t i = 0; i < count; ++i) force[i] += 2e-4 * other[i];
  }
  const int modes = static_cast<int>(draws.between(3.0, 7.0));
  for (int m = 0; m < modes; ++m) {
    const double f = draws.log_between(12.0, 0.3 * out.rate_hz);
    std::vector<double> one(count, 0.0);
    add_mode(one, force, out.rate_hz, f, draws.log_between(0.005, 0.05), 1.0);
    const double level = rms_of(one);
    scale(one, draws.log_between(0.1, 1.0) / level);
    for (std::size_t i = 0; i < count; ++i) x[i] += one[i];
  }
  anti_alias(x);
  if (kind != SiteSignal::Kind::blows) {
    const double broad = draws.log_between(0.05, 0.5);
    const auto noise = filtered_noise(count, seed + 1000003);
    for (std::size_t i = 0; i < count; ++i) x[i] += broad * noise[i];
    scale(x, 1.0 / rms_of(x));

    const double speed = draws.between(8.0, 60.0);
    const double to = kind == SiteSignal::Kind::runup ? speed * draws.between(0.2, 0.6) : speed;
    const auto turns = turns_of(count, out.rate_hz, to, speed, seed + 5);
    std::vector<double> strength(count, draws.log_between(0.3, 5.0));
    if (kind == SiteSignal::Kind::runup) {
      for (std::size_t i = 0; i < count; ++i) {
        const double f = to + (speed - to) * static_cast<double>(i) / static_cast<double>(count);
        strength[i] *= f * f / (speed * speed);
      }
    }
    add_lines(x, turns, 0.35 * out.rate_hz / speed, draws, strength);
    const double electrical = draws.one_of(std::array{100.0, 120.0});
    const double amplitude = draws.log_between(0.05, 0.6);
    for (std::size_t i = 0; i < count; ++i) {
      x[i] += amplitude * std::cos(2.0 * pi * electrical * static_cast<double>(i) / out.rate_hz);
    }
  }
  high_pass(x, out.rate_hz, draws.log_between(0.5, 2.0));
  x.erase(x.begin(), x.begin() + static_cast<std::ptrdiff_t>(lead_s * out.rate_hz));
  scale(x, draws.log_between(0.05, 30.0) / rms_of(x));
  out.range = out.peak() / draws.log_between(0.08, 0.8);
  const double offset = draws.between(-0.02, 0.02) * out.range;
  for (double& v : x) v += offset;
  return out;
}

}  // namespace

std::vector<double> normal_noise(std::size_t count, std::uint64_t seed) {
  std::mt19937_64 engine(seed);  // quicker than the program's own, and apart from it
  const auto uniform = [&] { return (static_cast<double>(engine() >> 11) + 0.5) * 0x1p-53; };
  std::vector<double> x(count);
  for (std::size_t i = 0; i < count; i += 2) {  // Box & Muller 1958
    const double radius = std::sqrt(-2.0 * std::log(uniform()));
    const double angle = 2.0 * pi * uniform();
    x[i] = radius * std::cos(angle);
    if (i + 1 < count) x[i + 1] = radius * std::sin(angle);
  }
  return x;
}

std::vector<double> filtered_noise(std::size_t count, std::uint64_t seed) {
  auto x = white(count, seed, 3);
  anti_alias(x);
  return x;
}

double SiteSignal::rms() const { return rms_of(samples); }

double SiteSignal::peak() const {
  double peak = 0.0;
  for (const double v : samples) peak = std::max(peak, std::abs(v));
  return peak;
}

SiteSignal site_signal(std::uint64_t seed) {
  const std::uint64_t which = seed % 10;
  return make(seed, which < 7   ? SiteSignal::Kind::steady
                    : which < 9 ? SiteSignal::Kind::runup
                                : SiteSignal::Kind::blows);
}

SiteSignal steady_signal(std::uint64_t seed) {
  static std::map<std::uint64_t, SiteSignal> made;  // the same few are asked for again and again
  const auto at = made.find(seed);
  return at != made.end() ? at->second : made.emplace(seed, make(seed, SiteSignal::Kind::steady)).first->second;
}

MemoryChannel stored(const SiteSignal& signal, const std::string& name, std::uint64_t seed) {
  MemoryChannel out{name, signal.samples};
  const double step = signal.range / std::ldexp(1.0, signal.bits - 1);
  const auto noise = white(signal.samples.size(), seed, 9);
  for (std::size_t i = 0; i < out.samples.size(); ++i) {
    const double v = out.samples[i] + 1e-5 * signal.range * noise[i];
    out.samples[i] = std::clamp(std::nearbyint(v / step) * step, -signal.range, signal.range - step);
  }
  out.stored_step = step;
  out.full_scale = signal.range;
  return out;
}

}  // namespace stillmass::tests
