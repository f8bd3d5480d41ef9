#include "modal/blow.hpp"

#include <algorithm>
#include <array>
#include <cmath>

#include "stillmass/base/number.hpp"
#include "stillmass/numeric/statistics.hpp"

#include "modal/clipping.hpp"
#include "modal/frames.hpp"

namespace stillmass::modal {
namespace {

constexpr double of_peak_in_contact = 0.1;
constexpr double second_pulse = 0.04;
constexpr double bounce_s = 0.5;
constexpr double weak = 0.25;
constexpr double clipped_within_s = 1.0;
constexpr double least_block_s = 0.5;
constexpr double usual_share = 0.8;

std::string percent(double fraction) { return base::rounded(100.0 * fraction, 2) + " %"; }

recording::FrameRange around(const recording::Recording& recording, std::int64_t frame, std::int64_t before,
                             double after_s) {
  const recording::FrameRange segment = segment_of(recording, frame);
  const auto after = static_cast<std::int64_t>(after_s * recording.rate_hz);
  return {std::max(segment.begin, frame - before), std::min(segment.end, frame + after)};
}

}  // namespace

void Blow::refuse(HitVerdict verdict, std::string reason) {
  if (!hit.used) return;
  hit.verdict = verdict;
  hit.used = false;
  hit.reason = std::move(reason);
}

std::int64_t frames_before(double rate_hz) { return std::max<std::int64_t>(64, std::llround(0.05 * rate_hz)); }

Blow measure_pulse(recording::Reader& reader, std::size_t channel, const Levels& levels, std::int64_t trigger) {
  const recording::Recording& recording = reader.recording();
  const auto range = around(recording, trigger, frames_before(recording.rate_hz), bounce_s);
  Blow blow;
  blow.hit.first_frame = trigger;
  blow.hit.time_s = recording.time_s(trigger);
  blow.contact_end = blow.window_end = trigger + 1;
  const auto samples = read_frames(reader, range, std::array{channel});
  if (!samples) {
    blow.refuse(HitVerdict::cut_off, "samples of the force are missing");
    return blow;
  }
  std::vector<double> force = samples->front();
  const auto clip = clipped_level(force, recording.channels[channel]);
  for (double& x : force) x = levels.upward ? x - levels.offset : levels.offset - x;

  const auto begin = static_cast<std::size_t>(trigger - range.begin);
  const double threshold = force[begin];
  std::size_t top = begin;
  for (std::size_t i = begin; i < force.size() && force[i] >= 0.5 * threshold; ++i) {
    if (force[i] > force[top]) top = i;
  }
  const double low = of_peak_in_contact * force[top];
  std::size_t first = top;
  while (first > 0 && force[first - 1] > low) --first;
  std::size_t last = top;
  while (last + 1 < force.size() && force[last + 1] > low) ++last;

  blow.hit.first_frame = range.begin + static_cast<std::int64_t>(first);
  blow.hit.time_s = recording.time_s(blow.hit.first_frame);
  blow.hit.peak = force[top];
  const auto contact = static_cast<std::int64_t>(last + 1 - first);
  blow.hit.contact_s = static_cast<double>(contact) / recording.rate_hz;
  blow.contact_end = blow.hit.first_frame + contact;
  blow.window_end = blow.contact_end + std::max(2 * contact, window_margin);

  if (clip) {
    blow.refuse(HitVerdict::overload, "the force is cut off at " + base::rounded(*clip) + " N");
    return blow;
  }
  const double bounce = std::max(second_pulse * force[top], 8.0 * levels.noise);
  const auto after = static_cast<std::size_t>(blow.window_end + window_margin - range.begin);
  for (std::size_t i = after; i < force.size(); ++i) {
    if (force[i] <= bounce) continue;
    std::size_t crest = i;
    for (std::size_t k = i; k < force.size() && force[k] > bounce; ++k) crest = force[k] > force[crest] ? k : crest;
    const double later_ms = 1000.0 * static_cast<double>(crest - top) / recording.rate_hz;
    blow.refuse(HitVerdict::double_hit, "a second pulse of " + percent(force[crest] / force[top]) + " came " +
                                            base::rounded(later_ms) + " ms after the first");
    break;
  }
  return blow;
}

Blow measure_rise(recording::Reader& reader, std::size_t channel, const Levels& levels, std::int64_t trigger) {
  const recording::Recording& recording = reader.recording();
  Blow blow;
  blow.hit.first_frame = trigger;
  blow.hit.time_s = recording.time_s(trigger);
  // How long contact lasted is not known; 20 ms is more than a hammer's tip stays.
  blow.contact_end = trigger + std::llround(0.02 * recording.rate_hz);
  blow.window_end = blow.contact_end;
  const auto samples = read_frames(reader, around(recording, trigger, 0, 0.2), std::array{channel});
  if (!samples) {
    blow.refuse(HitVerdict::cut_off, "samples of the response are missing");
    return blow;
  }
  for (const double x : samples->front()) blow.hit.peak = std::max(blow.hit.peak, std::abs(x - levels.offset));
  return blow;
}

void refuse_overloads(recording::Reader& reader, std::span<const std::size_t> responses, std::vector<Blow>& blows) {
  const recording::Recording& recording = reader.recording();
  for (Blow& blow : blows) {
    auto range = around(recording, blow.hit.first_frame, frames_before(recording.rate_hz), clipped_within_s);
    range.end = std::min(range.end, blow.available_end);
    const auto samples = read_frames(reader, range, responses);
    if (!samples) {
      blow.refuse(HitVerdict::cut_off, "samples of a response are missing");
      continue;
    }
    for (std::size_t i = 0; i < responses.size(); ++i) {
      const recording::Channel& channel = recording.channels[responses[i]];
      const auto clip = clipped_level((*samples)[i], channel);
      if (clip) blow.refuse(HitVerdict::overload, "channel " + channel.name + " is cut off at " + base::rounded(*clip));
    }
  }
}

void refuse_weak(std::vector<Blow>& blows) {
  std::vector<double> peaks;
  for (const Blow& blow : blows) peaks.push_back(blow.hit.peak);
  if (peaks.size() < 3) return;
  const double usual = numeric::median(peaks);
  for (Blow& blow : blows) {
    if (blow.hit.peak >= weak * usual) continue;
    blow.refuse(HitVerdict::weak_hit, "its peak is " + percent(blow.hit.peak / usual) + " of that of the others");
  }
}

std::int64_t common_length(std::vector<Blow>& blows, double rate_hz, double max_s, std::int64_t decayed) {
  const auto available = [](const Blow& blow) { return blow.available_end - blow.hit.first_frame; };
  std::vector<double> times;
  for (const Blow& blow : blows) {
    if (blow.hit.used) times.push_back(static_cast<double>(available(blow)));
  }
  if (times.empty()) return 0;
  const double usual = std::min(numeric::median(times), max_s * rate_hz);
  const double needed = std::max(least_block_s * rate_hz, std::min(usual_share * usual, static_cast<double>(decayed)));
  double length = max_s * rate_hz;
  for (Blow& blow : blows) {
    const double time = static_cast<double>(available(blow));
    if (blow.hit.used && time < needed) {
      const std::string left = base::rounded(time / rate_hz) + " s after it";
      if (blow.next_is_blow)
        blow.refuse(HitVerdict::too_close, "the next blow came " + left);
      else
        blow.refuse(HitVerdict::cut_off, "the recording ends or pauses " + left);
    }
    if (blow.hit.used) length = std::min(length, time);
  }
  const bool any = std::ranges::any_of(blows, [](const Blow& blow) { return blow.hit.used; });
  return any ? static_cast<std::int64_t>(length) : 0;
}

}  // namespace stillmass::modal
