#include "survey/stages.hpp"

#include <algorithm>
#include <cmath>

namespace stillmass::survey {
namespace {

using base::Estimate;
using base::Interval;
using base::Quantity;

// The speed may have moved this much between two recordings of the same duty (common practice).
constexpr double same_line = 0.01;

// The first steady recording of a running machine in that stage that has the point.
const step::ChannelSpectrum* channel_in(const SurveyResult& result, Stage stage, const std::string& point) {
  for (const auto& [index, spectra] : result.spectra) {
    const SurveyRecording& recording = result.survey.recordings[index];
    if (recording.stage != stage || !recording.running) continue;
    for (const step::ChannelSpectrum& channel : spectra.channels) {
      if (channel.channel.point == point && channel.shown.quantity == Quantity::velocity) return &channel;
    }
  }
  return nullptr;
}

const absorber::Predicted* prediction_at(const SurveyResult& result, const std::string& point) {
  for (const AbsorberAim& aim : result.absorbers) {
    if (!aim.result.specification) continue;
    const absorber::Specification& specification = *aim.result.specification;
    if (specification.predicted && specification.predicted->point == point) return &*specification.predicted;
    for (const absorber::Predicted& other : specification.others) {
      if (other.point == point) return &other;
    }
  }
  return nullptr;
}

std::optional<double> forcing_of(const SurveyResult& result) {
  if (!result.absorbers.empty()) return result.absorbers.front().forcing.value;
  for (const auto& [index, spectra] : result.spectra) {
    if (spectra.speed) return spectra.speed->value;
  }
  return {};
}

}  // namespace

std::optional<Estimate> line_amplitude(const step::ChannelSpectrum& channel, double frequency_hz) {
  const double reach = std::max(same_line * frequency_hz, channel.shown.line_hz);
  const step::SpectralPeak* best = nullptr;
  for (const step::SpectralPeak& peak : channel.peaks) {
    const double distance = std::abs(peak.tone.frequency.value - frequency_hz);
    if (distance > reach) continue;
    if (best == nullptr || peak.tone.amplitude_rms.value > best->tone.amplitude_rms.value) best = &peak;
  }
  if (best == nullptr) return {};
  return best->tone.amplitude_rms;
}

std::vector<AfterPoint> compare_stages(const SurveyResult& result) {
  std::vector<AfterPoint> points;
  const std::optional<double> forcing = forcing_of(result);
  for (const Point& point : result.survey.points) {
    const step::ChannelSpectrum* before = channel_in(result, Stage::before, point.name);
    const step::ChannelSpectrum* after = channel_in(result, Stage::after, point.name);
    if (before == nullptr || after == nullptr || !before->severity_velocity || !after->severity_velocity) continue;
    AfterPoint each;
    each.point = point.name;
    each.band_hz = after->band_hz;
    each.before = *before->severity_velocity;
    each.after = *after->severity_velocity;
    if (const absorber::Predicted* predicted = prediction_at(result, point.name)) each.predicted = predicted->at_duty;
    if (forcing) {
      each.component_before = line_amplitude(*before, *forcing);
      each.component_after = line_amplitude(*after, *forcing);
    }
    each.achieved = absorber::achieved(each.before, each.after, each.predicted);
    if (result.target_m_s) each.meets_target = each.after.value <= *result.target_m_s;
    points.push_back(each);
  }
  return points;
}

}  // namespace stillmass::survey
