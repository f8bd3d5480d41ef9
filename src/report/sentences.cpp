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

std::string cause_sentence(const base::Finding& finding) {
  std::string name(base::text(finding.code).name);
  std::replace(name.begin(), name.end(), '-', ' ');
  return fmt::format("{} ({}): {}", name, base::name(finding.strength), finding.text);
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
  const std::string clock = " The recorder's clock comes on top of frequencies (usually below 0.005 %).";
  if (without.empty()) return "+- is the standard uncertainty, that of the sensors' calibration included." + clock;
  if (any) {
    return "+- is the standard uncertainty, that of the sensor's calibration included but for " + without +
           ", where it comes on top (usually 2 to 5 %; a zone counts 2 %)." + clock;
  }
  return "+- is the standard uncertainty from this recording; the sensor's calibration comes on top (usually 2 to 5 %; "
         "a zone counts 2 %)." +
         clock;
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

}  // namespace stillmass::report
