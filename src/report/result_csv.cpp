#include "stillmass/report/result_csv.hpp"

#include <complex>
#include <filesystem>
#include <numbers>
#include <optional>
#include <set>
#include <string_view>

#include "stillmass/base/number.hpp"
#include "stillmass/base/text.hpp"
#include "stillmass/spectral/noise_interval.hpp"

namespace stillmass::report {
namespace {

// A cell of text: quoted where it must be (RFC 4180).
std::string quoted(const std::string& text) {
  if (text.find_first_of(",\"\r\n") == std::string::npos) return text;
  std::string out = "\"";
  for (const char c : text) out += c == '"' ? "\"\"" : std::string(1, c);
  return out + "\"";
}

std::string cell(const std::string& text) { return quoted(text); }
std::string cell(double value) {
  const std::string text = base::shortest(value);
  return text == "null" ? "" : text;
}
std::string cell(const std::optional<double>& value) { return value ? cell(*value) : ""; }

template <class... Cells>
std::string row(const Cells&... cells) {
  std::string out;
  bool first = true;
  ((out += (first ? "" : ",") + cell(cells), first = false), ...);
  return out + "\n";
}

std::string file_name(const std::string& kind, const std::string& channel) {
  return base::safe_file_name(channel.empty() ? kind : kind + "-" + channel) + ".csv";
}

std::string unit_of(const spectral::Spectrum& spectrum) { return std::string(base::si_unit(spectrum.quantity).name); }

void put_modes(std::vector<NamedText>& files, const std::vector<modal::Mode>& modes) {
  if (modes.empty()) return;
  std::string text =
      row(std::string("frequency [Hz]"), std::string("u [Hz]"), std::string("damping ratio [1]"), std::string("u [1]"),
          std::string("modal mass [kg]"), std::string("u [kg]"), std::string("point"), std::string("machine"));
  for (const modal::Mode& mode : modes) {
    std::optional<double> mass;
    std::optional<double> mass_u;
    if (mode.modal_mass) {
      mass = mode.modal_mass->value;
      mass_u = mode.modal_mass->u;
    }
    text += row(mode.frequency.value, mode.frequency.u, mode.damping_ratio.value, mode.damping_ratio.u, mass, mass_u,
                mode.point, mode.state);
  }
  files.push_back({"modes.csv", text});
}

void put_bands(std::vector<NamedText>& files, const step::ChannelSpectrum& channel) {
  if (channel.third_octaves.bands.empty()) return;
  const std::string unit = unit_of(channel.shown);
  std::string text = row(std::string("nominal [Hz]"), std::string("from [Hz]"), std::string("to [Hz]"),
                         "r.m.s. [" + unit + "]", "u [" + unit + "]");
  for (const spectral::BandLevel& each : channel.third_octaves.bands) {
    text += row(each.nominal_hz, each.band_hz.lo, each.band_hz.hi, each.rms.value, each.rms.u);
  }
  files.push_back({file_name("third-octaves", channel.channel.name), text});
}

void put_zoom(std::vector<NamedText>& files, const step::ChannelSpectrum& channel) {
  if (!channel.zoom) return;
  const std::string unit(base::si_unit(channel.zoom->quantity).name);
  std::string text =
      row(std::string("frequency [Hz]"), "r.m.s. amplitude [" + unit + "]", "density [(" + unit + ")^2/Hz]");
  for (std::size_t k = 0; k < channel.zoom->density.size(); ++k) {
    text += row(channel.zoom->frequency(k), channel.zoom->amplitude_rms(k), channel.zoom->density[k]);
  }
  files.push_back({file_name("zoom", channel.channel.name), text});
}

void put_envelope(std::vector<NamedText>& files, const step::ChannelSpectrum& channel) {
  if (!channel.envelope || !channel.envelope->envelope) return;
  const spectral::Spectrum& spectrum = channel.envelope->envelope->spectrum;
  std::string text = row(std::string("frequency [Hz]"), "r.m.s. amplitude [" + unit_of(spectrum) + "]");
  for (std::size_t k = spectrum.first_line; k < spectrum.density.size(); ++k) {
    text += row(spectrum.frequency(k), spectrum.amplitude_rms(k));
  }
  files.push_back({file_name("envelope", channel.channel.name), text});
}

void put_waveform(std::vector<NamedText>& files, const step::ChannelSpectrum& channel) {
  if (!channel.synchronous) return;
  const rotation::SynchronousAverage& average = *channel.synchronous;
  const std::string unit(base::si_unit(average.quantity).name);
  std::string text = row(std::string("turns [1]"), "mean [" + unit + "]", "standard error [" + unit + "]");
  for (std::size_t i = 0; i < average.waveform.size(); ++i) {
    text += row(static_cast<double>(i) / static_cast<double>(average.samples_per_turn), average.waveform[i],
                average.standard_error(i));
  }
  files.push_back({file_name("synchronous", channel.channel.name), text});
}

void put_deflections(std::vector<NamedText>& files, const std::vector<step::OperatingDeflection>& shapes) {
  if (shapes.empty()) return;
  constexpr double to_deg = 180.0 / std::numbers::pi;
  std::string text = row(std::string("forcing"), std::string("frequency [Hz]"), std::string("reference"),
                         std::string("point"), std::string("ratio [1]"), std::string("u [1]"),
                         std::string("phase lead [deg]"), std::string("u [deg]"), std::string("coherence [1]"));
  for (const step::OperatingDeflection& each : shapes) {
    for (const spectral::Deflection& point : each.shape.points) {
      std::optional<double> phase;
      std::optional<double> phase_u;
      if (point.phase) {
        phase = point.phase->value * to_deg;
        if (point.phase->u) phase_u = *point.phase->u * to_deg;
      }
      text += row(each.name, each.shape.frequency.value, each.shape.reference, point.point, point.magnitude.value,
                  point.magnitude.u, phase, phase_u, point.coherence);
    }
  }
  files.push_back({"deflections.csv", text});
}

// Channels of one name, or whose names differ in what a file name cannot hold, get files of their own.
std::vector<NamedText> told_apart(std::vector<NamedText> files) {
  std::set<std::string> taken;
  for (NamedText& file : files) {
    const std::string stem = file.name.substr(0, file.name.size() - std::string_view(".csv").size());
    for (int i = 2; !taken.insert(file.name).second; ++i) file.name = stem + "-" + std::to_string(i) + ".csv";
  }
  return files;
}

void with_prefix(std::vector<NamedText>& all, const std::string& recording, std::vector<NamedText> files) {
  const std::string stem = std::filesystem::path(recording).stem().string();
  for (NamedText& file : files) all.push_back({base::safe_file_name(stem) + "-" + file.name, std::move(file.text)});
}

}  // namespace

std::vector<NamedText> csv(const std::vector<step::CheckResult>& results) {
  std::string text = row(std::string("file"), std::string("channel"), std::string("verdict"), std::string("code"),
                         std::string("from [s]"), std::string("to [s]"), std::string("text"));
  for (const step::CheckResult& result : results) {
    for (const step::ChannelCheck& each : result.channels) {
      const std::string file = result.recording.file.filename().string();
      const std::string verdict(step::name(each.verdict));
      if (each.findings.empty())
        text += row(file, each.channel.name, verdict, std::string(), std::string(), std::string(), std::string());
      for (const base::Finding& finding : each.findings) {
        text += row(file, each.channel.name, verdict, std::string(base::text(finding.code).name), finding.from_s,
                    finding.to_s, finding.text);
      }
    }
  }
  return {{"check.csv", text}};
}

std::vector<NamedText> csv(const step::SpectrumResult& result) {
  std::vector<NamedText> files;
  for (const step::ChannelSpectrum& each : result.channels) {
    const spectral::Spectrum& shown = each.shown;
    const std::string unit = unit_of(shown);
    const std::string density_unit = "[(" + unit + ")^2/Hz]";
    std::string text = row(std::string("frequency [Hz]"), "r.m.s. amplitude [" + unit + "]", "density " + density_unit,
                           "95 % from " + density_unit, "95 % to " + density_unit);
    const auto intervals = spectral::density_intervals(shown);
    for (std::size_t k = shown.first_line; k < shown.density.size(); ++k) {
      std::optional<double> from;
      std::optional<double> to;
      if (intervals) {
        from = (*intervals)[k - shown.first_line].lo;
        to = (*intervals)[k - shown.first_line].hi;
      }
      text += row(shown.frequency(k), shown.amplitude_rms(k), shown.density[k], from, to);
    }
    files.push_back({file_name("spectrum", each.channel.name), text});
    std::string peaks = row(std::string("frequency [Hz]"), std::string("u [Hz]"), "r.m.s. amplitude [" + unit + "]",
                            "u [" + unit + "]", std::string("cause"));
    for (const step::SpectralPeak& peak : each.peaks) {
      peaks += row(peak.tone.frequency.value, peak.tone.frequency.u, peak.tone.amplitude_rms.value,
                   peak.tone.amplitude_rms.u, peak.cause.text);
    }
    files.push_back({file_name("peaks", each.channel.name), peaks});
    put_bands(files, each);
    put_zoom(files, each);
    put_envelope(files, each);
    put_waveform(files, each);
  }
  put_deflections(files, result.shapes);
  return told_apart(std::move(files));
}

std::vector<NamedText> csv(const step::BumpResult& result) {
  std::vector<NamedText> files;
  put_modes(files, result.modes);
  if (!result.impact) return files;
  for (const modal::AveragedResponse& each : result.impact->responses) {
    std::string text = row(std::string("frequency [Hz]"), std::string("real [(m/s2)/N]"),
                           std::string("imaginary [(m/s2)/N]"), std::string("coherence [1]"),
                           std::string("fitted real [(m/s2)/N]"), std::string("fitted imaginary [(m/s2)/N]"));
    for (std::size_t k = 0; k < each.accelerance.size(); ++k) {
      const double frequency = static_cast<double>(k) * result.impact->line_hz;
      if (frequency > result.impact->band_hz.hi) break;
      std::optional<double> coherence;
      if (!each.coherence.empty()) coherence = each.coherence[k];
      std::optional<double> real;
      std::optional<double> imaginary;
      if (k < each.fitted.size() && std::abs(each.fitted[k]) > 0.0) {
        real = each.fitted[k].real();
        imaginary = each.fitted[k].imag();
      }
      text += row(frequency, each.accelerance[k].real(), each.accelerance[k].imag(), coherence, real, imaginary);
    }
    files.push_back({file_name("response", each.channel), text});
  }
  return told_apart(std::move(files));
}

std::vector<NamedText> csv(const step::RunupResult& result) {
  std::vector<NamedText> files;
  for (const rotation::OrderTrack& track : result.tracks) {
    const std::string unit(base::si_unit(track.quantity).name);
    std::string text = row(std::string("time [s]"), std::string("speed [rpm]"), "r.m.s. amplitude [" + unit + "]",
                           std::string("phase lag [deg]"), "noise [" + unit + "]");
    for (std::size_t i = 0; i < track.value.size(); ++i) {
      text += row(track.time_s[i], track.speed_hz[i] * 60.0, track.amplitude_rms(i), track.phase_lag_deg(i),
                  track.noise[i]);
    }
    files.push_back({file_name("order-" + base::plain(track.order), track.channel), text});
  }
  return told_apart(std::move(files));
}

std::vector<NamedText> csv(const step::AbsorberResult& result) {
  std::vector<NamedText> files;
  if (!result.specification) return files;
  std::string tuning = row(std::string("free length [mm]"), std::string("frequency [Hz]"));
  for (const absorber::TuningPoint& point : result.specification->tuning)
    tuning += row(point.free_length_m * 1e3, point.frequency_hz);
  files.push_back({"tuning.csv", tuning});
  return files;
}

std::vector<NamedText> csv(const survey::SurveyResult& result) {
  std::vector<NamedText> files;
  std::vector<step::CheckResult> checks;
  for (const auto& [index, check] : result.quality) checks.push_back(check);
  for (NamedText& file : csv(checks)) files.push_back(std::move(file));
  put_modes(files, result.modes);
  for (std::size_t i = 0; i < result.bumps.size(); ++i) {
    std::vector<NamedText> of_bump = csv(result.bumps[i]);
    std::erase_if(of_bump, [](const NamedText& file) { return file.name == "modes.csv"; });
    with_prefix(files, result.bumps[i].recordings.front().file.filename().string(), std::move(of_bump));
  }
  for (const auto& [index, spectra] : result.spectra)
    with_prefix(files, result.survey.recordings[index].written, csv(spectra));
  put_deflections(files, result.shapes);
  for (const auto& [index, runup] : result.runups)
    with_prefix(files, result.survey.recordings[index].written, csv(runup));
  for (const survey::AbsorberAim& aim : result.absorbers)
    with_prefix(files, "absorber-" + aim.site.point, csv(aim.result));
  return told_apart(std::move(files));
}

}  // namespace stillmass::report
