#include "step/channel_checks.hpp"

#include <algorithm>
#include <cmath>
#include <optional>

#include <fmt/format.h>

#include "stillmass/base/number.hpp"
#include "stillmass/numeric/statistics.hpp"
#include "stillmass/rotation/tacho.hpp"
#include "stillmass/spectral/level.hpp"
#include "stillmass/spectral/quantity.hpp"

namespace stillmass::step {
namespace {

using base::Code;
using base::Finding;
using base::Quantity;
using base::Strength;
using recording::Role;

constexpr double tacho_seconds = 600.0;       // looked at, so that memory does not grow with the recording
constexpr double irregular_pulses = 0.2;      // missing and additional ones over those kept: no tacho
constexpr double same_lines = 1e-6;           // spread of the ratio of two spectra: the same samples, scaled
constexpr double one_sensor_lines = 0.003;    // the same with the noise of two inputs
constexpr double line_range = 1e-6;           // lines that strong, of the strongest, are compared
constexpr double gravity_tolerance = 0.02;    // of the sensor's offset
constexpr double most_acceleration = 5000.0;  // m/s2 peak: ten times the range of the common sensor
constexpr double least_acceleration = 2e-5;   // m/s2 r.m.s.: below the noise of any common sensor
constexpr double most_velocity = 0.3;         // m/s r.m.s.: thirty times the worst zone boundary
constexpr double most_displacement = 0.02;    // m peak

recording::FrameRange longest_part(const recording::Recording& recording, recording::FrameRange range) {
  recording::FrameRange longest;
  for (const recording::Segment& segment : recording.segments) {
    const recording::FrameRange part{std::max(range.begin, segment.first_frame),
                                     std::min(range.end, segment.first_frame + segment.frames)};
    if (part.size() > longest.size()) longest = part;
  }
  const auto most = static_cast<std::int64_t>(tacho_seconds * recording.rate_hz);
  longest.end = std::min(longest.end, longest.begin + most);
  return longest;
}

void judge_tacho(ChannelCheck& tacho, std::size_t index, const recording::Reader& reader, recording::FrameRange part,
                 const CheckRequest& request, const base::Context& context) {
  rotation::TachoOptions options;
  options.channel = index;
  options.pulses_per_turn = request.pulses_per_turn;
  options.edge = request.falling_edge ? rotation::Edge::falling : rotation::Edge::rising;
  const auto pulses = rotation::find_pulses(reader, part, options, context);
  if (!pulses) {
    tacho.findings.push_back({Code::no_pulses, pulses.refusal().seen, tacho.channel.name});
    return;
  }
  const std::size_t wrong = pulses->missing + pulses->extra;
  if (static_cast<double>(wrong) > irregular_pulses * static_cast<double>(pulses->time_s.size())) {
    tacho.findings.push_back({Code::no_pulses,
                              fmt::format("of {} pulses {} come where none belongs or fail to come",
                                          pulses->time_s.size() + pulses->extra, wrong),
                              tacho.channel.name});
    return;
  }
  tacho.findings.insert(tacho.findings.end(), pulses->findings.begin(), pulses->findings.end());
}

/// Median and spread (scaled MAD) of the ratio of two amplitude spectra over their strong lines.
struct LineRatio {
  double median = 0.0;
  double spread = 0.0;  ///< relative
};

std::optional<LineRatio> line_ratio(const spectral::Spectrum& a, const spectral::Spectrum& b) {
  if (a.density.empty() || a.density.size() != b.density.size() || a.quantity != b.quantity) return std::nullopt;
  const double strongest = *std::max_element(a.density.begin() + 1, a.density.end());
  std::vector<double> ratios;
  for (std::size_t k = 1; k < a.density.size(); ++k) {
    if (a.density[k] > line_range * strongest) ratios.push_back(std::sqrt(b.density[k] / a.density[k]));
  }
  constexpr std::size_t enough = 30;
  if (ratios.size() < enough) return std::nullopt;
  const double median = numeric::median(ratios);
  if (!(median > 0.0)) return std::nullopt;
  return LineRatio{median, numeric::mad_scale(std::move(ratios)) / median};
}

std::optional<Finding> likeness(const ChannelCheck& a, const ChannelCheck& b, const spectral::Spectrum& sa,
                                const spectral::Spectrum& sb) {
  if (!a.quality.rms || !b.quality.rms || !(*a.quality.rms > 0.0)) return std::nullopt;
  const auto finding = [&](Strength strength, const std::string& text) {
    return Finding{Code::identical_channels,
                   "channels '" + a.channel.name + "' and '" + b.channel.name + "' " + text,
                   b.channel.name,
                   {},
                   {},
                   strength};
  };
  if (a.quality.rms == b.quality.rms && a.quality.peak == b.quality.peak && sa.density == sb.density) {
    return finding(Strength::strong, "carry the same samples");
  }
  const auto ratio = line_ratio(sa, sb);
  if (!ratio || ratio->spread > one_sensor_lines) return std::nullopt;
  const std::string factor = fmt::format("with a factor of {}", base::rounded(ratio->median, 4));
  if (ratio->spread < same_lines) return finding(Strength::strong, "carry the same samples " + factor);
  return finding(Strength::fair,
                 fmt::format("carry the same signal {}: their lines agree to {:.2g} %", factor, 100.0 * ratio->spread));
}

void suspect(ChannelCheck& check, Strength strength, std::string text) {
  check.findings.push_back({Code::unit_suspected, std::move(text), check.channel.name, {}, {}, strength});
}

// A sensor that measures down to 0 Hz shows the earth's acceleration, and so the unit.
void look_at_gravity(ChannelCheck& check) {
  const double mean = std::abs(check.quality.mean.value_or(0.0));
  if (mean < check.quality.rms.value_or(0.0)) return;
  const auto is = [&](double value) { return std::abs(mean / value - 1.0) < gravity_tolerance; };
  if (check.channel.unit.name == "m/s2" && is(1.0)) {
    suspect(
        check, Strength::weak,
        fmt::format("the mean is {} m/s2: at 1.0 g that would be the earth's acceleration, so the numbers may be in g",
                    base::rounded(mean)));
  }
  if (check.channel.unit.name == "g" && is(base::standard_gravity * base::standard_gravity)) {
    suspect(check, Strength::fair,
            fmt::format("the mean is {} g, which in m/s2 would be the earth's acceleration: the numbers may be in m/s2",
                        base::rounded(mean / base::standard_gravity)));
  }
}

void look_at_level(ChannelCheck& check, const spectral::Spectrum* spectrum) {
  const double peak = check.quality.peak.value_or(0.0);
  const double rms = check.quality.rms.value_or(0.0);
  const auto show = [&](double value) {
    return fmt::format("{} {}", base::rounded(value / check.channel.unit.to_si), check.channel.unit.name);
  };
  switch (check.channel.unit.quantity) {
    case Quantity::acceleration: {
      if (peak > most_acceleration) {
        suspect(check, Strength::fair,
                fmt::format("a peak of {} is ten times what the common sensor measures: a scale is missing or wrong",
                            show(peak)));
        return;
      }
      if (rms < least_acceleration) {
        suspect(
            check, Strength::fair,
            fmt::format("{} r.m.s. is below the noise of any common sensor: a scale is missing or wrong", show(rms)));
        return;
      }
      if (spectrum == nullptr) return;
      const base::Interval band{10.0, std::min(1000.0, 0.4 * spectrum->rate_hz)};
      if (band.lo < 4.0 * spectrum->line_hz || band.hi <= 2.0 * band.lo) return;
      const double velocity = spectral::band_rms(spectral::as_quantity(*spectrum, Quantity::velocity), band).value;
      if (velocity > most_velocity) {
        suspect(check, Strength::fair,
                fmt::format("{} mm/s r.m.s. from {:.0f} to {:.0f} Hz would shake any machine to pieces: a factor of "
                            "9.81 or 1000 too much",
                            base::rounded(1000.0 * velocity), band.lo, band.hi));
      }
      return;
    }
    case Quantity::velocity:
      if (rms > most_velocity) {
        suspect(check, Strength::fair,
                fmt::format("{} r.m.s. would shake any machine to pieces: mm/s taken for m/s, or a scale is missing",
                            show(rms)));
      }
      return;
    case Quantity::displacement:
      if (peak > most_displacement) {
        suspect(check, Strength::fair,
                fmt::format("a displacement of {} is beyond any machine: µm taken for mm, or a scale is missing",
                            show(peak)));
      }
      return;
    default:
      return;
  }
}

}  // namespace

void judge_tachos(std::span<ChannelCheck> channels, const recording::Reader& reader, recording::FrameRange range,
                  const CheckRequest& request, const base::Context& context) {
  const recording::FrameRange part = longest_part(reader.recording(), range);
  std::vector<ChannelCheck*> lonely;  // tachos without pulses
  for (std::size_t c = 0; c < channels.size(); ++c) {
    ChannelCheck& each = channels[c];
    if (each.channel.role != Role::tacho) continue;
    const bool is_dead = std::any_of(each.findings.begin(), each.findings.end(),
                                     [](const Finding& f) { return f.code == Code::no_signal; });
    if (!is_dead) judge_tacho(each, c, reader, part, request, context);
    if (!each.quality.looks_like_pulses) lonely.push_back(&each);
  }
  for (ChannelCheck& each : channels) {
    if (each.channel.role != Role::vibration || !each.quality.looks_like_pulses) continue;
    std::string text = "'" + each.channel.name + "' is taken as vibration and jumps between two levels like a tacho";
    if (!lonely.empty()) text += ", while the tacho channel '" + lonely.front()->channel.name + "' does not";
    for (ChannelCheck* tacho : lonely) {
      tacho->findings.push_back({Code::channels_swapped,
                                 "'" + tacho->channel.name + "' does not look like a tacho, but '" + each.channel.name +
                                     "', taken as vibration, does",
                                 tacho->channel.name});
    }
    each.findings.push_back({Code::channels_swapped,
                             std::move(text),
                             each.channel.name,
                             {},
                             {},
                             lonely.empty() ? Strength::fair : Strength::strong});
  }
}

void judge_likeness(std::span<ChannelCheck> channels, std::span<const spectral::Spectrum> spectra) {
  if (spectra.size() != channels.size()) return;
  for (std::size_t c = 0; c < channels.size(); ++c) {
    for (std::size_t other = 0; other < c; ++other) {
      auto finding = likeness(channels[other], channels[c], spectra[other], spectra[c]);
      if (finding) channels[c].findings.push_back(std::move(*finding));
    }
  }
}

void judge_units(std::span<ChannelCheck> channels, std::span<const spectral::Spectrum> spectra) {
  for (std::size_t c = 0; c < channels.size(); ++c) {
    ChannelCheck& each = channels[c];
    const bool is_dead = std::any_of(each.findings.begin(), each.findings.end(),
                                     [](const Finding& f) { return f.code == Code::no_signal; });
    if (each.channel.role != Role::vibration || is_dead) continue;
    const bool has_spectrum = c < spectra.size() && !spectra[c].density.empty();
    look_at_gravity(each);
    look_at_level(each, has_spectrum ? &spectra[c] : nullptr);
  }
}

}  // namespace stillmass::step
