#include "spectral/close_steadiness.hpp"

#include <algorithm>
#include <cmath>
#include <numbers>
#include <numeric>

#include "stillmass/numeric/statistics.hpp"
#include "stillmass/spectral/block_plan.hpp"

#include "spectral/fft.hpp"

namespace stillmass::spectral {

namespace {

using Complex = std::complex<double>;
constexpr double turn = 2.0 * std::numbers::pi;

/// Mean square deviation of equally spaced values from their straight line.
double about_line(std::span<const double> y) {
  const auto n = static_cast<double>(y.size());
  double sy = 0.0, sty = 0.0, stt = 0.0;
  for (std::size_t i = 0; i < y.size(); ++i) {
    const double t = static_cast<double>(i) - 0.5 * (n - 1.0);
    sy += y[i];
    sty += t * y[i];
    stt += t * t;
  }
  double sum = 0.0;
  for (std::size_t i = 0; i < y.size(); ++i) {
    const double t = static_cast<double>(i) - 0.5 * (n - 1.0);
    const double off = y[i] - sy / n - sty / stt * t;
    sum += off * off;
  }
  return sum / n;
}

/// The lines between two numbers against time, over the middle 80 % of the stretch.
std::vector<Complex> against_time(const CloseLines& lines, double from, double to, std::size_t instants) {
  std::vector<Complex> z(instants);
  for (std::size_t i = 0; i < lines.z.size(); ++i) {
    const double number = lines.number(i);
    if (number < from || number > to) continue;
    for (std::size_t t = 0; t < instants; ++t) {
      const double at = 0.8 * ((static_cast<double>(t) + 0.5) / static_cast<double>(instants) - 0.5);
      z[t] += lines.z[i] * std::polar(1.0, turn * number * at);
    }
  }
  return z;
}

Steadiness varies(const CloseLines& lines, double from, double to, double noise, const Hump* without) {
  from = std::max(from, lines.number(0));
  to = std::min(to, lines.number(lines.z.size() - 1));
  const double taken = std::floor(to) - std::ceil(from) + 1.0;
  Steadiness result;
  if (taken < 3.0) return result;
  const auto instants = static_cast<std::size_t>(4.0 * taken);
  const auto z = against_time(lines, from, to, instants);
  std::vector<Complex> turned(instants, 1.0);
  if (without != nullptr) {
    constexpr double skirt = 3.0;  // lines
    turned = against_time(lines, without->from - skirt, without->to + skirt, instants);
  }
  std::vector<double> phase(instants);
  double mean = 0.0;
  double square = 0.0;
  for (std::size_t t = 0; t < instants; ++t) {
    // Without a hump: about the middle of the lines, so that the phase does not run.
    const double at = 0.8 * ((static_cast<double>(t) + 0.5) / static_cast<double>(instants) - 0.5);
    const double running = without != nullptr ? std::arg(turned[t]) : turn * 0.5 * (from + to) * at;
    phase[t] = std::arg(z[t] * std::polar(1.0, -running));
    if (t > 0) phase[t] += turn * std::round((phase[t - 1] - phase[t]) / turn);
    mean += std::abs(z[t]) / static_cast<double>(instants);
    square += std::norm(z[t]) / static_cast<double>(instants);
  }
  if (mean == 0.0) return result;
  // Noise of mean square s beside a tone of amplitude a: s / 2 along it and s / 2 across.
  const double from_noise = 0.5 * noise * taken / (mean * mean);
  result.amplitude = std::sqrt(std::max(square / (mean * mean) - 1.0 - from_noise, 0.0));
  result.phase_rad = std::sqrt(std::max(about_line(phase) - from_noise, 0.0));
  return result;
}

}  // namespace

double line_noise(std::span<const Complex> residual) {
  std::vector<double> power;
  for (const Complex& r : residual) power.push_back(std::norm(r));
  return power.empty() ? 0.0 : numeric::median(std::move(power)) / std::numbers::ln2;
}

Steadiness steadiness(const CloseLines& lines, double from, double to, double noise) {
  return varies(lines, from, to, noise, nullptr);
}

Steadiness steadiness_beside(const CloseLines& lines, double from, double to, const Hump& strongest, double noise) {
  return varies(lines, from, to, noise, &strongest);
}

Humps::Humps(const CloseLines& lines, double line_noise) : first_(lines.number(0)), noise_(line_noise) {
  constexpr int tapers = 5;
  constexpr double stands_out = 4.0;
  constexpr double lowest = 1e-3;  // of the greatest: the tapers' side lobes are below it a few lines away
  constexpr std::size_t valley = 3;
  const std::size_t count = lines.z.size();
  const std::size_t instants = fast_length_at_least(2 * count);
  ComplexFft fft(instants);
  // What stands on the lines, against time: line i turns i times about the stretch.
  std::fill(fft.values().begin(), fft.values().end(), Complex{});
  for (std::size_t i = 0; i < count; ++i) {
    const double sign = (lines.first + static_cast<std::int64_t>(i)) % 2 == 0 ? 1.0 : -1.0;  // from middle to start
    fft.values()[i] = sign * std::conj(lines.z[i]);
  }
  fft.run();
  std::vector<Complex> signal(fft.values().begin(), fft.values().end());
  for (Complex& z : signal) z = std::conj(z);

  const auto n = static_cast<double>(instants);
  power_.assign(count, 0.0);
  for (int k = 1; k <= tapers; ++k) {
    own_ += 0.25 * k * k / tapers;
    for (std::size_t t = 0; t < instants; ++t) {
      const double taper = std::numbers::sqrt2 * std::sin(0.5 * turn * k * (static_cast<double>(t) + 0.5) / n);
      fft.values()[t] = taper / n * signal[t];
    }
    fft.run();
    for (std::size_t i = 0; i < count; ++i) power_[i] += std::norm(fft.values()[i]) / tapers;
  }
  least_ = std::max(stands_out * noise_, lowest * *std::max_element(power_.begin(), power_.end()));
  for (std::size_t i = 0; i < count; ++i) {
    if (power_[i] < least_) continue;
    std::size_t last = i;
    for (std::size_t j = i + 1; j < count && j <= last + valley; ++j) {
      if (power_[j] >= least_) last = j;
    }
    humps_.push_back(moments(i, last));
    i = last;
  }
}

Hump Humps::moments(std::size_t from, std::size_t to) const {
  Hump hump;
  hump.from = first_ + static_cast<double>(from);
  hump.to = first_ + static_cast<double>(to);
  double sum = 0.0, first = 0.0, second = 0.0;
  for (std::size_t i = from; i <= to; ++i) {
    if (power_[i] < least_) continue;
    const double x = first_ + static_cast<double>(i);
    const double p = power_[i] - noise_;
    sum += p;
    first += p * x;
    second += p * x * x;
  }
  if (!(sum > 0.0)) return hump;
  hump.power = sum;
  hump.mean = first / sum;
  hump.deviation = std::sqrt(std::max(second / sum - hump.mean * hump.mean - own_, 0.0));
  return hump;
}

Hump Humps::together() const { return moments(0, power_.size() - 1); }

}  // namespace stillmass::spectral
