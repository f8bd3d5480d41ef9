#include "stillmass/simulate/skid_file.hpp"

#include <cmath>
#include <numbers>
#include <set>

#include <fmt/format.h>

#include "stillmass/base/error.hpp"

namespace stillmass::simulate {
namespace {

using Table = base::Settings::Table;

constexpr double degree = std::numbers::pi / 180.0;

Vector3 vector_of(const Table& table, std::string_view key) {
  const auto numbers = table.numbers(key);
  if (numbers.size() != 3) table.refuse(key, fmt::format("'{}' must be a list of three numbers [x, y, z]", key));
  return {numbers[0], numbers[1], numbers[2]};
}

Vector3 vector_or_zero(const Table& table, std::string_view key) {
  return table.has(key) ? vector_of(table, key) : Vector3{};
}

Vector3 axis_of(const std::string& name) {
  Vector3 direction{};
  direction[static_cast<std::size_t>(name[1] - 'x')] = name[0] == '-' ? -1.0 : 1.0;
  return direction;
}

// The place of the named thing in its list; an error at that key where there is none.
template <class Named>
std::size_t index_of(const Table& table, std::string_view key, const std::vector<Named>& list) {
  const std::string name = table.text(key).value_or("");
  std::string known;
  for (std::size_t i = 0; i < list.size(); ++i) {
    if (list[i].name == name) return i;
    known += (known.empty() ? "" : ", ") + list[i].name;
  }
  table.refuse(key, fmt::format("'{}': there is no \"{}\"", key, name), "known here: " + known);
}

// Names must tell their bearers apart.
template <class Named>
void add_named(const Table& table, std::string_view key, std::vector<Named>& list, Named one) {
  for (const Named& each : list) {
    if (each.name == one.name)
      table.refuse(key, fmt::format("\"{}\" is there twice", one.name), "give each its own name");
  }
  list.push_back(std::move(one));
}

Body read_body(const Table& table) {
  return {*table.text("name"), *table.number("mass_kg"), vector_of(table, "centre_m"),
          vector_of(table, "inertia_kg_m2")};
}

Spring read_spring(const Table& table, const SkidFile& skid) {
  Spring spring;
  spring.body = index_of(table, "body", skid.bodies);
  if (table.text("to").value_or("ground") != "ground") {
    spring.other = index_of(table, "to", skid.bodies);
    if (*spring.other == spring.body) table.refuse("to", "a spring joins two different bodies");
  }
  spring.at_m = vector_of(table, "at_m");
  spring.stiffness_n_per_m = vector_of(table, "stiffness_n_per_m");
  return spring;
}

ForceKind force_kind(const std::string& name) {
  if (name == "unbalance") return ForceKind::unbalance;
  if (name == "order") return ForceKind::order;
  if (name == "line") return ForceKind::line;
  if (name == "neighbour") return ForceKind::neighbour;
  return name == "flow" ? ForceKind::flow : ForceKind::ambient;
}

Force read_force(const Table& table, const SkidFile& skid) {
  Force force;
  force.kind = force_kind(*table.text("kind"));
  force.body = index_of(table, "body", skid.bodies);
  force.at_m = vector_of(table, "at_m");
  force.unbalance_kg_m = table.number("unbalance_g_mm").value_or(0.0) * 1e-6;
  const bool broadband = force.kind == ForceKind::flow || force.kind == ForceKind::ambient;
  force.amplitude = vector_or_zero(table, broadband ? "density_n_per_rthz" : "amplitude_n");
  force.multiple = table.number("multiple").value_or(1.0);
  force.frequency_hz = table.number("frequency_hz").value_or(0.0);
  if ((force.kind == ForceKind::neighbour) != (force.frequency_hz > 0.0)) {
    table.refuse("kind", "a force of kind \"neighbour\" and 'frequency_hz' go together");
  }
  force.phase_rad = table.number("phase_deg").value_or(0.0) * degree;
  force.corner_hz = table.number("corner_hz").value_or(500.0);
  return force;
}

Hammer read_hammer(const Table& table, const SkidFile& skid) {
  Hammer hammer;
  hammer.point = index_of(table, "point", skid.points);
  hammer.peak_n = *table.number("peak_n");
  hammer.spread = table.number("spread").value_or(0.0);
  hammer.tip_s = *table.number("tip_ms") * 1e-3;
  hammer.first_s = table.number("first_s").value_or(1.0);
  hammer.interval_s = *table.number("interval_s");
  hammer.blows = *table.integer("blows");
  hammer.double_hit = table.integer("double_hit").value_or(0);
  hammer.bounce_s = table.number("bounce_ms").value_or(45.0) * 1e-3;
  hammer.bounce_ratio = table.number("bounce_ratio").value_or(0.4);
  hammer.overload = table.integer("overload").value_or(0);
  hammer.overload_ratio = table.number("overload_ratio").value_or(2.0);
  return hammer;
}

Sensor read_sensor(const Table& table) {
  Sensor sensor;
  sensor.name = *table.text("name");
  sensor.unit = *base::unit_named(*table.text("unit"));
  sensor.sensitivity_v = *table.number("sensitivity_mv_per_unit") * 1e-3;
  sensor.sensitivity_error = table.number("sensitivity_error").value_or(0.0);
  sensor.noise = table.number("noise_per_rthz").value_or(0.0);
  sensor.low_corner_hz = table.number("low_corner_hz").value_or(0.0);
  return sensor;
}

PlannedChannel read_channel(const Table& table, const SkidFile& skid) {
  PlannedChannel channel;
  const std::string role = table.text("role").value_or("vibration");
  channel.sensor = index_of(table, "sensor", skid.sensors);
  channel.full_scale_v = table.number("full_scale_v").value_or(5.0);
  auto expected = base::Quantity::acceleration;
  if (role == "force") {
    channel.role = recording::Role::force;
    expected = base::Quantity::force;
  } else if (role == "tacho") {
    channel.role = recording::Role::tacho;
    expected = base::Quantity::pulse;
  } else {
    channel.point = index_of(table, "point", skid.points);
  }
  if (skid.sensors[channel.sensor].unit.quantity != expected) {
    table.refuse("sensor", fmt::format("the sensor \"{}\" is not one of {}", skid.sensors[channel.sensor].name, role));
  }
  return channel;
}

recording::CsvStyle read_csv_style(const Table& table) {
  recording::CsvStyle style;
  style.separator = table.text("separator").value_or(",").front();
  style.decimal = table.text("decimal").value_or(".").front();
  if (style.separator == style.decimal) table.refuse("decimal", "separator and decimal sign must differ");
  style.decimals = table.integer("decimals").value_or(5);
  style.header_lines = table.texts("header");
  return style;
}

PlannedRecording read_recording(const Table& table, const SkidFile& skid) {
  PlannedRecording plan;
  plan.file = *table.text("file");
  const std::filesystem::path name(plan.file);
  if (name.filename() != name || (name.extension() != ".wav" && name.extension() != ".csv")) {
    table.refuse("file", "'file' must be a name that ends in .wav or .csv, without a folder");
  }
  if (name.extension() == ".csv") plan.csv = read_csv_style(table);
  const std::string kind = *table.text("kind");
  plan.kind = kind == "steady"       ? RecordingKind::steady
              : kind == "coastdown"  ? RecordingKind::coastdown
              : kind == "background" ? RecordingKind::background
              : kind == "calibrator" ? RecordingKind::calibrator
              : kind == "hung-mass"  ? RecordingKind::hung_mass
                                     : RecordingKind::bump;
  plan.hung_mass_kg = table.number("hung_mass_kg").value_or(0.0);
  if ((plan.kind == RecordingKind::hung_mass) != (plan.hung_mass_kg > 0.0)) {
    table.refuse("kind", "a recording of kind \"hung-mass\" and 'hung_mass_kg' go together");
  }
  plan.rate_hz = *table.number("rate_hz");
  plan.duration_s = *table.number("duration_s");
  plan.switch_off_s = table.number("switch_off_s").value_or(0.0);
  plan.bits = table.integer("bits").value_or(16);
  if (!plan.csv && plan.bits != 16 && plan.bits != 24) table.refuse("bits", "a WAV recorder has 16 or 24 bits");
  if (!plan.csv && plan.rate_hz != std::floor(plan.rate_hz))
    table.refuse("rate_hz", "a WAV file holds whole rates only");
  plan.fitted = table.flag("fitted").value_or(false);
  if (plan.fitted && !skid.absorber) table.refuse("fitted", "there is no [absorber] to be fitted");
  const bool is_struck = plan.kind == RecordingKind::bump || plan.kind == RecordingKind::hung_mass;
  if (is_struck && !skid.hammer) table.refuse("kind", "there is no [hammer]");
  for (const Table& channel : table.tables("channel")) plan.channels.push_back(read_channel(channel, skid));
  if (plan.channels.empty()) table.refuse("channel", "a recording has at least one channel");
  return plan;
}

Drive read_drive(const Table& table) {
  return {*table.number("speed_rpm") / 60.0, table.number("line_frequency_hz").value_or(50.0),
          table.number("wander").value_or(0.0), table.number("coast_time_s").value_or(0.5),
          table.number("friction_rpm_per_s").value_or(60.0) / 60.0};
}

void read_tables(const Table& root, SkidFile& skid) {
  for (const Table& table : root.tables("body")) add_named(table, "name", skid.bodies, read_body(table));
  for (const Table& table : root.tables("spring")) skid.springs.push_back(read_spring(table, skid));
  for (const Table& table : root.tables("point")) {
    add_named(table, "name", skid.points,
              Point{*table.text("name"), index_of(table, "body", skid.bodies), vector_of(table, "at_m"),
                    axis_of(*table.text("direction"))});
  }
  for (const Table& table : root.tables("force")) skid.forces.push_back(read_force(table, skid));
  if (const auto table = root.table("absorber")) {
    skid.absorber = FittedAbsorber{index_of(*table, "point", skid.points), *table->number("mass_kg"),
                                   *table->number("frequency_hz"), *table->number("damping_ratio")};
  }
  if (const auto table = root.table("hammer")) skid.hammer = read_hammer(*table, skid);
  for (const Table& table : root.tables("sensor")) add_named(table, "name", skid.sensors, read_sensor(table));
  std::set<std::string> files;
  for (const Table& table : root.tables("recording")) {
    skid.recordings.push_back(read_recording(table, skid));
    if (!files.insert(skid.recordings.back().file).second) table.refuse("file", "this file is made twice");
  }
}

SkidFile skid_from(const base::Settings& settings) {
  const Table& root = settings.root();
  SkidFile skid;
  skid.name = *root.text("name");
  skid.seed = static_cast<std::uint64_t>(*root.integer("seed"));
  skid.drive = read_drive(*root.table("drive"));
  const Table structure = *root.table("structure");
  skid.running_shift = structure.number("running_shift").value_or(0.0);
  skid.damping_ratios = structure.numbers("damping_ratios");
  if (skid.damping_ratios.empty()) structure.refuse("damping_ratios", "at least one damping ratio is needed");
  if (const auto tacho = root.table("tacho")) {
    skid.tacho_angle_rad = tacho->number("angle_deg").value_or(0.0) * degree;
    skid.tacho_width = tacho->number("width").value_or(0.1);
  }
  read_tables(root, skid);
  return skid;
}

}  // namespace

SkidFile read_skid_file(const std::filesystem::path& file) {
  return skid_from(base::Settings::read(file, skid_file_keys()));
}

SkidFile parse_skid_file(std::string_view text, const std::string& name) {
  return skid_from(base::Settings::parse(text, name, skid_file_keys()));
}

}  // namespace stillmass::simulate
