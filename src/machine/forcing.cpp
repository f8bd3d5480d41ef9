#include "stillmass/machine/forcing.hpp"

#include <algorithm>
#include <array>
#include <cmath>
#include <numbers>
#include <utility>

#include <fmt/format.h>

#include "stillmass/machine/bearing.hpp"

namespace stillmass::machine {
namespace {

constexpr double line_frequency_u_hz = 0.02;  // a public grid (common practice)
constexpr double bearing_slip = 0.01;         // relative standard uncertainty (common practice)
constexpr double belt_run_u = 0.01;           // of the diameter at which a belt runs (common practice)
constexpr double switching_u = 0.01;          // of a drive's carrier (common practice)
constexpr double greatest_drive_slip = 0.03;  // of an induction motor at full load (common practice)
constexpr double greatest_line_slip = 0.08;   // of a small induction motor (common practice)
constexpr double same = 1e-9;                 // orders that differ by less are one by definition
constexpr double same_mesh = 1e-3;            // ratios are written with a few digits: both wheels have one mesh

// Collects the forcing frequencies of one machine at one speed. A frequency is order * speed + lines * line frequency.
class List {
 public:
  List(const Machine& machine, const base::Estimate& speed) : machine_(machine), speed_(speed) {}

  void add_rotation(int harmonics) {
    for (int k = 1; k <= harmonics; ++k) {
      const bool vane_pass = machine_.vanes && (k == *machine_.vanes || k == 2 * *machine_.vanes);
      if (k > 1 && vane_pass) continue;
      Forcing each = start(fmt::format("{}x", k), ForcingKind::rotation);
      as_harmonic(each, k, "1x");
      add_order(std::move(each), k);
    }
    for (const int k : {1, 3, 5}) {  // halves: a loose part touches every other turn
      Forcing each = start(fmt::format("{}x", 0.5 * k), ForcingKind::rotation, 2);
      as_harmonic(each, k, "0.5x");
      add_order(std::move(each), 0.5 * k);
    }
  }

  void add_vane_pass() {
    if (machine_.vanes) add_vane_pass(*machine_.vanes, "", 1.0, 0.0);
    for (const Shaft& shaft : machine_.shafts) {
      if (shaft.vanes) add_vane_pass(*shaft.vanes, shaft.name, shaft.ratio, shaft.ratio_u);
    }
  }

  void add_shafts() {
    for (const Shaft& shaft : machine_.shafts) {
      for (int k = 1; k <= 3 && shaft.ratio != 1.0; ++k) {
        Forcing each = start(fmt::format("{}x of {}", k, shaft.name), ForcingKind::rotation);
        each.shaft = shaft.name;
        as_harmonic(each, k, "1x of " + shaft.name);
        add_order(std::move(each), k * shaft.ratio, shaft.ratio_u);
      }
      if (shaft.teeth) add_gear_mesh(shaft);
      if (shaft.belt && shaft.belt->length_m) add_belt(shaft);
    }
  }

  void add_bearings() {
    std::vector<std::pair<Bearing, std::string>> different;  // with the names of all that are alike
    for (const Bearing& bearing : machine_.bearings) {
      if (!machine_.shaft_ratio(bearing.shaft)) continue;
      const auto alike = std::find_if(different.begin(), different.end(), [&](const auto& each) {
        return each.first.shaft == bearing.shaft && each.first.elements == bearing.elements &&
               each.first.ball_diameter_m == bearing.ball_diameter_m &&
               each.first.pitch_diameter_m == bearing.pitch_diameter_m &&
               each.first.contact_angle_rad == bearing.contact_angle_rad;
      });
      if (alike == different.end()) {
        different.emplace_back(bearing, bearing.name);
      } else if (alike->second != bearing.name) {
        alike->second += " or " + bearing.name;
      }
    }
    for (const auto& [bearing, names] : different) {
      const BearingOrders orders = bearing_orders(bearing);
      add_bearing("cage", bearing, names, orders.cage);
      add_bearing("outer ring", bearing, names, orders.outer);
      add_bearing("inner ring", bearing, names, orders.inner);
      add_bearing("rolling element", bearing, names, orders.element);
    }
  }

  void add_electrical() {
    if (machine_.supply == Supply::drive) {
      if (machine_.motor_poles) add_field("drive frequency", 0.5 * *machine_.motor_poles, 0.0, greatest_drive_slip);
      if (machine_.drive_switching_hz) {
        Forcing each = start("drive switching", ForcingKind::switching, 1);
        each.frequency = hertz(*machine_.drive_switching_hz, switching_u * *machine_.drive_switching_hz);
        list_.push_back(std::move(each));
      }
    } else if (machine_.line_frequency_hz) {
      add_field("line frequency", 0.0, 1.0, 0.0);
      add_slip();
    }
  }

  std::vector<Forcing> sorted() {
    std::erase_if(list_, [](const Forcing& each) { return !(each.frequency.value > 0.0); });
    std::stable_sort(list_.begin(), list_.end(),
                     [](const Forcing& a, const Forcing& b) { return a.frequency.value < b.frequency.value; });
    return std::move(list_);
  }

 private:
  static base::Estimate hertz(double value, std::optional<double> u) {
    base::Estimate out;
    out.value = value;
    out.u = u;
    out.quantity = base::Quantity::frequency;
    return out;
  }

  static Forcing start(std::string name, ForcingKind kind, int rank = 0) {
    Forcing out;
    out.name = std::move(name);
    out.kind = kind;
    out.rank = rank;
    return out;
  }

  static void as_harmonic(Forcing& each, int k, const std::string& fundamental) {
    each.harmonic = k;
    if (k > 1) each.of = fundamental;
  }

  // order * speed + lines * line frequency; `relative_u` of the order, `own_u` in Hz. Without u of the speed only what
  // does not follow it has one.
  base::Estimate estimate(double order, double lines, double relative_u = 0.0, double own_u = 0.0) const {
    const double line = machine_.line_frequency_hz.value_or(0.0);
    const double value = order * speed_.value + lines * line;
    if (order != 0.0 && !speed_.u && relative_u == 0.0 && own_u == 0.0) return hertz(value, {});
    const double follows = std::hypot(order * speed_.u.value_or(0.0), relative_u * order * speed_.value);
    return hertz(value, std::hypot(follows, lines * line_frequency_u_hz, own_u));
  }

  void add_order(Forcing each, double order, double relative_u = 0.0) {
    each.frequency = estimate(order, 0.0, relative_u);
    each.order = order;
    list_.push_back(std::move(each));
  }

  bool has_order(double order) const {
    return std::any_of(list_.begin(), list_.end(), [&](const Forcing& each) {
      return each.order && each.shaft.empty() && std::abs(*each.order - order) < same * order;
    });
  }

  void add_vane_pass(int vanes, const std::string& shaft, double ratio, double ratio_u) {
    if (vanes < 2) return;
    const std::string of_shaft = shaft.empty() ? "" : " of " + shaft;
    const std::string fundamental = fmt::format("vane pass{} ({}x)", of_shaft, vanes);
    for (const int k : {1, 2}) {
      Forcing each = start(k == 1 ? fundamental : fmt::format("twice vane pass{} ({}x)", of_shaft, 2 * vanes),
                           ForcingKind::vane_pass);
      each.shaft = shaft;
      as_harmonic(each, k, fundamental);
      add_order(std::move(each), k * vanes * ratio, ratio_u);
    }
  }

  void add_gear_mesh(const Shaft& shaft) {
    const double mesh = shaft.ratio * *shaft.teeth;
    const bool known = std::any_of(list_.begin(), list_.end(), [&](const Forcing& each) {
      return each.kind == ForcingKind::gear_mesh && each.side_band == 0 &&
             std::abs(*each.order - mesh) < same_mesh * mesh;
    });
    if (known) return;
    const std::string fundamental = "gear mesh of " + shaft.name;
    for (int k = 1; k <= 3; ++k) {
      Forcing each =
          start(k == 1 ? fundamental : fmt::format("{}x {}", k, fundamental), ForcingKind::gear_mesh, k == 1 ? 0 : 1);
      each.shaft = each.part = shaft.name;
      as_harmonic(each, k, fundamental);
      add_order(std::move(each), k * mesh, shaft.ratio_u);
    }
    add_mesh_bands(shaft, shaft.name, shaft.ratio, mesh, fundamental);
    const double driver = machine_.shaft_ratio(shaft.driven_by).value_or(1.0);
    if (driver != shaft.ratio) add_mesh_bands(shaft, shaft.driven_by, driver, mesh, fundamental);
  }

  void add_mesh_bands(const Shaft& shaft, const std::string& modulating, double ratio, double mesh,
                      const std::string& fundamental) {
    for (const int side : {-1, 1}) {
      const std::string by = modulating.empty() ? "1x" : "1x of " + modulating;
      Forcing each = start(fmt::format("{} {} {}", fundamental, side < 0 ? '-' : '+', by), ForcingKind::gear_mesh, 1);
      each.shaft = modulating;
      each.part = shaft.name;
      as_band(each, side, fundamental);
      add_order(std::move(each), mesh + side * ratio, shaft.ratio_u);
    }
  }

  static void as_band(Forcing& each, int side, const std::string& carrier) {
    each.side_band = side;
    each.of = carrier;
  }

  void add_belt(const Shaft& shaft) {
    const double driver = machine_.shaft_ratio(shaft.driven_by).value_or(1.0);
    const double order = std::numbers::pi * shaft.belt->driver_sheave_m * driver / *shaft.belt->length_m;
    const std::string fundamental = "belt of " + shaft.name;
    for (const int k : {1, 2}) {
      Forcing each = start(k == 1 ? fundamental : "2x " + fundamental, ForcingKind::belt, k == 1 ? 0 : 1);
      each.shaft = shaft.driven_by;
      each.part = shaft.name;
      as_harmonic(each, k, fundamental);
      add_order(std::move(each), k * order, std::hypot(belt_run_u, machine_.shaft_ratio_u(shaft.driven_by)));
    }
  }

  void add_bearing(const char* part, const Bearing& bearing, const std::string& names, double per_turn) {
    const double order = per_turn * *machine_.shaft_ratio(bearing.shaft);
    const std::string fundamental = fmt::format("{} of bearing {}", part, names);
    for (int k = 1; k <= 3; ++k) {
      Forcing each =
          start(k == 1 ? fundamental : fmt::format("{}x {}", k, fundamental), ForcingKind::bearing, k == 1 ? 0 : 1);
      each.shaft = bearing.shaft;
      each.part = names;
      as_harmonic(each, k, fundamental);
      add_order(std::move(each), k * order, std::hypot(bearing_slip, machine_.shaft_ratio_u(bearing.shaft)));
    }
  }

  // The electrical frequency, its double and four times it, with the rotor bars it makes side bands of. It is `order`
  // times the speed plus up to `slip`, or `lines` times the line frequency.
  void add_field(const std::string& name, double order, double lines, double slip) {
    const double middle = order * (1.0 + 0.5 * slip);
    const double slip_u = order * speed_.value * slip / std::sqrt(12.0);  // anywhere in 0 to `slip`
    const std::string twice = "twice " + name;
    Forcing field = start(name, ForcingKind::line, 1);
    field.frequency = estimate(middle, lines, 0.0, slip_u);
    list_.push_back(std::move(field));
    for (const int k : {1, 2}) {
      Forcing each = start(k == 1 ? twice : "four times " + name, ForcingKind::electrical);
      as_harmonic(each, k, twice);
      each.frequency = estimate(2.0 * k * middle, 2.0 * k * lines, 0.0, 2.0 * k * slip_u);
      list_.push_back(std::move(each));
    }
    if (!machine_.rotor_bars) return;
    const double bars = *machine_.rotor_bars;
    const std::string passing = fmt::format("rotor bars ({}x)", bars);
    add_order(start(passing, ForcingKind::rotor_bar, 1), bars);
    for (const int side : {-1, 1}) {
      Forcing each = start(fmt::format("{} {} {}", passing, side < 0 ? '-' : '+', twice), ForcingKind::rotor_bar, 1);
      as_band(each, side, passing);
      each.frequency = estimate(bars + side * 2.0 * middle, side * 2.0 * lines, 0.0, 2.0 * slip_u);
      list_.push_back(std::move(each));
    }
  }

  // Side bands of a motor on the line that slips. Slip frequency: line - poles / 2 speed; pole pass: twice that.
  void add_slip() {
    const auto synchronous = machine_.synchronous_hz();
    if (!synchronous) return;
    const double slip = *synchronous - speed_.value;
    if (!(slip > 0.0) || slip > greatest_line_slip * *synchronous) return;
    const double poles = *machine_.motor_poles;
    for (const int side : {-1, 1}) {
      const char sign = side < 0 ? '-' : '+';
      add_slip_band(fmt::format("1x {} pole pass", sign), "1x", side, 1.0 - side * poles, side * 2.0);
      // Above 1x of two poles stands the line itself; below twice line frequency the order of the poles: one by
      // definition.
      if (side < 0 || poles > 2.0) {
        add_slip_band(fmt::format("1x {} slip", sign), "1x", side, 1.0 - side * 0.5 * poles, side, 2);
      }
      if (side > 0 || !has_order(poles)) {
        add_slip_band(fmt::format("twice line frequency {} pole pass", sign), "twice line frequency", side,
                      -side * poles, 2.0 + side * 2.0);
      }
    }
  }

  void add_slip_band(std::string name, const char* carrier, int side, double order, double lines, int rank = 1) {
    Forcing each = start(std::move(name), ForcingKind::pole_pass, rank);
    as_band(each, side, carrier);
    each.frequency = estimate(order, lines);
    list_.push_back(std::move(each));
  }

  const Machine& machine_;
  const base::Estimate& speed_;
  std::vector<Forcing> list_;
};

// What a diagnosis must tell apart, whatever is known of bearings, belts and gears.
bool must_be_parted(const Forcing& each) {
  return each.rank < 2 && (each.kind == ForcingKind::rotation || each.kind == ForcingKind::vane_pass ||
                           each.kind == ForcingKind::electrical || each.kind == ForcingKind::pole_pass ||
                           each.kind == ForcingKind::line);
}

}  // namespace

std::string_view name(ForcingKind kind) {
  constexpr std::array<std::string_view, 10> names = {"rotation", "vane pass", "electrical", "pole pass", "gear mesh",
                                                      "bearing",  "belt",      "line",       "rotor bar", "switching"};
  return names[static_cast<std::size_t>(kind)];
}

std::vector<Forcing> forcing_frequencies(const Machine& machine, const base::Estimate& speed, int harmonics) {
  List list(machine, speed);
  list.add_rotation(harmonics);
  list.add_vane_pass();
  list.add_shafts();
  list.add_bearings();
  list.add_electrical();
  return list.sorted();
}

std::optional<ClosePair> smallest_distance(const Machine& machine, double speed_hz, double least_hz) {
  base::Estimate speed;
  speed.value = speed_hz;
  std::vector<Forcing> list = forcing_frequencies(machine, speed);
  std::erase_if(list, [](const Forcing& each) { return !must_be_parted(each); });
  std::optional<ClosePair> nearest;
  for (std::size_t i = 0; i < list.size(); ++i) {
    for (std::size_t j = i + 1; j < list.size(); ++j) {
      const double distance = list[j].frequency.value - list[i].frequency.value;
      if (distance < least_hz) continue;
      if (!nearest || distance < nearest->distance_hz) nearest = {distance, list[i].name, list[j].name};
      break;
    }
  }
  return nearest;
}

}  // namespace stillmass::machine
