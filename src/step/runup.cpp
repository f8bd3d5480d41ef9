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
// Below this relative change of speed per second the machine runs steadily: a peak there is no critical speed.
constexpr double least_sweep = 0.002;
// A known mode is the one that a peak shows if their frequencies are this close; a sweep of S Hz/s moves the peak on by
// up to 0.86 sqrt S (CHECKS R4), a little more where the track's blocks are long.
constexpr double same_mode = 0.06;
constexpr double lag_of_sweep = 1.0;
// A passage as such is about sqrt S wide. A peak less than three times as wide says nothing of the damping: at eta =
// 1/9 the loss is still below 1 % (Cronin 1968).
constexpr double sweep_widths = 3.0;

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

// `rate_hz_per_s`: of the order's frequency, signed: the peak comes late, so the mode lies behind it.
const modal::Mode* known_mode(const std::vector<modal::Mode>& modes, double frequency_hz, double rate_hz_per_s) {
  const double lag = lag_of_sweep * std::sqrt(std::abs(rate_hz_per_s));
  base::Interval near{frequency_hz * (1.0 - same_mode), frequency_hz * (1.0 + same_mode)};
  (rate_hz_per_s > 0.0 ? near.lo : near.hi) += rate_hz_per_s > 0.0 ? -lag : lag;
  const modal::Mode* best = nullptr;
  for (const modal::Mode& mode : modes) {
    if (!near.contains(mode.frequency.value)) continue;
    const auto distance = [&](const modal::Mode& each) { return std::abs(each.frequency.value - near.middle()); };
    if (best == nullptr || distance(mode) < distance(*best)) best = &mode;
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
  std::optional<double> width;  // half-power, of the order's frequency
  if (lower && upper && *upper > *lower) width = track.order * (*upper - *lower);

  const modal::Mode* known = known_mode(request.modes, frequency, track.order * curve.sweep[i]);
  if (known != nullptr) {
    found.mode = *known;
    found.speed = {known->frequency.value / track.order, {}, known->frequency.dof, Quantity::speed};
    if (known->frequency.u) found.speed.u = *known->frequency.u / track.order;
    found.amplification_factor = 0.5 / known->damping_ratio.value;
  }
  const double limit = known != nullptr ? modal::sweep_rate_limit(known->frequency.value, known->damping_ratio.value)
                       : width          ? std::pow(*width / sweep_widths, 2)
                                        : 0.0;
  if (rate > limit) {
    // Unknown mode: it may lie behind the peak by the lag of the sweep.
    if (known == nullptr) found.speed.u = lag_of_sweep * std::sqrt(rate) / track.order;
    findings.push_back({base::Code::sweep_too_fast,
                        "order " + base::plain(track.order) + " passed " + base::rounded(frequency) + " Hz at " +
                            base::rounded(rate, 2) + " Hz/s" +
                            (limit > 0.0 ? "; at most " + base::rounded(limit, 2) + " Hz/s would do" : ""),
                        track.channel});
    return found;
  }
  if (known != nullptr || !lower || !upper) return found;
  found.amplification_factor = modal::amplification_factor(curve.speed[i], *lower, *upper);
  modal::Mode mode;
  mode.frequency = {frequency, {}, {}, Quantity::frequency};
  mode.damping_ratio = {0.5 * *width / frequency, {}, {}, Quantity::ratio};
  mode.point = track.channel;
  mode.state = "running";
  mode.methods.push_back({"half-power bandwidth of the order track", mode.frequency, mode.damping_ratio});
  found.mode = mode;
  return found;
}

// Known modes that an order meets within the speeds of the run, where no peak showed them.
void add_known(const RunupRequest& request, base::Interval speeds, std::vector<CriticalSpeedFound>& found) {
  for (const modal::CriticalSpeed& each : modal::critical_speeds(request.modes, request.orders, speeds.hi)) {
    const modal::Mode& mode = request.modes[each.mode];
    const bool shown = std::any_of(found.begin(), found.end(), [&](const CriticalSpeedFound& other) {
      return other.order == each.order && other.mode && other.mode->frequency.value == mode.frequency.value;
    });
    if (shown || each.speed.value < speeds.lo) continue;
    CriticalSpeedFound known;
    known.speed = each.speed;
    known.order = each.order;
    known.channel = mode.point;
    known.amplification_factor = each.amplification_factor;
    known.mode = mode;
    found.push_back(std::move(known));
  }
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
      const bool sweeping = std::abs(curve.sweep[i]) > least_sweep * curve.speed[i];
      if (highest && sweeping && stands_out(curve, i)) {
        result.critical_speeds.push_back(judged(track, curve, i, request, result.findings));
      }
    }
  }
  add_known(request, result.runup->speed.speed_range(), result.critical_speeds);
  std::stable_sort(result.critical_speeds.begin(), result.critical_speeds.end(),
                   [](const auto& a, const auto& b) { return a.speed.value < b.speed.value; });
  return result;
}

}  // namespace stillmass::step
