#include "stillmass/survey/calibrations.hpp"

#include <algorithm>
#include <cmath>

#include <fmt/format.h>

#include "stillmass/base/number.hpp"
#include "stillmass/modal/hits.hpp"
#include "stillmass/recording/sample_quality.hpp"
#include "stillmass/step/part.hpp"

namespace stillmass::survey {
namespace {

using base::Quantity;
using recording::ChannelSetting;
using recording::Correction;
using recording::Role;

// Standard uncertainty of a factor that no calibration covers, relative (common practice).
constexpr double assumed_u = 0.02;

const ChannelSetting* setting_of(const SurveyRecording& recording, int index) {
  for (const ChannelSetting& setting : recording.open.channels) {
    if (setting.index == index) return &setting;
  }
  return nullptr;
}

bool states_scale(const ChannelSetting* setting, const recording::Channel& channel, const recording::Recording& file) {
  if (setting != nullptr && (setting->scale || setting->sensitivity_mv_per_unit)) return true;
  return channel.unit_known && file.format.starts_with("CSV");  // a text file's numbers carry their unit
}

bool is_recorder_unit(const recording::Channel& channel) {
  return channel.unit.quantity == Quantity::voltage || channel.unit.quantity == Quantity::ratio;
}

bool same_sensor(const ChannelSetting& a, const ChannelSetting& b) {
  return a.sensor.empty() && b.sensor.empty() ? a.index == b.index : a.sensor == b.sensor;
}

// A correction is that of a sensor with its stated factor; with another range of the recorder the sensitivity stays.
bool same_factor(const ChannelSetting& a, const ChannelSetting& b) {
  const auto unit = [](const ChannelSetting& s) { return s.unit ? s.unit->name : std::string_view(); };
  if (unit(a) != unit(b)) return false;
  if (a.sensitivity_mv_per_unit || b.sensitivity_mv_per_unit) {
    return a.sensitivity_mv_per_unit == b.sensitivity_mv_per_unit;
  }
  return a.scale == b.scale;
}

// A level that the recorder has cut off is none.
bool is_cut_off(const recording::ChannelQuality& quality) {
  return std::any_of(quality.findings.begin(), quality.findings.end(), [](const base::Finding& each) {
    return each.code == base::Code::clipped || each.code == base::Code::overload;
  });
}

std::string percent(double relative) { return base::rounded(100.0 * relative, 2) + " %"; }

class Calibrator {
 public:
  Calibrator(Survey& survey, const base::Context& context) : survey_(survey), context_(context) {}

  Calibrations run() {
    for (std::size_t i = 0; i < survey_.recordings.size(); ++i) {
      if (survey_.recordings[i].kind == Kind::calibration) on_calibrator(i);
    }
    for (std::size_t i = 0; i < survey_.recordings.size(); ++i) {
      if (survey_.recordings[i].kind == Kind::ratio_calibration) on_mass(i);
    }
    return std::move(out_);
  }

 private:
  recording::FrameRange part(const recording::Reader& reader, const SurveyRecording& of) const {
    return step::frames_of(reader.recording(), of.part_s ? step::Part{of.part_s->lo, of.part_s->hi} : step::Part{});
  }

  std::string file(std::size_t i) const { return survey_.recordings[i].written; }

  // Only the channels that the survey file lists are on the calibrator; of several the one that shows its tone.
  void on_calibrator(std::size_t i) {
    const SurveyRecording& of = survey_.recordings[i];
    const auto reader = recording::open(of.file, of.open, context_);
    const recording::Recording& recording = reader->recording();
    const recording::FrameRange range = part(*reader, of);
    const auto quality = recording::sample_quality(*reader, range, context_);
    std::vector<base::Refusal> refusals;
    bool found = false;
    for (std::size_t c = 0; c < recording.channels.size(); ++c) {
      const recording::Channel& channel = recording.channels[c];
      if (channel.role != Role::vibration) continue;
      const ChannelSetting* setting = setting_of(of, channel.index);
      if (setting == nullptr && recording.channels.size() > 1 && !of.open.channels.empty()) continue;
      if (!base::is_motion(channel.unit.quantity) && !is_recorder_unit(channel)) continue;
      if (is_cut_off(quality[c])) {
        refusals.push_back({"no-calibrator-tone", "'" + channel.name + "' is cut off at the end of its range",
                            "record the calibrator again with a larger range"});
        continue;
      }
      const auto answer = spectral::calibrate(*reader, range, c, of.calibrator, context_);
      if (!answer) {
        refusals.push_back(answer.refusal());
        continue;
      }
      found = true;
      take(i, channel, *answer, states_scale(setting, channel, recording) && !is_recorder_unit(channel),
           is_recorder_unit(channel) ? std::optional(base::si_unit(of.calibrator.quantity)) : std::nullopt);
    }
    if (found) return;
    if (refusals.empty()) refusals.push_back({"no-calibrator-tone", "no vibration channel in '" + file(i) + "'", ""});
    for (base::Refusal& refusal : refusals) {
      refusal.seen = file(i) + ": " + refusal.seen;
      out_.refusals.push_back(std::move(refusal));
    }
  }

  void take(std::size_t i, const recording::Channel& channel, const spectral::Calibration& result, bool is_stated,
            std::optional<base::Unit> unit) {
    ChannelCalibration& one = add(i, channel, result);
    one.applied = !is_stated || result.suspicion.empty();
    const double factor = result.correction.value;
    const std::string level = base::rounded(result.measured.value, 4) + " " +
                              std::string(base::si_unit(result.measured.quantity).name) + " r.m.s. at " +
                              base::rounded(result.frequency_hz, 4) + " Hz";
    if (!one.applied) {
      one.text = fmt::format("{}: '{}' shows {}, {}", file(i), channel.name, level, result.suspicion);
      out_.findings.push_back({base::Code::calibration_off,
                               one.text + "; its factor was left as stated (" + base::rounded(factor, 4) +
                                   " times it would fit), with an uncertainty as large as that",
                               channel.name});
      apply(i, channel.index, doubted(result));
      return;
    }
    const std::string u = percent(*result.correction.relative());
    const std::string does = unit ? fmt::format("1 {} is {} {} +- {}", channel.unit.name,
                                                base::rounded(factor * channel.unit.to_si, 4), unit->name, u)
                                  : fmt::format("its factor is multiplied by {} +- {}", base::rounded(factor, 4), u);
    one.text = fmt::format("{}: '{}' shows {}; {}", file(i), channel.name, level, does);
    if (!apply(i, channel.index, {factor, *result.correction.relative(), unit})) say_unused(one);
  }

  // What a calibration contradicts is as uncertain as the contradiction is large.
  static Correction doubted(const spectral::Calibration& result) {
    const double factor = result.correction.value;
    return {1.0, std::max(std::abs(factor - 1.0), std::abs(1.0 / factor - 1.0)), {}};
  }

  void say_unused(ChannelCalibration& one) {
    one.applied = false;
    one.text += "; no other recording has this sensor";
    out_.findings.push_back({base::Code::calibration_off,
                             file(one.recording) + ": no other recording has the sensor of channel " +
                                 std::to_string(one.index) + (one.sensor.empty() ? "" : " ('" + one.sensor + "')") +
                                 "; nothing is corrected by it",
                             one.channel,
                             {},
                             {},
                             base::Strength::fair});
  }

  ChannelCalibration& add(std::size_t i, const recording::Channel& channel, const spectral::Calibration& result) {
    ChannelCalibration& one = out_.channels.emplace_back();
    one.recording = i;
    one.index = channel.index;
    one.channel = channel.name;
    if (const ChannelSetting* setting = setting_of(survey_.recordings[i], channel.index)) one.sensor = setting->sensor;
    one.result = result;
    return one;
  }

  // To the same sensor in every other recording; false where there is none.
  bool apply(std::size_t from, int index, const Correction& correction) {
    ChannelSetting source;
    source.index = index;
    if (const ChannelSetting* setting = setting_of(survey_.recordings[from], index)) source = *setting;
    bool applied = false;
    for (std::size_t i = 0; i < survey_.recordings.size(); ++i) {
      SurveyRecording& target = survey_.recordings[i];
      if (i == from || target.kind == Kind::calibration) continue;
      for (ChannelSetting& setting : target.open.channels) {
        if (setting.role == Role::tacho || !same_sensor(source, setting)) continue;
        applied = true;  // or said below
        if (!same_factor(source, setting)) {
          out_.findings.push_back({base::Code::calibration_off,
                                   fmt::format("{}: channel {} states another unit, scale or sensitivity than in the "
                                               "calibration {}; it was left as stated",
                                               target.written, setting.index, file(from)),
                                   setting.name.value_or(""),
                                   {},
                                   {},
                                   base::Strength::fair});
          continue;
        }
        setting.correction = setting.correction ? joined(*setting.correction, correction, from, setting) : correction;
      }
    }
    return applied;
  }

  // Two calibrations of one sensor, say before and after the visit: their mean, and half their difference where that is
  // more than their uncertainty. They share the calibrator, so the mean is no surer than one of them.
  Correction joined(const Correction& first, const Correction& second, std::size_t from,
                    const ChannelSetting& setting) {
    Correction both = first;
    both.factor = 0.5 * (first.factor + second.factor);
    const double apart = std::abs(second.factor / first.factor - 1.0);
    both.relative_u = std::max({first.relative_u, second.relative_u, 0.5 * apart});
    if (apart > 2.0 * std::max(first.relative_u, second.relative_u)) {
      std::string text = fmt::format("{}: the calibrations of channel {} differ by {}; their mean is used", file(from),
                                     setting.index, percent(apart));
      const bool is_told = std::any_of(out_.findings.begin(), out_.findings.end(),
                                       [&](const base::Finding& each) { return each.text == text; });
      if (!is_told) {
        out_.findings.push_back(
            {base::Code::calibration_off, std::move(text), setting.name.value_or(""), {}, {}, base::Strength::fair});
      }
    }
    return both;
  }

  void on_mass(std::size_t i) {
    const SurveyRecording& of = survey_.recordings[i];
    const auto reader = recording::open(of.file, of.open, context_);
    const recording::Recording& recording = reader->recording();
    modal::HitOptions options;
    options.range = part(*reader, of);
    options.max_block_s = 1.0;  // a free mass does not ring
    const modal::HitSearch search = modal::find_hits(*reader, options, context_);
    const auto role_at = [&](Role role) {
      return std::find_if(recording.channels.begin(), recording.channels.end(),
                          [&](const recording::Channel& channel) { return channel.role == role; });
    };
    const auto force = role_at(Role::force);
    const auto response = role_at(Role::vibration);
    const auto refuse = [&](base::Refusal refusal) {
      refusal.seen = file(i) + ": " + refusal.seen;
      out_.refusals.push_back(std::move(refusal));
    };
    if (force == recording.channels.end() || response == recording.channels.end()) {
      return refuse({"no-level-accelerance", "it needs a force channel and a vibration channel",
                     "name them with role = \"force\" and a unit"});
    }
    if (search.blocks.empty()) {
      return refuse({"no-usable-hit", "no blow could be used", "strike five single clean blows"});
    }
    std::size_t shortest = search.blocks.front().force.size();
    for (const modal::HitBlocks& block : search.blocks) shortest = std::min(shortest, block.force.size());
    std::vector<spectral::HitBlock> blocks;
    for (const modal::HitBlocks& block : search.blocks) {
      blocks.push_back({std::span(block.force).first(shortest), std::span(block.responses.front()).first(shortest)});
    }
    spectral::HitWindows windows;
    windows.pre_trigger = search.blocks.front().onset;
    const auto answer = spectral::calibrate_on_mass(blocks, recording.rate_hz, *of.hung_mass, windows);
    if (!answer) return refuse(answer.refusal());

    ChannelCalibration& one = add(i, *force, *answer);
    const double ratio = answer->measured.value;
    const double relative = *answer->correction.relative();
    one.applied = answer->suspicion.empty();
    const std::string seen = fmt::format("{}: mass times accelerance is {} from {:.0f} to {:.0f} Hz", file(i),
                                         base::rounded(ratio, 4), answer->band_hz.lo, answer->band_hz.hi);
    if (!one.applied) {
      one.text = seen + ", " + answer->suspicion;
      out_.findings.push_back({base::Code::calibration_off,
                               one.text + "; both were left as stated, with an uncertainty as large as that",
                               force->name});
      apply(i, force->index, doubted(*answer));
      return;
    }
    one.text = fmt::format("{}; the hammer's factor is multiplied by {} +- {}", seen, base::rounded(ratio, 4),
                           percent(relative));
    if (answer->opposed) {
      one.text += "; the response opposes the blow";
      out_.findings.push_back({base::Code::calibration_off,
                               file(i) +
                                   ": the response opposes the blow: the polarity of hammer or sensor is inverted, "
                                   "or the mass was struck from the sensor's side",
                               force->name,
                               {},
                               {},
                               base::Strength::fair});
    }
    const int response_index = response->index;
    const std::optional<double> response_u = response->factor_u;
    if (!apply(i, force->index, {ratio, relative, {}})) return say_unused(one);
    share_uncertainty(i, response_index, response_u.value_or(assumed_u));
  }

  // A ratio holds for hammer and sensor together: in hammer tests the sensor on the mass adds nothing to it, another
  // one adds its own uncertainty and that of the sensor on the mass.
  void share_uncertainty(std::size_t from, int response_index, double response_u) {
    ChannelSetting source;
    source.index = response_index;
    if (const ChannelSetting* setting = setting_of(survey_.recordings[from], response_index)) source = *setting;
    for (SurveyRecording& target : survey_.recordings) {
      if (target.kind != Kind::bump && target.kind != Kind::ringdown) continue;
      for (ChannelSetting& setting : target.open.channels) {
        if (setting.role == Role::tacho || setting.role == Role::force) continue;
        if (setting.unit && setting.unit->quantity == Quantity::force) continue;
        if (same_sensor(source, setting)) {
          setting.correction = Correction{setting.correction ? setting.correction->factor : 1.0, 0.0,
                                          setting.correction ? setting.correction->unit : std::nullopt};
        } else if (setting.correction) {  // without one the hammer test assumes its uncertainty, and says so
          setting.correction->relative_u = std::hypot(setting.correction->relative_u, response_u);
        }
      }
    }
  }

  Survey& survey_;
  const base::Context& context_;
  Calibrations out_;
};

}  // namespace

Calibrations apply_calibrations(Survey& survey, const base::Context& context) {
  return Calibrator(survey, context).run();
}

}  // namespace stillmass::survey
