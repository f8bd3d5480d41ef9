#include "stillmass/report/terminal.hpp"

#include <algorithm>
#include <cmath>

#include <fmt/format.h>

#include "stillmass/base/number.hpp"
#include "stillmass/base/text.hpp"
#include "stillmass/report/sentences.hpp"

namespace stillmass::report {
namespace {

using base::rounded;

constexpr std::size_t screen = 100;

std::string in_unit(std::optional<double> si, const base::Unit& unit) {
  return si ? rounded(*si / unit.to_si) + " " + std::string(unit.name) : "-";
}

std::string in_trade_unit(std::optional<double> si, base::Quantity quantity) {
  return in_unit(si, base::trade_unit(quantity));
}

std::string heading(const recording::Recording& recording) {
  return fmt::format("{}\n  {}; {} channel{}, {} Hz, {} s{}\n", base::printable(recording.file.string()),
                     base::printable(recording.format), recording.channels.size(),
                     recording.channels.size() == 1 ? "" : "s", base::plain(recording.rate_hz),
                     base::plain(recording.duration_s(), 4),
                     recording.segments.size() > 1 ? fmt::format(" in {} parts", recording.segments.size()) : "");
}

std::string bullet(const std::string& text) { return "  - " + wrapped(text, screen - 4, 4) + "\n"; }

// An assumption has no likely cause.
std::string finding_lines(const std::vector<base::Finding>& findings, bool with_cause = true) {
  std::string out;
  const Shortened few = shortened(findings);
  for (const base::Finding& each : few.findings) {
    const base::CodeText& code = base::text(each.code);
    const std::string whose = each.channel.empty() ? "" : each.channel + ": ";
    const std::string cause = with_cause ? "likely " + std::string(code.likely_cause) + "; " : "";
    const std::string seen = each.text.empty() ? std::string(code.seen) : each.text;
    out += bullet(
        base::printable(fmt::format("{}{}{} [{}]; {}{}", whose, seen, when(each), code.name, cause, code.next_step)));
  }
  for (const std::string& more : few.more) out += bullet("and " + more);
  return out;
}

std::string mode_table(const std::vector<modal::Mode>& modes) {
  std::vector<std::vector<std::string>> rows;
  for (std::size_t i = 0; i < modes.size(); ++i) {
    const modal::Mode& mode = modes[i];
    rows.push_back({std::to_string(i + 1), with_u(mode.frequency), with_u(mode.damping_ratio),
                    mode.modal_mass ? with_u(*mode.modal_mass) : "-", base::printable(mode.point), mode.state});
  }
  return aligned({"mode", "natural frequency", "damping ratio", "modal mass", "point", "machine"}, rows);
}

}  // namespace

std::string text(const step::CheckResult& result) {
  std::string out = heading(result.recording);
  std::vector<std::vector<std::string>> rows;
  for (const step::ChannelCheck& each : result.channels) {
    rows.push_back({base::printable(each.channel.name), std::string(step::name(each.verdict)),
                    in_unit(each.quality.rms, each.channel.unit), in_unit(each.quality.peak, each.channel.unit),
                    each.quality.crest_factor ? rounded(*each.quality.crest_factor, 2) : "-"});
  }
  out += aligned({"channel", "verdict", "r.m.s.", "peak", "crest factor"}, rows);
  std::vector<base::Finding> all = result.findings;
  for (const step::ChannelCheck& each : result.channels) {
    all.insert(all.end(), each.findings.begin(), each.findings.end());
  }
  return out + finding_lines(all);
}

std::string text(const step::SpectrumResult& result, bool density) {
  std::string out = heading(result.recording);
  if (!result.channels.empty()) {
    const spectral::Spectrum& first = result.channels.front().measured;
    out += fmt::format("  {} window, lines {} Hz apart, {} blocks\n", spectral::name(first.window),
                       base::plain(first.line_hz, 3), first.blocks);
  }
  if (result.speed) out += fmt::format("  running speed {}\n", with_u(*result.speed, 60.0, "rpm"));
  std::vector<base::Finding> all = result.findings;
  for (const step::ChannelSpectrum& each : result.channels) {
    const base::Unit unit = base::trade_unit(each.shown.quantity);
    const double factor = base::from_rms(result.detector) / unit.to_si;
    out += "\n" + base::printable(each.channel.name);
    if (each.overall) {
      out += fmt::format(": {} {} from {} to {} Hz", with_u(*each.overall, factor, unit.name),
                         base::name(result.detector), base::plain(each.band_hz.lo, 4), base::plain(each.band_hz.hi, 4));
    }
    out += "\n";
    if (each.severity) {
      const step::Severity& severity = *each.severity;
      out += fmt::format("  zone {} of {}, {}: {} r.m.s. (limits {}, {}, {})\n", machine::name(severity.zone),
                         severity.limits.standard, severity.limits.category, velocity_text(severity.velocity),
                         velocity_text(severity.limits.velocity[0]), velocity_text(severity.limits.velocity[1]),
                         velocity_text(severity.limits.velocity[2]));
    }
    std::vector<std::vector<std::string>> rows;
    for (const step::SpectralPeak& peak : each.peaks) {
      std::vector<std::string> row = {with_u(peak.tone.frequency), with_u(peak.tone.amplitude_rms, factor, unit.name)};
      if (density) {
        const double value = each.shown.density[std::min(peak.tone.line, each.shown.density.size() - 1)];
        row.push_back(fmt::format("{} ({})\xC2\xB2/Hz", rounded(value / (unit.to_si * unit.to_si)), unit.name));
      }
      row.push_back(base::printable(peak.cause.text));
      rows.push_back(row);
    }
    const std::string amplitude = "amplitude (" + std::string(base::name(result.detector)) + ")";
    if (rows.empty()) {
      out += "  no line stands out of the noise\n";
    } else if (density) {
      out += aligned({"frequency", amplitude, "density", "cause"}, rows);
    } else {
      out += aligned({"frequency", amplitude, "cause"}, rows);
    }
    all.insert(all.end(), each.findings.begin(), each.findings.end());
  }
  out += "\n" + wrapped(uncertainty_note(result), screen, 0) + "\n";
  return out + (all.empty() ? "" : "\n" + finding_lines(all));
}

std::string text(const step::BumpResult& result) {
  std::string out;
  for (const recording::Recording& recording : result.recordings) out += heading(recording);
  std::size_t used = 0;
  for (const step::FileHit& each : result.hits) used += each.hit.used ? 1 : 0;
  out += fmt::format("  {} blow{} found, {} used\n", result.hits.size(), result.hits.size() == 1 ? "" : "s", used);
  for (const step::FileHit& each : result.hits) {
    if (each.hit.used) continue;
    out += bullet(fmt::format("{} at {:.2f} s not used: {} ({})", base::printable(each.file), each.hit.time_s,
                              each.hit.reason, modal::name(each.hit.verdict)));
  }
  if (result.refusal) {
    out += "\nNo modes: " + wrapped(sentence(*result.refusal), screen - 10, 10) + "\n";
  } else {
    out += "\n" + mode_table(result.modes);
  }
  return out + (result.findings.empty() ? "" : "\n" + finding_lines(result.findings));
}

std::string text(const step::RunupResult& result) {
  std::string out = heading(result.recording);
  if (result.refusal) return out + "\nNo order tracks: " + wrapped(sentence(*result.refusal), screen - 17, 17) + "\n";
  const base::Interval range = result.runup->speed.speed_range();
  out += fmt::format("  {}, {:.0f} to {:.0f} rpm, {} pulses\n\n", rotation::name(result.runup->speed.trend()),
                     range.lo * 60.0, range.hi * 60.0, result.runup->pulses.time_s.size());
  std::vector<std::vector<std::string>> rows;
  for (const rotation::OrderTrack& track : result.tracks) {
    if (track.value.empty()) continue;
    std::size_t highest = 0;
    for (std::size_t i = 0; i < track.value.size(); ++i) {
      if (track.amplitude_rms(i) > track.amplitude_rms(highest)) highest = i;
    }
    rows.push_back({base::printable(track.channel), base::plain(track.order) + "x",
                    in_trade_unit(track.amplitude_rms(highest), track.quantity),
                    fmt::format("{:.0f} rpm", track.speed_hz[highest] * 60.0),
                    fmt::format("{:.0f} deg", track.phase_lag_deg(highest))});
  }
  out += aligned({"channel", "order", "highest (r.m.s.)", "at", "phase lag"}, rows);
  if (result.critical_speeds.empty()) {
    out += "\nNo critical speed within these speeds.\n";
  } else {
    std::vector<std::vector<std::string>> critical;
    for (const step::CriticalSpeedFound& each : result.critical_speeds) {
      critical.push_back({with_u(each.speed, 60.0, "rpm"),
                          each.peak_speed_hz ? fmt::format("{:.0f} rpm", *each.peak_speed_hz * 60.0) : "-",
                          base::plain(each.order) + "x", base::printable(each.channel),
                          each.amplification_factor ? rounded(*each.amplification_factor) : "-",
                          each.mode ? with_u(each.mode->frequency) : "-"});
    }
    out += "\n" + aligned({"critical speed", "highest at", "order", "channel", "amplification", "mode"}, critical);
  }
  return out + (result.findings.empty() ? "" : "\n" + finding_lines(result.findings));
}

std::string text(const step::AbsorberResult& result) {
  std::string out = fmt::format(
      "Mode: {}, damping {}{}\n", with_u(result.question.mode.frequency), with_u(result.question.mode.damping_ratio),
      result.question.mode.modal_mass ? ", modal mass " + with_u(*result.question.mode.modal_mass) : "");
  if (result.refusal) return out + wrapped("Not sized: " + sentence(*result.refusal), screen, 2) + "\n";
  const absorber::Specification& found = *result.specification;
  out += wrapped(fmt::format("Recommendation: {}; {}", absorber::name(found.recommendation), sentence(found.reason)),
                 screen, 2) +
         "\n";
  for (const absorber::Reason& note : found.notes) out += bullet(sentence(note));
  if (found.absorber) {
    const absorber::AbsorberData& data = *found.absorber;
    out += "\n" + aligned({"absorber", ""},
                          {{"mass", rounded(data.mass_kg, 4) + " kg (mass ratio " + rounded(data.mass_ratio) + ")"},
                           {"frequency on a clamp", fmt::format("{:.3f} Hz", data.frequency_hz)},
                           {"stiffness", rounded(data.stiffness, 5) + " N/m"},
                           {"damping", fmt::format("{} N s/m (ratio {})", rounded(data.damping_constant),
                                                   rounded(data.damping_ratio))},
                           {"new natural frequencies", fmt::format("{:.2f} and {:.2f} Hz", data.split_frequencies_hz[0],
                                                                   data.split_frequencies_hz[1])}});
  }
  if (found.predicted) {
    const absorber::Predicted& p = *found.predicted;
    out += "\n" +
           aligned({"predicted", "r.m.s. velocity"},
                   {{"before", with_u(p.before, 1e3, "mm/s")},
                    {"after, worst over the forcing range", with_u(p.after, 1e3, "mm/s")},
                    {"after, at duty", with_u(p.at_duty, 1e3, "mm/s")},
                    {"95 % of cases below", velocity_text(p.worst_case)},
                    {"outside the absorber's reach", velocity_text(p.outside_model)},
                    {"chance to meet the target",
                     p.probability_meets_target ? fmt::format("{:.0f} %", std::floor(*p.probability_meets_target * 100))
                                                : "no target"},
                    {"travel, peak", with_u(p.travel_m, 1e3, "mm")}});
  }
  if (!found.blades.empty()) {
    std::vector<std::vector<std::string>> rows;
    for (const absorber::BladeOption& blade : found.blades) {
      rows.push_back({std::to_string(blade.count),
                      fmt::format("{:.1f} x {:.1f} x {:.1f} mm", blade.blade.length_m * 1e3, blade.blade.width_m * 1e3,
                                  blade.blade.thickness_m * 1e3),
                      rounded(blade.tip_mass_kg) + " kg", rounded(blade.stress_pa * 1e-6) + " MPa",
                      rounded(blade.endurance_factor, 2), rounded(blade.frequency_per_m * 1e-3, 2) + " Hz/mm",
                      base::printable(blade.material)});
    }
    out += "\n" + aligned({"blades", "free length x width x thickness", "tip mass each", "stress", "endurance factor",
                           "tuning", "material"},
                          rows);
  }
  out += "\n";
  for (const std::string& each : absorber_cautions()) out += bullet(each);
  return out + (result.findings.empty() ? "" : "\n" + finding_lines(result.findings));
}

std::string text(const survey::SurveyResult& result) {
  constexpr std::size_t label = 15;
  std::string out =
      base::printable(result.survey.machine.name) + "\n\n" + wrapped(verdict(result).text, screen, 0) + "\n\n";
  for (const Line& line : lines(result)) {
    out += fmt::format("{:<{}}{}\n", line.label, label, wrapped(line.text, screen - label, label));
  }
  if (!result.refusals.empty()) {
    out += "\nNot answered:\n";
    for (const base::Refusal& each : result.refusals) out += bullet(sentence(each));
  }
  if (!result.calibrations.channels.empty()) {
    out += "\nCalibrated:\n";
    for (const survey::ChannelCalibration& each : result.calibrations.channels) out += bullet(each.text);
  }
  std::vector<base::Finding> assumed;
  const auto pick = [&](const std::vector<base::Finding>& findings) {
    for (const base::Finding& each : findings) {
      if (each.code == base::Code::stopped_shift_assumed || each.code == base::Code::calibration_assumed ||
          each.code == base::Code::methods_disagree || each.code == base::Code::outside_model ||
          each.code == base::Code::calibration_off) {
        assumed.push_back(each);
      }
    }
  };
  pick(result.findings);
  for (const step::BumpResult& bump : result.bumps) pick(bump.findings);
  if (!assumed.empty()) out += "\nAssumed:\n" + finding_lines(assumed, false);
  out += "\nCaution:\n";
  for (const std::string& each : cautions(result)) out += bullet(each);
  return out;
}

}  // namespace stillmass::report
