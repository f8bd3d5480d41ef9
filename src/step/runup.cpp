#include "stillmass/step/runup.hpp"

#include <algorithm>
#include <cmath>
#include <numeric>
#include <utility>

#include "stillmass/base/error.hpp"
#include "stillmass/base/number.hpp"
#include "stillmass/modal/critical_speed.hpp"
#include "stillmass/rotation/sweep.hpp"

namespace stillmass::step {
namespace {

using base::Finding;
using base::Quantity;

// A peak of an order counts where it stands this much above the lowest point on both sides of it and above the noise
// (common practice).
constexpr double prominence = 1.6;
constexpr double above_noise = 4.0;
// A known mode is the one that a peak shows if their frequencies are this close (a sweep moves the peak).
constexpr double same_mode = 0.06;

std::size_t position_of(const recording::Recording& recording, const std::string& name) {
  for (std::size_t c = 0; c < recording.channels.size(); ++c) {
    if (recording.channels[c].name == name) return c;
  }
  throw base::usage_error(recording.file.string(), "there is no channel named '" + name + "'");
}

// Order amplitude against speed, rising in speed.
struct Curve {
  std::vector<double> speed, amplitude, noise, sweep;
};

Curve against_speed(const rotation::OrderTrack& track) {
  std::vector<std::size_t> by_speed(track.value.size());
  std::iota(by_speed.begin(), by_speed.end(), std::size_t{0});
  std::stable_sort(by_speed.begin(), by_speed.end(),
                   [&](std::size_t a, std::size_t b) { return track.speed_hz[a] < track.speed_hz[b]; });
  Curve curve;
  for (const std::size_t i : by_speed) {
    curve.speed.push_back(track.speed_hz[i]);
    curve.amplitude.push_back(track.amplitude_rms(i));
    curve.noise.push_back(track.noise[i]);
    curve.sweep.push_back(track.sweep_hz_per_s[i].value_or(0.0));
  }
  return curve;
}

bool stands_out(const Curve& curve, std::size_t i) {
  const auto valley = [&](auto begin, auto end) {
    double least = curve.amplitude[i];
    for (auto at = begin; at != end && *at <= curve.amplitude[i]; ++at) least = std::min(least, *at);
    return least;
  };
  const auto& a = curve.amplitude;
  const auto middle = static_cast<std::ptrdiff_t>(i);
  const double left = valley(std::make_reverse_iterator(a.begin() + middle), a.rend());
  const double right = valley(a.begin() + middle + 1, a.end());
  return a[i] > prominence * left && a[i] > prominence * right && a[i] > above_noise * curve.noise[i];
}

// Speed at which the curve falls through the level when walking away from the peak; absent where it does not.
std::optional<double> flank(const Curve& curve, std::size_t peak, int step, double level) {
  for (auto i = static_cast<std::ptrdiff_t>(peak);
       i + step >= 0 && i + step < static_cast<std::ptrdiff_t>(curve.speed.size()); i += step) {
    const auto a = static_cast<std::size_t>(i);
    const auto b = static_cast<std::size_t>(i + step);
    if (curve.amplitude[b] > curve.amplitude[peak]) return {};
    if (curve.amplitude[b] <= level) {
      const double part = (curve.amplitude[a] - level) / (curve.amplitude[a] - curve.amplitude[b]);
      return curve.speed[a] + part * (curve.speed[b] - curve.speed[a]);
    }
  }
  return {};
}

const modal::Mode* known_mode(const std::vector<modal::Mode>& modes, double frequency_hz) {
  const modal::Mode* best = nullptr;
  for (const modal::Mode& mode : modes) {
    const double distance = std::abs(mode.frequency.value / frequency_hz - 1.0);
    if (distance > same_mode) continue;
    if (best == nullptr || distance < std::abs(best->frequency.value / frequency_hz - 1.0)) best = &mode;
  }
  return best;
}

CriticalSpeedFound judged(const rotation::OrderTrack& track, const Curve& curve, std::size_t i,
                          const RunupRequest& request, std::vector<Finding>& findings) {
  CriticalSpeedFound found;
  found.order = track.order;
  found.channel = track.channel;
  found.peak_speed_hz = curve.speed[i];
  found.speed = {curve.speed[i], {}, {}, Quantity::speed};
  const double frequency = track.order * curve.speed[i];
  const double rate = track.order * std::abs(curve.sweep[i]);
  const auto lower = flank(curve, i, -1, curve.amplitude[i] / std::sqrt(2.0));
  const auto upper = flank(curve, i, +1, curve.amplitude[i] / std::sqrt(2.0));
  std::optional<double> damping;
  if (lower && upper && *upper > *lower) damping = 0.5 * (*upper - *lower) / curve.speed[i];

  const modal::Mode* known = known_mode(request.modes, frequency);
  if (known != nullptr) {
    found.mode = *known;
    found.speed = {known->frequency.value / track.order, {}, known->frequency.dof, Quantity::speed};
    if (known->frequency.u) found.speed.u = *known->frequency.u / track.order;
    damping = known->damping_ratio.value;
  }
  const double limit = damping ? modal::sweep_rate_limit(frequency, *damping) : 0.0;
  if (damping && rate > limit) {
    if (known == nullptr) {
      // The highest response lags the resonance by up to two bandwidths of the apparent peak (CHECKS R6 for eta <= 10).
      found.speed.u = 2.0 * *damping * curve.speed[i];
    }
    findings.push_back({base::Code::sweep_too_fast,
                        "order " + base::rounded(track.order) + " passed " + base::rounded(frequency) + " Hz at " +
                            base::rounded(rate, 2) + " Hz/s; " + base::rounded(limit, 2) + " Hz/s would do",
                        track.channel});
    return found;
  }
  if (!lower || !upper) return found;
  found.amplification_factor = modal::amplification_factor(curve.speed[i], *lower, *upper);
  if (known == nullptr) {
    modal::Mode mode;
    mode.frequency = {frequency, {}, {}, Quantity::frequency};
    mode.damping_ratio = {*damping, {}, {}, Quantity::ratio};
    mode.point = track.channel;
    mode.state = "running";
    mode.methods.push_back({"half-power bandwidth of the order track", mode.frequency, mode.damping_ratio});
    found.mode = mode;
  }
  return found;
}

}  // namespace

RunupResult runup(const recording::Reader& reader, const RunupRequest& request, const base::Context& context) {
  RunupResult result;
  result.recording = reader.recording();
  result.findings = result.recording.findings;

  rotation::RunupSettings settings;
  const recording::FrameRange range = frames_of(result.recording, request.part);
  settings.time_s = base::Interval{result.recording.time_s(range.begin), result.recording.time_s(range.end - 1)};
  if (!request.speed_channel.empty()) settings.tacho_channel = position_of(result.recording, request.speed_channel);
  settings.tacho.pulses_per_turn = request.pulses_per_turn;
  settings.tacho.edge = request.falling_edge ? rotation::Edge::falling : rotation::Edge::rising;
  settings.orders.orders = request.orders;
  settings.waterfall.max_frequency_hz = request.max_frequency_hz;

  auto answer = rotation::runup(reader, settings, context);
  if (!answer) {
    result.refusal = answer.refusal();
    return result;
  }
  result.runup = std::move(*answer);
  for (const Finding& finding : result.runup->findings) result.findings.push_back(finding);
  for (const rotation::OrderTrack& track : result.runup->tracks) {
    const bool motion = track.quantity == Quantity::acceleration || track.quantity == Quantity::displacement;
    result.tracks.push_back(motion ? rotation::in_quantity(track, Quantity::velocity) : track);
  }
  if (result.runup->speed.trend() == rotation::Trend::steady) return result;
  for (const rotation::OrderTrack& track : result.tracks) {
    const Curve curve = against_speed(track);
    for (std::size_t i = 1; i + 1 < curve.speed.size(); ++i) {
      const bool highest = curve.amplitude[i] >= curve.amplitude[i - 1] && curve.amplitude[i] > curve.amplitude[i + 1];
      if (highest && stands_out(curve, i)) {
        result.critical_speeds.push_back(judged(track, curve, i, request, result.findings));
      }
    }
  }
  std::stable_sort(result.critical_speeds.begin(), result.critical_speeds.end(),
                   [](const auto& a, const auto& b) { return a.peak_speed_hz < b.peak_speed_hz; });
  return result;
}

}  // namespace stillmass::step
