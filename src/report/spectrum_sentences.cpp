#include "report/spectrum_sentences.hpp"

#include <algorithm>
#include <cmath>
#include <numbers>

#include <fmt/format.h>

#include "stillmass/base/number.hpp"
#include "stillmass/report/sentences.hpp"

namespace stillmass::report {
namespace {

using base::plain;
using base::rounded;

constexpr double rad_to_deg = 180.0 / std::numbers::pi;

base::Unit unit_of(const step::ChannelSpectrum& channel) { return base::trade_unit(channel.shown.quantity); }

std::string joined(const std::vector<std::string>& words) {
  std::string out;
  for (const std::string& word : words) out += (out.empty() ? "" : ", ") + word;
  return out;
}

std::string limits_text(const machine::JudgedLevel& level) {
  const bool is_velocity = level.judged == machine::Judged::velocity;
  const double factor = is_velocity ? 1e3 : 1e6;
  return fmt::format("{} {} (limits {}, {}, {} {})", with_u(level.value, factor, is_velocity ? "mm/s" : "um"),
                     machine::name(level.judged), rounded(level.limits[0] * factor), rounded(level.limits[1] * factor),
                     rounded(level.limits[2] * factor), is_velocity ? "mm/s" : "um");
}

std::string numbers_text(const std::vector<spectral::FamilyMember>& members) {
  std::vector<std::string> words;
  for (const spectral::FamilyMember& member : members) {
    if (words.size() == 12) {
      words.emplace_back("...");
      break;
    }
    words.push_back(fmt::format("{}", member.number));
  }
  return joined(words);
}

}  // namespace

const spectral::Spectrum* averaged(const step::SpectrumResult& result) {
  const auto most = std::max_element(result.channels.begin(), result.channels.end(), [](const auto& a, const auto& b) {
    return a.measured.blocks < b.measured.blocks;
  });
  return most == result.channels.end() ? nullptr : &most->measured;
}

std::string blocks_sentence(const step::SpectrumResult& result) {
  const spectral::Spectrum* lines = averaged(result);
  if (lines == nullptr) return "";
  const spectral::Spectrum& first = *lines;
  std::string text = fmt::format("{} window, lines {} Hz apart, {} blocks", spectral::name(first.window),
                                 plain(first.line_hz, 3), first.blocks);
  if (first.averaging == spectral::Averaging::peak_hold) {
    text += ", peak hold";
  } else if (first.blocks > 1) {
    text += fmt::format(" worth {} independent ones{}", rounded(first.effective_averages),
                        first.averaging == spectral::Averaging::exponential ? ", exponential average" : "");
  }
  return text + ": " + result.choice.text();
}

std::string speed_sentence(const step::SpectrumResult& result) {
  if (!result.speed) return "";
  std::string text = with_u(*result.speed, 60.0, "rpm");
  if (!result.refined_speed) return text + ", as stated";
  std::vector<std::string> orders;
  for (const machine::SpeedLine& line : result.refined_speed->lines) {
    const std::string order = plain(line.order) + "x";
    if (line.used && std::find(orders.begin(), orders.end(), order) == orders.end()) orders.push_back(order);
  }
  text += ", from " + joined(orders);
  if (result.refined_speed->wander > 0.0) {
    text += fmt::format("; it wanders by {} %", rounded(result.refined_speed->wander * 100.0, 2));
  }
  return text;
}

std::string overall_sentence(const step::SpectrumResult& result, const step::ChannelSpectrum& channel) {
  if (!channel.overall) return "";
  const base::Unit unit = unit_of(channel);
  std::string text = fmt::format(
      "{} {} from {} to {} Hz", with_u(*channel.overall, base::from_rms(result.detector) / unit.to_si, unit.name),
      base::name(result.detector), plain(channel.band_hz.lo, 4), plain(channel.band_hz.hi, 4));
  if (result.detector != base::Detector::rms) text += " (r.m.s. times that of a sine)";
  if (channel.low_limit_hz) text += fmt::format("; integrated from {} Hz", rounded(*channel.low_limit_hz));
  return text;
}

std::vector<std::string> judgements(const step::ChannelSpectrum& channel) {
  std::vector<std::string> out;
  if (channel.severity) {
    const step::Severity& severity = *channel.severity;
    std::string text = fmt::format("{} of {}, {}: ", machine::text(severity.verdict), severity.limits.standard,
                                   severity.limits.category);
    for (std::size_t i = 0; i < severity.verdict.levels.size(); ++i) {
      const machine::JudgedLevel& each = severity.verdict.levels[i];
      text += (i == 0 ? "" : "; ") + limits_text(each);
      if (severity.verdict.levels.size() > 1) {
        text += fmt::format(": {}{}", machine::name(each.zone), i == severity.verdict.rules ? ", rules" : "");
      }
    }
    out.push_back(text);
    if (!severity.limits.note.empty()) out.push_back(severity.limits.note);
  }
  if (channel.typical) {
    out.push_back("typical ranges of ISO 20816-1: " + channel.typical->text);
  }
  if (channel.plant) {
    std::string text = fmt::format("plant: {}", machine::name(channel.plant->state));
    if (channel.plant->could_be.size() > 1) text += ", not sure";
    if (channel.plant->over) text += fmt::format(" ({} % of the lowest limit)", rounded(*channel.plant->over * 100.0));
    out.push_back(text);
  }
  if (channel.background) {
    const spectral::BackgroundLevel& each = *channel.background;
    std::string text = fmt::format("background {} mm/s r.m.s., {} % of the running level",
                                   rounded(each.background.value * 1e3), rounded(each.share.value * 100.0, 2));
    if (each.machine) {
      text += fmt::format("; without it {}", with_u(*each.machine, 1e3, "mm/s"));
    } else {
      text += "; " + sentence(each.machine.refusal());
    }
    if (each.is_doubtful) text += "; above 25 %: the severity is doubtful";
    out.push_back(text);
  }
  return out;
}

std::string features_sentence(const step::ChannelSpectrum& channel) {
  const recording::ChannelFeatures& features = channel.features;
  const base::Unit unit = channel.channel.unit;
  if (!features.deviation) return "";
  std::string text = fmt::format("as measured: r.m.s. {} {}", rounded(*features.deviation / unit.to_si), unit.name);
  if (features.peak) text += fmt::format(", peak {} {}", rounded(*features.peak / unit.to_si), unit.name);
  if (features.crest_factor) text += fmt::format(", crest factor {}", rounded(*features.crest_factor, 2));
  if (features.kurtosis) text += fmt::format(", kurtosis {}", rounded(*features.kurtosis, 2));
  return text;
}

std::string largest_line_sentence(std::span<const step::ChannelSpectrum* const> channels) {
  const step::SpectralPeak* largest = nullptr;
  const step::ChannelSpectrum* where = nullptr;
  for (const step::ChannelSpectrum* channel : channels) {
    for (const step::SpectralPeak& peak : channel->velocity_peaks) {
      if (peak.in_background() || !channel->severity_velocity) continue;
      if (largest != nullptr && peak.tone.amplitude_rms.value <= largest->tone.amplitude_rms.value) continue;
      largest = &peak;
      where = channel;
    }
  }
  if (largest == nullptr) return "";
  const double share = largest->tone.amplitude_rms.value / where->severity_velocity->value;
  return fmt::format(
      "no rule explains it; the largest line is {} at {} Hz: {} r.m.s. at {}, {:.0f} % of the level there",
      largest->cause.text, rounded(largest->tone.frequency.value, 4), velocity_text(largest->tone.amplitude_rms.value),
      where->channel.name, 100.0 * std::min(share, 1.0));
}

std::string cause_text(const step::SpectralPeak& peak) {
  std::string text = peak.cause.text;
  if (peak.background && peak.background->is_marked) {
    text += fmt::format(" ({} % of it with the machine stopped)", rounded(peak.background->share.value * 100.0, 2));
  }
  if (!peak.note.empty()) text += "; " + peak.note;
  return text;
}

std::vector<std::string> family_sentences(const step::SpectrumResult& result) {
  constexpr std::size_t most_families = 4;  // the JSON result has them all
  std::vector<std::string> out;
  for (const spectral::HarmonicFamily& family : result.families.harmonics) {
    std::string text = fmt::format("harmonics of {}: {}", with_u(family.fundamental), numbers_text(family.members));
    if (family.half_orders) {
      text += fmt::format("; half orders of {} Hz", rounded(2.0 * family.fundamental.value, 4));
    }
    out.push_back(text);
  }
  std::size_t sides = 0;
  for (const spectral::SideBandFamily& family : result.families.side_bands) {
    const auto is_member = [&](const spectral::FamilyMember& member) { return member.tone == family.carrier; };
    if (family.spacing_of) {  // of a harmonic: the family above has said it
      const auto& members = result.families.harmonics[*family.spacing_of].members;
      if (std::any_of(members.begin(), members.end(), is_member)) continue;
    }
    if (++sides > most_families) break;
    out.push_back(fmt::format("side bands of {} Hz, {} apart: {}",
                              rounded(result.tones[family.carrier].frequency.value, 4), with_u(family.spacing),
                              numbers_text(family.members)));
  }
  return out;
}

std::string envelope_sentence(const step::EnvelopeResult& envelope) {
  if (!envelope.envelope) return "no envelope: " + sentence(envelope.envelope.refusal());
  const spectral::Envelope& found = *envelope.envelope;
  std::string text = fmt::format("envelope of {} to {} Hz", plain(found.band_hz.lo, 4), plain(found.band_hz.hi, 4));
  if (found.choice) {
    text += fmt::format(", the most impulsive band (kurtosis {}, noise stays below {})",
                        rounded(found.choice->kurtosis, 2), rounded(found.choice->limit, 2));
  }
  text += fmt::format(": mean {}, lines {} Hz apart", with_u(found.mean), plain(found.spectrum.line_hz, 3));
  if (envelope.peaks.empty()) text += "; no line stands out of it";
  return text;
}

Rows peak_rows(const step::SpectrumResult& result, const step::ChannelSpectrum& channel, bool density) {
  const base::Unit unit = unit_of(channel);
  const double factor = base::from_rms(result.detector) / unit.to_si;
  Rows out;
  out.header = {"frequency", "amplitude (" + std::string(base::name(result.detector)) + ")"};
  if (density) out.header.emplace_back("density");
  out.header.emplace_back("cause");
  for (const step::SpectralPeak& peak : channel.peaks) {
    std::vector<std::string> row = {with_u(peak.tone.frequency), with_u(peak.tone.amplitude_rms, factor, unit.name)};
    if (density) {
      const double value = channel.shown.density[std::min(peak.tone.line, channel.shown.density.size() - 1)];
      row.push_back(fmt::format("{} ({})\xC2\xB2/Hz", rounded(value / (unit.to_si * unit.to_si)), unit.name));
    }
    row.push_back(cause_text(peak));
    out.rows.push_back(row);
  }
  return out;
}

std::string zoom_sentence(const step::ChannelSpectrum& channel) {
  const spectral::ZoomSpectrum& zoom = *channel.zoom;
  return fmt::format("zoom {} to {} Hz, lines {} Hz apart, {} block{}; its highest lines:", plain(zoom.band_hz.lo),
                     plain(zoom.band_hz.hi), plain(zoom.line_hz, 3), zoom.blocks, zoom.blocks == 1 ? "" : "s");
}

Rows zoom_rows(const step::SpectrumResult& result, const step::ChannelSpectrum& channel) {
  constexpr std::size_t most = 6;
  const spectral::ZoomSpectrum& zoom = *channel.zoom;
  const base::Unit unit = base::trade_unit(zoom.quantity);
  const double factor = base::from_rms(result.detector) / unit.to_si;
  std::vector<std::size_t> peaks;
  for (std::size_t k = 1; k + 1 < zoom.density.size(); ++k) {
    if (zoom.density[k] >= zoom.density[k - 1] && zoom.density[k] > zoom.density[k + 1]) peaks.push_back(k);
  }
  std::stable_sort(peaks.begin(), peaks.end(), [&](auto a, auto b) { return zoom.density[a] > zoom.density[b]; });
  if (peaks.size() > most) peaks.resize(most);
  Rows out{{"line", std::string(base::name(result.detector)) + " of the line"}, {}};
  for (const std::size_t k : peaks) {
    out.rows.push_back({fmt::format("{} Hz", plain(zoom.frequency(k))),
                        fmt::format("{} {}", rounded(zoom.amplitude_rms(k) * factor), unit.name)});
  }
  return out;
}

Rows envelope_rows(const step::EnvelopeResult& envelope) {
  Rows out{{"line of the envelope", "modulation depth", "cause"}, {}};
  for (const step::EnvelopePeak& peak : envelope.peaks) {
    out.rows.push_back({with_u(peak.tone.frequency), with_u(peak.depth), peak.cause.text});
  }
  return out;
}

Rows deflection_rows(const std::vector<step::OperatingDeflection>& shapes) {
  Rows out{{"point"}, {}};
  std::vector<std::string> points;
  for (const step::OperatingDeflection& each : shapes) {
    out.header.push_back(fmt::format("{} ({} Hz)", each.name, rounded(each.shape.frequency.value, 4)));
    for (const spectral::Deflection& point : each.shape.points) {
      if (std::find(points.begin(), points.end(), point.point) == points.end()) points.push_back(point.point);
    }
  }
  for (const std::string& name : points) {
    std::vector<std::string> row = {name};
    for (const step::OperatingDeflection& each : shapes) {
      const auto at = std::find_if(each.shape.points.begin(), each.shape.points.end(),
                                   [&](const spectral::Deflection& point) { return point.point == name; });
      if (at == each.shape.points.end()) {
        row.emplace_back("-");
        continue;
      }
      std::string cell = rounded(at->magnitude.value);
      if (at->phase) cell += fmt::format(" at {:.0f} deg", std::round(at->phase->value * rad_to_deg) + 0.0);
      if (name == each.shape.reference && each.shape.sign_known) cell = "1 (reference)";
      row.push_back(cell);
    }
    out.rows.push_back(row);
  }
  return out;
}

std::vector<std::string> deflection_notes(const std::vector<step::OperatingDeflection>& shapes) {
  std::vector<std::string> notes;
  const auto say = [&](std::string text) {
    if (std::find(notes.begin(), notes.end(), text) == notes.end()) notes.push_back(std::move(text));
  };
  for (const step::OperatingDeflection& each : shapes) {
    if (!each.shape.sign_known) {
      say("one sensor without a reference: magnitudes only, the signs are not known");
    }
    if (!each.shape.levels_agree) say("taken one after the other: a change of level between them is in the ratios");
    for (const spectral::PointRefusal& point : each.shape.not_given) {
      say(fmt::format("{}, {}: {}", each.name, point.point, sentence(point.why)));
    }
    for (const std::string& point : each.shape.disagreeing) {
      say(fmt::format("{}, {}: two recordings disagree", each.name, point));
    }
  }
  return notes;
}

Rows synchronous_rows(const step::SpectrumResult& result, const step::ChannelSpectrum& channel) {
  const rotation::SynchronousAverage& average = *channel.synchronous;
  const base::Unit unit = base::trade_unit(average.quantity);
  const double factor = base::from_rms(result.detector) / unit.to_si;
  Rows out{{"order", "amplitude (" + std::string(base::name(result.detector)) + ")", "phase lag"}, {}};
  for (const rotation::SynchronousLine& line : average.lines) {
    const bool stands_out = line.phase_u_deg < 30.0;
    if (!stands_out) continue;
    out.rows.push_back({plain(line.order) + "x", with_u(line.amplitude_rms, factor, unit.name),
                        fmt::format("{:.0f} +- {:.0f} deg", line.phase_lag_deg, std::max(line.phase_u_deg, 0.5))});
  }
  return out;
}

Rows third_octave_rows(const step::SpectrumResult& result, const step::ChannelSpectrum& channel) {
  const base::Unit unit = unit_of(channel);
  const double factor = base::from_rms(result.detector) / unit.to_si;
  Rows out{{"third octave", std::string(base::name(result.detector))}, {}};
  for (const spectral::BandLevel& each : channel.third_octaves.bands) {
    out.rows.push_back({plain(each.nominal_hz) + " Hz", with_u(each.rms, factor, unit.name)});
  }
  return out;
}

}  // namespace stillmass::report
