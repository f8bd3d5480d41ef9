#include "stillmass/report/charts_signal.hpp"

#include <algorithm>
#include <cmath>

#include <fmt/format.h>

#include "stillmass/base/number.hpp"
#include "stillmass/report/sentences.hpp"

namespace stillmass::report {
namespace {

using base::Quantity;

constexpr std::size_t most_panels = 8;
constexpr std::size_t named_peaks = 5;

std::string plain_name(Quantity quantity) {
  std::string name(base::name(quantity));
  name.front() = static_cast<char>(name.front() - 'a' + 'A');
  return name;
}

// r.m.s. amplitude per line, in the trade's unit.
Series amplitude_series(const std::string& name, const spectral::Spectrum& spectrum, double factor, double to_hz) {
  std::vector<double> x;
  std::vector<double> y;
  for (std::size_t k = std::max<std::size_t>(spectrum.first_line, 1); k < spectrum.density.size(); ++k) {
    if (spectrum.frequency(k) > to_hz) break;
    x.push_back(spectrum.frequency(k));
    y.push_back(spectrum.amplitude_rms(k) * factor);
  }
  return series_of(name, x, y);
}

Series density_series(const std::string& name, const spectral::Spectrum& spectrum, double to_si, double to_hz) {
  std::vector<double> x;
  std::vector<double> y;
  for (std::size_t k = std::max<std::size_t>(spectrum.first_line, 1); k < spectrum.density.size(); ++k) {
    if (spectrum.frequency(k) > to_hz) break;
    x.push_back(spectrum.frequency(k));
    y.push_back(spectrum.density[k] / (to_si * to_si));
  }
  return series_of(name, x, y);
}

// The background in the place of the channel's density.
spectral::Spectrum stopped(const step::ChannelSpectrum& channel) {
  spectral::Spectrum out = channel.shown;
  out.density = channel.background_density;
  return out;
}

double highest_of_interest(const step::SpectrumResult& result, const spectral::Spectrum& spectrum) {
  const double half_rate = spectrum.rate_hz / 2.0;
  if (result.max_frequency_hz) return std::min(*result.max_frequency_hz, half_rate);
  double top = 200.0;
  for (const machine::Forcing& forcing :
       result.forcing) {  // gears, bearings and carriers reach too far to see the rest
    const bool is_low = forcing.kind == machine::ForcingKind::rotation ||
                        forcing.kind == machine::ForcingKind::vane_pass ||
                        forcing.kind == machine::ForcingKind::electrical;
    if (is_low) top = std::max(top, 1.2 * forcing.frequency.value);
  }
  return std::min(top, half_rate);
}

// When something is wrong, as a band across the channel; what lasts the whole recording is in the text only.
void show_findings(const std::vector<base::Finding>& findings, double duration_s, Panel& panel) {
  constexpr double least_width = 0.004;  // of the recording, to be seen at all
  constexpr double whole = 0.8;
  for (const base::Finding& each : findings) {
    if (!each.from_s || !each.to_s || *each.to_s - *each.from_s > whole * duration_s) continue;
    const double widening = std::max(0.0, 0.5 * (least_width * duration_s - (*each.to_s - *each.from_s)));
    Zone zone;
    zone.direction = Direction::vertical;
    zone.from = std::max(0.0, *each.from_s - widening);
    zone.to = std::min(duration_s, *each.to_s + widening);
    zone.label = std::string(base::text(each.code).name);
    zone.tone = Tone::caution;
    panel.zones.push_back(std::move(zone));
  }
}

double usual_step(const std::vector<double>& times) {
  std::vector<double> steps;
  for (std::size_t i = 1; i < times.size(); ++i) steps.push_back(times[i] - times[i - 1]);
  const auto middle = steps.begin() + static_cast<std::ptrdiff_t>(steps.size() / 2);
  std::nth_element(steps.begin(), middle, steps.end());
  return *middle;
}

}  // namespace

Chart overview_chart(const step::CheckResult& result) {
  Chart chart;
  chart.title = "The recording at a glance: " + result.recording.file.filename().string();
  chart.caption = "Least and largest sample of each column of the picture; shaded: when something was found.";
  chart.x = {"Time", "s"};
  const auto& picture = result.overview;
  for (std::size_t c = 0; c < std::min(result.channels.size(), most_panels); ++c) {
    const recording::Channel& channel = result.channels[c].channel;
    const base::Unit unit = channel.unit;
    Panel panel;
    panel.y = {channel.name, std::string(unit.name)};
    show_findings(result.findings, result.recording.duration_s(), panel);
    show_findings(result.channels[c].findings, result.recording.duration_s(), panel);
    // A band each for the stretches between the gaps.
    const double pause = picture.time_s.size() > 1 ? 1.5 * usual_step(picture.time_s) : 0.0;
    Band band;
    band.name = channel.name;
    const auto close = [&] {
      if (!band.x.empty()) panel.bands.push_back(band);
      band.x.clear();
      band.low.clear();
      band.high.clear();
    };
    for (std::size_t i = 0; i < picture.time_s.size(); ++i) {
      const auto& range = picture.channels[c][i];
      if (!range || (i > 0 && picture.time_s[i] - picture.time_s[i - 1] > pause)) close();
      if (!range) continue;
      band.x.push_back(picture.time_s[i]);
      band.low.push_back(range->lo / unit.to_si);
      band.high.push_back(range->hi / unit.to_si);
    }
    close();
    if (panel.bands.empty()) continue;
    chart.panels.push_back(std::move(panel));
  }
  return chart;
}

Chart spectrum_chart(const step::SpectrumResult& result, const step::ChannelSpectrum& channel, bool density) {
  const spectral::Spectrum& spectrum = channel.shown;
  const base::Unit unit = base::trade_unit(spectrum.quantity);
  const double top = highest_of_interest(result, spectrum);
  Chart chart;
  chart.title = "Spectrum at " + channel.channel.name;
  chart.caption = fmt::format("{} window, lines {} Hz apart, {} blocks.", spectral::name(spectrum.window),
                              base::plain(spectrum.line_hz, 3), spectrum.blocks);
  chart.x = {"Frequency", "Hz"};
  chart.x.range = base::Interval{0.0, top};
  Panel panel;
  if (density) {
    panel.y = {plain_name(spectrum.quantity) + " density", "(" + std::string(unit.name) + ")\xC2\xB2/Hz"};
    if (!channel.background_density.empty()) {
      panel.series.push_back(density_series("machine stopped", stopped(channel), unit.to_si, top));
      panel.series.back().quiet = true;
    }
    panel.series.push_back(density_series(channel.channel.name, spectrum, unit.to_si, top));
  } else {
    panel.y = {plain_name(spectrum.quantity), std::string(unit.name) + " " + std::string(base::name(result.detector))};
    if (!channel.background_density.empty()) {
      panel.series.push_back(
          amplitude_series("machine stopped", stopped(channel), base::from_rms(result.detector) / unit.to_si, top));
      panel.series.back().quiet = true;
    }
    panel.series.push_back(
        amplitude_series(channel.channel.name, spectrum, base::from_rms(result.detector) / unit.to_si, top));
  }
  panel.y.scale = Scale::logarithmic;
  panel.height = 2.0;
  std::size_t named = 0;
  for (const step::SpectralPeak& peak : channel.peaks) {
    if (peak.tone.frequency.value > top || ++named > named_peaks) continue;
    const double rms = peak.tone.amplitude_rms.value;
    const double y =
        density ? spectrum.density[std::min(peak.tone.line, spectrum.density.size() - 1)] / (unit.to_si * unit.to_si)
                : rms * base::from_rms(result.detector) / unit.to_si;
    const std::string cause =
        peak.cause.text == machine::unexplained ? base::rounded(peak.tone.frequency.value, 4) + " Hz" : peak.cause.text;
    panel.callouts.push_back({peak.tone.frequency.value, y, cause});
  }
  chart.panels.push_back(std::move(panel));
  return chart;
}

std::optional<Chart> severity_chart(std::span<const step::ChannelSpectrum* const> before,
                                    std::span<const step::ChannelSpectrum* const> after,
                                    std::optional<double> target_m_s) {
  Chart chart;
  chart.title = "How bad is it";
  chart.x.label = "";
  Panel panel;
  panel.y = {"Broad-band velocity", "mm/s r.m.s."};
  Series now;
  now.name = after.empty() ? "measured" : "before";
  now.style = Style::bars;
  now.segments.emplace_back();
  const step::Severity* severity = nullptr;
  for (const step::ChannelSpectrum* channel : before) {
    if (!channel->severity_velocity) continue;
    now.segments[0].x.push_back(static_cast<double>(chart.x.categories.size()));
    now.segments[0].y.push_back(channel->severity_velocity->value * 1e3);
    chart.x.categories.push_back(channel->channel.name);
    if (channel->severity) severity = &*channel->severity;
  }
  if (chart.x.categories.empty()) return {};
  panel.series.push_back(std::move(now));
  Series later;
  later.name = "after fitting";
  later.style = Style::bars;
  later.segments.emplace_back();
  for (const step::ChannelSpectrum* channel : after) {
    const auto at = std::find(chart.x.categories.begin(), chart.x.categories.end(), channel->channel.name);
    if (at == chart.x.categories.end() || !channel->severity_velocity) continue;
    later.segments[0].x.push_back(static_cast<double>(at - chart.x.categories.begin()));
    later.segments[0].y.push_back(channel->severity_velocity->value * 1e3);
  }
  if (!later.segments[0].x.empty()) panel.series.push_back(std::move(later));
  if (severity != nullptr) {
    const auto& limits = severity->limits.velocity;
    chart.caption = fmt::format("Zones of {}, {}.", severity->limits.standard, severity->limits.category);
    panel.zones = {{Direction::horizontal, 0.0, limits[0] * 1e3, "zone A", Tone::good},
                   {Direction::horizontal, limits[0] * 1e3, limits[1] * 1e3, "zone B", Tone::neutral},
                   {Direction::horizontal, limits[1] * 1e3, limits[2] * 1e3, "zone C", Tone::caution},
                   {Direction::horizontal, limits[2] * 1e3, {}, "zone D", Tone::bad}};
  }
  if (target_m_s) {
    panel.marks.push_back(
        {Direction::horizontal, *target_m_s * 1e3, "target " + velocity_text(*target_m_s), MarkKind::limit});
  }
  chart.panels.push_back(std::move(panel));
  return chart;
}

Chart before_after_chart(const step::ChannelSpectrum& before, const step::ChannelSpectrum& after, double to_hz) {
  Chart chart;
  chart.title = "Before and after at " + before.channel.name;
  chart.x = {"Frequency", "Hz"};
  chart.x.range = base::Interval{0.0, to_hz};
  Panel panel;
  panel.y = {"Velocity", "mm/s r.m.s."};
  panel.y.scale = Scale::logarithmic;
  panel.series.push_back(amplitude_series("before", before.shown, 1e3, to_hz));
  panel.series.push_back(amplitude_series("after fitting", after.shown, 1e3, to_hz));
  chart.panels.push_back(std::move(panel));
  return chart;
}

}  // namespace stillmass::report
