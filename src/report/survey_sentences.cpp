#include <algorithm>
#include <cmath>
#include <optional>

#include <fmt/format.h>

#include "stillmass/base/number.hpp"
#include "stillmass/report/sentences.hpp"

#include "report/spectrum_sentences.hpp"

// What a survey says in sentences: its lines, its verdict, its cautions, the measuring plan.
namespace stillmass::report {
namespace {

using absorber::ReasonCode;
using absorber::Recommendation;
using base::rounded;

struct Worst {
  const step::ChannelSpectrum* channel = nullptr;
  std::size_t zones = 0;
};

// The channel with the highest velocity of the recordings before, and how many severities there are.
Worst worst_channel(const survey::SurveyResult& result) {
  Worst worst;
  for (const auto& [index, spectra] : result.spectra) {
    const survey::SurveyRecording& recording = result.survey.recordings[index];
    if (recording.stage != survey::Stage::before || !recording.running) continue;
    for (const step::ChannelSpectrum& channel : spectra.channels) {
      if (channel.severity) ++worst.zones;
      if (!channel.severity_velocity) continue;
      if (worst.channel == nullptr || channel.severity_velocity->value > worst.channel->severity_velocity->value) {
        worst.channel = &channel;
      }
    }
  }
  return worst;
}

Line quality_line(const survey::SurveyResult& result) {
  std::size_t unusable = 0;
  std::string named;
  std::size_t doubtful = 0;
  for (const auto& [index, check] : result.quality) {
    if (check.verdict == step::Verdict::unusable) {
      ++unusable;
      named += (named.empty() ? ": " : ", ") + result.survey.recordings[index].written;
    }
    if (check.verdict == step::Verdict::doubtful) ++doubtful;
  }
  const std::size_t all = result.quality.size();
  const auto& calibrations = result.calibrations;
  const bool is_off = !calibrations.findings.empty() || !calibrations.refusals.empty();
  const std::string off = is_off ? "; a calibration does not fit, see below" : "";
  if (unusable > 0) {
    return {"Recordings",
            fmt::format("{} of {} have an unusable channel{}; take them again before you leave{}", unusable, all, named,
                        off),
            Tone::bad};
  }
  if (doubtful > 0) {
    return {"Recordings", fmt::format("{} of {} good, {} usable with remarks{}", all - doubtful, all, doubtful, off),
            Tone::caution};
  }
  return {"Recordings", fmt::format("all {} good{}", all, off), is_off ? Tone::caution : Tone::good};
}

Line severity_line(const survey::SurveyResult& result) {
  const Worst worst = worst_channel(result);
  if (worst.channel == nullptr) {
    return {"Severity", "no steady recording of the running machine: record it for a minute at its usual load",
            Tone::caution};
  }
  const step::ChannelSpectrum& channel = *worst.channel;
  const double value = channel.severity_velocity->value;
  std::string text = fmt::format("{} r.m.s. at {}", velocity_text(value), channel.channel.name);
  Tone tone = Tone::neutral;
  if (channel.severity) {
    const step::Severity& severity = *channel.severity;
    text += fmt::format(": {} of {}, {}", machine::text(severity.verdict), severity.limits.standard,
                        severity.limits.category);
    tone = severity.verdict.zone == machine::Zone::d   ? Tone::bad
           : severity.verdict.zone == machine::Zone::c ? Tone::caution
                                                       : Tone::good;
  } else {
    text += "; no zone: " + channel.severity.refusal().seen;
    if (channel.typical) text += "; typical ranges of ISO 20816-1: " + channel.typical->text;
  }
  if (channel.background && channel.background->is_doubtful) {
    text += fmt::format("; doubtful: the background is {:.0f} % of it", 100.0 * channel.background->share.value);
  }
  if (result.target_m_s) {
    text += fmt::format("; {} {}", result.target_from_standard ? "limit B/C taken as target," : "target",
                        velocity_text(*result.target_m_s));
    if (value > *result.target_m_s && tone != Tone::bad) tone = Tone::caution;
  }
  return {"Severity", text, tone};
}

Line cause_line(const survey::SurveyResult& result) {
  for (const base::Finding& finding : result.findings) {
    if (finding.evidence.empty()) continue;  // what is assumed on the way
    return {"Cause", cause_sentence(finding), Tone::neutral};
  }
  const std::string line = largest_line_sentence(survey::loudest(result, survey::Stage::before));
  return {"Cause", line.empty() ? "no cause stands out of these recordings" : line, Tone::caution};
}

std::string mode_text(const modal::Mode& mode) {
  std::string text = fmt::format("{}, damping {}", with_u(mode.frequency), with_u(mode.damping_ratio));
  if (mode.modal_mass) text += fmt::format(", modal mass {} at {}", with_u(*mode.modal_mass), mode.point);
  return text + " (" + mode.state + ")";
}

Line mode_line(const survey::SurveyResult& result) {
  if (!result.absorbers.empty()) return {"Mode", mode_text(result.modes[result.absorbers.front().mode]), Tone::neutral};
  if (!result.modes.empty()) {
    return {"Mode", fmt::format("{} measured, the lowest {}", result.modes.size(), mode_text(result.modes.front())),
            Tone::neutral};
  }
  return {"Mode", "no natural frequency measured: make a hammer test on the stopped machine", Tone::caution};
}

Line remedy_line(const survey::SurveyResult& result) {
  if (result.absorbers.empty()) {
    if (result.survey.absorbers.empty())
      return {"Absorber", "no place for one is named in the survey file", Tone::neutral};
    const std::string why = result.refusals.empty() ? "" : ": " + sentence(result.refusals.back());
    return {"Absorber", "not sized" + why, Tone::caution};
  }
  const survey::AbsorberAim& aim = result.absorbers.front();
  if (!aim.result.specification) return {"Absorber", "not sized: " + sentence(*aim.result.refusal), Tone::caution};
  const absorber::Specification& found = *aim.result.specification;
  Tone tone = Tone::good;
  if (found.recommendation == Recommendation::none) {
    tone = found.reason.code == ReasonCode::target_already_met ? Tone::good : Tone::caution;
  } else if (found.predicted && found.predicted->probability_meets_target &&
             *found.predicted->probability_meets_target < 0.95) {
    tone = Tone::caution;
  }
  return {"Absorber", sentence(found, aim.site.point), tone};
}

std::optional<Line> after_line(const survey::SurveyResult& result) {
  const survey::AfterPoint* worst = nullptr;
  for (const survey::AfterPoint& point : result.after) {
    if (worst == nullptr || point.after.value > worst->after.value) worst = &point;
  }
  if (worst == nullptr) return {};
  const std::string wanted = result.absorbers.empty() ? worst->point : result.absorbers.front().site.point;
  const auto at = std::find_if(result.after.begin(), result.after.end(),
                               [&](const survey::AfterPoint& point) { return point.point == wanted; });
  const survey::AfterPoint& shown = at == result.after.end() ? *worst : *at;
  std::string text =
      fmt::format("{} from {} to {}", shown.point, velocity_text(shown.before.value), velocity_text(shown.after.value));
  if (shown.predicted) text += fmt::format(" (predicted {})", with_u(*shown.predicted));
  Tone tone = Tone::neutral;
  if (worst->meets_target) {
    tone = *worst->meets_target ? Tone::good : Tone::caution;
    text += *worst->meets_target ? "; every measured point is within the target"
                                 : fmt::format("; {} is still above the target with {}", worst->point,
                                               velocity_text(worst->after.value));
  }
  if (shown.achieved.deviation && *shown.achieved.deviation > 2.0) {
    text += "; more than predicted, so the tuning or the clamp can be improved";
  }
  return Line{"After fitting", text, tone};
}

}  // namespace

std::vector<Line> lines(const survey::SurveyResult& result) {
  if (result.survey.recordings.empty()) {
    std::vector<Line> plan;
    for (const std::string& each : sentences(survey::measuring_plan(result.survey))) {
      plan.push_back({fmt::format("Step {}", plan.size() + 1), each, Tone::neutral});
    }
    return plan;
  }
  std::vector<Line> all = {quality_line(result), severity_line(result), cause_line(result), mode_line(result),
                           remedy_line(result)};
  if (const auto after = after_line(result)) all.push_back(*after);
  return all;
}

Line verdict(const survey::SurveyResult& result) {
  if (result.survey.recordings.empty()) return {"", "No recordings yet: the measuring plan.", Tone::neutral};
  if (const auto after = after_line(result)) {
    const std::string text = after->tone == Tone::good ? "The fitted absorber does its work: the target is met."
                             : after->tone == Tone::caution
                                 ? "The absorber is fitted; the target is not met everywhere."
                                 : "The absorber is fitted; no target was stated.";
    return {"", text, after->tone};
  }
  const Line remedy = remedy_line(result);
  const Line severity = severity_line(result);
  if (!result.absorbers.empty() && result.absorbers.front().result.specification &&
      result.absorbers.front().result.specification->recommendation != Recommendation::none) {
    return {"", "An absorber helps: " + remedy.text + ".", remedy.tone};
  }
  return {"", severity.text + ".", severity.tone};
}

std::vector<std::string> summary(const survey::SurveyResult& result) {
  std::vector<std::string> out = {verdict(result).text};
  for (const Line& line : lines(result)) out.push_back(line.label + ": " + line.text);
  return out;
}

std::vector<std::string> sentences(const survey::Plan& plan) {
  std::vector<std::string> out = {
      fmt::format("Record at {:.0f} Hz or more: {:.0f} Hz must be seen.", plan.rate_hz, plan.highest_hz),
      fmt::format(
          "Running at its duty: {:.0f} s on every point, at once or one after the other, with a tacho if there is one.",
          plan.steady_s),
      "A run-up or coast-down with a tacho: start recording before the switch, stop after standstill."};
  if (plan.hammer_s) {
    out.push_back(fmt::format(
        "Stopped and locked out: {} blows with a force hammer where the absorber could sit, {:.0f} s apart, response "
        "at the same point and direction. The tip must reach {:.0f} Hz: contact of {:.0f} ms or shorter.",
        plan.hammer_blows, std::ceil(*plan.hammer_s), *plan.hammer_reach_hz, *plan.contact_s * 1e3));
  }
  if (plan.trial_mass_kg) {
    out.push_back(fmt::format("Without a force sensor: the same blows again with {} kg bolted on there, weighed.",
                              rounded(*plan.trial_mass_kg, 2)));
  }
  for (const survey::Plan::Bound& bound : plan.bounds) {
    out.push_back(fmt::format(
        "At {} the mass ratio is at least {}: the new natural frequencies lie at least {:.0f} % away, and a damped "
        "absorber leaves at most {} times the static deflection.",
        bound.point, rounded(bound.least_mass_ratio, 2), bound.least_split * 100, rounded(bound.highest_peak)));
  }
  std::string unknown;
  for (const std::string& key : plan.unknown) unknown += (unknown.empty() ? "" : ", ") + key;
  if (!unknown.empty()) out.push_back("These keys of the survey file would sharpen the plan: " + unknown + ".");
  return out;
}

std::vector<std::string> absorber_cautions() {
  return {
      "An absorber is a suspended mass that can break loose: give it a secondary retention and a guard, and have the "
      "blade or spring "
      "checked for endurance and the structure for the load by a licensed engineer.",
      "It makes two new natural frequencies: keep every speed of the machine, in all directions, away from them.",
      "Isolate and lock out the machine by the site's rules before anything is fitted or tuned.",
  };
}

std::vector<std::string> cautions(const survey::SurveyResult& result) {
  std::vector<std::string> out = {
      "Loose anchors, cracks and soft foot come before any test and any remedy.",
      "Site rules, local codes and licensed practice go before anything said here.",
  };
  if (!result.bumps.empty() || result.modes.empty()) {
    out.push_back(
        "Strike only a stopped machine, isolated and locked out; a pump or fan can turn by itself (windmilling). In "
        "explosive "
        "atmospheres no hammer and no battery instrument without a permit.");
  }
  const auto& recordings = result.survey.recordings;
  if (std::any_of(recordings.begin(), recordings.end(), [](const auto& each) { return each.hung_mass.has_value(); })) {
    out.push_back("Hang a test mass low, on rated gear with a second sling, and let nobody stand under it.");
  }
  if (!result.runups.empty()) out.push_back("Keep to the motor's starts per hour; do not dwell on a resonance.");
  if (!result.absorbers.empty()) {
    for (const std::string& each : absorber_cautions()) out.push_back(each);
  }
  return out;
}

}  // namespace stillmass::report
