#include "stillmass/machine/forcing.hpp"

#include <algorithm>
#include <array>
#include <cmath>

#include <fmt/format.h>

#include "stillmass/machine/bearing.hpp"

namespace stillmass::machine {
namespace {

constexpr double line_frequency_u_hz = 0.02;  // a public grid (common practice)
constexpr double bearing_slip = 0.01;         // relative standard uncertainty (common practice)
constexpr double greatest_drive_slip = 0.03;  // of an induction motor at full load (common practice)
constexpr double greatest_line_slip = 0.08;   // of a small induction motor (common practice)

base::Estimate hertz(double value, std::optional<double> u) {
  base::Estimate out;
  out.value = value;
  out.u = u;
  out.quantity = base::Quantity::frequency;
  return out;
}

// Collects the forcing frequencies of one machine at one speed.
class List {
 public:
  List(const Machine& machine, const base::Estimate& speed) : machine_(machine), speed_(speed) {}

  void add_rotation(int harmonics) {
    for (int k = 1; k <= harmonics; ++k) {
      const bool vane_pass = machine_.vanes && (k == *machine_.vanes || k == 2 * *machine_.vanes);
      if (k == 1 || !vane_pass) add_order(fmt::format("{}x", k), ForcingKind::rotation, k);
    }
  }

  void add_vane_pass() {
    if (!machine_.vanes || *machine_.vanes < 2) return;
    const int vanes = *machine_.vanes;
    add_order(fmt::format("vane pass ({}x)", vanes), ForcingKind::vane_pass, vanes);
    add_order(fmt::format("twice vane pass ({}x)", 2 * vanes), ForcingKind::vane_pass, 2 * vanes);
  }

  void add_shafts() {
    for (const Shaft& shaft : machine_.shafts) {
      if (shaft.ratio != 1.0) add_order("1x of " + shaft.name, ForcingKind::rotation, shaft.ratio);
      if (!shaft.teeth) continue;
      const double mesh = shaft.ratio * *shaft.teeth;
      const bool known = std::any_of(list_.begin(), list_.end(), [&](const Forcing& each) {
        return each.kind == ForcingKind::gear_mesh && std::abs(*each.order - mesh) < 1e-3 * mesh;
      });
      if (!known) add_order("gear mesh of " + shaft.name, ForcingKind::gear_mesh, mesh);
    }
  }

  void add_bearings() {
    for (const Bearing& bearing : machine_.bearings) {
      const auto ratio = machine_.shaft_ratio(bearing.shaft);
      if (!ratio) continue;
      const BearingOrders orders = bearing_orders(bearing);
      add_bearing("cage", bearing, *ratio * orders.cage);
      add_bearing("outer ring", bearing, *ratio * orders.outer);
      add_bearing("inner ring", bearing, *ratio * orders.inner);
      add_bearing("rolling element", bearing, *ratio * orders.element);
    }
  }

  void add_electrical() {
    if (machine_.supply == Supply::drive) {
      if (!machine_.motor_poles) return;
      const double without_slip = *machine_.motor_poles * speed_.value;
      const double frequency = without_slip * (1.0 + 0.5 * greatest_drive_slip);
      const double slip_u = without_slip * greatest_drive_slip / std::sqrt(12.0);
      const double u = std::hypot(slip_u, *machine_.motor_poles * speed_.u.value_or(0.0));
      list_.push_back({"twice drive frequency", ForcingKind::electrical, hertz(frequency, u), {}});
    } else if (machine_.line_frequency_hz) {
      const double frequency = 2.0 * *machine_.line_frequency_hz;
      list_.push_back(
          {"twice line frequency", ForcingKind::electrical, hertz(frequency, 2.0 * line_frequency_u_hz), {}});
      add_pole_pass();
    }
  }

  std::vector<Forcing> sorted() {
    std::stable_sort(list_.begin(), list_.end(),
                     [](const Forcing& a, const Forcing& b) { return a.frequency.value < b.frequency.value; });
    return std::move(list_);
  }

 private:
  void add_order(std::string name, ForcingKind kind, double order) {
    std::optional<double> u;
    if (speed_.u) u = order * *speed_.u;
    list_.push_back({std::move(name), kind, hertz(order * speed_.value, u), order});
  }

  void add_bearing(const char* part, const Bearing& bearing, double order) {
    const double frequency = order * speed_.value;
    const double u = std::hypot(bearing_slip * frequency, order * speed_.u.value_or(0.0));
    list_.push_back(
        {fmt::format("{} of bearing {}", part, bearing.name), ForcingKind::bearing, hertz(frequency, u), order});
  }

  void add_pole_pass() {
    if (!machine_.motor_poles) return;
    const double poles = *machine_.motor_poles;
    const double synchronous = 2.0 * *machine_.line_frequency_hz / poles;
    const double slip = synchronous - speed_.value;
    if (!(slip > 0.0) || slip > greatest_line_slip * synchronous) return;
    for (const double side : {-1.0, 1.0}) {  // speed + side poles (synchronous - speed)
      std::optional<double> u;
      if (speed_.u) u = std::hypot((1.0 - side * poles) * *speed_.u, 2.0 * line_frequency_u_hz);
      list_.push_back({side < 0.0 ? "1x - pole pass" : "1x + pole pass",
                       ForcingKind::pole_pass,
                       hertz(speed_.value + side * poles * slip, u),
                       {}});
    }
  }

  const Machine& machine_;
  const base::Estimate& speed_;
  std::vector<Forcing> list_;
};

}  // namespace

std::string_view name(ForcingKind kind) {
  constexpr std::array<std::string_view, 6> names = {"rotation",  "vane pass", "electrical",
                                                     "pole pass", "gear mesh", "bearing"};
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

}  // namespace stillmass::machine
