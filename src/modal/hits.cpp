#include "stillmass/modal/hits.hpp"

#include <algorithm>
#include <array>
#include <cmath>
#include <numbers>
#include <numeric>

#include "stillmass/base/error.hpp"
#include "stillmass/base/number.hpp"

#include "modal/blow.hpp"
#include "modal/frames.hpp"
#include "modal/trigger.hpp"

namespace stillmass::modal {
namespace {

using recording::FrameRange;
using recording::Role;

constexpr double bounce_s = 0.5;
constexpr double guard_s = 0.01;  // before the next blow: ringing of its filter

struct Channels {
  std::optional<std::size_t> force;
  std::vector<std::size_t> responses;
};

Channels chosen_channels(const recording::Recording& recording, const HitOptions& options) {
  Channels chosen{options.force, options.responses};
  for (std::size_t c = 0; c < recording.channels.size(); ++c) {
    const Role role = recording.channels[c].role;
    if (!options.force && !chosen.force && role == Role::force) chosen.force = c;
    if (options.responses.empty() && role == Role::vibration) chosen.responses.push_back(c);
  }
  if (options.ignore_force) chosen.force.reset();
  const std::string file = recording.file.string();
  if (chosen.responses.empty()) throw base::usage_error(file, "has no vibration channel", "name one with --channel");
  const auto missing = [&](std::size_t c) { return c >= recording.channels.size(); };
  if ((chosen.force && missing(*chosen.force)) || std::ranges::any_of(chosen.responses, missing)) {
    throw base::usage_error(file, "has " + std::to_string(recording.channels.size()) + " channels only");
  }
  return chosen;
}

std::vector<Blow> blows_of_force(recording::Reader& reader, std::size_t channel, FrameRange range,
                                 const base::Context& context) {
  const Levels levels = measure_levels(reader, range, std::array{channel}, false, context).front();
  const double rate = reader.recording().rate_hz;
  std::vector<Blow> blows;
  std::optional<std::int64_t> last;
  for (const std::int64_t trigger : force_pulses(reader, channel, levels)) {
    if (last && static_cast<double>(trigger - *last) < bounce_s * rate) continue;
    blows.push_back(measure_pulse(reader, channel, levels, trigger));
    last = trigger;
  }
  return blows;
}

std::vector<Blow> blows_of_responses(recording::Reader& reader, std::span<const std::size_t> channels, FrameRange range,
                                     const base::Context& context) {
  const std::vector<Levels> levels = measure_levels(reader, range, channels, true, context);
  const auto loudest = static_cast<std::size_t>(std::ranges::max_element(levels, {}, &Levels::peak) - levels.begin());
  std::vector<Blow> blows;
  for (const std::int64_t trigger : response_rises(reader, channels[loudest], levels[loudest])) {
    Blow next = measure_rise(reader, channels[loudest], levels[loudest], trigger);
    if (!blows.empty() && next.hit.time_s - blows.back().hit.time_s < bounce_s) {
      blows.back().refuse(HitVerdict::double_hit,
                          "another came " + base::rounded(next.hit.time_s - blows.back().hit.time_s) + " s after it");
    }
    blows.push_back(std::move(next));
  }
  return blows;
}

void find_room(const recording::Recording& recording, FrameRange range, std::int64_t before, std::vector<Blow>& blows) {
  const auto guard = static_cast<std::int64_t>(guard_s * recording.rate_hz);
  for (std::size_t i = 0; i < blows.size(); ++i) {
    const std::int64_t frame = blows[i].hit.first_frame;
    const FrameRange segment = segment_of(recording, frame);
    blows[i].available_end = std::min(segment.end, range.end);
    if (i + 1 < blows.size() && blows[i + 1].hit.first_frame <= blows[i].available_end) {
      blows[i].available_end = blows[i + 1].hit.first_frame - guard;
      blows[i].next_is_blow = true;
    }
    if (frame - before < segment.begin) {
      blows[i].refuse(HitVerdict::cut_off, "the recording begins or pauses right before it");
    }
  }
}

double rms(std::span<const double> x) {
  return std::sqrt(std::inner_product(x.begin(), x.end(), x.begin(), 0.0) / static_cast<double>(x.size()));
}

void subtract_mean(std::vector<double>& x) {
  const double mean = std::accumulate(x.begin(), x.end(), 0.0) / static_cast<double>(x.size());
  for (double& value : x) value -= mean;
}

/// Frames until all responses of a blow have fallen to 1 % of their start or to twice their quietest.
std::int64_t frames_to_decay(recording::Reader& reader, const Blow& blow, std::span<const std::size_t> responses,
                             double max_s) {
  constexpr std::size_t parts = 32;
  const auto most = static_cast<std::int64_t>(max_s * reader.recording().rate_hz);
  const std::int64_t end = std::min(blow.available_end, blow.contact_end + most);
  auto samples = read_frames(reader, {blow.contact_end, end}, responses);
  if (!samples || end - blow.contact_end < static_cast<std::int64_t>(2 * parts)) return most;
  const std::size_t part = samples->front().size() / parts;
  std::size_t needed = 0;
  for (std::vector<double>& response : *samples) {
    subtract_mean(response);
    std::array<double, parts> level{};
    for (std::size_t i = 0; i < parts; ++i) level[i] = rms(std::span(response).subspan(i * part, part));
    const double dead = std::max(0.01 * level.front(), 2.0 * std::ranges::min(level));
    for (std::size_t i = 0; i < parts; ++i) needed = level[i] > dead ? std::max(needed, i + 1) : needed;
  }
  return static_cast<std::int64_t>((needed + 1) * part);
}

/// 1 over contact and its filter's ringing on both sides, then half a cosine down to 0.
void window_force(std::vector<double>& force, std::int64_t onset, std::int64_t window_end) {
  const std::int64_t quiet = onset - window_margin;
  const double offset = std::accumulate(force.begin(), force.begin() + quiet, 0.0) / static_cast<double>(quiet);
  for (std::int64_t i = 0; i < std::ssize(force); ++i) {
    const double past = static_cast<double>(i - window_end) / static_cast<double>(window_margin);
    double weight = i < quiet || past >= 1.0 ? 0.0 : 1.0;
    if (weight > 0.0 && past > 0.0) weight = 0.5 * (1.0 + std::cos(std::numbers::pi * past));
    double& value = force[static_cast<std::size_t>(i)];
    value = weight * (value - offset);
  }
}

std::optional<HitBlocks> cut_out(recording::Reader& reader, const Blow& blow, const Channels& channels,
                                 std::int64_t before, std::int64_t length) {
  std::vector<std::size_t> all = channels.responses;
  if (channels.force) all.push_back(*channels.force);
  auto samples = read_frames(reader, {blow.hit.first_frame - before, blow.hit.first_frame + length}, all);
  if (!samples) return std::nullopt;
  HitBlocks blocks;
  blocks.time_s = blow.hit.time_s;
  blocks.rate_hz = reader.recording().rate_hz;
  blocks.onset = static_cast<std::size_t>(before);
  blocks.contact_end = static_cast<std::size_t>(before + blow.contact_end - blow.hit.first_frame);
  if (channels.force) {
    blocks.force = std::move(samples->back());
    samples->pop_back();
    window_force(blocks.force, before, before + blow.window_end - blow.hit.first_frame);
  }
  blocks.responses = std::move(*samples);
  for (auto& response : blocks.responses) subtract_mean(response);
  return blocks;
}

base::Code code_of(HitVerdict verdict) {
  switch (verdict) {
    case HitVerdict::double_hit:
      return base::Code::double_hit;
    case HitVerdict::weak_hit:
      return base::Code::weak_hit;
    case HitVerdict::overload:
      return base::Code::overload;
    default:
      return base::Code::short_decay;
  }
}

std::vector<base::Finding> findings_of(std::span<const Hit> hits) {
  std::vector<base::Finding> findings;
  for (const HitVerdict verdict : {HitVerdict::double_hit, HitVerdict::weak_hit, HitVerdict::overload,
                                   HitVerdict::too_close, HitVerdict::cut_off}) {
    base::Finding finding{code_of(verdict), {}, {}, {}, {}, base::Strength::strong, {}};
    for (const Hit& hit : hits) {
      if (hit.verdict != verdict) continue;
      if (!finding.from_s) finding.from_s = hit.time_s;
      finding.to_s = hit.time_s + hit.contact_s.value_or(0.0);
      finding.evidence.push_back("at " + base::rounded(hit.time_s, 4) + " s " + hit.reason);
    }
    if (finding.evidence.empty()) continue;
    const std::size_t count = finding.evidence.size();
    finding.text = std::to_string(count) + (count == 1 ? " blow was" : " blows were") +
                   " not used: " + finding.evidence.front() + (count > 1 ? ", and others" : "");
    findings.push_back(std::move(finding));
  }
  return findings;
}

}  // namespace

std::string_view name(HitVerdict verdict) {
  switch (verdict) {
    case HitVerdict::used:
      return "used";
    case HitVerdict::double_hit:
      return "double hit";
    case HitVerdict::weak_hit:
      return "weak hit";
    case HitVerdict::overload:
      return "overload";
    case HitVerdict::too_close:
      return "too close to the next";
    case HitVerdict::cut_off:
      return "cut off";
  }
  return "";
}

HitSearch find_hits(recording::Reader& reader, const HitOptions& options, const base::Context& context) {
  const recording::Recording& recording = reader.recording();
  const Channels channels = chosen_channels(recording, options);
  const FrameRange range = options.range.size() > 0 ? options.range : FrameRange{0, recording.frames};

  std::vector<Blow> blows = channels.force ? blows_of_force(reader, *channels.force, range, context)
                                           : blows_of_responses(reader, channels.responses, range, context);
  // A ring-down needs nothing of what was before it.
  const std::int64_t before = channels.force ? frames_before(recording.rate_hz) : 0;
  find_room(recording, range, before, blows);
  refuse_overloads(reader, channels.responses, blows);
  refuse_weak(blows);
  std::int64_t decayed = 0;
  for (const Blow& blow : blows) {
    context.check_stop();
    if (blow.hit.used) {
      decayed = std::max(decayed, frames_to_decay(reader, blow, channels.responses, options.max_block_s));
    }
  }
  const std::int64_t length = common_length(blows, recording.rate_hz, options.max_block_s, decayed);

  HitSearch search;
  for (Blow& blow : blows) {
    context.check_stop();
    if (blow.hit.used) {
      auto blocks = cut_out(reader, blow, channels, before, length);
      if (blocks)
        search.blocks.push_back(std::move(*blocks));
      else
        blow.refuse(HitVerdict::cut_off, "samples after it are missing");
    }
    search.hits.push_back(blow.hit);
  }
  search.findings = findings_of(search.hits);
  for (const std::size_t c : channels.responses) {
    const recording::Channel& channel = recording.channels[c];
    search.responses.push_back({channel.name, channel.point, channel.unit.quantity, channel.factor_u});
  }
  if (channels.force) {
    search.force_point = recording.channels[*channels.force].point;
    search.force_factor_u = recording.channels[*channels.force].factor_u;
  }
  return search;
}

}  // namespace stillmass::modal
