#pragma once

#include "stillmass/absorber/specification.hpp"

namespace stillmass::tests {

inline base::Estimate estimate(double value, double u, base::Quantity quantity = base::Quantity::ratio) {
  return {value, u, {}, quantity};
}

/// A line-fed pump a little above a lightly damped mode.
inline modal::Mode skid_mode() {
  modal::Mode mode;
  mode.frequency = estimate(23.8, 0.1, base::Quantity::frequency);
  mode.damping_ratio = estimate(0.009, 0.0012);
  mode.modal_mass = estimate(280.0, 25.0, base::Quantity::mass);
  mode.point = "pump-de-h";
  mode.state = "running";
  return mode;
}

/// The same mode as if it were known exactly.
inline modal::Mode sure_mode() {
  modal::Mode mode = skid_mode();
  mode.frequency.u = 0.0;
  mode.damping_ratio.u = 0.0;
  mode.modal_mass->u = 0.0;
  return mode;
}

inline absorber::Allowances no_allowances() {
  absorber::Allowances allowances;
  allowances.tuning_u = 0.0;
  allowances.own_damping_u = 0.0;
  allowances.damper_u = 0.0;
  allowances.velocity_u = 0.0;
  return allowances;
}

inline absorber::Before line_only(double component) {
  absorber::Before before;
  before.point = "pump-de-h";
  before.component = estimate(component, 0.01 * component, base::Quantity::velocity);
  return before;
}

/// The same as if it had been measured exactly.
inline absorber::Before sure_line(double component) {
  absorber::Before before = line_only(component);
  before.component->u = 0.0;
  return before;
}

/// The pump of the design's example: 7 mm/s at 24.633 Hz, a target of 2.8 mm/s, at most 15 kg and 4 mm.
inline absorber::Request pump_request() {
  absorber::Request request;
  request.mode = skid_mode();
  request.forcing = {absorber::Forcing::unbalance, {24.57, 24.70}, 24.633};
  request.before = line_only(7e-3);
  request.constraints.target = 2.8e-3;
  request.constraints.max_mass_kg = 15.0;
  request.constraints.max_travel_m = 4e-3;
  request.allowances.temperature_c = base::Interval{0.0, 45.0};
  request.stock.materials = {{"steel", 210e9, 81e9, 7850.0, 32.3e6, 0.0}, {"wire", 206e9, 81.5e9, 7850.0, 0.0, 241e6}};
  for (const double width : {0.04, 0.06, 0.08}) {
    for (const double thickness : {0.005, 0.006, 0.008, 0.01}) {
      request.stock.bars.push_back({width, thickness, "steel"});
    }
  }
  for (const double diameter : {0.004, 0.006, 0.008}) request.stock.wires.push_back({diameter, "wire"});
  return request;
}

}  // namespace stillmass::tests
