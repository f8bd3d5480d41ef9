#include <algorithm>
#include <cmath>

#include <fmt/format.h>

#include "stillmass/base/number.hpp"
#include "stillmass/report/charts_signal.hpp"

// Charts of what a spectrum has beside its lines.
namespace stillmass::report {
namespace {

constexpr std::size_t named_peaks = 6;

std::string capital(std::string_view text) {
  std::string out(text);
  out.front() = static_cast<char>(out.front() - 'a' + 'A');
  return out;
}

}  // namespace

Chart zoom_chart(const step::SpectrumResult& result, const step::ChannelSpectrum& channel) {
  const spectral::ZoomSpectrum& zoom = *channel.zoom;
  const base::Unit unit = base::trade_unit(zoom.quantity);
  const double factor = base::from_rms(result.detector) / unit.to_si;
  Chart chart;
  chart.title = "Zoom at " + channel.channel.name;
  chart.caption = fmt::format("{} window, lines {} Hz apart, {} blocks.", spectral::name(zoom.window),
                              base::plain(zoom.line_hz, 3), zoom.blocks);
  chart.x = {"Frequency", "Hz"};
  chart.x.range = zoom.band_hz;
  Panel panel;
  panel.y = {capital(base::name(zoom.quantity)),
             std::string(unit.name) + " " + std::string(base::name(result.detector))};
  panel.y.scale = Scale::logarithmic;
  std::vector<double> x;
  std::vector<double> y;
  for (std::size_t k = 0; k < zoom.density.size(); ++k) {
    x.push_back(zoom.frequency(k));
    y.push_back(zoom.amplitude_rms(k) * factor);
  }
  panel.series.push_back(series_of(channel.channel.name, x, y));
  chart.panels.push_back(std::move(panel));
  return chart;
}

Chart waveform_chart(const step::ChannelSpectrum& channel) {
  const rotation::SynchronousAverage& average = *channel.synchronous;
  const base::Unit unit = base::trade_unit(average.quantity);
  Chart chart;
  chart.title = "Synchronous average at " + channel.channel.name;
  chart.caption = fmt::format("Mean of {} blocks of {} turn{}; band: twice the standard error.", average.blocks,
                              average.turns_per_block, average.turns_per_block == 1 ? "" : "s");
  chart.x = {"Turns after the tacho's edge", ""};
  Panel panel;
  panel.y = {capital(base::name(average.quantity)), std::string(unit.name)};
  Band band;
  band.name = "2 u";
  std::vector<double> y;
  for (std::size_t i = 0; i < average.waveform.size(); ++i) {
    const double reach = 2.0 * average.standard_error(i);
    band.x.push_back(static_cast<double>(i) / static_cast<double>(average.samples_per_turn));
    band.low.push_back((average.waveform[i] - reach) / unit.to_si);
    band.high.push_back((average.waveform[i] + reach) / unit.to_si);
    y.push_back(average.waveform[i] / unit.to_si);
  }
  panel.series.push_back(series_of("mean", band.x, y));
  panel.bands.push_back(std::move(band));
  chart.panels.push_back(std::move(panel));
  return chart;
}

Chart envelope_chart(const step::SpectrumResult& result, const step::ChannelSpectrum& channel) {
  const spectral::Envelope& envelope = *channel.envelope->envelope;
  const spectral::Spectrum& spectrum = envelope.spectrum;
  const base::Unit unit = base::trade_unit(spectrum.quantity);
  const double factor = base::from_rms(result.detector) / unit.to_si;
  Chart chart;
  chart.title = "Envelope at " + channel.channel.name;
  chart.caption = fmt::format("Of {} to {} Hz; {} window, lines {} Hz apart, {} blocks.",
                              base::plain(envelope.band_hz.lo, 4), base::plain(envelope.band_hz.hi, 4),
                              spectral::name(spectrum.window), base::plain(spectrum.line_hz, 3), spectrum.blocks);
  chart.x = {"Frequency", "Hz"};
  chart.x.range = base::Interval{0.0, 0.5 * spectrum.rate_hz};
  Panel panel;
  panel.y = {"Envelope", std::string(unit.name) + " " + std::string(base::name(result.detector))};
  std::vector<double> x;
  std::vector<double> y;
  for (std::size_t k = std::max<std::size_t>(spectrum.first_line, 1); k < spectrum.density.size(); ++k) {
    x.push_back(spectrum.frequency(k));
    y.push_back(spectrum.amplitude_rms(k) * factor);
  }
  panel.series.push_back(series_of(channel.channel.name, x, y));
  for (std::size_t i = 0; i < std::min(named_peaks, channel.envelope->peaks.size()); ++i) {
    const step::EnvelopePeak& peak = channel.envelope->peaks[i];
    if (peak.cause.text == machine::unexplained) continue;
    panel.callouts.push_back({peak.tone.frequency.value, peak.tone.amplitude_rms.value * factor, peak.cause.text});
  }
  chart.panels.push_back(std::move(panel));
  return chart;
}

Chart third_octave_chart(const step::SpectrumResult& result, const step::ChannelSpectrum& channel) {
  const base::Unit unit = base::trade_unit(channel.shown.quantity);
  const double factor = base::from_rms(result.detector) / unit.to_si;
  Chart chart;
  chart.title = "Third octaves at " + channel.channel.name;
  chart.x = {"Nominal mid-band frequency", "Hz"};
  Panel panel;
  panel.y = {capital(base::name(channel.shown.quantity)),
             std::string(unit.name) + " " + std::string(base::name(result.detector))};
  Series series;
  series.name = channel.channel.name;
  series.style = Style::bars;
  series.segments.emplace_back();
  for (const spectral::BandLevel& each : channel.third_octaves.bands) {
    series.segments[0].x.push_back(static_cast<double>(chart.x.categories.size()));
    series.segments[0].y.push_back(each.rms.value * factor);
    chart.x.categories.push_back(base::plain(each.nominal_hz));
  }
  panel.series.push_back(std::move(series));
  chart.panels.push_back(std::move(panel));
  return chart;
}

}  // namespace stillmass::report
