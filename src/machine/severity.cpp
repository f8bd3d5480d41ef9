#include "stillmass/machine/severity.hpp"

#include <algorithm>
#include <array>

#include <fmt/format.h>

#include "stillmass/base/error.hpp"
#include "stillmass/base/tables.hpp"
#include "stillmass/base/text.hpp"
#include "stillmass/machine/verdict.hpp"

namespace stillmass::machine {
namespace {

using base::KeyType;

constexpr auto keys = std::to_array<base::Key>({
    {"row", KeyType::tables, "", true, "", "one line of a standard's table", "", {}},
    {"row.standard", KeyType::text, "", true, "", "name of the standard", "", {}},
    {"row.category", KeyType::text, "", true, "", "group, category or class", "", {}},
    {"row.support", KeyType::text, "", false, "", "support class; absent: both", "rigid|flexible", {}},
    {"row.power_kw", KeyType::number_or_pair, "kW", true, "", "rated power", "", {0, 1e6}},
    {"row.shaft_height_mm", KeyType::number_or_pair, "mm", false, "", "of electrical machines", "", {0, 1e4}},
    {"row.limits_mm_s", KeyType::numbers, "mm/s", false, "", "A/B, B/C, C/D", "", {0.01, 1000}},
    {"row.limits_um", KeyType::numbers, "um", false, "", "A/B, B/C, C/D", "", {0.1, 10000}},
    {"row.slow_limits_um", KeyType::numbers, "um", false, "", "peak-to-peak, below 600 r/min", "", {0.1, 10000}},
    {"row.slow_source", KeyType::text, "", false, "", "where those come from", "", {}},
    {"row.ranges_mm_s", KeyType::numbers, "mm/s", false, "", "lowest and highest of A/B, B/C, C/D", "", {0.01, 1000}},
    {"row.source", KeyType::text, "", true, "", "where the numbers come from", "", {}},
});

constexpr const char* pumps = "ISO 10816-7";
constexpr const char* machines = "ISO 10816-3";
constexpr const char* ranges = "ISO 20816-1";
constexpr const char* handed_over =
    "pumps were handed from ISO 10816-3 to ISO 10816-7 in 2009: groups 3 and 4 are those of the 1998 edition";
constexpr double slow_hz = 600.0 / 60.0;  // and below: the band begins at 2 Hz (from memory)
constexpr base::Interval part3_speed_hz{120.0 / 60.0, 15000.0 / 60.0};  // covered by part 3 (from memory)

std::array<double, 3> three(const base::Settings::Table& row, std::string_view key, double to_si) {
  const std::vector<double> given = row.numbers(key);
  if (given.size() != 3 || !std::is_sorted(given.begin(), given.end())) row.refuse(key, "three ascending limits");
  return {given[0] * to_si, given[1] * to_si, given[2] * to_si};
}

base::Interval scaled(base::Interval interval, double factor) { return {interval.lo * factor, interval.hi * factor}; }

// "I", "category I" and "Category I" name the same.
bool names_category(std::string_view given, std::string_view category) {
  const std::string wanted = base::lower(base::trimmed(given));
  const std::string full = base::lower(category);
  return wanted == full || wanted == full.substr(full.rfind(' ') + 1);
}

base::Refusal unknown(std::string seen, std::string measure) {
  return {"limit-unknown", std::move(seen), std::move(measure)};
}

bool judged_by_height(const Machine& machine) {
  return machine.kind == MachineKind::motor && machine.shaft_height_m.has_value();
}

// Fits the machine's size: the shaft height of a motor where both know it, else the power (above lo, up to hi).
bool fits_size(const SeverityRow& row, const Machine& machine) {
  if (judged_by_height(machine) && row.shaft_height_m) return row.shaft_height_m->contains(*machine.shaft_height_m);
  return machine.power_w && *machine.power_w > row.power_w.lo && *machine.power_w <= row.power_w.hi;
}

base::Refusal no_row(const std::string& standard, const Machine& machine, Support support) {
  std::string seen = "the power of the machine is not known";
  if (judged_by_height(machine)) {
    seen = fmt::format("{} has no limits for a shaft height of {:.4g} mm, {}", standard,
                       *machine.shaft_height_m * 1000.0, name(support));
  } else if (machine.power_w) {
    seen = fmt::format("{} has no limits for {:.3g} kW, {}", standard, *machine.power_w / 1000.0, name(support));
  }
  return unknown(std::move(seen), "say the power, name another standard, or set a target of your own");
}

Zone zone_of(const std::array<double, 3>& limits, double value) {
  const auto passed = std::count_if(limits.begin(), limits.end(), [&](double limit) { return value > limit; });
  return static_cast<Zone>(passed);
}

// The standard's rows of that category, or all where it is not said.
std::vector<SeverityRow> rows_of(const std::string& standard, const std::string& category) {
  std::vector<SeverityRow> rows = severity_table();
  std::string known;
  for (const SeverityRow& row : rows) {
    if (known.find(row.standard) == std::string::npos) known += (known.empty() ? "" : ", ") + row.standard;
  }
  std::erase_if(rows, [&](const SeverityRow& row) { return row.standard != standard; });
  if (rows.empty()) throw base::usage_error("limit", "no table for '" + standard + "'", "known: " + known);
  if (category.empty()) return rows;
  std::erase_if(rows, [&](const SeverityRow& row) { return !names_category(category, row.category); });
  if (rows.empty()) throw base::usage_error("limit", standard + " has no category '" + category + "'");
  return rows;
}

}  // namespace

std::string_view name(Zone zone) {
  constexpr std::array<std::string_view, 4> names = {"A", "B", "C", "D"};
  return names[static_cast<std::size_t>(zone)];
}

std::vector<SeverityRow> severity_table() {
  std::vector<SeverityRow> out;
  for (const base::Settings::Table& row : base::table_rows("severity.toml", keys)) {
    if (row.has("ranges_mm_s")) continue;
    SeverityRow& line = out.emplace_back();
    line.standard = *row.text("standard");
    line.category = *row.text("category");
    if (const auto support = row.text("support")) line.support = support_named(*support);
    line.power_w = scaled(*row.interval("power_kw"), 1000.0);
    if (const auto height = row.interval("shaft_height_mm")) line.shaft_height_m = scaled(*height, 1e-3);
    line.velocity_limits = three(row, "limits_mm_s", 1e-3);
    if (row.has("limits_um")) line.displacement_limits = three(row, "limits_um", 1e-6);
    if (row.has("slow_limits_um")) line.slow_limits = three(row, "slow_limits_um", 1e-6);
    line.slow_source = row.text("slow_source").value_or("");
    line.source = *row.text("source");
  }
  return out;
}

TypicalRanges typical_ranges() {
  TypicalRanges out;
  for (const base::Settings::Table& row : base::table_rows("severity.toml", keys)) {
    const std::vector<double> given = row.numbers("ranges_mm_s");
    if (!row.has("ranges_mm_s")) continue;
    if (given.size() != 6) row.refuse("ranges_mm_s", "three ranges");
    out.standard = *row.text("standard");
    for (std::size_t i = 0; i < 3; ++i) out.boundary[i] = {given[2 * i] * 1e-3, given[2 * i + 1] * 1e-3};
    out.source = *row.text("source");
  }
  return out;
}

base::Answer<SeverityLimits> severity_limits(const Machine& machine, const SeverityQuestion& question) {
  const bool pump = machine.kind == MachineKind::pump;
  const std::string standard = question.standard.empty() ? (pump ? pumps : machines) : question.standard;
  if (standard == ranges) {
    return unknown(standard + " gives typical ranges of the boundaries, no boundaries",
                   "name the standard of the machine (ISO 10816-3, ISO 10816-7) or set a target of your own");
  }
  const std::vector<SeverityRow> rows = rows_of(standard, question.category);
  if (!question.on_bearing_housing) {
    return unknown("the point is not on a bearing housing",
                   "measure on the bearing housings: the zones hold there only");
  }
  const auto support = question.support ? question.support : machine.support(question.direction);
  if (!support) {
    return unknown("the support class of the direction is not known",
                   "say the foundation (rigid or flexible), or find the lowest natural frequency by a bump test");
  }
  if (standard == pumps && question.category.empty()) {
    return unknown(standard + " asks for the category of the pump", "say category I or II in the limit");
  }
  if (standard == machines && pump && question.category.empty()) {
    return unknown(standard + " parts pumps by their driver",
                   "say group 3 (driver of its own) or group 4 (driver built in) in the limit, or take ISO 10816-7");
  }
  if (!machine.speed_hz) return unknown("the running speed is not known", "say the speed of the machine");
  if (standard == machines && !part3_speed_hz.intersects(*machine.speed_hz)) {
    return unknown(fmt::format("{} covers 120 to 15000 r/min", standard), "set a target of your own");
  }
  const bool no_pump =
      standard == machines && question.category.empty();  // groups 3 and 4 are pumps, and have no height
  const auto row = std::find_if(rows.begin(), rows.end(), [&](const SeverityRow& each) {
    if (no_pump && !each.shaft_height_m) return false;
    return (!each.support || each.support == support) && fits_size(each, machine);
  });
  if (row == rows.end()) return no_row(standard, machine, *support);
  SeverityLimits limits;
  limits.standard = row->standard;
  limits.category = row->category;
  limits.support = row->support;
  limits.velocity = row->velocity_limits;
  limits.displacement = row->displacement_limits;
  limits.source = row->source;
  if (machine.speed_hz->lo <= slow_hz) limits.band_hz.lo = 2.0;
  if (machine.speed_hz->lo < slow_hz) {
    limits.displacement_pp = row->slow_limits;
    if (row->slow_limits) limits.displacement_pp_source = row->slow_source;
  }
  if (standard == machines && pump) limits.note = handed_over;
  return limits;
}

Zone zone(const SeverityLimits& limits, double velocity, std::optional<double> displacement) {
  const Zone by_velocity = zone_of(limits.velocity, velocity);
  if (!displacement || !limits.displacement) return by_velocity;
  return std::max(by_velocity, zone_of(*limits.displacement, *displacement));
}

}  // namespace stillmass::machine
