#include "stillmass/absorber/remedies.hpp"

#include <cmath>
#include <functional>

#include "stillmass/base/error.hpp"
#include "stillmass/numeric/root.hpp"

#include "absorber/response.hpp"

namespace stillmass::absorber {
namespace {

using modal::OneMode;

/// The line at f on a changed machine, the forces unchanged, over the line at the duty frequency on the present one.
double line_ratio(const OneMode& now, const OneMode& changed, const ForcingRange& forcing, double f_hz) {
  const auto response = [&](const OneMode& machine, double f) {
    const double s = (f / machine.frequency_hz) * (f / machine.frequency_hz);
    const double scale = machine.modal_mass_kg * machine.frequency_hz * machine.frequency_hz;  // stiffness
    const double weight =
        velocity_weight(machine.damping_ratio, forcing.forcing, (f / now.frequency_hz) * (f / now.frequency_hz));
    const double bare = (1.0 - s) * (1.0 - s) + 4.0 * machine.damping_ratio * machine.damping_ratio * s;
    return std::sqrt(weight / bare) / scale;
  };
  // Moved by the ground, the machine gets its force through its own stiffness.
  const double through = forcing.forcing == Forcing::base ? changed.stiffness() / now.stiffness() : 1.0;
  return through * response(changed, f_hz) / response(now, forcing.duty());
}

/// The least amount between nothing and the limit that brings the line to `allowed` (a ratio).
Remedy least_amount(RemedyKind kind, base::Quantity quantity, double nothing, double limit, double line_rms,
                    double allowed, const std::function<double(double)>& ratio) {
  constexpr int steps = 400;
  const auto excess = [&](double amount) { return ratio(amount) - allowed; };
  Remedy remedy{kind, quantity, {}, line_rms * ratio(limit)};
  double before = nothing;
  for (int i = 0; i <= steps; ++i) {
    const double amount = nothing + (limit - nothing) * i / steps;
    if (excess(amount) > 0.0) {
      before = amount;
      continue;
    }
    const base::Interval bracket{std::min(before, amount), std::max(before, amount)};
    remedy.amount = i == 0 ? nothing : numeric::bracketed_root(excess, bracket, 1e-9 * std::abs(limit - nothing));
    remedy.component_rms = line_rms * ratio(*remedy.amount);
    break;
  }
  return remedy;
}

}  // namespace

std::string_view name(RemedyKind kind) {
  switch (kind) {
    case RemedyKind::less_force:
      return "less-force";
    case RemedyKind::stiffen:
      return "stiffen";
    case RemedyKind::soften:
      return "soften";
    case RemedyKind::add_mass:
      return "add-mass";
    case RemedyKind::add_damping:
      return "add-damping";
    case RemedyKind::lower_speed:
      return "lower-speed";
    case RemedyKind::higher_speed:
      return "higher-speed";
  }
  return {};
}

std::vector<Remedy> remedies(const OneMode& machine, const ForcingRange& forcing, double line_rms, double allowed_rms) {
  if (forcing.forcing == Forcing::random) throw base::usage_error("remedies", "need a forcing frequency");
  if (!(line_rms > 0.0) || !(allowed_rms > 0.0)) throw base::usage_error("remedies", "need positive velocities");
  const double allowed = allowed_rms / line_rms;
  const double duty = forcing.duty();
  const auto at_duty = [&](const OneMode& changed) { return line_ratio(machine, changed, forcing, duty); };

  const auto moved = [&](double change) {
    OneMode changed = machine;
    changed.frequency_hz *= 1.0 + change;
    return at_duty(changed);
  };
  const auto heavier = [&](double mass_kg) {
    OneMode changed = machine;
    const double whole = 1.0 + mass_kg / machine.modal_mass_kg;
    changed.modal_mass_kg *= whole;
    changed.frequency_hz /= std::sqrt(whole);
    changed.damping_ratio /= std::sqrt(whole);
    return at_duty(changed);
  };
  const auto damped = [&](double damping_ratio) {
    OneMode changed = machine;
    changed.damping_ratio = damping_ratio;
    return at_duty(changed);
  };
  const auto at_speed = [&](double f_hz) { return line_ratio(machine, machine, forcing, f_hz); };
  const auto find = [&](RemedyKind kind, base::Quantity quantity, double nothing, double limit, const auto& ratio) {
    return least_amount(kind, quantity, nothing, limit, line_rms, allowed, ratio);
  };

  using base::Quantity;
  return {Remedy{RemedyKind::less_force, Quantity::ratio, std::min(1.0, allowed), std::min(line_rms, allowed_rms)},
          find(RemedyKind::stiffen, Quantity::ratio, 0.0, 1.0, moved),
          find(RemedyKind::soften, Quantity::ratio, 0.0, -0.4, moved),
          find(RemedyKind::add_mass, Quantity::mass, 0.0, machine.modal_mass_kg, heavier),
          find(RemedyKind::add_damping, Quantity::ratio, machine.damping_ratio, std::max(0.2, machine.damping_ratio),
               damped),
          find(RemedyKind::lower_speed, Quantity::frequency, duty, 0.7 * duty, at_speed),
          find(RemedyKind::higher_speed, Quantity::frequency, duty, 1.3 * duty, at_speed)};
}

}  // namespace stillmass::absorber
