#include "stillmass/machine/verdict.hpp"

#include <algorithm>
#include <tuple>
#include <utility>

#include <fmt/format.h>

namespace stillmass::machine {
namespace {

constexpr double low_end_missing = 1.1;  // of the band's lower end (common practice)
constexpr double top_end_held = 0.4;     // of its upper end (common practice)
constexpr double slow_band_hz = 2.0;     // the band of machines at 600 r/min and below begins here

base::Refusal unknown(std::string seen, std::string measure) {
  return {"limit-unknown", std::move(seen), std::move(measure)};
}

// How many of the limits a value has passed; on a limit it has not.
template <class Limits>
std::size_t passed(const Limits& limits, double value) {
  return static_cast<std::size_t>(
      std::count_if(limits.begin(), limits.end(), [&](double limit) { return value > limit; }));
}

// value -+ 2 u.
base::Interval within(const base::Estimate& level) {
  const double reach = 2.0 * base::widened(level.u, level.dof).value_or(0.0);
  return {level.value - reach, level.value + reach};
}

JudgedLevel judged(Judged what, const base::Estimate& value, const std::array<double, 3>& limits) {
  const base::Interval range = within(value);
  return {what,
          value,
          limits,
          static_cast<Zone>(passed(limits, value.value)),
          static_cast<Zone>(passed(limits, range.lo)),
          static_cast<Zone>(passed(limits, range.hi))};
}

double share_of(const JudgedLevel& level) { return level.value.value / level.limits[2]; }

template <class Enum>
std::vector<Enum> from_to(Enum first, Enum last) {
  std::vector<Enum> out;
  for (int i = static_cast<int>(first); i <= static_cast<int>(last); ++i) out.push_back(static_cast<Enum>(i));
  return out;
}

std::string list_of(const std::vector<std::string>& words) {
  std::string out;
  for (std::size_t i = 0; i < words.size(); ++i) {
    out += (i == 0 ? "" : i + 1 == words.size() ? " and " : ", ") + words[i];
  }
  return out;
}

std::string text_of(const RangeVerdict& verdict) {
  constexpr std::array<const char*, 3> boundaries = {"A/B", "B/C", "C/D"};
  std::vector<std::string> held;
  for (std::size_t i = 0; i < 3; ++i) {
    if (verdict.place[i] == Place::within) held.emplace_back(boundaries[i]);
  }
  std::string out;
  if (!held.empty()) {
    out = "within the range of " + list_of(held);
  } else {  // the ranges overlap, so there is nothing between them
    out = verdict.place[0] == Place::below ? "below the range of A/B" : "above the range of C/D";
  }
  if (verdict.best == verdict.worst) return out;
  return fmt::format("{}: zone {} to {}, not decided", out, name(verdict.best), name(verdict.worst));
}

}  // namespace

std::string_view name(Judged judged) {
  constexpr std::array<std::string_view, 3> names = {"velocity r.m.s.", "displacement r.m.s.",
                                                     "displacement peak-to-peak"};
  return names[static_cast<std::size_t>(judged)];
}

std::string_view name(Place place) {
  constexpr std::array<std::string_view, 3> names = {"below", "within", "above"};
  return names[static_cast<std::size_t>(place)];
}

std::string_view name(PlantState state) {
  constexpr std::array<std::string_view, 4> names = {"within the limits", "above target", "above alarm", "above trip"};
  return names[static_cast<std::size_t>(state)];
}

std::string text(const SeverityVerdict& verdict) {
  std::string out = "zone ";
  for (std::size_t i = 0; i < verdict.could_be.size(); ++i) {
    out += (i == 0 ? "" : i + 1 == verdict.could_be.size() ? " or " : ", ") + std::string(name(verdict.could_be[i]));
  }
  return out;
}

base::Answer<SeverityVerdict> judge(const SeverityLimits& limits, const SeverityLevels& levels) {
  if (!levels.usable) return unknown("the channel is unusable", "record again: see what `check` says of it");
  if (!levels.unit_known) {
    return unknown("unit and sensitivity of the channel were assumed", "say them, or record a calibrator");
  }
  if (levels.held_hz.lo > low_end_missing * limits.band_hz.lo || levels.held_hz.hi < top_end_held * limits.band_hz.hi) {
    return unknown(fmt::format("the spectrum covers only {:.3g} to {:.4g} Hz", levels.held_hz.lo, levels.held_hz.hi),
                   fmt::format("record at 2560 Hz or more, for long enough, with a sensor that reaches {:.3g} Hz",
                               limits.band_hz.lo));
  }
  const bool slow = limits.band_hz.lo <= slow_band_hz;
  if ((limits.displacement_pp && !levels.displacement_pp) || (slow && limits.displacement && !levels.displacement)) {
    return unknown(limits.standard + " limits the displacement of so slow a machine, and it was not measured",
                   "record with a sensor that is true down to 2 Hz");
  }
  SeverityVerdict out;
  out.levels.push_back(judged(Judged::velocity, levels.velocity, limits.velocity));
  if (limits.displacement && levels.displacement) {
    out.levels.push_back(judged(Judged::displacement, *levels.displacement, *limits.displacement));
  }
  if (limits.displacement_pp && levels.displacement_pp) {
    out.levels.push_back(judged(Judged::displacement_pp, *levels.displacement_pp, *limits.displacement_pp));
  }
  Zone best = Zone::a;
  Zone worst = Zone::a;
  for (std::size_t i = 0; i < out.levels.size(); ++i) {
    const JudgedLevel& each = out.levels[i];
    const JudgedLevel& so_far = out.levels[out.rules];
    if (std::pair(each.zone, share_of(each)) > std::pair(so_far.zone, share_of(so_far))) out.rules = i;
    best = std::max(best, each.best);
    worst = std::max(worst, each.worst);
    if (!each.value.u) out.has_uncertainty = false;
  }
  out.zone = out.levels[out.rules].zone;
  out.share = share_of(out.levels[out.rules]);
  out.could_be = from_to(best, worst);
  return out;
}

RangeVerdict against_ranges(const TypicalRanges& ranges, const base::Estimate& velocity) {
  RangeVerdict out;
  const base::Interval range = within(velocity);
  std::size_t certain = 0;
  std::size_t possible = 0;
  for (std::size_t i = 0; i < 3; ++i) {
    const base::Interval& boundary = ranges.boundary[i];
    out.place[i] = velocity.value < boundary.lo   ? Place::below
                   : velocity.value > boundary.hi ? Place::above
                                                  : Place::within;
    if (range.lo > boundary.hi) ++certain;
    if (range.hi > boundary.lo) ++possible;
  }
  out.best = static_cast<Zone>(certain);
  out.worst = static_cast<Zone>(possible);
  out.text = text_of(out);
  return out;
}

std::optional<PlantVerdict> against_plant(const PlantLimits& limits, const base::Estimate& velocity) {
  const auto state = [&](double value) {
    if (limits.trip && value > *limits.trip) return PlantState::above_trip;
    if (limits.alarm && value > *limits.alarm) return PlantState::above_alarm;
    if (limits.target && value > *limits.target) return PlantState::above_target;
    return PlantState::within;
  };
  const auto is_set = [&](PlantState each) {
    return each == PlantState::within || (each == PlantState::above_target && limits.target) ||
           (each == PlantState::above_alarm && limits.alarm) || (each == PlantState::above_trip && limits.trip);
  };
  std::optional<double> lowest;
  for (const auto& limit : {limits.target, limits.alarm, limits.trip}) {
    if (limit && (!lowest || *limit < *lowest)) lowest = limit;
  }
  if (!lowest) return {};
  PlantVerdict out;
  const base::Interval range = within(velocity);
  out.state = state(velocity.value);
  for (const PlantState each : from_to(state(range.lo), state(range.hi))) {
    if (is_set(each)) out.could_be.push_back(each);
  }
  out.over = velocity.value / *lowest;
  return out;
}

std::optional<std::size_t> worst_point(std::span<const SeverityVerdict> points) {
  if (points.empty()) return {};
  const auto at = std::max_element(points.begin(), points.end(), [](const auto& a, const auto& b) {
    return std::tuple(a.zone, a.share) < std::tuple(b.zone, b.share);
  });
  return static_cast<std::size_t>(at - points.begin());
}

}  // namespace stillmass::machine
