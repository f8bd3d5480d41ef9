#include "survey/duty.hpp"

#include <algorithm>
#include <cmath>
#include <iterator>
#include <map>
#include <utility>

namespace stillmass::survey {
namespace {

bool is_duty(const SurveyRecording& recording) {
  return recording.kind == Kind::steady && recording.stage == Stage::before && recording.running;
}

std::optional<rotation::SynchronousSettings> synchronous_settings(const SurveyRecording& recording,
                                                                  const recording::Reader& reader) {
  const auto& channels = reader.recording().channels;
  if (std::none_of(channels.begin(), channels.end(),
                   [](const auto& each) { return each.role == recording::Role::tacho; })) {
    return {};
  }
  rotation::SynchronousSettings settings;
  settings.tacho.pulses_per_turn = recording.pulses_per_turn;
  settings.tacho.edge = recording.falling_edge ? rotation::Edge::falling : rotation::Edge::rising;
  if (recording.part_s) settings.time_s = recording.part_s;
  return settings;
}

std::vector<std::string> points_of(const SurveyRecording& recording) {
  std::vector<std::string> points;
  for (const recording::ChannelSetting& channel : recording.open.channels) {
    if (channel.role.value_or(recording::Role::vibration) != recording::Role::vibration || channel.point.empty())
      continue;
    points.push_back(channel.point);
  }
  std::sort(points.begin(), points.end());
  return points;
}

// The point that stayed while sensors were moved: the one that all steady recordings with more than one share, where
// they do not all have the same points. Empty: there is none.
std::string common_reference(const Survey& survey) {
  std::vector<std::string> common;
  bool is_first = true;
  bool differ = false;
  for (const SurveyRecording& recording : survey.recordings) {
    if (!is_duty(recording)) continue;
    const std::vector<std::string> points = points_of(recording);
    if (points.size() < 2) continue;
    if (is_first) {
      common = points;
    } else {
      std::vector<std::string> both;
      std::set_intersection(common.begin(), common.end(), points.begin(), points.end(), std::back_inserter(both));
      differ = differ || both.size() < points.size() || both.size() < common.size();
      common = both;
    }
    is_first = false;
  }
  return differ && !common.empty() ? common.front() : std::string();
}

// That point where the recording has it beside another channel of motion, else none.
std::string reference_in(const recording::Reader& reader, const std::string& point) {
  std::size_t moving = 0;
  bool is_there = false;
  for (const recording::Channel& channel : reader.recording().channels) {
    if (channel.role != recording::Role::vibration || !base::is_motion(channel.unit.quantity)) continue;
    ++moving;
    is_there = is_there || channel.point == point;
  }
  return moving > 1 && is_there ? point : std::string();
}

// The single channels of several recordings at one order of the speed.
std::vector<step::OperatingDeflection> roved_without_reference(
    const std::vector<const step::SpectrumResult*>& recordings) {
  std::map<double, std::pair<std::string, std::vector<spectral::RovedLevel>>> by_order;
  for (const step::SpectrumResult* spectra : recordings) {
    for (const step::ChannelSpectrum& channel : spectra->channels) {
      if (!base::is_motion(channel.measured.quantity)) continue;
      std::map<double, bool> taken;
      for (const step::SpectralPeak& peak : channel.velocity_peaks) {
        if (!peak.cause.forcing || peak.in_background()) continue;
        const machine::Forcing& forcing = spectra->forcing[*peak.cause.forcing];
        if (!forcing.order || std::exchange(taken[*forcing.order], true)) continue;
        auto& [name, levels] = by_order[*forcing.order];
        name = forcing.name;
        const std::string& point = channel.channel.point.empty() ? channel.channel.name : channel.channel.point;
        levels.push_back({point, peak.tone.amplitude_rms, peak.tone.frequency});
      }
    }
  }
  std::vector<step::OperatingDeflection> out;
  for (const auto& [order, named] : by_order) {
    if (named.second.size() < 2) continue;
    const auto shape = spectral::magnitudes_only(named.second);
    if (shape) out.push_back({named.first, order, *shape});
  }
  return out;
}

std::vector<step::OperatingDeflection> roved_with_reference(
    const std::vector<const step::SpectrumResult*>& recordings) {
  std::map<double, std::pair<std::string, std::vector<spectral::DeflectionShape>>> by_order;
  for (const step::SpectrumResult* spectra : recordings) {
    for (const step::OperatingDeflection& each : spectra->shapes) {
      if (!each.order) continue;
      auto& [name, of_order] = by_order[*each.order];
      name = each.name;
      of_order.push_back(each.shape);
    }
  }
  std::vector<step::OperatingDeflection> out;
  for (const auto& [order, named] : by_order) {
    if (named.second.size() < 2) continue;
    const auto shape = spectral::joined(named.second);
    if (shape) out.push_back({named.first, order, *shape});
  }
  return out;
}

}  // namespace

step::Part part_of(const SurveyRecording& recording) {
  if (!recording.part_s) return {};
  return {recording.part_s->lo, recording.part_s->hi};
}

const SurveyRecording* background_of(const Survey& survey, Stage stage) {
  const SurveyRecording* any = nullptr;
  for (const SurveyRecording& each : survey.recordings) {
    if (each.kind != Kind::background) continue;
    if (each.stage == stage) return &each;
    if (any == nullptr) any = &each;
  }
  return any;
}

step::SpectrumResult steady_spectrum(const SurveyResult& result, std::size_t recording, const Readers& readers,
                                     const base::Context& context) {
  const Survey& survey = result.survey;
  const SurveyRecording& which = survey.recordings[recording];
  step::SpectrumRequest request;
  request.part = part_of(which);
  request.site = site_of(survey);
  request.speed_hz = which.speed_hz;
  request.modes = result.modes;
  request.synchronous = synchronous_settings(which, *readers[recording]);
  request.reference = reference_in(*readers[recording], common_reference(survey));
  if (const SurveyRecording* stopped = background_of(survey, which.stage)) {
    const auto position = static_cast<std::size_t>(stopped - survey.recordings.data());
    request.background = {readers[position].get(), part_of(*stopped)};
  }
  for (const auto& [index, check] : result.quality) {
    if (index != recording) continue;
    for (const step::ChannelCheck& channel : check.channels) {
      if (channel.verdict == step::Verdict::unusable) request.unusable.push_back(channel.channel.name);
    }
  }
  return step::spectrum(*readers[recording], request, context);
}

const step::SpectrumResult* duty(const SurveyResult& result) {
  const step::SpectrumResult* first = nullptr;
  for (const auto& [index, spectra] : result.spectra) {
    if (!is_duty(result.survey.recordings[index])) continue;
    if (spectra.speed) return &spectra;
    if (first == nullptr) first = &spectra;
  }
  return first;
}

std::vector<Of<step::OtherTests::Cut>> power_cuts(const SurveyResult& result, const Readers& readers,
                                                  const base::Context& context) {
  std::vector<Of<step::OtherTests::Cut>> out;
  const machine::Machine& machine = result.survey.machine;
  if (machine.supply != machine::Supply::line || !machine.line_frequency_hz) return out;
  for (std::size_t i = 0; i < readers.size(); ++i) {
    const SurveyRecording& recording = result.survey.recordings[i];
    if (recording.kind != Kind::coastdown || recording.stage != Stage::before) continue;
    const auto run =
        std::find_if(result.runups.begin(), result.runups.end(), [&](const auto& each) { return each.recording == i; });
    const rotation::SpeedCurve* curve =
        run != result.runups.end() && run->result.runup ? &run->result.runup->speed : nullptr;
    const auto& channels = readers[i]->recording().channels;
    for (std::size_t c = 0; c < channels.size(); ++c) {
      if (channels[c].role != recording::Role::vibration) continue;
      rotation::PowerCutOptions options;
      options.channel = c;
      options.electrical_hz = 2.0 * *machine.line_frequency_hz;
      options.time_s = recording.part_s;
      if (const step::SpectrumResult* spectra = duty(result); spectra != nullptr && spectra->speed) {
        options.speed_hz = spectra->speed->value;
      }
      if (options.electrical_hz > 0.4 * readers[i]->recording().rate_hz) continue;
      auto cut = rotation::power_cut(*readers[i], options, curve, context);
      if (cut) out.push_back({i, {channels[c].name, std::move(*cut)}});
    }
  }
  return out;
}

std::vector<step::OperatingDeflection> shapes(const SurveyResult& result) {
  std::vector<const step::SpectrumResult*> with_shapes;
  std::vector<const step::SpectrumResult*> alone;
  for (const auto& [index, spectra] : result.spectra) {
    if (!is_duty(result.survey.recordings[index])) continue;
    (spectra.shapes.empty() ? alone : with_shapes).push_back(&spectra);
  }
  if (with_shapes.size() > 1) return roved_with_reference(with_shapes);
  if (with_shapes.empty() && alone.size() > 1) return roved_without_reference(alone);
  return {};
}

std::vector<base::Finding> diagnosis(const SurveyResult& result) {
  step::OtherTests others;
  for (const auto& [index, run] : result.runups) {
    if (result.survey.recordings[index].stage == Stage::before && run.runup && others.run == nullptr) others.run = &run;
  }
  for (const auto& [index, cut] : result.power_cuts) others.power_cuts.push_back(cut);

  std::vector<const step::SpectrumResult*> loudest_first;
  for (const auto& [index, spectra] : result.spectra) {
    if (is_duty(result.survey.recordings[index])) loudest_first.push_back(&spectra);
  }
  const auto level_of = [](const step::SpectrumResult& spectra) {
    double most = 0.0;
    for (const auto& channel : spectra.channels) {
      if (channel.severity_velocity) most = std::max(most, channel.severity_velocity->value);
    }
    return most;
  };
  std::stable_sort(loudest_first.begin(), loudest_first.end(),
                   [&](const auto* a, const auto* b) { return level_of(*a) > level_of(*b); });

  const auto about = [](const base::Finding& each) { return each.text.substr(0, each.text.find(" at ")); };
  std::vector<base::Finding> all;
  for (const step::SpectrumResult* spectra : loudest_first) {
    for (base::Finding& each : step::diagnosed(*spectra, site_of(result.survey), result.modes, others)) {
      const auto same = std::find_if(all.begin(), all.end(), [&](const base::Finding& known) {
        return known.code == each.code && about(known) == about(each);
      });
      if (same == all.end()) {
        all.push_back(std::move(each));
      } else if (each.strength > same->strength) {
        *same = std::move(each);
      }
    }
  }
  std::stable_sort(all.begin(), all.end(), [](const auto& a, const auto& b) { return a.strength > b.strength; });
  return all;
}

std::vector<const step::ChannelSpectrum*> loudest(const SurveyResult& result, Stage stage) {
  std::vector<const step::ChannelSpectrum*> out;
  const auto place = [](const step::ChannelSpectrum& each) {
    return each.channel.point.empty() ? each.channel.name : each.channel.point;
  };
  for (const auto& [index, spectra] : result.spectra) {
    const SurveyRecording& recording = result.survey.recordings[index];
    if (recording.stage != stage || !recording.running) continue;
    for (const step::ChannelSpectrum& channel : spectra.channels) {
      if (!channel.severity_velocity) continue;
      const auto known =
          std::find_if(out.begin(), out.end(), [&](const auto* each) { return place(*each) == place(channel); });
      if (known == out.end()) {
        out.push_back(&channel);
      } else if ((*known)->severity_velocity->value < channel.severity_velocity->value) {
        *known = &channel;
      }
    }
  }
  return out;
}

}  // namespace stillmass::survey
