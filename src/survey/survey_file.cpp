#include "stillmass/survey/survey_file.hpp"

#include <algorithm>
#include <cmath>
#include <numbers>
#include <set>
#include <utility>

#include "stillmass/base/error.hpp"
#include "stillmass/base/text.hpp"
#include "stillmass/machine/bearing.hpp"

namespace stillmass::survey {
namespace {

namespace fs = std::filesystem;
using Table = base::Settings::Table;
using base::Interval;

constexpr std::array kinds = {Kind::steady,   Kind::runup,      Kind::coastdown,   Kind::stepped,          Kind::bump,
                              Kind::ringdown, Kind::background, Kind::calibration, Kind::ratio_calibration};
constexpr std::array stages = {Stage::before, Stage::after, Stage::bench, Stage::blocked};

template <class Value, std::size_t n>
Value named(const std::array<Value, n>& all, const std::string& wanted) {
  return *std::find_if(all.begin(), all.end(), [&](Value value) { return name(value) == wanted; });
}

std::optional<double> scaled(std::optional<double> number, double factor) {
  return number ? std::optional(*number * factor) : std::nullopt;
}

std::optional<Interval> scaled(std::optional<Interval> interval, double factor) {
  return interval ? std::optional(Interval{interval->lo * factor, interval->hi * factor}) : std::nullopt;
}

void read_foundation(const Table& table, machine::Machine& machine) {
  if (const auto text = table.text("foundation")) machine.foundation = machine::support_named(*text);
  for (const char* direction : {"horizontal", "vertical", "axial"}) {
    if (const auto text = table.text(std::string("foundation_") + direction)) {
      machine.foundation_by_direction.push_back({direction, *machine::support_named(*text)});
    }
  }
}

void go_together(const Table& row, const char* first, const char* second) {
  if (row.has(first) == row.has(second)) return;
  row.refuse(row.has(first) ? first : second, std::string("'") + first + "' and '" + second + "' go together");
}

double shaft_ratio(const Table& row, const machine::Machine& machine, const std::string& named) {
  const auto ratio = machine.shaft_ratio(named);
  if (!ratio) row.refuse("driven_by", "there is no [[machine.shaft]] named '" + named + "' before this one");
  return *ratio;
}

machine::Shaft read_shaft(const Table& row, const machine::Machine& machine) {
  machine::Shaft shaft;
  shaft.name = *row.text("name");
  shaft.driven_by = row.text("driven_by").value_or("");
  shaft.teeth = row.integer("teeth");
  shaft.vanes = row.integer("vanes");
  go_together(row, "sheave_mm", "driver_sheave_mm");
  const auto sheave = scaled(row.number("sheave_mm"), 1e-3);
  const auto driver_sheave = scaled(row.number("driver_sheave_mm"), 1e-3);
  if (row.has("driver_teeth") && !shaft.teeth) go_together(row, "teeth", "driver_teeth");
  if (sheave) {
    shaft.belt = machine::Belt{*driver_sheave, *sheave, scaled(row.number("belt_length_mm"), 1e-3)};
    if (const auto centre = scaled(row.number("centre_mm"), 1e-3); centre && !shaft.belt->length_m) {
      if (*centre <= 0.5 * (*sheave + *driver_sheave)) row.refuse("centre_mm", "the sheaves would touch");
      shaft.belt->length_m = machine::belt_length(*driver_sheave, *sheave, *centre);
    }
  }
  const double driver = shaft_ratio(row, machine, shaft.driven_by);
  const double driver_u = machine.shaft_ratio_u(shaft.driven_by);
  if (const auto ratio = row.number("ratio")) {
    shaft.ratio = *ratio;
  } else if (const auto driver_teeth = row.integer("driver_teeth")) {
    shaft.ratio = driver * *driver_teeth / *shaft.teeth;
    shaft.ratio_u = driver_u;
  } else if (sheave) {
    shaft.ratio = driver * *driver_sheave / *sheave;
    shaft.ratio_u = std::hypot(driver_u, machine::belt_slip_u);
  } else {
    row.refuse("", "[[machine.shaft]] '" + shaft.name + "' needs 'ratio'",
               "or 'teeth' and 'driver_teeth', or 'sheave_mm' and 'driver_sheave_mm'");
  }
  return shaft;
}

machine::Bearing read_bearing(const Table& row, const machine::Machine& machine) {
  machine::Bearing bearing;
  const std::string name = *row.text("name");
  const auto elements = row.integer("rolling_elements");
  const auto ball = row.number("ball_mm");
  const auto pitch = row.number("pitch_mm");
  if (elements && ball && pitch) {
    bearing.elements = *elements;
    bearing.ball_diameter_m = *ball * 1e-3;
    bearing.pitch_diameter_m = *pitch * 1e-3;
    bearing.contact_angle_rad = row.number("contact_angle_deg").value_or(0.0) * std::numbers::pi / 180.0;
    if (*ball >= *pitch) row.refuse("ball_mm", "'ball_mm' must be smaller than 'pitch_mm'");
  } else if (elements || ball || pitch) {
    row.refuse(elements ? "rolling_elements"
               : ball   ? "ball_mm"
                        : "pitch_mm",
               "'rolling_elements', 'ball_mm' and 'pitch_mm' go together");
  } else if (const auto known = machine::bearing_named(name)) {
    bearing = *known;
  } else {
    const std::string meant = machine::nearest_bearing(name);
    row.refuse("name", "the bearing '" + name + "' is not in the program's table",
               (meant.empty() ? std::string() : "did you mean '" + meant + "'? Else ") +
                   "give rolling_elements, ball_mm and pitch_mm");
  }
  bearing.name = name;
  bearing.shaft = row.text("shaft").value_or("");
  if (!machine.shaft_ratio(bearing.shaft)) {
    row.refuse("shaft", "there is no [[machine.shaft]] named '" + bearing.shaft + "'");
  }
  return bearing;
}

machine::Machine read_machine(const Table& table) {
  machine::Machine machine;
  machine.name = *table.text("name");
  machine.kind = *machine::kind_named(table.text("kind").value_or("general"));
  machine.power_w = scaled(table.number("power_kw"), 1e3);
  machine.speed_hz = scaled(table.interval("speed_rpm"), 1.0 / 60.0);
  machine.supply = *machine::supply_named(table.text("supply").value_or("line"));
  machine.line_frequency_hz = table.number("line_frequency_hz");
  machine.motor_poles = table.integer("motor_poles");
  machine.vanes = table.integer("vanes");
  machine.mass_kg = table.number("mass_kg");
  machine.rotor_mass_kg = table.number("rotor_mass_kg");
  read_foundation(table, machine);
  if (machine.motor_poles && *machine.motor_poles % 2 != 0)
    table.refuse("motor_poles", "'machine.motor_poles' must be even");
  if (machine.speed_hz && machine.speed_hz->lo <= 0.0) table.refuse("speed_rpm", "'machine.speed_rpm' must be above 0");
  if (const auto shift = table.table("stopped_shift")) {
    machine.stopped_shift_frequency = shift->number("frequency").value_or(machine.stopped_shift_frequency);
    machine.stopped_shift_damping = shift->number("damping").value_or(machine.stopped_shift_damping);
  }
  machine.rotor_bars = table.integer("rotor_bars");
  machine.drive_switching_hz = table.number("drive_switching_hz");
  for (const Table& row : table.tables("shaft")) machine.shafts.push_back(read_shaft(row, machine));
  for (const Table& row : table.tables("bearing")) machine.bearings.push_back(read_bearing(row, machine));
  return machine;
}

std::vector<Point> read_points(const Table& root) {
  std::vector<Point> points;
  std::set<std::string> seen;
  for (const Table& row : root.tables("point")) {
    Point point{*row.text("name"), row.text("direction").value_or(""), row.text("on").value_or(""), {}};
    if (!seen.insert(point.name).second) row.refuse("name", "there are two points named '" + point.name + "'");
    if (const auto position = row.numbers("position_m"); row.has("position_m")) {
      if (position.size() != 3) row.refuse("position_m", "'point.position_m' must be [x, y, z]");
      point.position_m = {position[0], position[1], position[2]};
    }
    points.push_back(std::move(point));
  }
  return points;
}

void check_point(const Table& row, const Survey& survey, const std::string& name) {
  if (survey.point(name) != nullptr) return;
  std::vector<std::string_view> names;
  for (const Point& point : survey.points) names.push_back(point.name);
  const std::string_view meant = base::nearest_name(name, names);
  row.refuse("point", "there is no [[point]] named '" + name + "'",
             meant.empty() ? "" : "did you mean '" + std::string(meant) + "'?");
}

recording::ChannelSetting read_channel(const Table& row, const Survey& survey, SurveyRecording& of) {
  recording::ChannelSetting channel;
  channel.index = *row.integer("index");
  channel.point = row.text("point").value_or("");
  channel.direction = row.text("direction").value_or("");
  channel.scale = row.number("scale");
  channel.sensor = row.text("sensor").value_or("");
  channel.sensitivity_mv_per_unit = row.number("sensitivity_mv_per_unit");
  channel.full_scale_v = row.number("full_scale_v");
  if (const auto role = row.text("role")) {
    for (const recording::Role each : {recording::Role::vibration, recording::Role::force, recording::Role::tacho}) {
      if (name(each) == *role) channel.role = each;
    }
  }
  if (!channel.point.empty()) {
    check_point(row, survey, channel.point);
    if (channel.direction.empty()) channel.direction = survey.point(channel.point)->direction;
  }
  if (const auto given = row.text("name")) {
    channel.name = given;
  } else if (!channel.point.empty()) {
    channel.name = channel.role == recording::Role::force ? channel.point + "-force" : channel.point;
  } else if (channel.role == recording::Role::tacho) {
    channel.name = "tacho";
  }
  if (const auto text = row.text("unit")) {
    channel.unit = base::unit_named(*text);
    if (!channel.unit) {
      row.refuse("unit", "'" + *text + "' is not a unit known here",
                 "one of g, m/s2, mm/s, m/s, in/s, um, mm, m, mil, N, lbf, V, 1, tacho");
    }
  }
  if (channel.scale && *channel.scale == 0.0) row.refuse("scale", "'scale' must not be 0");
  if (channel.scale && channel.sensitivity_mv_per_unit) {
    row.refuse("scale", "give 'scale' or 'sensitivity_mv_per_unit', not both");
  }
  if (channel.sensitivity_mv_per_unit.has_value() != channel.full_scale_v.has_value()) {
    row.refuse(channel.full_scale_v ? "full_scale_v" : "sensitivity_mv_per_unit",
               "'sensitivity_mv_per_unit' and 'full_scale_v' go together");
  }
  if (channel.sensitivity_mv_per_unit && *channel.sensitivity_mv_per_unit == 0.0) {
    row.refuse("sensitivity_mv_per_unit", "'sensitivity_mv_per_unit' must not be 0");
  }
  if (channel.role == recording::Role::tacho) {
    of.pulses_per_turn = row.integer("pulses_per_turn").value_or(1);
    of.falling_edge = row.text("edge") == "falling";
  }
  return channel;
}

void read_calibration(const Table& row, SurveyRecording& out) {
  if (const auto table = row.table("calibrator")) {
    if (out.kind != Kind::calibration) row.refuse("calibrator", "only a recording of kind \"calibration\" has one");
    const std::string name = table->text("unit").value_or("m/s2");
    const auto unit = base::unit_named(name);
    if (!unit || !base::is_motion(unit->quantity)) {
      table->refuse("unit", "'" + name + "' is not a unit of vibration", "one of m/s2, g, mm/s, um");
    }
    out.calibrator.quantity = unit->quantity;
    out.calibrator.frequency_hz = table->number("frequency_hz").value_or(out.calibrator.frequency_hz);
    out.calibrator.rms = table->number("level").value_or(10.0) * unit->to_si;
    out.calibrator.relative_u = table->number("u_percent").value_or(1.5) * 1e-2;
  }
  if (const auto table = row.table("known_mass")) {
    out.hung_mass = spectral::HungMass{*table->number("kg"), table->number("u_percent").value_or(0.1) * 1e-2,
                                       table->number("least_hz").value_or(10.0)};
  }
  if ((out.kind == Kind::ratio_calibration) != out.hung_mass.has_value()) {
    row.refuse(out.hung_mass ? "known_mass" : "kind",
               "a recording of kind \"ratio-calibration\" and 'known_mass' go together",
               "weigh the hung mass and write known_mass = { kg = 10.0 }");
  }
}

recording::TextOptions read_text_options(const Table& row) {
  recording::TextOptions text;
  if (const auto word = row.text("separator")) text.separator = recording::separator_named(*word);
  if (const auto word = row.text("decimal")) text.decimal = recording::decimal_named(*word);
  if (const auto word = row.text("time_unit")) text.time_unit_s = recording::time_unit_named(*word);
  if (const auto word = row.text("dates")) text.day_first = recording::day_first_named(*word);
  if (const auto column = row.integer("time_column")) text.time_column = static_cast<int>(*column);
  return text;
}

SurveyRecording read_recording(const Table& row, const Survey& survey) {
  SurveyRecording out;
  out.written = *row.text("file");
  out.file = survey.file.parent_path() / out.written;
  out.line = row.line("file");
  out.kind = named(kinds, *row.text("kind"));
  out.stage = named(stages, row.text("stage").value_or("before"));
  const bool hammered = out.kind == Kind::bump || out.kind == Kind::ringdown || out.kind == Kind::background ||
                        out.kind == Kind::calibration || out.kind == Kind::ratio_calibration;
  out.running = row.text("state").value_or(hammered ? "stopped" : "running") == "running";
  out.speed_hz = scaled(row.number("speed_rpm"), 1.0 / 60.0);
  out.part_s = row.interval("part_s");
  out.added_mass_kg = row.number("added_mass_kg");
  out.open.rate_hz = row.number("rate_hz");
  out.open.text = read_text_options(row);
  std::set<int> seen;
  for (const Table& channel : row.tables("channel")) {
    out.open.channels.push_back(read_channel(channel, survey, out));
    if (!seen.insert(out.open.channels.back().index).second) channel.refuse("index", "the channel index stands twice");
  }
  read_calibration(row, out);
  std::error_code ignored;
  if (!fs::is_regular_file(out.file, ignored)) {
    row.refuse("file", "the recording '" + out.written + "' is not there", "put it beside the survey file");
  }
  return out;
}

Limit read_limit(const Table& row) {
  Limit limit;
  limit.standard = row.text("standard").value_or("");
  limit.category = row.text("category").value_or("");
  limit.shaft_height_m = scaled(row.number("shaft_height_mm"), 1e-3);
  limit.target_m_s = scaled(row.number("target_mm_s"), 1e-3);
  limit.alarm_m_s = scaled(row.number("alarm_mm_s"), 1e-3);
  limit.trip_m_s = scaled(row.number("trip_mm_s"), 1e-3);
  if (limit.standard.empty() && !limit.target_m_s && !limit.alarm_m_s && !limit.trip_m_s) {
    row.refuse("", "[[limit]] needs 'standard' or 'target_mm_s'");
  }
  const auto ascend = [&](const auto& lower, const auto& upper, const char* key, const char* than) {
    if (lower && upper && *upper < *lower)
      row.refuse(key, std::string("'") + key + "' must not be below '" + than + "'");
  };
  ascend(limit.target_m_s, limit.alarm_m_s, "alarm_mm_s", "target_mm_s");
  ascend(limit.alarm_m_s, limit.trip_m_s, "trip_mm_s", "alarm_mm_s");
  ascend(limit.target_m_s, limit.trip_m_s, "trip_mm_s", "target_mm_s");
  return limit;
}

AbsorberSite read_absorber(const Table& row, const Survey& survey) {
  AbsorberSite site{*row.text("point"), row.texts("axes"), row.number("max_mass_kg"),
                    scaled(row.number("max_travel_mm"), 1e-3), row.interval("temperature_c")};
  check_point(row, survey, site.point);
  return site;
}

}  // namespace

std::string_view name(Kind kind) {
  switch (kind) {
    case Kind::steady:
      return "steady";
    case Kind::runup:
      return "runup";
    case Kind::coastdown:
      return "coastdown";
    case Kind::stepped:
      return "stepped";
    case Kind::bump:
      return "bump";
    case Kind::ringdown:
      return "ringdown";
    case Kind::background:
      return "background";
    case Kind::calibration:
      return "calibration";
    case Kind::ratio_calibration:
      return "ratio-calibration";
  }
  return "";
}

std::string_view name(Stage stage) {
  switch (stage) {
    case Stage::before:
      return "before";
    case Stage::after:
      return "after";
    case Stage::bench:
      return "bench";
    case Stage::blocked:
      return "blocked";
  }
  return "";
}

const Point* Survey::point(std::string_view wanted) const {
  const auto at = std::find_if(points.begin(), points.end(), [&](const Point& each) { return each.name == wanted; });
  return at == points.end() ? nullptr : &*at;
}

Survey read_survey(const fs::path& file) {
  const base::Settings settings = base::Settings::read(file, survey_keys());
  const Table& root = settings.root();
  Survey survey;
  survey.file = file;
  survey.machine = read_machine(*root.table("machine"));
  survey.points = read_points(root);
  for (const Table& row : root.tables("recording")) survey.recordings.push_back(read_recording(row, survey));
  for (const Table& row : root.tables("limit")) survey.limits.push_back(read_limit(row));
  for (const Table& row : root.tables("absorber")) survey.absorbers.push_back(read_absorber(row, survey));
  for (const Limit& limit : survey.limits) {
    if (limit.shaft_height_m) survey.machine.shaft_height_m = limit.shaft_height_m;
  }
  return survey;
}

}  // namespace stillmass::survey
