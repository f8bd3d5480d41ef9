#include "stillmass/report/terminal.hpp"

#include <algorithm>
#include <cmath>

#include <fmt/format.h>

#include "stillmass/base/number.hpp"
#include "stillmass/base/text.hpp"
#include "stillmass/report/sentences.hpp"

#include "report/terminal_parts.hpp"

namespace stillmass::report {
namespace {

using base::rounded;

std::string in_unit(std::optional<double> si, const base::Unit& unit) {
  return si ? rounded(*si / unit.to_si) + " " + std::string(unit.name) : "-";
}

std::string in_trade_unit(std::optional<double> si, base::Quantity quantity) {
  return in_unit(si, base::trade_unit(quantity));
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
  if (result.refusal) return out + wrapped("Not sized: " + sentence(*result.refusal), screen - 2, 2) + "\n";
  const absorber::Specification& found = *result.specification;
  out += wrapped(fmt::format("Recommendation: {}; {}", absorber::name(found.recommendation), sentence(found.reason)),
                 screen - 2, 2) +
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
  // The first cause stands in its line above; the page has them all, with their evidence.
  constexpr std::size_t most_more = 2;
  std::vector<base::Finding> more;
  for (const base::Finding& each : result.findings) {
    if (!each.evidence.empty() && each.strength != base::Strength::weak) more.push_back(each);
  }
  if (!more.empty()) more.erase(more.begin());
  if (more.size() > most_more) more.resize(most_more);
  if (!more.empty()) out += "\nAlso found:\n" + cause_headlines(more);
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
