#include "machine/simulated_machine.hpp"

#include <algorithm>
#include <cmath>
#include <complex>
#include <numbers>
#include <optional>
#include <random>
#include <utility>

#include "stillmass/machine/bearing.hpp"

namespace stillmass::test {
namespace {

using std::numbers::pi;
using Complex = std::complex<double>;

constexpr double duration_s = 8.0;
constexpr std::array<const char*, 4> places = {"motor-nde", "motor-de", "pump-de", "pump-nde"};
enum Direction { horizontal, vertical, axial };

// Portable draws: the engine is fixed by the standard, the distributions are written out.
class Draw {
 public:
  explicit Draw(std::uint64_t seed) : engine_(seed) {}
  double between(double lo, double hi) { return lo + (hi - lo) * (static_cast<double>(engine_() >> 11) * 0x1p-53); }
  double normal() {  // Box and Muller, both halves used
    if (spare_) return *std::exchange(spare_, std::nullopt);
    const double radius = std::sqrt(-2.0 * std::log(between(1e-300, 1.0)));
    const double angle = between(0.0, 2.0 * pi);
    spare_ = radius * std::sin(angle);
    return radius * std::cos(angle);
  }
  double lognormal(double middle, double spread) { return middle * std::exp(spread * normal()); }
  bool coin() { return between(0.0, 1.0) < 0.5; }

 private:
  std::optional<double> spare_;
  std::mt19937_64 engine_;
};

class Generator {
 public:
  Generator(std::uint64_t seed, double healthy_scale) : draw_(seed) {
    out_.machine.kind = machine::MachineKind::pump;
    out_.machine.line_frequency_hz = 50.0;
    out_.machine.motor_poles = 2 + 2 * static_cast<int>(draw_.between(0.0, 2.99));
    out_.machine.vanes = 5 + static_cast<int>(draw_.between(0.0, 2.99));
    const double synchronous = 100.0 / *out_.machine.motor_poles;
    out_.speed_hz = synchronous * draw_.between(0.975, 0.992);
    out_.machine.speed_hz = base::Interval{out_.speed_hz, out_.speed_hz};
    out_.machine.bearings = {{"pump bearing", 9, 0.00794, 0.03904, 0.0, ""},
                             {"motor bearing", 9, 0.0127, 0.058, 0.0, ""}};
    out_.smooth_limit = draw_.coin() ? 0.0 : draw_.coin() ? 1.4e-3 : 2.3e-3;
    frames_ = static_cast<std::size_t>(duration_s * out_.rate_hz);
    for (const char* place : places) {
      for (const char* direction : {"-h", "-v", "-a"}) {
        out_.channels.push_back({std::string(place) + direction, std::vector<double>(frames_)});
      }
    }
    turn_ = draw_.coin() ? 1.0 : -1.0;  // direction of rotation
    add_mode(draw_.between(1.6, 3.4) * out_.speed_hz);
    healthy(healthy_scale * draw_.lognormal(1.0, 0.4));
  }

  void add(const FaultSize& each) {
    const double v = each.size;
    switch (each.fault) {
      case Fault::unbalance:
        return unbalance(v);
      case Fault::parallel_misalignment:
        return parallel(v);
      case Fault::angular_misalignment:
        return angular(v);
      case Fault::looseness:
        return looseness(v);
      case Fault::bent_shaft:
        return bent(v);
      case Fault::vane_pass:
        return vane_pass(v);
      case Fault::electrical:
        return electrical(v);
      case Fault::bearing:
        return bearing(v);
      case Fault::cavitation:
        return cavitation(v);
      case Fault::soft_foot:
        return soft_foot(v);
      case Fault::resonance:
        return resonance(v);
    }
  }

  SimulatedMachine take() { return std::move(out_); }

 private:
  std::vector<double>& at(std::size_t place, std::size_t direction) {
    return out_.channels[3 * place + direction].acceleration;
  }
  double degrees(double middle, double spread) { return (middle + spread * draw_.normal()) * pi / 180.0; }
  double any_angle() { return draw_.between(0.0, 2.0 * pi); }

  void add_mode(double frequency) {
    modal::Mode mode;
    mode.frequency.value = frequency;
    mode.frequency.u = 0.003 * frequency;
    mode.damping_ratio.value = 0.02;
    mode.state = "running";
    out_.modes.push_back(mode);
  }

  // A tone of that r.m.s. velocity; acceleration = i omega v.
  void tone(std::size_t place, std::size_t direction, double frequency, double velocity, double phase) {
    const double omega = 2.0 * pi * frequency;
    Complex now = std::polar(std::sqrt(2.0) * omega * velocity, phase + 0.5 * pi);
    const Complex step = std::polar(1.0, omega / out_.rate_hz);
    for (double& sample : at(place, direction)) {
      sample += now.real();
      now *= step;
    }
  }
  void order(std::size_t place, std::size_t direction, double k, double velocity, double phase) {
    tone(place, direction, k * out_.speed_hz, velocity, phase);
  }
  // A force that turns with the shaft: vertical 90 degrees from horizontal.
  void turning(std::size_t place, double k, double velocity, double phase, double spread_deg) {
    order(place, horizontal, k, velocity, phase);
    order(place, vertical, k, draw_.between(0.4, 1.0) * velocity, phase + turn_ * degrees(90.0, spread_deg));
  }

  // Small lines of every kind: what no machine is without.
  void healthy(double scale) {
    const double mm = 1e-3 * scale;
    const double flow = draw_.lognormal(0.12, 0.4) * mm;
    for (std::size_t p = 0; p < 4; ++p) {
      const bool pump = p >= 2;
      const double one = draw_.lognormal(0.25, 0.4) * mm;
      turning(p, 1.0, one, any_angle(), 25.0);
      order(p, axial, 1.0, draw_.between(0.1, 0.6) * one, any_angle());
      for (std::size_t d = 0; d < 3; ++d) {
        if (draw_.between(0.0, 1.0) < 0.2) order(p, d, 0.5, draw_.lognormal(0.02, 0.5) * mm, any_angle());
        order(p, d, 2.0, draw_.lognormal(0.08, 0.5) * mm, any_angle());
        for (int k = 3; k <= 5; ++k) order(p, d, k, draw_.lognormal(0.02, 0.5) * mm, any_angle());
        if (pump) order(p, d, *out_.machine.vanes, draw_.lognormal(0.2, 0.5) * mm, any_angle());
        if (!pump) tone(p, d, 100.0, draw_.lognormal(0.12, 0.5) * mm, any_angle());
        noise(p, d, draw_.lognormal(0.6, 0.4) * std::sqrt(scale), pump ? flow : 0.4 * flow);
      }
    }
  }

  // White acceleration, its amplitude swaying a little with shaft and vanes, and low-frequency velocity of the flow.
  void noise(std::size_t place, std::size_t direction, double acceleration, double velocity) {
    const double depth = draw_.between(0.0, 0.15);
    const double swing = 2.0 * pi * out_.speed_hz * (place >= 2 ? *out_.machine.vanes : 1) / out_.rate_hz;
    const double keep = std::exp(-2.0 * pi * 60.0 / out_.rate_hz);  // flow noise: one pole at 60 Hz
    double flow = 0.0;
    double before = 0.0;
    const double step = velocity * std::sqrt(1.0 - keep * keep);
    std::size_t i = 0;
    for (double& sample : at(place, direction)) {
      flow = keep * flow + step * draw_.normal();
      // The mean of two, so that the differences do not fill the high frequencies.
      smooth_ = 0.9 * smooth_ + 0.1 * flow;
      sample += (smooth_ - before) * out_.rate_hz;
      before = smooth_;
      sample += acceleration * (1.0 + depth * std::cos(swing * static_cast<double>(i++))) * draw_.normal();
    }
    smooth_ = 0.0;
  }

  // Centrifugal force of one rotor, felt at the other too; little along the shaft.
  void unbalance(double v) {
    const std::size_t rotor = draw_.coin() ? 0 : 2;
    const double phase = any_angle();
    for (std::size_t p = 0; p < 4; ++p) {
      const bool own = p == rotor || p == rotor + 1;
      const double size = v * (own ? draw_.between(0.8, 1.0) : draw_.between(0.2, 0.5));
      const double lead = own ? phase + degrees(0.0, 15.0) : phase + degrees(20.0, 40.0);
      turning(p, 1.0, size, lead, 10.0);
      order(p, axial, 1.0, draw_.between(0.05, 0.3) * size, any_angle());
    }
  }

  // Offset shafts: twice per turn, radial, opposite on the two sides of the coupling.
  void parallel(double v) {
    const double two = any_angle();
    const double one = any_angle();
    const double one_share = draw_.between(0.4, 0.9);
    const double three_share = draw_.between(0.1, 0.4);
    for (std::size_t p = 0; p < 4; ++p) {
      const double near = p == 1 || p == 2 ? draw_.between(0.85, 1.0) : draw_.between(0.3, 0.6);
      const double side = p >= 2 ? 180.0 : 0.0;
      const double across_1 = degrees(side, 15.0);
      const double across_2 = degrees(side, 12.0);
      turning(p, 2.0, near * v, two + across_2, 20.0);
      turning(p, 1.0, near * one_share * v, one + across_1, 20.0);
      turning(p, 3.0, near * three_share * v, any_angle(), 20.0);
      order(p, axial, 1.0, 0.2 * near * v, one + across_1);
      order(p, axial, 2.0, 0.3 * near * v, two + across_2);
    }
  }

  // Shafts at an angle: once and twice per turn along the shaft, opposite across the coupling, each rotor as one piece.
  void angular(double v) {
    const double one = any_angle();
    const double two = any_angle();
    const double two_share = draw_.between(0.2, 0.6);
    const double radial = draw_.between(0.3, 0.7);
    for (std::size_t p = 0; p < 4; ++p) {
      const double near = p == 1 || p == 2 ? draw_.between(0.85, 1.0) : draw_.between(0.6, 0.9);
      const double side = p >= 2 ? 180.0 : 0.0;
      order(p, axial, 1.0, near * v, one + degrees(side, 12.0));
      order(p, axial, 2.0, near * two_share * v, two + degrees(side, 12.0));
      turning(p, 1.0, near * radial * v, one + degrees(side + 90.0, 20.0), 20.0);
      turning(p, 2.0, near * radial * two_share * v, two + degrees(side, 20.0), 25.0);
    }
  }

  // A foot that lifts: the wave is cut off on one side and falls harder every second turn, mostly vertical.
  void looseness(double v) {
    const std::size_t rotor = draw_.coin() ? 0 : 2;
    const double cut = draw_.between(-0.5, -0.1);
    const double second = draw_.between(0.55, 0.8);
    constexpr int points = 1024;
    std::vector<Complex> halves(41);
    for (int i = 0; i < points; ++i) {
      const double turn = 4.0 * pi * i / points;
      const double size = i < points / 2 ? 1.0 : second;
      const double wave = size * std::max(std::sin(turn), cut);
      for (int k = 1; k <= 40; ++k) halves[k] += wave * std::polar(2.0 / points, -0.5 * k * turn);
    }
    const double one = std::abs(halves[2]);
    for (std::size_t p = rotor; p < rotor + 2; ++p) {
      const double size = v * draw_.between(0.6, 1.0);
      const double sideways = draw_.between(0.2, 0.5);
      const double flip = draw_.coin() ? 0.0 : pi;
      for (int k = 1; k <= 40; ++k) {
        const double amplitude = size * 0.5 * k * std::abs(halves[k]) / one;  // velocity: the displacement is cut off
        const double phase = std::arg(halves[k]);
        order(p, vertical, 0.5 * k, amplitude, phase);
        order(p, horizontal, 0.5 * k, sideways * amplitude, phase + flip);
        order(p, axial, 0.5 * k, 0.15 * amplitude, phase);
      }
    }
  }

  // A bow: the bearings are tilted to and fro once per turn, opposite at the two ends.
  void bent(double v) {
    const std::size_t rotor = draw_.coin() ? 0 : 2;
    const double phase = any_angle();
    const double radial = draw_.between(0.5, 0.9);
    for (std::size_t p = rotor; p < rotor + 2; ++p) {
      const double end = p == rotor ? 0.0 : 180.0;
      const double size = v * draw_.between(0.8, 1.0);
      order(p, axial, 1.0, size, phase + degrees(end, 12.0));
      order(p, axial, 2.0, 0.15 * size, any_angle());
      turning(p, 1.0, radial * size, phase + degrees(0.0, 15.0), 12.0);
      turning(p, 2.0, 0.1 * size, any_angle(), 20.0);
    }
    const std::size_t other = 2 - rotor;
    for (std::size_t p = other; p < other + 2; ++p) turning(p, 1.0, 0.15 * v, any_angle(), 20.0);
  }

  void vane_pass(double v) {
    const double vanes = *out_.machine.vanes;
    const double twice = draw_.between(0.05, 0.4);
    const double side = draw_.between(0.0, 0.2);
    for (std::size_t p = 2; p < 4; ++p) {
      for (std::size_t d = 0; d < 3; ++d) {
        const double size = v * draw_.between(0.5, 1.0);
        order(p, d, vanes, size, any_angle());
        order(p, d, 2.0 * vanes, twice * size, any_angle());
        order(p, d, vanes - 1.0, side * size, any_angle());
        order(p, d, vanes + 1.0, side * size, any_angle());
      }
    }
  }

  // Uneven air gap: twice the line frequency, with pole-pass side bands where the gap turns with the rotor.
  void electrical(double v) {
    const double pole_pass = *out_.machine.motor_poles * (100.0 / *out_.machine.motor_poles - out_.speed_hz);
    const double side = draw_.coin() ? 0.0 : draw_.between(0.1, 0.3);
    for (std::size_t p = 0; p < 2; ++p) {
      for (std::size_t d = 0; d < 3; ++d) {
        const double size = v * (d == axial ? 0.2 : draw_.between(0.5, 1.0));
        tone(p, d, 100.0, size, any_angle());
        tone(p, d, 100.0 - pole_pass, side * size, any_angle());
        tone(p, d, 100.0 + pole_pass, side * size, any_angle());
      }
    }
    out_.power_cut = machine::TestOutcome::confirmed;
  }

  // A flaw of the outer ring of the pump bearing: each element strikes it and rings a local resonance.
  void bearing(double height) {
    const machine::BearingOrders orders = machine::bearing_orders(out_.machine.bearings[0]);
    const double period = 1.0 / (orders.outer * out_.speed_hz * (1.0 - draw_.between(0.0, 0.015)));
    const double ring = draw_.between(2200.0, 3300.0);
    const double decay = 2.0 * pi * ring * draw_.between(0.02, 0.05);
    const double seen[3] = {1.0, draw_.between(0.5, 1.0), draw_.between(0.3, 0.6)};
    for (double time = 0.5 * period; time < duration_s; time += period * (1.0 + 0.004 * draw_.normal())) {
      blow(2, seen, time, height * std::max(0.2, 1.0 + 0.15 * draw_.normal()), ring, decay);
    }
  }
  void blow(std::size_t place, const double (&seen)[3], double time, double height, double ring, double decay) {
    const auto first = static_cast<std::size_t>(std::ceil(time * out_.rate_hz));
    for (std::size_t i = first; i < frames_; ++i) {
      const double after = static_cast<double>(i) / out_.rate_hz - time;
      if (decay * after > 9.0) break;
      const double x = height * std::exp(-decay * after) * std::sin(2.0 * pi * ring * after);
      for (std::size_t d = 0; d < 3; ++d) {
        at(place, d)[i] += seen[d] * x;
        at(place + 1, d)[i] += 0.15 * seen[d] * x;
      }
    }
  }

  // Bubbles that collapse: short bursts of high-frequency noise at random instants, of very different strength.
  void cavitation(double rms) {
    const double rate = draw_.between(150.0, 400.0);
    std::vector<double> bursts(frames_);
    double power = 0.0;
    for (double time = 0.0; time < duration_s - 0.01; time -= std::log(draw_.between(1e-12, 1.0)) / rate) {
      const auto first = static_cast<std::size_t>(time * out_.rate_hz);
      const double size = -std::log(draw_.between(1e-12, 1.0));
      for (std::size_t i = 0; i < 40 && first + i < frames_; ++i) {
        bursts[first + i] += size * std::exp(-0.08 * static_cast<double>(i)) * draw_.normal();
      }
    }
    double before = 0.0;
    for (double& sample : bursts) {  // differences: little below 1 kHz
      const double now = sample;
      sample -= 0.9 * before;
      before = now;
      power += sample * sample;
    }
    const double factor = rms / std::sqrt(power / static_cast<double>(frames_));
    for (std::size_t p = 2; p < 4; ++p) {
      for (std::size_t d = 0; d < 3; ++d) {
        const double size = factor * draw_.between(0.6, 1.0);
        for (std::size_t i = 0; i < frames_; ++i) at(p, d)[i] += size * bursts[i];
      }
    }
  }

  // A foot that rocks: 1x along one line, and the frame's strain makes the air gap uneven.
  void soft_foot(double v) {
    const double phase = any_angle();
    const double electrical_share = draw_.between(0.4, 0.9);
    const std::size_t along = draw_.coin() ? horizontal : vertical;
    for (std::size_t p = 0; p < 2; ++p) {
      const double size = v * draw_.between(0.8, 1.0);
      order(p, along, 1.0, size, phase);
      order(p, along == horizontal ? vertical : horizontal, 1.0, draw_.between(0.1, 0.25) * size,
            phase + degrees(draw_.coin() ? 0.0 : 180.0, 15.0));
      order(p, axial, 1.0, 0.15 * size, any_angle());
      tone(p, horizontal, 100.0, electrical_share * size, any_angle());
      tone(p, vertical, 100.0, 0.5 * electrical_share * size, any_angle());
    }
    out_.soft_foot = machine::TestOutcome::confirmed;
  }

  // A horizontal mode of the pump at running speed multiplies an ordinary force.
  void resonance(double v) {
    const double natural = out_.speed_hz * draw_.between(0.97, 1.04);
    add_mode(natural);
    const double phase = any_angle();
    for (std::size_t p = 2; p < 4; ++p) {
      const double size = v * draw_.between(0.8, 1.0);
      order(p, horizontal, 1.0, size, phase + degrees(0.0, 8.0));
      order(p, vertical, 1.0, draw_.between(0.08, 0.25) * size, phase + degrees(draw_.coin() ? 20.0 : 170.0, 25.0));
      order(p, axial, 1.0, draw_.between(0.05, 0.2) * size, any_angle());
    }
  }

  Draw draw_;
  SimulatedMachine out_;
  std::size_t frames_ = 0;
  double turn_ = 1.0;
  double smooth_ = 0.0;
};

}  // namespace

SimulatedMachine simulated(std::uint64_t seed, const std::vector<FaultSize>& faults, double healthy_scale) {
  Generator generator(seed, healthy_scale);
  for (const FaultSize& each : faults) generator.add(each);
  return generator.take();
}

}  // namespace stillmass::test
