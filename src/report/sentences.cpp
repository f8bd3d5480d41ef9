#include "stillmass/report/sentences.hpp"

#include <algorithm>
#include <cmath>

#include <fmt/format.h>

#include "stillmass/base/number.hpp"

namespace stillmass::report {
namespace {

using absorber::ReasonCode;
using absorber::Recommendation;
using base::Estimate;
using base::Quantity;
using base::rounded;

constexpr double to_mm_s = 1e3;

// Decimals so that u has two digits.
int decimals_for(double u) {
  const int exponent = static_cast<int>(std::floor(std::log10(u)));
  return std::clamp(1 - exponent, 0, 9);
}

// The unit in which a quantity is read in running text.
base::Unit text_unit(Quantity quantity) {
  switch (quantity) {
    case Quantity::ratio:
      return {"%", quantity, 0.01};
    case Quantity::frequency:
      return {"Hz", quantity, 1.0};
    case Quantity::mass:
      return {"kg", quantity, 1.0};
    default:
      return base::trade_unit(quantity);
  }
}

std::string number_text(const absorber::Number& number) {
  if (number.quantity == Quantity::displacement) return rounded(number.value * 1e3, 2) + " mm";
  const base::Unit unit = text_unit(number.quantity);
  return rounded(number.value / unit.to_si) + " " + std::string(unit.name);
}

// " (target 2.80 mm/s, after 3.10 mm/s)"; empty without numbers.
std::string all_numbers(const absorber::Reason& reason) {
  std::string out;
  for (const absorber::Number& number : reason.numbers) {
    std::string name(number.name);
    std::replace(name.begin(), name.end(), '-', ' ');
    out += (out.empty() ? " (" : ", ") + name + " " + number_text(number);
  }
  return out.empty() ? out : out + ")";
}

std::string_view words(ReasonCode code) {
  switch (code) {
    case ReasonCode::one_forcing_frequency:
      return "one forcing frequency: it fits between the two new natural frequencies with all its drift";
    case ReasonCode::forcing_band:
      return "the forcing covers too wide a range for an undamped absorber";
    case ReasonCode::random_forcing:
      return "the forcing is broad-band";
    case ReasonCode::undamped_misses_target:
      return "an undamped absorber would miss the target, a damped one does not";
    case ReasonCode::target_already_met:
      return "the target is met already";
    case ReasonCode::outside_model_exceeds_target:
      return "what an absorber cannot touch (other lines, other modes) is above the target by itself";
    case ReasonCode::mass_too_small:
      return "the mass allowed is too small to get half of the way to the target";
    case ReasonCode::travel_exceeds_limit:
      return "the absorber's mass would move further than there is room";
    case ReasonCode::target_not_certain:
      return "the target is not certain with the mass allowed";
    case ReasonCode::split_near_forcing:
      return "a new natural frequency lies close to the forcing";
    case ReasonCode::mode_uncertainty_assumed:
      return "the mode's uncertainty was not stated; common values stand in for it";
    case ReasonCode::mass_bound_assumed:
      return "no bound of the mass was given; a fifth of the modal mass was taken";
    case ReasonCode::temperature_unknown:
      return "no range of temperature was given: its drift is not counted";
    case ReasonCode::no_target:
      return "without a target the heaviest absorber allowed was taken";
  }
  return "";
}

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
  if (unusable > 0) {
    return {"Recordings",
            fmt::format("{} of {} have an unusable channel{}; take them again before you leave", unusable, all, named),
            Tone::bad};
  }
  if (doubtful > 0) {
    return {"Recordings", fmt::format("{} of {} good, {} usable with remarks", all - doubtful, all, doubtful),
            Tone::caution};
  }
  return {"Recordings", fmt::format("all {} good", all), Tone::good};
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
    text += fmt::format(": zone {} of {}, {}", machine::name(severity.zone), severity.limits.standard,
                        severity.limits.category);
    tone = severity.zone == machine::Zone::d   ? Tone::bad
           : severity.zone == machine::Zone::c ? Tone::caution
                                               : Tone::good;
  } else {
    text += "; no zone: " + channel.severity.refusal().seen;
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
    if (finding.code != base::Code::resonance && finding.code != base::Code::unbalance &&
        finding.code != base::Code::vane_pass_force && finding.code != base::Code::electrical_force) {
      continue;
    }
    return {"Cause", fmt::format("{} ({})", finding.text, base::name(finding.strength)), Tone::neutral};
  }
  return {"Cause", "no cause stands out of these recordings", Tone::caution};
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

std::string with_u(const Estimate& estimate, double factor, std::string_view unit) {
  const double value = estimate.value * factor;
  if (!estimate.u || *estimate.u <= 0.0) return rounded(value, 4) + " " + std::string(unit);
  const double u = *estimate.u * std::abs(factor);
  const int decimals = decimals_for(u);
  return fmt::format("{:.{}f} +- {:.{}f} {}", value, decimals, u, decimals, unit);
}

std::string with_u(const Estimate& estimate) {
  const base::Unit unit = text_unit(estimate.quantity);
  return with_u(estimate, 1.0 / unit.to_si, unit.name);
}

std::string velocity_text(double m_s) {
  const double value = m_s * to_mm_s;
  return fmt::format("{} mm/s", value >= 100.0 ? rounded(value) : fmt::format("{:.2f}", value));
}

std::string sentence(const absorber::Reason& reason) { return std::string(words(reason.code)) + all_numbers(reason); }

std::string sentence(const absorber::Remedy& remedy) {
  using absorber::RemedyKind;
  const auto outcome = [&](const std::string& what, const std::string& never) {
    return remedy.amount ? what : never + fmt::format(" ({} at best)", velocity_text(remedy.component_rms));
  };
  const double amount = remedy.amount.value_or(0.0);
  switch (remedy.kind) {
    case RemedyKind::less_force:
      return outcome(fmt::format("less force: bring it to {:.0f} % of what it is (balance, align)", amount * 100),
                     "less force alone does not do");
    case RemedyKind::stiffen:
      return outcome(fmt::format("stiffen: raise the natural frequency by {:.1f} % (stiffness by {:.0f} %)",
                                 amount * 100, ((1 + amount) * (1 + amount) - 1) * 100),
                     "stiffening does not do");
    case RemedyKind::soften:
      return outcome(fmt::format("soften: lower the natural frequency by {:.1f} %", -amount * 100),
                     "softening does not do");
    case RemedyKind::add_mass:
      return outcome(fmt::format("add mass: {} kg rigidly at the point", rounded(amount)), "a rigid mass does not do");
    case RemedyKind::add_damping:
      return outcome(fmt::format("add damping: to {:.1f} % of critical", amount * 100), "damping alone does not do");
    case RemedyKind::lower_speed:
      return outcome(fmt::format("run slower: forcing at {} Hz", rounded(amount, 4)), "a lower speed does not do");
    case RemedyKind::higher_speed:
      return outcome(fmt::format("run faster: forcing at {} Hz", rounded(amount, 4)), "a higher speed does not do");
  }
  return "";
}

std::string sentence(const base::Finding& finding) {
  const base::CodeText& code = base::text(finding.code);
  return fmt::format("{}; likely {}; {}", finding.text.empty() ? code.seen : std::string_view(finding.text),
                     code.likely_cause, code.next_step);
}

Shortened shortened(const std::vector<base::Finding>& findings) {
  constexpr std::size_t most = 3;
  Shortened out;
  std::vector<std::size_t> count(base::all_codes().size());
  for (const base::Finding& each : findings) {
    if (++count[static_cast<std::size_t>(each.code)] <= most) out.findings.push_back(each);
  }
  for (std::size_t i = 0; i < count.size(); ++i) {
    if (count[i] > most) out.more.push_back(fmt::format("{} more of {}", count[i] - most, base::all_codes()[i].name));
  }
  return out;
}

std::string when(const base::Finding& finding) {
  const auto names_time = [&](std::string_view word) {  // "at 8.10 s"
    const auto at = finding.text.find(word);
    if (at == std::string::npos || at + word.size() >= finding.text.size()) return false;
    const char next = finding.text[at + word.size()];
    return next >= '0' && next <= '9' && finding.text.find(" s", at) != std::string::npos;
  };
  if (!finding.from_s || names_time("at ") || names_time("from ") || names_time("after ")) return "";
  if (!finding.to_s || *finding.to_s - *finding.from_s < 0.01) return fmt::format(" at {:.2f} s", *finding.from_s);
  return fmt::format(" from {:.2f} to {:.2f} s", *finding.from_s, *finding.to_s);
}

std::string uncertainty_note(const step::SpectrumResult& result) {
  std::string without;
  bool any = false;
  for (const step::ChannelSpectrum& each : result.channels) {
    any = any || each.channel.factor_u;
    if (!each.channel.factor_u) without += (without.empty() ? "" : ", ") + each.channel.name;
  }
  if (without.empty()) return "+- is the standard uncertainty, that of the sensors' calibration included.";
  if (any) {
    return "+- is the standard uncertainty, that of the sensor's calibration included but for " + without +
           ", where it comes on top (usually 2 to 5 %).";
  }
  return "+- is the standard uncertainty from this recording; the sensor's calibration comes on top (usually 2 to 5 "
         "%).";
}

std::string sentence(const base::Refusal& refusal) {
  return refusal.measure.empty() ? refusal.seen : refusal.seen + "; " + refusal.measure;
}

std::string sentence(const absorber::Specification& found, const std::string& point) {
  if (found.recommendation == Recommendation::none) return "none: " + sentence(found.reason);
  const absorber::AbsorberData& data = *found.absorber;
  std::string text = fmt::format("{} absorber of {} kg tuned to {} Hz at {}", absorber::name(found.recommendation),
                                 rounded(data.mass_kg), fmt::format("{:.2f}", data.frequency_hz), point);
  if (found.recommendation == Recommendation::damped)
    text += fmt::format(", damping ratio {}", rounded(data.damping_ratio, 2));
  if (found.predicted) {
    const absorber::Predicted& predicted = *found.predicted;
    text += fmt::format(": {} to {} (95 % below {}", velocity_text(predicted.before.value),
                        velocity_text(predicted.after.value), velocity_text(predicted.worst_case));
    if (predicted.probability_meets_target) {
      text +=
          fmt::format("; chance to meet the target {:.0f} %", std::floor(*predicted.probability_meets_target * 100));
    }
    text += ")";
  }
  return text;
}

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
