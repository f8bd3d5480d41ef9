#include "stillmass/survey/survey.hpp"

#include <algorithm>
#include <cmath>
#include <map>
#include <memory>
#include <utility>

#include "stillmass/base/number.hpp"
#include "stillmass/modal/shape.hpp"
#include "stillmass/modal/state.hpp"

#include "survey/duty.hpp"
#include "survey/stages.hpp"

namespace stillmass::survey {
namespace {

using base::Estimate;
using base::Finding;
using base::Interval;
using base::Quantity;
using base::Refusal;

// Speed of a line-fed motor moves with the grid (50 Hz +- 0.2 %) and a little with load (common practice).
constexpr double line_speed_spread = 0.002;
// An absorber is for a mode whose natural frequency lies this near the forcing line (common practice).
constexpr double governs_within = 0.25;

// Progress of one step out of many.
base::Context part_of(const base::Context& context, std::size_t step, std::size_t steps) {
  base::Context part = context;
  if (context.progress) {
    part.progress = [progress = context.progress, step, steps](std::string_view what, double fraction) {
      progress(what, (static_cast<double>(step) + fraction) / static_cast<double>(steps));
    };
  }
  return part;
}

bool is_bump(const SurveyRecording& recording) {
  return (recording.kind == Kind::bump || recording.kind == Kind::ringdown) && recording.stage == Stage::before;
}

// Hammer tests of one set-up go together: the same channels. Those with an added mass come with the one without.
std::vector<step::BumpResult> all_bumps(const Survey& survey, const Readers& readers, const base::Context& context) {
  const auto setup = [](const recording::Reader& reader) {
    std::string key = base::shortest(reader.recording().rate_hz);
    for (const recording::Channel& channel : reader.recording().channels) {
      key += "|" + channel.name + "|" + std::string(name(channel.role));
    }
    return key;
  };
  std::map<std::string, std::pair<std::vector<recording::Reader*>, step::BumpRequest>> groups;
  std::vector<std::string> order;
  for (std::size_t i = 0; i < readers.size(); ++i) {
    const SurveyRecording& recording = survey.recordings[i];
    if (!is_bump(recording)) continue;
    const std::string key = setup(*readers[i]);
    if (!groups.contains(key)) order.push_back(key);
    auto& [plain, request] = groups[key];
    request.state = recording.running ? "running" : "stopped";
    if (recording.added_mass_kg) {
      request.added_masses.push_back({*recording.added_mass_kg, readers[i].get()});
    } else {
      plain.push_back(readers[i].get());
      request.part = part_of(recording);
    }
  }
  std::vector<step::BumpResult> results;
  for (const std::string& key : order) {
    const auto& [plain, request] = groups[key];
    if (!plain.empty()) results.push_back(step::bump(plain, request, context));
  }
  return results;
}

step::RunupResult speed_run(const SurveyRecording& recording, const recording::Reader& reader,
                            const std::vector<modal::Mode>& modes, const base::Context& context) {
  step::RunupRequest request;
  request.part = part_of(recording);
  request.pulses_per_turn = recording.pulses_per_turn;
  request.falling_edge = recording.falling_edge;
  request.modes = modes;
  return step::runup(reader, request, context);
}

void set_target(SurveyResult& result, const step::SpectrumResult* spectra) {
  for (const Limit& limit : result.survey.limits) {
    if (limit.target_m_s) result.target_m_s = limit.target_m_s;
  }
  if (result.target_m_s || spectra == nullptr) return;
  for (const step::ChannelSpectrum& channel : spectra->channels) {
    if (!channel.severity) continue;
    const double limit = channel.severity->limits.velocity[1];
    if (!result.target_m_s || limit < *result.target_m_s) result.target_m_s = limit;
    result.target_from_standard = true;
  }
}

// The mode with its modal mass carried to the site; nothing where the shape does not reach it.
std::optional<modal::Mode> mode_at(const modal::Mode& mode, const std::string& point) {
  if (mode.point == point) return mode;
  for (const modal::ShapeRatio& ratio : mode.shape) {
    if (ratio.point != point || ratio.ratio <= 0.0 || !mode.modal_mass) continue;
    modal::Mode carried = mode;
    carried.point = point;
    carried.modal_mass = modal::mass_at(*mode.modal_mass, {ratio.ratio, {}, {}, Quantity::ratio});
    return carried;
  }
  return {};
}

const step::ChannelSpectrum* channel_at(const step::SpectrumResult& spectra, const std::string& point) {
  const auto at = std::find_if(spectra.channels.begin(), spectra.channels.end(), [&](const auto& channel) {
    return channel.channel.point == point && channel.shown.quantity == Quantity::velocity;
  });
  return at == spectra.channels.end() ? nullptr : &*at;
}

absorber::Before before_at(const step::ChannelSpectrum& channel, double forcing_hz) {
  absorber::Before before;
  before.point = channel.channel.point;
  before.overall = channel.severity_velocity;
  before.band_hz = channel.band_hz;
  before.spectrum = absorber::VelocitySpectrum{channel.shown.line_hz, channel.shown.density};
  before.component = line_amplitude(channel, forcing_hz);
  return before;
}

absorber::ForcingRange forcing_range(const machine::Machine& machine, const Estimate& speed, double order) {
  absorber::ForcingRange range;
  range.forcing = absorber::Forcing::unbalance;
  range.duty_hz = order * speed.value;
  const double spread = std::max(line_speed_spread * speed.value, 2.0 * speed.u.value_or(0.0));
  Interval speeds{speed.value - spread, speed.value + spread};
  if (machine.speed_hz && machine.speed_hz->width() > 0.0) {
    speeds = {std::min(machine.speed_hz->lo, speed.value), std::max(machine.speed_hz->hi, speed.value)};
  }
  range.range_hz = {order * speeds.lo, order * speeds.hi};
  return range;
}

// The forcing line that moves a point most: of those with a known cause.
const step::SpectralPeak* strongest_line(const step::ChannelSpectrum& channel, const step::SpectrumResult& spectra) {
  for (const step::SpectralPeak& peak : channel.peaks) {
    if (peak.cause.forcing && spectra.forcing[*peak.cause.forcing].order) return &peak;
  }
  return nullptr;
}

std::optional<double> sweep_at(const SurveyResult& result) {
  std::optional<double> fastest;
  for (const auto& [index, runup] : result.runups) {
    for (const rotation::OrderTrack& track : runup.tracks) {
      if (track.order != 1.0) continue;
      for (const std::optional<double>& rate : track.sweep_hz_per_s) {
        if (rate && std::abs(*rate) > fastest.value_or(0.0)) fastest = std::abs(*rate);
      }
    }
  }
  return fastest;
}

base::Answer<AbsorberAim> aim(const SurveyResult& result, const AbsorberSite& site, const base::Context& context) {
  const step::SpectrumResult* spectra = duty(result);
  if (spectra == nullptr) {
    return Refusal{"no-duty-recording", "no steady recording of the running machine",
                   "record the running machine for a minute at its usual load"};
  }
  const step::ChannelSpectrum* channel = channel_at(*spectra, site.point);
  if (channel == nullptr) {
    return Refusal{"no-duty-recording", "no steady recording at the absorber's point '" + site.point + "'",
                   "record the running machine with a sensor there"};
  }
  if (!spectra->speed) {
    return Refusal{"speed-unknown", "the running speed is not known", "give machine.speed_rpm, or record a tacho"};
  }
  const step::SpectralPeak* line = strongest_line(*channel, *spectra);
  if (line == nullptr) {
    return Refusal{"no-forcing-line", "no line of a known forcing frequency stands out at '" + site.point + "'",
                   "say more of the machine (poles, vanes, shafts), or record longer for finer lines"};
  }
  const machine::Forcing& forcing = spectra->forcing[*line->cause.forcing];
  std::optional<std::size_t> nearest;
  std::optional<modal::Mode> mode;
  for (std::size_t i = 0; i < result.modes.size(); ++i) {
    const auto distance = [&](const modal::Mode& each) {
      return std::abs(std::log(each.frequency.value / forcing.frequency.value));
    };
    const auto here = mode_at(result.modes[i], site.point);
    if (!here || distance(*here) > governs_within) continue;
    if (!nearest || distance(*here) < distance(*mode)) {
      nearest = i;
      mode = here;
    }
  }
  if (!mode) {
    return Refusal{"no-mode",
                   "no natural frequency measured at '" + site.point + "' lies near " + forcing.name + " (" +
                       base::rounded(forcing.frequency.value, 4) + " Hz)",
                   "make a hammer test with force and response at that point and in that direction"};
  }
  AbsorberAim out;
  out.site = site;
  out.mode = *nearest;
  out.forcing = forcing.frequency;
  out.forcing_name = forcing.name;
  step::AbsorberRequest request;
  request.question.mode = *mode;
  request.question.forcing = forcing_range(result.survey.machine, *spectra->speed, *forcing.order);
  request.question.before = before_at(*channel, forcing.frequency.value);
  for (const step::ChannelSpectrum& other : spectra->channels) {
    if (&other == channel || other.channel.point.empty() || other.shown.quantity != Quantity::velocity) continue;
    request.question.others.push_back(before_at(other, forcing.frequency.value));
  }
  request.question.constraints.target = result.target_m_s;
  request.question.constraints.max_mass_kg = site.max_mass_kg;
  request.question.constraints.max_travel_m = site.max_travel_m;
  request.question.allowances.temperature_c = site.temperature_c;
  request.question.sweep_hz_per_s = sweep_at(result);
  request.stopped_shift =
      modal::StoppedShift{result.survey.machine.stopped_shift_frequency, result.survey.machine.stopped_shift_damping};
  out.result = step::size_absorber(std::move(request), context);
  return out;
}

}  // namespace

step::Site site_of(const Survey& survey) {
  step::Site site;
  site.machine = survey.machine;
  for (const Point& point : survey.points) {
    site.points.push_back({point.name, point.direction, point.on == "bearing-housing"});
  }
  for (const Limit& limit : survey.limits) {
    if (!limit.standard.empty()) {
      site.standard = limit.standard;
      site.category = limit.category;
    }
    if (limit.target_m_s) site.plant.target = limit.target_m_s;
    if (limit.alarm_m_s) site.plant.alarm = limit.alarm_m_s;
    if (limit.trip_m_s) site.plant.trip = limit.trip_m_s;
  }
  return site;
}

SurveyResult run(const Survey& stated, const base::Context& context) {
  SurveyResult result;
  result.survey = stated;
  result.calibrations = apply_calibrations(result.survey, context);
  result.refusals = result.calibrations.refusals;
  const Survey& survey = result.survey;
  const std::size_t steps = 2 * survey.recordings.size() + 2;
  std::size_t step = 0;

  Readers readers;
  for (const SurveyRecording& recording : survey.recordings) {
    readers.push_back(recording::open(recording.file, recording.open, context));
  }
  for (std::size_t i = 0; i < readers.size(); ++i) {
    step::CheckRequest request;
    request.part = part_of(survey.recordings[i]);
    request.line_frequency_hz = survey.machine.line_frequency_hz;
    request.pulses_per_turn = survey.recordings[i].pulses_per_turn;
    request.falling_edge = survey.recordings[i].falling_edge;
    result.quality.push_back({i, step::check(*readers[i], request, part_of(context, step++, steps))});
  }

  result.bumps = all_bumps(survey, readers, part_of(context, step, steps));
  for (const step::BumpResult& bump : result.bumps) {
    result.modes.insert(result.modes.end(), bump.modes.begin(), bump.modes.end());
    if (bump.refusal) result.refusals.push_back(*bump.refusal);
  }
  std::stable_sort(result.modes.begin(), result.modes.end(),
                   [](const modal::Mode& a, const modal::Mode& b) { return a.frequency.value < b.frequency.value; });

  for (std::size_t i = 0; i < readers.size(); ++i) {
    const SurveyRecording& recording = survey.recordings[i];
    const base::Context part = part_of(context, step++, steps);
    if (recording.kind == Kind::steady) {
      result.spectra.push_back({i, steady_spectrum(result, i, readers, part)});
    } else if (recording.kind == Kind::runup || recording.kind == Kind::coastdown) {
      result.runups.push_back({i, speed_run(recording, *readers[i], result.modes, part)});
      if (result.runups.back().result.refusal) result.refusals.push_back(*result.runups.back().result.refusal);
    }
  }

  const step::SpectrumResult* spectra = duty(result);
  result.power_cuts = power_cuts(result, readers, part_of(context, step, steps));
  result.shapes = shapes(result);
  result.findings = diagnosis(result);
  result.findings.insert(result.findings.end(), result.calibrations.findings.begin(),
                         result.calibrations.findings.end());
  set_target(result, spectra);
  for (const AbsorberSite& site : survey.absorbers) {
    if (survey.recordings.empty()) break;  // the measuring plan is the answer
    auto answer = aim(result, site, part_of(context, step, steps));
    if (!answer) {
      result.refusals.push_back(answer.refusal());
      continue;
    }
    if (answer->result.refusal) result.refusals.push_back(*answer->result.refusal);
    for (const Finding& finding : answer->result.findings) result.findings.push_back(finding);
    result.absorbers.push_back(std::move(*answer));
  }
  result.after = compare_stages(result);
  context.report("done", 1.0);
  return result;
}

}  // namespace stillmass::survey
